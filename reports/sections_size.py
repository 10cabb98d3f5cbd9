"""How big the heating must be: hours and design night side by side, boiler sizes, stores, fuel."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from canopy.run import CandidateRun, Run
from reports import sentences as say
from reports.blocks import Block, Chooser, Each, Points, Row, Section, Table, Text
from reports.display import NONE, Display, number, percent, pretty
from reports.figures import marks_of
from reports.figures_heat import duration_figure
from reports.sections_years import energy_table, several_years
from reports.summary import Summary, peaks_as_screens_open


def size(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return peak, duration, design night step by step, boiler sizes, stores and fuel."""
    title, question = "Heating size", "How big must the heating be?"
    nominal = run.weather.typical or run.weather.clear_sky
    each = tuple(_one(one, nominal, show) for one in run.candidates)
    blocks: list[Block | Each | Chooser] = [
        Text(_lead(run, rows, show), lead=True),
        size_table(run, rows, show),
        duration_figure(run, show),
        Chooser("Worked out for"),
        Each(each),
    ]
    blocks += several_years(run, show)
    fuels = energy_table(run, show)
    if fuels is not None:
        blocks.append(fuels)
    blocks.append(
        Text(
            (
                "A planning figure: local codes, the designer's margins and licensed design come first. "
                "Read the cautions below on snow, power failure and combustion air before ordering.",
            )
        )
    )
    return Section("size", title, question, tuple(blocks))


def size_table(run: Run, rows: Sequence[Summary], show: Display) -> Table:
    """Return the sizes of all candidates."""
    body = []
    for r, one, mark in zip(rows, run.candidates, marks_of(run), strict=True):
        s = one.sizing
        body.append(
            Row(
                r.name,
                (
                    show.bare(s.peak_w_m2, "W/m2"),
                    say.short_hour(s.peak_at) if s.peak_w_m2 > 0 else NONE,
                    show.bare(s.load_exceeded_35_h_w_m2, "W/m2"),
                    show.bare(s.load_exceeded_88_h_w_m2, "W/m2"),
                    show.bare(s.design_night_w_m2, "W/m2"),
                    show.bare(s.design_outside_c, "degC"),
                    show.bare(s.design_heat_kw, "kW"),
                    number(s.full_load_hours),
                    f"{show.bare(s.boiler_kw, 'kW')}",
                ),
                mark,
            )
        )
    unit = show.text("W/m2")
    margins = sorted({one.sizing.margin_pct for one in run.candidates})
    margin = f"+{number(margins[0])}\u202f%" if len(margins) == 1 else "with margin"
    return Table(
        "Size of the heating",
        (
            "candidate",
            "largest hour",
            "when",
            "exceeded in 35 h",
            "in 88 h",
            "design night",
            "outside then",
            "design heat",
            "full-load hours",
            f"boiler, {margin}",
        ),
        tuple(body),
        ("", unit, "", unit, unit, unit, show.text("degC"), show.text("kW"), "h a year", show.text("kW")),
    )


def _lead(run: Run, rows: Sequence[Summary], show: Display) -> tuple[str, ...]:
    name, s = rows[0].name, run.candidates[0].sizing
    if s.design_w_m2 <= 0:
        return (f"With {name} no heat is asked for under the set-points given.",)
    first = f"With {name} the largest simulated hour takes {show.say(s.peak_w_m2, 'W/m2')}"
    if np.isfinite(s.design_night_w_m2):
        night, cold = show.say(s.design_night_w_m2, "W/m2"), show.say(s.design_outside_c, "degC")
        first += f", the design night {night} at {cold} outside"
    lines = [f"{first}. The design heat is taken from: {s.basis}."]
    if len(rows) > 1:
        small = min(run.candidates, key=lambda c: c.sizing.boiler_kw)
        large = max(run.candidates, key=lambda c: c.sizing.boiler_kw)
        least, most = show.say(small.sizing.boiler_kw, "kW"), show.say(large.sizing.boiler_kw, "kW")
        lines.append(
            f"The boiler is {least} for every candidate, margin included."
            if least == most
            else f"The boiler ranges from {least} ({small.plan.name}) to {most} ({large.plan.name}), margin "
            "included."
        )
    opening = [one.plan.name for one in run.candidates if peaks_as_screens_open(one)]
    if opening:
        lines.append(
            f"With {say.listed(opening)} the largest hour is the one in which the screens open: cold air "
            "from above falls in and the covering has to be warmed. Opening later or in steps lowers it."
        )
    if len(run.hours) < len(run.weather):
        lines.append("Sizes are taken from the whole weather record, not only from the season reported.")
    if run.weather.typical or run.weather.clear_sky:
        kind = "computed clear-sky" if run.weather.clear_sky else "typical"
        lines.append(f"The weather is a {kind} year without extremes: its largest hour alone is no size.")
    return tuple(lines)


