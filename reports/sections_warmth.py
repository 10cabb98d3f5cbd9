"""How much heat each candidate takes by month, where it goes, and where a saving stays."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from canopy.run import Run
from reports import sentences as say
from reports.blocks import Block, Row, Section, Table, Text
from reports.display import Display, percent
from reports.figures import marks_of, month_labels
from reports.figures_heat import FLOWS, balance_figure, month_heat_figure
from reports.savings import LOSS_PATHS, Saving, saving
from reports.summary import Summary


def heat(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return heat by month, where it goes, and what changes against the first candidate."""
    blocks: list[Block] = [
        Text(_lead(run, rows, show), lead=True),
        month_heat_figure(run, show),
        _month_table(run, rows, show),
        balance_figure(run, rows, show),
        _flow_table(run, rows, show),
    ]
    if len(rows) > 1 and max(r.heat_kwh for r in rows) > 0:
        savings = [saving(run, run.candidates[0], one) for one in run.candidates[1:]]
        blocks += [Text((_saving_words(rows, savings, show),)), _saving_table(run, rows, savings, show)]
    return Section(
        "heat", "Heat by month", "How much heat does it take, and where does it go?", tuple(blocks)
    )


def _lead(run: Run, rows: Sequence[Summary], show: Display) -> tuple[str, ...]:
    base, lines = rows[0], []
    by_month = run.candidates[0].monthly["heat_delivered_kwh_m2"]
    if base.heat_kwh > 0 and len(by_month) > 1:
        at = int(np.argmax(by_month))
        month = say.MONTHS[int(run.months[at][5:7]) - 1]
        most = float(by_month[at])
        lines.append(
            f"With {base.name}, {month} takes the most heat: {show.say(most, 'kWh/m2')}, "
            f"{percent(most / base.heat_kwh)} of the total."
        )
    losses = [base.total[name] for _, names, way in FLOWS if way == "out" for name in names]
    total = sum(loss for loss in losses if loss > 0)
    if total > 0:
        air = base.total["air_change_loss_kwh_m2"] + base.total["venting_kwh_m2"]
        lines.append(
            "Of all that leaves this house, the sun's warmth included, "
            f"{percent(base.total['sky_loss_kwh_m2'] / total)} goes to the sky as long-wave radiation and "
            f"{percent(air / total)} with the air that leaks out or is vented."
        )
    damp = max(rows, key=lambda r: r.total["heat_for_humidity_kwh_m2"])
    damp_kwh = damp.total["heat_for_humidity_kwh_m2"]
    if damp_kwh > 0.5:
        least = min(r.total["heat_for_humidity_kwh_m2"] for r in rows)
        most_of = f" with {damp.name}, the most of all candidates" if damp_kwh - least >= 0.5 else ""
        lines.append(f"Keeping the air dry by venting costs {show.say(damp_kwh, 'kWh/m2')} of heat{most_of}.")
    return tuple(lines)


def _month_table(run: Run, rows: Sequence[Summary], show: Display) -> Table:
    body = []
    for r, one, mark in zip(rows, run.candidates, marks_of(run), strict=True):
        cells = [show.bare(float(v), "kWh/m2", 1) for v in one.monthly["heat_delivered_kwh_m2"]]
        body.append(Row(r.name, (*cells, show.bare(r.heat_kwh, "kWh/m2", 1)), mark))
    caption = f"Heat delivered by month, {show.text('kWh/m2')}"
    return Table(caption, ("candidate", *month_labels(run.months), "sum"), tuple(body), folded=True)


def _flow_table(run: Run, rows: Sequence[Summary], show: Display) -> Table:
    body = []
    for r, mark in zip(rows, marks_of(run), strict=True):
        cells = [show.bare(sum(r.total[n] for n in names), "kWh/m2", 1) for _, names, _ in FLOWS]
        body.append(Row(r.name, tuple(cells), mark))
    caption = f"What comes in and what goes out, {show.text('kWh/m2')}"
    return Table(caption, ("candidate", *(mark.name for mark, _, _ in FLOWS)), tuple(body), folded=True)


def _saving_words(rows: Sequence[Summary], savings: Sequence[Saving], show: Display) -> str:
    at = int(np.argmax([s.heat for s in savings]))
    most, name = savings[at], rows[at + 1].name
    if max(abs(s.heat) for s in savings) <= say.SAME * rows[0].heat_kwh:
        return f"All candidates take the same heat as {rows[0].name}."
    if most.heat <= 0:
        return f"No candidate takes less heat than {rows[0].name}; the table says where the others lose more."
    parts = sorted(zip(most.paths, (title for title, _ in LOSS_PATHS), strict=True), reverse=True)[:2]
    kept = [f"{show.say(kwh, 'kWh/m2', 1)} less {title}" for kwh, title in parts if kwh > 0.05]
    where = f"in the dark, {say.listed(kept)}" if kept else "all of it by day"
    saved = show.say(most.heat, "kWh/m2", 1)
    return (
        f"The most is saved by {name}, {saved} against {rows[0].name}; {where}. Leakage and the "
        "ground belong to the house; the other paths to the covering and its screens, as far as the house "
        "is the same."
    )


def _saving_table(run: Run, rows: Sequence[Summary], savings: Sequence[Saving], show: Display) -> Table:
    body = []
    for r, s, mark in zip(rows[1:], savings, marks_of(run)[1:], strict=True):
        cells = [show.bare(kwh, "kWh/m2", 1) for kwh in (*s.paths, s.by_day, s.heat)]
        body.append(Row(r.name, tuple(cells), mark))
    titles = [f"less {title}" for title, _ in LOSS_PATHS]
    return Table(
        f"Heat saved against {rows[0].name}, {show.text('kWh/m2')}: by paths in the dark, and by day",
        ("candidate", *titles, "by day", "heat saved"),
        tuple(body),
    )
