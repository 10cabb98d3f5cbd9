"""Formats, cells and references that every sheet of the workbook shares."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any, Final

import numpy as np
from xlsxwriter.utility import xl_col_to_name

from canopy.run import Run
from reports.us_units import Shown, System, shown

SHEETS: Final = ("Read me", "Comparison", "Monthly", "Sizing", "Inputs", "Sources")
TEXT_LIMIT: Final = 32_000  # Excel takes 32767 characters in a cell
TOTALS_ROW: Final = 4  # row (from 0) of the season's formulas on a daily sheet
FIRST_ROW: Final = 5  # first day on a daily sheet
AREA_ROW: Final = 3  # row (from 0) of the floor area on the sizing sheet
LINE_POINTS: Final = 15.0  # height of one line
COLOURS: Final = ("#1f5f8b", "#c8553d", "#588157", "#8a5a9e", "#b8860b", "#3a7d7c", "#7a4e2d", "#5c5c5c")


class Book:
    """A workbook in the making: the xlsxwriter book, its formats, the run and the units."""

    def __init__(self, book: Any, run: Run, system: System) -> None:
        """Make the formats once."""
        self.book, self.run, self.system = book, run, system
        self.title = book.add_format({"bold": True, "font_size": 14})
        self.head = book.add_format(
            {"bold": True, "text_wrap": True, "valign": "top", "bottom": 1, "bg_color": "#e8eef2"}
        )
        self.unit = book.add_format({"italic": True, "font_color": "#555555"})
        self.name = book.add_format({"font_color": "#777777", "font_size": 8, "text_wrap": True})
        self.wrap = book.add_format({"text_wrap": True, "valign": "top"})
        self.plain = book.add_format({"valign": "top"})
        self.bold = book.add_format({"bold": True})
        self.head_left = book.add_format({"bold": True, "valign": "top"})
        self.day = book.add_format({"num_format": "yyyy-mm-dd", "align": "left"})
        self._numbers: dict[tuple[str, bool], Any] = {}

    def sheet(self, name: str) -> Any:
        """Add a sheet; it prints landscape, one page wide."""
        added = self.book.add_worksheet(name)
        added.set_landscape()
        added.fit_to_pages(1, 0)
        return added

    def number(self, number_format: str, bold: bool = False) -> Any:
        """Return the format of a number; sums are bold with a line below."""
        key = (number_format, bold)
        if key not in self._numbers:
            look: dict[str, Any] = {"num_format": number_format}
            if bold:
                look |= {"bold": True, "bottom": 1}
            self._numbers[key] = self.book.add_format(look)
        return self._numbers[key]

    def shown(self, unit: str) -> Shown:
        """Return how a unit is shown."""
        return shown(unit, self.system)

    def put(self, sheet: Any, row: int, col: int, value: float, unit: str, bold: bool = False) -> None:
        """Write a number given in SI in the shown unit; nothing where there is no number."""
        how = self.shown(unit)
        if np.isfinite(value):
            sheet.write_number(row, col, float(how.convert(value)), self.number(how.number_format, bold))

    def formula(
        self, sheet: Any, row: int, col: int, text: str, value: float, number_format: str, bold: bool = False
    ) -> None:
        """Write a formula with its value, so that viewers which do not compute show it too."""
        cached: float | str = float(value) if np.isfinite(value) else ""
        sheet.write_formula(row, col, text, self.number(number_format, bold), cached)

    def text(self, sheet: Any, row: int, col: int, words: object, look: Any = None) -> None:
        """Write text as text, whatever it begins with."""
        sheet.write_string(row, col, str(words)[:TEXT_LIMIT], look or self.plain)

    def heading(self, sheet: Any, row: int, col: int, heads: Sequence[str], units: Sequence[str]) -> None:
        """Write headings and, in the row below, their units."""
        for at, (head, unit) in enumerate(zip(heads, units, strict=True)):
            self.text(sheet, row, col + at, head, self.head)
            self.text(sheet, row + 1, col + at, self.shown(unit).text, self.unit)


def fit_row(sheet: Any, row: int, *cells: tuple[str, float]) -> None:
    """Make a row high enough for wrapped texts, each given with its column's width in characters."""
    lines = max(math.ceil(0.9 * len(words) / width) for words, width in cells)
    if lines > 1:
        sheet.set_row(row, LINE_POINTS * lines)


def cell(row: int, col: int, fixed: bool = False) -> str:
    """Return "B7" (or "$B$7") for a row and column from 0."""
    mark = "$" if fixed else ""
    return f"{mark}{xl_col_to_name(col)}{mark}{row + 1}"


def span(sheet: str, first: int, last: int, col: int) -> str:
    """Return "'Day 1'!$B$6:$B$370"."""
    name = xl_col_to_name(col)
    return f"'{sheet}'!${name}${first + 1}:${name}${last + 1}"


def day_sheet(at: int) -> str:
    """Return the name of a candidate's daily sheet: short and numbered, whatever the user called it."""
    return f"Day {at + 1}"


def colour(at: int) -> str:
    """Return the colour of a candidate."""
    return COLOURS[at % len(COLOURS)]


def row_head(book: Book, sheet: Any, row: int, words: str, unit: str) -> None:
    """Write the name and the unit of a row."""
    book.text(sheet, row, 0, words)
    book.text(sheet, row, 1, book.shown(unit).text, book.unit)


def subtitle(book: Book, sheet: Any, row: int, words: str) -> None:
    """Write the title of a table."""
    book.text(sheet, row, 0, words, book.bold)