def _one(one: CandidateRun, nominal: bool, show: Display) -> tuple[Block, ...]:
    blocks: list[Block] = []
    night = one.design
    if night is not None:
        blocks += [
            _night_table(night, load, one.plan.name, show) for load in (night.drawn, night.open) if load
        ]
        blocks.append(_outside_table(night, show))
        if show.system == "us":
            blocks.append(Text(("In SI units, as worked:",)))
        on_paper = f"On paper: {night.hand.text}."
        recovery = f"Recovery after the night: {night.recovery.text}."
        blocks.append(Points((pretty(on_paper), *([pretty(recovery)] if show.system == "us" else []))))
    if show.system == "si":
        blocks.append(Points(tuple(say.dated(pretty(text), nominal) for text in one.sizing.explained)))
    elif one.sizing.finite is not None:
        blocks.append(Text((_finite_words(one, show),)))
    if one.sizing.design_w_m2 > 0:
        blocks += [_share_table(one, show), _store_table(one, show)]
    return tuple(blocks)


def _night_table(night: Any, load: Any, name: str, show: Display) -> Table:
    state = {"drawn": "screens drawn", "open": "screens open", "none": "no screens"}[load.screens]
    rows = [
        Row(part.name, (show.bare(part.w_m2, "W/m2", 1), show.bare(part.kw, "kW", 1), pretty(part.how)))
        for part in load.components
    ]
    total = show.bare(load.total_w_m2, "W/m2", 1), show.bare(load.total_kw, "kW", 1), "all of the above"
    rows.append(Row("heat for the design night", total, strong=True))
    return Table(
        f"The design night step by step, {state}: {name}",
        ("part", "per floor", "whole house", "how"),
        tuple(rows),
        ("", show.text("W/m2"), show.text("kW"), "worked in SI" if show.system == "us" else ""),
        words=True,
    )


def _outside_table(night: Any, show: Display) -> Table:
    o = night.outside
    rows = (
        Row("outside temperature", (show.say(o.temp_c, "degC"), o.temp_source)),
        Row(
            "the record's own 99.6 %",
            (show.say(o.temp_data_c, "degC"), "colder than this in 35 hours a year"),
        ),
        Row("inside temperature", (show.say(night.inside_c, "degC"), night.inside_source)),
        Row("wind at 10 m in the open", (show.say(o.wind_m_s, "m/s"), o.wind_source)),
        Row(
            "long-wave from a clear sky",
            (show.say(o.sky_w_m2, "W/m2"), "the model of the hourly run, without cloud"),
        ),
    )
    return Table(
        "What the design night stands on", ("", "value", "where from"), rows, folded=True, words=True
    )


def _finite_words(one: CandidateRun, show: Display) -> str:
    run = one.sizing.finite
    size, low = show.say(run.capacity_w_m2, "W/m2"), show.say(run.lowest_air_c, "degC")
    if not run.solved_again:
        return f"A boiler of {size} is never at its limit in this record; the lowest house air is {low}."
    limited = say.count(run.limited_h, "hour", "hours")
    short = say.count(run.deficit_h, "hour", "hours")
    return (
        f"With a boiler of {size} the year was run again: it is at its limit in {limited}, the air is short "
        f"of its set-point in {short} ({number(run.deficit_kh)} kelvin hours), and the lowest house air is "
        f"{low} on {say.hour_words(run.lowest_at)}."
    )


def _share_table(one: CandidateRun, show: Display) -> Table:
    curve, s = one.sizing.curve, one.sizing
    cells = zip(curve.size_share, curve.heat_share, curve.full_load_h, strict=True)
    rows = tuple(
        Row(
            f"{percent(share)} of the design heat",
            (
                show.bare(share * s.design_w_m2, "W/m2"),
                show.bare(share * s.design_heat_kw, "kW"),
                percent(heat, 1),
                number(hours),
            ),
        )
        for share, heat, hours in cells
    )
    return Table(
        f"What a smaller boiler still covers: {one.plan.name}",
        ("boiler", "per floor", "whole house", "share of the heat", "full-load hours"),
        rows,
        ("", show.text("W/m2"), show.text("kW"), "", "h"),
        folded=True,
    )


def _store_table(one: CandidateRun, show: Display) -> Table:
    s = one.sizing.stores
    rows = tuple(
        Row(
            f"{number(volume)} m³ per 1000 m²",
            (show.bare(held, "kWh/m2", 2), show.bare(boiler, "W/m2"), show.bare(reserve, "W/m2")),
        )
        for volume, held, boiler, reserve in zip(
            s.volume_m3, s.capacity_kwh_m2, s.boiler_w_m2, s.with_reserve_w_m2, strict=True
        )
    )
    return Table(
        f"Smallest boiler beside a heat store of {number(s.spread_k)} K: {one.plan.name}. Perfect foresight; "
        f"last column with {number(s.reserve_pct)}\u202f% operating reserve",
        ("store", "holds", "smallest boiler", "with reserve"),
        rows,
        ("", show.text("kWh/m2"), show.text("W/m2"), show.text("W/m2")),
        folded=True,
    )
