"""Fuel, electricity, CO2 and cost on the sizing sheet: one column per candidate."""

from __future__ import annotations

from typing import Any, Final

from canopy.fuel import FuelUse
from canopy.heatpump import HeatPumpRun
from canopy.tariff import Cost
from reports.us_units import KWH_PER_THERM, L_PER_GALLON, T_PER_SHORT_TON
from reports.workbook_base import Book, cell, row_head, subtitle

NOT_COMPUTED: Final = "not computed"
USE: Final = (
    ("efficiency, on the net heating value", "share"),
    ("heat delivered", "kWh"),
    ("gross heating value", "kWh"),
    ("net heating value", "kWh"),
    ("highest draw, gross", "kW"),
    ("CO2", "kg"),
)
COST: Final = (
    ("energy, day or flat price", "energy_day"),
    ("energy at night", "energy_night"),
    ("capacity charge", "capacity"),
    ("above the contract", "over_contract"),
    ("standing charge", "standing"),
)
PUMP: Final = (
    ("share of the heat", "heat_share", "share"),
    ("source too cold", "too_cold_h", "h"),
    ("needed flow too hot", "too_hot_h", "h"),
    ("capacity reached, back-up helps", "short_h", "h"),
    ("defrosting", "defrost_h", "h"),
    ("running at a higher lift than the performance data", "outside_range_h", "h"),
)


def energy_table(book: Book, sheet: Any, row: int) -> int:
    """Write what every candidate's supplies take and cost; returns the last row used."""
    subtitle(book, sheet, row, "Boiler over the record, whole house (of a heat pump: its back-up)")
    bills = [
        (2 + k, one.sizing.energy)
        for k, one in enumerate(book.run.candidates)
        if one.sizing is not None and one.sizing.energy is not None
    ]
    row = _use(book, sheet, row + 1, [(col, bill.boiler) for col, bill in bills])
    row = _cost(book, sheet, row + 1, [(col, bill.boiler_cost) for col, bill in bills])
    pumps = [(col, bill) for col, bill in bills if bill.pump is not None and bill.electricity is not None]
    if pumps:
        subtitle(
            book,
            sheet,
            row + 2,
            "Heat pump over the record, whole house (efficiency: its seasonal performance)",
        )
        row = _pump(book, sheet, row + 3, [(col, bill.pump, bill.electricity) for col, bill in pumps])
        row = _cost(book, sheet, row + 1, [(col, bill.electricity_cost) for col, bill in pumps])
    return row


def _sold(book: Book, use: FuelUse) -> tuple[float, str]:
    """Return the amount as it is sold: gas in therms and litres as gallons where units are US."""
    unit, amount = use.fuel.unit, use.amount
    if book.system == "us":
        if unit == "m3":
            return use.gross_kwh / KWH_PER_THERM, "therm (gross)"
        if unit == "l":
            return amount / L_PER_GALLON, "gal"
        if unit == "t":
            return amount / T_PER_SHORT_TON, "short ton"
    return amount, unit


def _use(book: Book, sheet: Any, row: int, uses: list[tuple[int, FuelUse]]) -> int:
    row_head(book, sheet, row, "supply", "")
    for at, (words, unit) in enumerate(USE, start=1):
        row_head(book, sheet, row + at, words, unit)
    last = row + len(USE)
    row_head(book, sheet, last + 1, "bought", "")
    row_head(book, sheet, last + 2, "sold in", "")
    for col, use in uses:
        biogenic = " (CO2 of recent plant growth)" if use.fuel.biogenic else ""
        book.text(sheet, row, col, use.fuel.title + biogenic)
        values = (use.efficiency, use.heat_kwh, use.gross_kwh, use.net_kwh, use.peak_kw, use.co2_kg)
        for at, (value, (_, unit)) in enumerate(zip(values, USE, strict=True), start=1):
            if value is None:
                book.text(sheet, row + at, col, NOT_COMPUTED)
            else:
                book.put(sheet, row + at, col, float(value), unit)
        amount, unit = _sold(book, use)
        sheet.write_number(last + 1, col, amount, book.number("#,##0.0"))
        book.text(sheet, last + 2, col, unit)
    return last + 2


def _cost(book: Book, sheet: Any, row: int, costs: list[tuple[int, Cost | None]]) -> int:
    for at, (words, _) in enumerate(COST):
        row_head(book, sheet, row + at, f"cost: {words}", "")
    last = row + len(COST)
    row_head(book, sheet, last, "cost, together", "")
    row_head(book, sheet, last + 1, "currency", "")
    row_head(book, sheet, last + 2, "hours above the contract", "h")
    for col, paid in costs:
        if paid is None:
            book.text(sheet, last, col, f"{NOT_COMPUTED}: no price")
            continue
        for at, (_, name) in enumerate(COST):
            sheet.write_number(row + at, col, float(getattr(paid, name)), book.number("#,##0"))
        text = f"=SUM({cell(row, col)}:{cell(last - 1, col)})"
        book.formula(sheet, last, col, text, paid.total, "#,##0", bold=True)
        book.text(sheet, last + 1, col, paid.currency or "as the study's prices")
        book.put(sheet, last + 2, col, paid.over_contract_h, "h")
    return last + 2


def _pump(book: Book, sheet: Any, row: int, pumps: list[tuple[int, HeatPumpRun, FuelUse]]) -> int:
    rows = (
        ("seasonal performance", ""),
        ("electricity", ""),
        ("sold in", ""),
        ("CO2", "kg"),
        ("highest draw", ""),
        *((words, unit) for words, _, unit in PUMP),
    )
    for at, (words, unit) in enumerate(rows):
        row_head(book, sheet, row + at, words, unit)
    for col, pump, use in pumps:
        book.put(sheet, row, col, pump.seasonal, "")
        sheet.write_number(row + 1, col, use.amount, book.number("#,##0"))
        book.text(sheet, row + 2, col, "kWh; highest draw in kW")
        book.put(sheet, row + 3, col, float("nan") if use.co2_kg is None else use.co2_kg, "kg")
        sheet.write_number(row + 4, col, use.peak_kw, book.number("#,##0.0"))
        for at, (_, name, unit) in enumerate(PUMP, start=5):
            book.put(sheet, row + at, col, float(getattr(pump, name)), unit)
    return row + len(rows) - 1
