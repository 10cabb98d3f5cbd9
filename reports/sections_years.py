"""Cold spells, the spread over several years, and what the heat takes in fuel."""

from __future__ import annotations

from dataclasses import replace

from canopy.fuel import FuelUse
from canopy.run import Run
from reports import sentences as say
from reports.blocks import Block, Points, Row, Table, Text
from reports.display import NONE, Display, number, percent
from reports.figures import marks_of
from reports.us_units import shown


def several_years(run: Run, show: Display) -> list[Block]:
    """Return cold spells, and the spread over several years where it was computed."""
    spells = run.candidates[0].sizing.spells
    blocks: list[Block] = []
    if spells:
        parts = [
            f"{number(x.hours)} h: {show.say(x.mean_c, 'degC')} from {say.hour_words(x.start)}"
            for x in spells
        ]
        blocks.append(Text((f"Coldest spells of the record, mean outside air: {'; '.join(parts)}.",)))
    many = [(one, one.sizing.many) for one in run.candidates if one.sizing.many is not None]
    if not many:
        blocks.append(
            Text(("One weather year only: spread between years and return levels were not computed.",))
        )
        return blocks
    rows = []
    for (one, m), mark in zip(many, marks_of(run), strict=True):
        levels = "; ".join(
            f"{number(x.years)} years: {show.bare(x.level, 'W/m2')} ({show.bare(x.low, 'W/m2')} to "
            f"{show.bare(x.high, 'W/m2')})"
            for x in m.levels
        )
        rows.append(
            Row(
                one.plan.name,
                (
                    number(len(m.years)),
                    f"{show.bare(float(m.peak_w_m2.min()), 'W/m2')} to "
                    f"{show.bare(float(m.peak_w_m2.max()), 'W/m2')}",
                    f"{show.bare(float(m.annual_heat_kwh_m2.min()), 'kWh/m2')} to "
                    f"{show.bare(float(m.annual_heat_kwh_m2.max()), 'kWh/m2')}",
                    levels or "not computed",
                ),
                mark,
            )
        )
    blocks.append(
        Table(
            "Spread over the years; load reached once in so many years, with its 90 % interval",
            ("candidate", "years", "largest hour", "heat in a year", "return level"),
            tuple(rows),
            ("", "", show.text("W/m2"), show.text("kWh/m2"), show.text("W/m2")),
            words=True,
        )
    )
    blocks.append(Points(tuple(dict.fromkeys(m.note for _, m in many))))
    return blocks


def energy_table(run: Run, show: Display) -> Table | None:
    """Return fuel, CO2 and cost; None when no candidate has a supply."""
    rows, priced = [], False
    gross, tonnes = shown("kWh", show.system), shown("t", show.system)
    for one, mark in zip(run.candidates, marks_of(run), strict=True):
        e = one.sizing.energy
        if e is None:
            continue
        cost, pump = e.total_cost, e.pump
        priced = priced or cost is not None
        currency = next((c.currency for c in (e.boiler_cost, e.electricity_cost) if c is not None), "")
        rows.append(
            Row(
                one.plan.name,
                (
                    e.boiler.fuel.title,
                    _bought(e.boiler, show),
                    number(float(gross.convert(e.boiler.gross_kwh))),
                    NONE if e.electricity is None else number(e.electricity.gross_kwh),
                    NONE
                    if pump is None
                    else f"{number(pump.seasonal, 2)}, {percent(pump.heat_share)} of the heat",
                    NONE if e.co2_kg is None else number(float(tonnes.convert(e.co2_kg / 1000.0)), 1),
                    NONE if cost is None else f"{number(cost)} {currency}".strip(),
                ),
                mark,
            )
        )
    if not rows:
        return None
    whole = say.period(run) if len(run.hours) == len(run.weather) else "whole record"
    heads = ("supply", "bought", "gross heating value", "electricity", "heat pump, seasonal", "CO₂", "cost")
    units = ("", "", gross.text, "kWh", "", tonnes.text, "")
    kept = [k for k in range(len(heads)) if any(row.cells[k] != NONE for row in rows)]
    return Table(
        f"Fuel for the whole house, {whole}" + ("" if priced else "; no price is given in the study"),
        ("candidate", *(heads[k] for k in kept)),
        tuple(replace(row, cells=tuple(row.cells[k] for k in kept)) for row in rows),
        ("", *(units[k] for k in kept)),
        words=True,
    )


def _bought(use: FuelUse, show: Display) -> str:
    if show.system == "us" and use.fuel.unit == "m3":
        cubic_feet = use.amount * show.unit("m").factor ** 3
        return f"{number(cubic_feet / 1000.0)} thousand ft³"
    unit = shown(use.fuel.unit, show.system)
    name = {"m3": "m³", "l": "litres", "gal": "gallons", "short ton": "short tons"}.get(unit.text, unit.text)
    return f"{number(float(unit.convert(use.amount)))} {name}"
