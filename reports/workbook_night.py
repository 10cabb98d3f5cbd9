"""The design night on the sizing sheet: every component, one below the other, with its derivation."""

from __future__ import annotations

from typing import Any

from canopy.designnight import DesignNight, NightLoad
from canopy.run import CandidateRun
from canopy.sizing import Sizing
from reports.workbook_base import AREA_ROW, Book, cell, row_head, subtitle


def night_table(book: Book, sheet: Any, row: int, at: int, one: CandidateRun) -> int:
    """Write one candidate's design night and what explains it; returns the last row used."""
    night: DesignNight | None = one.design
    subtitle(book, sheet, row, f"Design night step by step: {one.plan.name}")
    if night is None:
        book.text(sheet, row + 1, 0, "not computed: no heating")
        return row + 1
    given = (
        ("outside air", night.outside.temp_c, "°C", night.outside.temp_source),
        ("house air", night.inside_c, "°C", night.inside_source),
        ("wind at 10 m", night.outside.wind_m_s, "m/s", night.outside.wind_source),
        ("humidity outside", night.outside.humidity_pct, "%", "mean of the coldest 1 % of hours"),
        ("clear sky, long-wave", night.outside.sky_w_m2, "W/m2", "no cloud"),
    )
    for k, (words, value, unit, source) in enumerate(given, start=1):
        row_head(book, sheet, row + k, words, unit)
        book.put(sheet, row + k, 2, value, unit)
        book.text(sheet, row + k, 3, source)
    end = row + len(given)
    for load in (night.open, night.drawn):
        if load is not None:
            end = _steps(book, sheet, end + 1, at, load)
    hand = night.hand
    book.text(
        sheet,
        end + 1,
        0,
        f"On paper, screens open (W/m2, SI): {hand.text}; together {hand.total_w_m2:.0f} W/m2",
    )
    book.text(sheet, end + 2, 0, f"Recovery (SI): {night.recovery.text}")
    if book.system == "us":
        end += 1
        book.text(sheet, end + 2, 0, "The sentences below are in SI units.")
    found: Sizing | None = one.sizing
    for k, words in enumerate(found.explained if found is not None else (), start=3):
        book.text(sheet, end + k, 0, words)
    return end + 2 + (len(found.explained) if found is not None else 0)


def _steps(book: Book, sheet: Any, row: int, at: int, load: NightLoad) -> int:
    """Write the components of one state of the screens; kW and totals are formulas."""
    flux, power = book.shown("W/m2"), book.shown("kW")
    state = "no screen" if load.screens == "none" else f"screens: {load.screens}"
    book.text(sheet, row, 0, state, book.head)
    for k, words in enumerate((flux.text, power.text, "how (SI)"), start=1):
        book.text(sheet, row, k, words, book.head)
    area = cell(AREA_ROW, 2 + at, fixed=True)
    first = row + 1
    for k, part in enumerate(load.components):
        here = first + k
        book.text(sheet, here, 0, part.name)
        book.put(sheet, here, 1, part.w_m2, "W/m2")
        text = f"={cell(here, 1)}*{area}/1000"
        book.formula(sheet, here, 2, text, float(power.convert(part.kw)), power.number_format)
        book.text(sheet, here, 3, part.how)
    end = first + len(load.components)
    book.text(sheet, end, 0, "heat needed", book.bold)
    values = (
        float(flux.convert(sum(p.w_m2 for p in load.components))),
        float(power.convert(sum(p.kw for p in load.components))),
    )
    for col, value, how in ((1, values[0], flux), (2, values[1], power)):
        text = f"=SUM({cell(first, col)}:{cell(end - 1, col)})"
        book.formula(sheet, end, col, text, value, how.number_format, bold=True)
    return end
