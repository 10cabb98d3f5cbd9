"""The numbers in words. Every function returns plain sentences; nothing is said that was not computed."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Final

import numpy as np

from canopy.run import Run
from reports.display import NONE, Display, number, percent
from reports.ranges import range_words
from reports.summary import FULL_YEAR_DAYS, Summary, beaten, dark_months, peaks_as_screens_open

MONTHS: Final = (
    "January", "February", "March", "April", "May", "June",
    "July", "August", "September", "October", "November", "December",
)  # fmt: skip

SAME: Final = 0.005  # differences below half a per cent are not told apart in words

SHORT_H: Final = 10.0  # hours below the set-point from which on a total of heat is called short
DARK: Final = "No sunlight falls in the reported season"


def day_words(day: np.datetime64) -> str:
    """Return "3 January"."""
    text = str(day.astype("datetime64[D]"))
    return f"{int(text[8:10])} {MONTHS[int(text[5:7]) - 1]}"


def hour_words(at: np.datetime64) -> str:
    """Return "3 January, 05:00"."""
    return f"{day_words(at)}, {str(at.astype('datetime64[m]'))[11:16]}"


def dated(text: str, nominal: bool) -> str:
    """Return a text with its "1990-01-03 05:00" in words, without the year where the year is nominal."""

    def words(found: re.Match[str]) -> str:
        at = np.datetime64(f"{found[1]}T{found[2]}")
        return hour_words(at) if nominal else f"{day_words(at)} {found[1][:4]}, {found[2]}"

    return re.sub(r"(\d{4}-\d\d-\d\d) (\d\d:\d\d)", words, text)


def short_day(day: np.datetime64) -> str:
    """Return "3 Jan"."""
    text = str(day.astype("datetime64[D]"))
    return f"{int(text[8:10])} {MONTHS[int(text[5:7]) - 1][:3]}"


def short_hour(at: np.datetime64) -> str:
    """Return "3 Jan 05:00"."""
    return f"{short_day(at)} {str(at.astype('datetime64[m]'))[11:16]}"


def listed(names: Sequence[str]) -> str:
    """Return "a, b and c"; "none" when there is nothing to list."""
    if not names:
        return "none"
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def period(run: Run) -> str:
    """Return what totals refer to: a year, or the reported season."""
    if len(run.days) >= FULL_YEAR_DAYS:
        years = len(run.days) / 365.0
        return "a year" if years < 1.5 else f"in {number(years)} years"
    if not (np.diff(run.days.astype(int)) == 1).all():
        gap = int(np.argmax(np.diff(run.days.astype(int))))
        return f"from {day_words(run.days[gap + 1])} to {day_words(run.days[gap])}"
    if len(run.days) == 1:
        return f"on {day_words(run.days[0])}"
    return f"from {day_words(run.days[0])} to {day_words(run.days[-1])}"


def dark_words(run: Run, short: bool = False) -> str:
    """Return the names of the darkest months: "November, December and January", or "Nov, Dec, Jan"."""
    numbers = sorted({int(m[5:7]) for m, dark in zip(run.months, dark_months(run), strict=True) if dark})
    if {1, 12} <= set(numbers):  # begin before the turn of the year
        numbers = sorted(numbers, key=lambda m: (m < 7, m))
    if short:
        return ", ".join(MONTHS[m - 1][:3] for m in numbers)
    return listed([MONTHS[m - 1] for m in numbers])


def change(new: float, old: float, what: str) -> str:
    """Return "12 % less heat", "3.1 % more heat" or "the same heat"."""
    if old <= 0 and new <= 0:
        return f"the same {what}"
    if old <= 0 or not np.isfinite(new / old):
        return f"{what} that cannot be compared"
    step = new / old - 1.0
    if abs(step) < SAME:
        return f"the same {what}"
    return f"{percent(abs(step), 0 if abs(step) >= 0.095 else 1)} {'less' if step < 0 else 'more'} {what}"


def answer(run: Run, rows: Sequence[Summary], show: Display) -> tuple[str, ...]:
    """Return the opening: who needs least heat, who gives most light."""
    span, base = period(run), rows[0]
    if len(rows) == 1:
        light = f"Light: {percent(base.light_share)} of the outside PAR reaches the top of the crop"
        light = light if base.outside_mol > 0 else DARK
        peak = show.say(base.peak_w, "W/m2")
        if base.heat_kwh <= 0:
            return f"{light}.", "It takes no heat: temperatures float.", cold_words(rows, show)
        return f"{light}.", f"Heat: {show.say(base.heat_kwh, 'kWh/m2')} {span}, {peak} in the largest hour."
    cool = min(rows, key=lambda r: r.heat_kwh)
    bright = max(rows, key=lambda r: r.inside_mol)
    most = max(r.heat_kwh for r in rows)
    if most <= 0:
        lines = ["No candidate takes heat: temperatures float.", cold_words(rows, show)]
    elif most - cool.heat_kwh <= SAME * most:
        lines = [f"All candidates take the same heat: {show.say(cool.heat_kwh, 'kWh/m2')} {span}."]
    else:
        against = "" if cool is base else f", {change(cool.heat_kwh, base.heat_kwh, 'heat')} than {base.name}"
        lines = [f"Least heat: {cool.name}, {show.say(cool.heat_kwh, 'kWh/m2')} {span}{against}."]
    if base.outside_mol <= 0:
        return (*lines, f"{DARK}.")
    dim = min(r.inside_mol for r in rows)
    if bright.inside_mol - dim <= SAME * bright.inside_mol:
        share = percent(bright.light_share)
        said = f"{show.say(bright.inside_mol, 'mol/m2')} of PAR at the top of the crop {span}"
        return (*lines, f"All candidates give the same light: {said}, {share} of what falls outside.")
    also = " as well" if bright is cool and most > 0 else ""
    lines.append(
        f"Most light: {bright.name}{also}, {show.say(bright.inside_mol, 'mol/m2')} of PAR at the top of the "
        f"crop {span}, {percent(bright.light_share)} of what falls outside."
    )
    return tuple(lines)


def cold_words(rows: Sequence[Summary], show: Display) -> str:
    """Return which unheated house stays warmest and coldest, by its leaves."""
    warm = max(rows, key=lambda r: r.total["leaf_min_c"])
    cold = min(rows, key=lambda r: r.total["leaf_min_c"])
    parts = [
        f"{show.say(r.total['leaf_min_c'], 'degC')} with {r.name} "
        f"({count(r.total['frost_h'], 'hour', 'hours')} of leaf frost, "
        f"{count(r.total['below_limit_h'], 'hour', 'hours')} below the crop's limit)"
        for r in ((warm,) if warm is cold else (warm, cold))
    ]
    return f"Coldest leaves: {' and '.join(parts)}."


def trades(run: Run, rows: Sequence[Summary], show: Display) -> tuple[str, ...]:
    """Return one sentence per further candidate: heat, light and peak against the first one."""
    base, lines = rows[0], []
    for one, candidate in zip(rows[1:], run.candidates[1:], strict=True):
        dark = f" ({change(one.dark_inside_mol, base.dark_inside_mol, 'light')} in {dark_words(run)})"
        text = (
            f"{one.name} against {base.name}: {_heat_change(one, base, show)}, and for the crop "
            f"{change(one.inside_mol, base.inside_mol, 'light')}{'' if dark_months(run).all() else dark}"
        )
        if max(one.peak_w, base.peak_w) > 0:
            mine, theirs = show.say(one.peak_w, "W/m2"), show.say(base.peak_w, "W/m2")
            more = "as well" if mine == theirs else f"instead of {theirs}"
            when = ", in which the screens open," if peaks_as_screens_open(candidate) else ""
            text += f"; the largest hour{when} takes {mine} {more}"
        text += "."
        saved, lost = base.heat_kwh - one.heat_kwh, base.inside_mol - one.inside_mol
        if saved > SAME * base.heat_kwh and lost > SAME * base.inside_mol:
            text += f" For each mol of PAR given up it saves {show.say(saved / lost, 'kWh/mol')} of heat."
        if one.cost is not None and base.cost is not None:
            text += (
                f" At the study's prices its fuel costs {money(one)} instead of {money(base)}, whole house"
                f"{'' if len(run.hours) == len(run.weather) else ' and whole weather record'}."
            )
        lines.append(text)
    return tuple(lines)


def _heat_change(one: Summary, base: Summary, show: Display) -> str:
    """Return "12 % less heat", or amounts where the first candidate takes none."""
    if base.heat_kwh > 0:
        return change(one.heat_kwh, base.heat_kwh, "heat")
    if one.heat_kwh <= 0:
        return "no heat either"
    return f"{show.say(one.heat_kwh, 'kWh/m2')} of heat where {base.name} takes none"


def money(one: Summary) -> str:
    """Return what a candidate's fuel costs, in the study's currency."""
    return NONE if one.cost is None else f"{number(one.cost)}\u00a0{one.currency}".strip()


def verdicts(rows: Sequence[Summary]) -> tuple[str, ...]:
    """Return who is beaten in light, heat and peak at once, and what the figures leave open."""
    lines = [
        f"Beaten on all three counts: {worse.name} gives less light than {better.name}, needs more heat and "
        "has a larger peak."
        for worse, better in beaten(tuple(rows))
    ]
    if len(rows) > 1:
        lines.append(
            "Which one pays is a matter of the price of heat, of the worth of the light at your crop, and "
            "of what each covering costs, lasts and weighs. These figures say what each gives and takes."
        )
    return tuple(lines)


def doubts(run: Run, rows: Sequence[Summary]) -> tuple[str, ...]:
    """Return how far the figures may be trusted, as far as that is known from the run itself."""
    weather, lines = run.weather, []
    short = [r for r in rows if r.total["below_setpoint_h"] >= SHORT_H]
    if short:
        most = count(max(r.total["below_setpoint_h"] for r in short), "hour", "hours")
        lines.append(
            f"With {listed([r.name for r in short])} the heating cannot hold the set-point, in up to {most}: "
            "the heat delivered is less than asked for, and comparisons of heat say less than they seem to. "
            "See heating size."
        )
    if weather.clear_sky:
        lines.append(
            "The weather is a computed clear-sky record: light is an upper bound, and nights are colder for "
            "the roof than real ones."
        )
    elif weather.typical:
        lines.append(
            "The weather is a typical year: months from different years, the extremes removed. Season "
            "totals are ordinary ones; the largest hour is not a sizing figure."
        )
    if weather.longwave_modelled.any():
        share = percent(float(weather.longwave_modelled[run.hours].mean()))
        lines.append(f"Long-wave radiation from the sky is computed, not measured, in {share} of the hours.")
    ranges = range_words(run)
    return tuple(lines) if ranges is None else (*lines, ranges)


def count(number_of: float, one: str, many: str) -> str:
    """Return "1 hour" or "12 hours"."""
    text = number(number_of)
    return f"{text} {one if text == '1' else many}"
