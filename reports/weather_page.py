"""The `weather` command: quality and climate of one weather file, as text and as a page with figures."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path
from typing import Any

from reports.blocks import Block, Points, Section, Table, Text
from reports.weather_climate import Climate, climate, design_lines, month_rows
from weather.errors import UserError
from weather.load import load_weather
from weather.record import Finding, Weather
from weather.request import WeatherRequest
from weather.typical import shipped_names

LEVELS = (("warning", "WARNING"), ("corrected", "corrected"), ("note", "note"))
HEAD = (
    "month",
    "global",
    "of clear sky",
    "diffuse",
    "mean",
    "lowest",
    "highest",
    "humidity",
    "wind",
    "long-wave",
    "sky below air",
)
UNITS = ("", "kWh/m²", "%", "%", "°C", "°C", "°C", "%", "m/s", "W/m²", "K")


def weather_command(file: Path, plot: Path | None, **overrides: Any) -> str:
    """Return the report on a weather file (or a shipped year, by its name) and write the page if asked.

    `overrides` are fields of WeatherRequest. UserError for a file that cannot be read or a page that cannot
    be written; the page is moved into place whole.
    """
    name = str(file)
    if not file.exists() and name in shipped_names():
        request = WeatherRequest(shipped=name, **overrides)
    else:
        request = WeatherRequest(file=file, **overrides)
    weather = load_weather(request)
    text = quality_text(weather)
    if plot is not None:
        weather_page(weather, plot)
        text += f"\npage with figures: {plot}\n"
    return text


def ordered(findings: tuple[Finding, ...]) -> list[tuple[str, str]]:
    """Return (level word, text) of the findings, the grave ones first."""
    return [(word, item.text) for level, word in LEVELS for item in findings if item.level == level]


def head_lines(weather: Weather) -> list[str]:
    """Return title, source, place and period in words."""
    site, first, last = weather.site, weather.time[0], weather.time[-1]
    if weather.clear_sky:
        kind = "computed clear-sky year, an upper bound of light"
    elif weather.typical:
        kind = "typical year on the nominal clock of 1990: extremes are removed, no sizing year"
    else:
        kind = f"record from {str(first)[:10]} to {str(last)[:10]}"
    return [
        weather.title,
        f"source: {weather.source}",
        f"place: {site.latitude:.3f}, {site.longitude:.3f}, {site.elevation:.0f} m above the sea; clock UTC"
        f"{weather.utc_offset_h:+g} h, schedules in {site.timezone}",
        f"{len(weather)} hours, {kind}; {int(weather.filled.sum())} hours hold a filled value",
    ]


def quality_text(weather: Weather) -> str:
    """Return the report for a terminal: what was found, the climate by month, design temperatures."""
    found = climate(weather)
    lines = [*head_lines(weather), "", "What the checks found"]
    lines += [f"  {word:<10}{text}" for word, text in ordered(weather.findings)] or ["  nothing"]
    lines += ["", "Climate by month"]
    head = ("", "global", "clear", "diff", "mean", "min", "max", "RH", "wind", "long-w", "sky -")
    unit = ("", "kWh/m2", "%", "%", "degC", "degC", "degC", "%", "m/s", "W/m2", "K")
    rows = [head, unit, *month_rows(found)]
    lines += ["  " + f"{row[0]:<10}" + "".join(f"{cell:>8}" for cell in row[1:]) for row in rows]
    lines += ["", "Design and extremes", *(f"  {line}" for line in design_lines(weather, found))]
    return "\n".join(lines) + "\n"


def _sections(weather: Weather, found: Climate) -> tuple[Section, ...]:
    from reports import weather_figures as figures

    table = Table("Climate by month", HEAD, tuple(_row(row) for row in month_rows(found)), UNITS, folded=True)
    findings: tuple[Block, ...] = (
        Points(tuple(f"{word}: {text}" for word, text in ordered(weather.findings)) or ("nothing",)),
    )
    return (
        Section(
            "found",
            "What the checks found",
            "Can this record be trusted?",
            (Text(tuple(head_lines(weather)[1:])), *findings),
        ),
        Section(
            "light",
            "Light",
            "How much light is there, and does the clock fit the sun?",
            (
                Text((found.light_words,), lead=True),
                figures.month_light(found),
                figures.carpet(weather, found),
                figures.clearness(weather, found),
                table,
            ),
        ),
        Section(
            "air",
            "Temperature, humidity, wind",
            "How cold and how damp is it?",
            (
                Text(tuple(design_lines(weather, found))),
                figures.temperature(found),
                figures.duration(weather, found),
            ),
        ),
        Section(
            "sky",
            "Long-wave",
            "How cold is the sky?",
            (Text((found.sky_words,), lead=True), figures.longwave(weather, found)),
        ),
    )


def _row(cells: tuple[str, ...]) -> Any:
    from reports.blocks import Row

    return Row(cells[0], cells[1:])


def weather_page(weather: Weather, path: Path) -> None:
    """Write one self-contained page with interactive figures; nothing half-written is left behind."""
    from reports.page import single_text

    sections = tuple(_sections(weather, climate(weather)))
    text = single_text(weather.title, "Weather record, checked", head_lines(weather)[3], sections)
    write_whole(text, path)


def write_whole(text: str, path: Path) -> None:
    """Write a text under another name and move it into place. UserError when that is not possible."""
    if path.is_dir():
        raise UserError(f"--plot: {path} is a folder, a file name is needed")
    scratch: str | None = None
    try:
        handle, scratch = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.", suffix=".part")
        with os.fdopen(handle, "w", encoding="utf-8") as file:
            file.write(text)
        os.chmod(scratch, 0o644)
        os.replace(scratch, path)
    except OSError as error:
        if scratch is not None and os.path.exists(scratch):
            os.unlink(scratch)
        raise UserError(f"--plot: {path} cannot be written ({error.strerror or error})") from None
