"""The first and the last sheets: read me, inputs, sources."""

from __future__ import annotations

from typing import Any

from canopy.cautions import CAUTIONS
from canopy.columns import GAINS, LOSSES, STORES
from canopy.fuel import fuels
from reports.display import place_words
from reports.keywords import value_words
from reports.method import METHOD
from reports.summary import notes_of
from reports.workbook_base import Book, day_sheet, fit_row

WIDE = 110
SOURCE_WIDTHS = (18, 34, 24, 100)
TABLES = ("house", "crop", "climate", "heating")


def readme_sheet(book: Book) -> None:
    """Write what this is, how to read it, and what to beware of."""
    run, sheet = book.run, book.sheet("Read me")
    weather, site = run.weather, run.weather.site
    sheet.set_column(0, 0, 24)
    sheet.set_column(1, 1, WIDE)
    book.text(sheet, 0, 0, run.study.keys.title, book.title)
    units = "US customary units; the CSV and Parquet files stay SI" if book.system == "us" else "SI units"
    day_names = ", ".join(f"{day_sheet(at)} = {one.plan.name}" for at, one in enumerate(run.candidates))
    identity = " + ".join(_stem(n) for n in GAINS) + " = " + " + ".join(_stem(n) for n in (*LOSSES, *STORES))
    lines: list[tuple[str, str]] = [
        ("Study", run.study.label),
        ("Weather", f"{weather.title}; {weather.source}"),
        ("Place", f"{place_words(site.latitude, site.longitude)}, {site.elevation:.0f} m above the sea"),
        ("Period", f"{run.days[0]} to {run.days[-1]}, {len(run.days)} days, {len(run.time)} hours"),
        ("Days", "standard-time days of the weather file; schedules run in civil time"),
        ("Units", f"{units}; the unit stands below every heading; every m2 or ft2 is floor"),
        ("Daily sheets", day_names),
        ("Formulas", "seasons, months and comparison are formulas over the daily sheets"),
        ("Balance of a day", f"{identity}, all in kWh per m2 of floor"),
        ("Empty cells", "an empty cell means that there is no such value"),
    ]
    if weather.typical:
        lines.append(("Typical year", "months of different years put together: its extremes are removed"))
    if weather.clear_sky:
        lines.append(("Clear sky", "a computed clear-sky year: an upper bound for light, no cloud at all"))
    row = 2
    for head, words in lines:
        book.text(sheet, row, 0, head, book.head_left)
        book.text(sheet, row, 1, words, book.wrap)
        fit_row(sheet, row, (words, WIDE))
        row += 1
    for head, some in (("Notes", notes_of(book.run)), ("Cautions", CAUTIONS)):
        for at, words in enumerate(some):
            book.text(sheet, row, 0, head if at == 0 else "", book.head_left)
            book.text(sheet, row, 1, words, book.wrap)
            fit_row(sheet, row, (words, WIDE))
            row += 1
    sheet.freeze_panes(1, 0)


def _stem(name: str) -> str:
    return name.removesuffix("_w_m2")


def inputs_sheet(book: Book) -> None:
    """Write every key of every candidate as used, and the study file as it was read."""
    run, sheet = book.run, book.sheet("Inputs")
    book.text(sheet, 0, 0, "Inputs as used (SI)", book.title)
    for col, words in enumerate(("key", *(one.plan.name for one in run.candidates))):
        book.text(sheet, 1, col, words, book.head)
    sheet.set_column(0, 0, 30)
    sheet.set_column(1, len(run.candidates), 24)
    row = 2
    rows: list[tuple[str, list[str]]] = [
        ("covering", [one.plan.covering for one in run.candidates]),
        ("screens", [", ".join(one.plan.screens) for one in run.candidates]),
    ]
    for table in TABLES:
        for key in type(getattr(run.candidates[0].plan, table)).model_fields:
            values = [getattr(getattr(one.plan, table), key) for one in run.candidates]
            rows.append((f"{table}.{key}", [value_words(value, f"{table}.{key}") for value in values]))
    for key, cells in rows:
        book.text(sheet, row, 0, key, book.bold)
        for col, value in enumerate(cells, start=1):
            _value(book, sheet, row, col, value)
        fit_row(sheet, row, *((value, 24) for value in cells))
        row += 1
    book.text(sheet, row + 1, 0, "Study file", book.bold)
    for at, line in enumerate(run.study.text.splitlines()[:2000], start=row + 2):
        book.text(sheet, at, 0, line)
    sheet.freeze_panes(2, 1)


def _value(book: Book, sheet: Any, row: int, col: int, value: str) -> None:
    """Write a plain number as a number, anything else as text."""
    try:
        number = float(value)
    except ValueError:
        book.text(sheet, row, col, value, book.wrap)
        return
    if number == number and abs(number) < 1e300:
        sheet.write_number(row, col, number, book.plain)
    else:
        book.text(sheet, row, col, value, book.wrap)


def sources_sheet(book: Book) -> None:
    """Write where every figure comes from: optics, fuels, weather findings, method, versions."""
    sheet = book.sheet("Sources")
    for col, width in enumerate(SOURCE_WIDTHS):
        sheet.set_column(col, col, width)
    book.text(sheet, 0, 0, "Sources", book.title)
    for col, words in enumerate(("what", "name", "how known", "source")):
        book.text(sheet, 1, col, words, book.head)
    for row, cells in enumerate(_rows(book), start=2):
        for col, words in enumerate(cells):
            book.text(sheet, row, col, words, book.wrap)
        fit_row(sheet, row, *zip(cells, SOURCE_WIDTHS, strict=True))
    sheet.freeze_panes(2, 0)


def _rows(book: Book) -> list[tuple[str, str, str, str]]:
    run = book.run
    rows: dict[tuple[str, str], tuple[str, str, str, str]] = {}
    for one in run.candidates:
        parts: list[tuple[str, Any]] = [("covering", one.covering)]
        parts += [("screen", screen) for screen in one.screens]
        parts += [("leaf", one.leaf), ("floor", one.ground)]
        for what, part in parts:
            rows[what, part.name] = (what, part.title, part.provenance, part.source)
        name = one.plan.heating.fuel
        kind = fuels().get(name)
        if kind is not None:
            rows["fuel", name] = ("fuel", kind.title, "published", f"{kind.source}; {kind.efficiency_source}")
    found = [("weather", f.check, f.level, f.text) for f in run.weather.findings]
    method = [("method", stage, after, how) for stage, how, after in METHOD]
    versions = [("version", name, "", number) for name, number in run.versions.items()]
    return [
        *rows.values(),
        ("weather", run.weather.title, "", run.weather.source),
        *found,
        *method,
        *versions,
    ]
