"""What the terminal shows: stages while the program works, and a small table at the end. Plain text."""

from __future__ import annotations

import shutil
import time
from collections.abc import Sequence
from typing import TextIO

from canopy.run import Run
from reports.display import Display, number
from reports.sentences import period
from reports.summary import Summary, summaries

NAME_WIDTH = 38
GAP = "  "


def plain(text: str, width: int) -> str:
    """Return a user's text for the terminal: no control characters, not longer than a width."""
    clean = "".join(c if c.isprintable() else "?" for c in text)
    return clean if len(clean) <= width else clean[: width - 1] + "…"


def _lines(head: Sequence[str], units: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    widths = [max(map(len, column)) for column in zip(head, units, *rows, strict=True)]
    rule = ["─" * width for width in widths]
    lines = []
    for row in (head, units, rule, *rows):
        cells = [row[0].ljust(widths[0])]
        cells += [cell.rjust(width) for cell, width in zip(row[1:], widths[1:], strict=True)]
        lines.append(GAP.join(cells).rstrip())
    return lines


def result_table(run: Run) -> str:
    """Return the result in a few lines: light, heat and size of every candidate."""
    show = Display(run.study.keys.units)
    rows = [_row(one, boiler, show) for one, boiler in zip(summaries(run), _boilers(run), strict=True)]
    head = ("candidate", "PAR at crop", "absorbed", "heat", "night sky", "largest hour", "boiler")
    energy = show.text("kWh/m2")
    units = ("", "% of outside", show.text("mol/m2"), energy, energy, show.text("W/m2"), show.text("kW"))
    title = f"{plain(run.study.keys.title, 100)} · {plain(run.weather.title, 60)} · totals {period(run)}"
    return "\n".join([title, "", *_lines(head, units, rows), *_notes(run)])


def _notes(run: Run) -> list[str]:
    if run.weather.clear_sky:
        return ["", "A computed clear-sky record: light is an upper bound."]
    if run.weather.typical:
        return ["", "A typical weather year: extremes are removed; size by the design night and local codes."]
    return []


def _boilers(run: Run) -> list[float]:
    return [float(one.sizing.boiler_kw) for one in run.candidates]


def _row(one: Summary, boiler: float, show: Display) -> tuple[str, ...]:
    return (
        plain(one.name, NAME_WIDTH),
        number(100.0 * one.light_share, 1),
        show.bare(one.crop_mol, "mol/m2"),
        show.bare(one.heat_kwh, "kWh/m2"),
        show.bare(one.total["night_sky_loss_kwh_m2"], "kWh/m2"),
        show.bare(one.peak_w, "W/m2"),
        show.bare(boiler, "kW"),
    )


class StageLine:
    """Progress on a terminal: one line that changes in place; in a file or pipe, one line per stage."""

    def __init__(self, stream: TextIO) -> None:
        """Write to a stream."""
        self.stream = stream
        self.alive = stream.isatty()
        self.start = time.perf_counter()

    def __call__(self, stage: str) -> None:
        """Say what is being done now."""
        seconds = time.perf_counter() - self.start
        width = shutil.get_terminal_size().columns - 1 if self.alive else 200
        text = plain(f"{seconds:5.1f} s  {stage}", max(width, 20))
        self.stream.write(f"\r\x1b[2K{text}" if self.alive else f"{text}\n")
        self.stream.flush()

    def done(self) -> None:
        """Clear the line."""
        if self.alive:
            self.stream.write("\r\x1b[2K")
            self.stream.flush()
