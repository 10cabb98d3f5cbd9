"""workbook.xlsx: read me, comparison, one daily sheet per candidate, monthly, sizing, inputs, sources."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

from canopy.run import Run
from reports.workbook_base import Book
from reports.workbook_days import comparison_sheet, daily_sheet, monthly_sheet
from reports.workbook_end import inputs_sheet, readme_sheet, sources_sheet
from reports.workbook_sizing import sizing_sheet


def write_workbook(run: Run, path: Path, units: Literal["si", "us"] = "si") -> None:
    """Write the workbook of a run; `units` "us" shows Btu, therms, °F and ft (the CSV files stay SI).

    Sheet names are short and numbered; text that users typed is written as text, never as a formula or link.
    Errors: OSError when the file cannot be written.
    """
    import xlsxwriter

    options = {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
    book = xlsxwriter.Workbook(str(path), options)
    try:
        book.set_properties({"title": run.study.keys.title, "comments": "canopy-budget"})
        sheets = Book(book, run, units)
        readme_sheet(sheets)
        comparison_sheet(sheets)
        for at, one in enumerate(run.candidates):
            daily_sheet(sheets, at, one)
        monthly_sheet(sheets)
        sizing_sheet(sheets)
        inputs_sheet(sheets)
        sources_sheet(sheets)
    finally:
        _close(book)


def _close(book: object) -> None:
    """Close the file; a failed write is an OSError like any other."""
    from xlsxwriter.exceptions import FileCreateError

    try:
        book.close()  # type: ignore[attr-defined]
    except FileCreateError as error:
        cause = error.args[0] if error.args else error
        raise cause if isinstance(cause, OSError) else OSError(str(error)) from error
