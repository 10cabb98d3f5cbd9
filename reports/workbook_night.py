"""Two parts of the sizing sheet: fuel and electricity, and the design night step by step."""

from __future__ import annotations

from typing import Any

from canopy.designnight import DesignNight, NightLoad
from canopy.fuel import FuelUse
from canopy.run import CandidateRun
from canopy.sizing import Sizing
from reports.workbook_base import AREA_ROW, Book, cell, row_head, subtitle


def energy_table(book: Book, sheet: Any, row: int) -> int:
    """Write what every candidate's supplies take; returns the last row used."""
    subtitle(book, sheet, row, "Fuel and electricity over the record, whole house")
    end = row
    for one in book.run.candidates:
        bill = one.sizing.energy if one.sizing is not None else None
        if bill is None:
            continue
        for use, paid in ((bill.boiler, bill.boiler_cost), (bill.electricity, bill.electricity_cost)):
            if use is None:
                continue
            end += 1
            book.text(sheet, end, 0, f"{one.plan.name}: {use.fuel.title}")
            currency = f", {paid.currency}" if paid is not None and paid.currency else ""
            cells: list[tuple[str, float | None, str]] = [
                ("efficiency on net", use.efficiency, ""),
                ("heat", use.heat_kwh, "kWh"),
                ("gross", use.gross_kwh, "kWh"),
                ("net", use.net_kwh, "kWh"),
                _bought(book, use),
                ("CO2 (biogenic)" if use.fuel.biogenic else "CO2", use.co2_kg, "kg"),
                ("highest draw, gross", use.peak_kw, "kW"),
                (f"cost{currency}", None if paid is None else paid.total, ""),
            ]
            for k, (words, value, unit) in enumerate(cells, start=2):
                text = book.shown(unit).text
                book.text(sheet, end, k, f"{words}, {text}" if text else words, book.unit)
                if value is None:
                    book.text(sheet, end + 1, k, "not computed")
                else:
                    book.put(sheet, end + 1, k, float(value), unit)
            end += 1
    return end


def _bought(book: Book, use: FuelUse) -> tuple[str, float, str]:
    """Return the amount as it is sold: gas in therms where units are US, electricity in kWh everywhere."""
    if use.fuel.unit == "kWh":
        return "bought, kWh", use.amount, ""
    if use.fuel.unit == "m3" and book.system == "us":
        return "bought (gross)", use.gross_kwh, "kWh"
    return "bought", use.amount, use.fuel.unit


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
    found: Sizing | None = one.sizing
    for k, words in enumerate(found.explained if found is not None else (), start=3):
        book.text(sheet, end + k, 0, words)
    return end + 2 + (len(found.explained) if found is not None else 0)


def _steps(book: Book, sheet: Any, row: int, at: int, load: NightLoad) -> int:
    """Write the components of one state of the screens; kW and totals are formulas."""
    flux, power = book.shown("W/m2"), book.shown("kW")
    book.text(sheet, row, 0, f"screens: {load.screens}", book.head)
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
