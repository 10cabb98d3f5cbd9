"""The size of the heating: simulated hours, design night and many years side by side, and what follows."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any, Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy.degreedays import DegreeDays, degree_days
from canopy.designnight import DesignNight
from canopy.energy import Energy
from canopy.heatcase import HeatCase, HeatResult
from canopy.heatstore import StoreSizes, store_sizes
from canopy.loadcurve import (
    EXCEEDED_99_6_H,
    EXCEEDED_99_H,
    YEAR_H,
    LoadCurve,
    exceeded,
    heating_only,
    load_curve,
)
from canopy.returns import ManyYears, Spell, coldest_spells, many_years
from canopy.sizingwords import Told, explain

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
Times = NDArray[np.datetime64]
Basis = Literal[
    "design night", "simulated hours (99.6 %)", "coldest of several years", "return level", "none"
]

SIZING_YEARS: Final = 20.0  # return period that a size is taken from, where it can be computed
BELOW_SETPOINT_K: Final = 0.1  # as in the hourly tables
MORE_THAN_A_YEAR: Final = 1.05  # from this length on, sums are per mean year
S_PER_H: Final = 3600.0


@dataclass(frozen=True)
class FiniteRun:
    """The proposed heating with its own limit, run through the record."""

    capacity_w_m2: float
    limited_h: float  # hours at the limit
    deficit_h: float  # hours below the set-point by more than .1 K
    deficit_kh: float  # kelvin hours below it
    lowest_air_c: float
    lowest_at: np.datetime64
    solved_again: bool  # False: the limit is never reached, the first run stands


@dataclass(frozen=True)
class Sizing:
    """Everything about the heating's size; loads W/m2 floor, heat kWh/m2 floor (mean year of several)."""

    peak_w_m2: float
    peak_at: np.datetime64
    load_exceeded_35_h_w_m2: float
    load_exceeded_88_h_w_m2: float
    design_night_w_m2: float
    design_outside_c: float
    annual_heat_kwh_m2: float
    full_load_hours: float
    design_heat_kw: float
    margin_pct: float
    boiler_kw: float
    design_w_m2: float
    basis: Basis
    capped: bool  # the load was cut off by the study's own capacity
    pipes_short_h: float  # hours in which the pipes at their highest flow cannot hold the set-point
    years: float  # length of the record
    curve: LoadCurve
    stores: StoreSizes
    degree_days: DegreeDays
    spells: tuple[Spell, ...]
    many: ManyYears | None
    finite: FiniteRun | None
    energy: Energy | None
    explained: tuple[str, ...]

    @property
    def boiler_w_m2(self) -> float:
        """The proposed boiler, W/m2 floor: design heat and margin."""
        return self.design_w_m2 * (1.0 + self.margin_pct / 100.0)


def choose(night_w_m2: float, exceeded_35_w_m2: float, many: ManyYears | None) -> tuple[float, Basis]:
    """Return the design heat, W/m2 floor, and where it comes from: the larger of design night and the years.

    Several years give the 20-year return level where it is computed (ten years), else their highest hour; one
    year gives the load that 35 hours exceed.
    """
    options: list[tuple[float, Basis]] = [(night_w_m2, "design night")]
    if many is not None:
        level = next((x.level for x in many.levels if x.years == SIZING_YEARS), None)
        if level is not None:
            options.append((level, "return level"))
        else:
            options.append((float(many.peak_w_m2.max()), "coldest of several years"))
    else:
        options.append((exceeded_35_w_m2, "simulated hours (99.6 %)"))
    best = max(options, key=lambda option: option[0])
    return best if best[0] > 0.0 else (0.0, "none")


def without_opening(load: Floats, opening: Bools) -> Floats:
    """Return the load with hours in which a screen opens no higher than the hour after.

    A screen that opens at once lets cold air down and asks the pipes to heat up within the hour. Opened in
    steps, the same heat spreads over the morning; no boiler is bought for the pulse.
    """
    return np.where(opening, np.minimum(load, np.roll(load, -1)), load)


def size(
    heat: Floats,
    time: Times,
    temp_outside: Floats,
    floor_area_m2: float,
    night: DesignNight | None,
    margin_pct: float,
    typical: bool,
    step_s: float = S_PER_H,
    capped: bool = False,
    pipes_short_h: float = 0.0,
    many: ManyYears | None = None,
    opening: Bools | None = None,
    stores: Callable[[Floats, float], StoreSizes] = store_sizes,
) -> Sizing:
    """Return the sizing of one candidate from its hourly heat.

    `heat` (N,) W/m2 floor over the whole record, `time` (N,) start of each step, `temp_outside` (N,) degC;
    `typical`: months from different years; `many` what other years gave (a record of several years in a row
    gives it by itself); `opening` (N,) hours in which a screen opens: the size does not count their pulse.
    Percentiles are over all hours, scaled to the record's length.
    """
    q = heating_only(heat)
    years = len(q) * step_s / S_PER_H / YEAR_H
    loads = exceeded(q, EXCEEDED_99_6_H), exceeded(q, EXCEEDED_99_H)
    sized = q if opening is None else without_opening(q, opening)
    calm = exceeded(sized, EXCEEDED_99_6_H)
    several = many if many is not None or typical else many_years(time, q, temp_outside, step_s, sized)
    design, basis = choose(0.0 if night is None else night.design_w_m2, calm, several)
    told = Told(
        q, time, loads, calm, night, basis, several, typical, years, capped, pipes_short_h, opening, step_s
    )  # fmt: skip
    total = float(q.sum()) * step_s / S_PER_H / 1000.0
    annual = total / years if years > MORE_THAN_A_YEAR else total
    return Sizing(
        **_headline(told, annual, design, floor_area_m2, margin_pct),
        margin_pct=margin_pct,
        design_w_m2=design,
        basis=basis,
        capped=capped,
        pipes_short_h=pipes_short_h,
        years=years,
        curve=load_curve(q, design, step_s),
        stores=stores(q, step_s),
        degree_days=degree_days(time, temp_outside, step_s),
        spells=coldest_spells(time, temp_outside, step_s),
        many=several,
        finite=None,
        energy=None,
        explained=explain(told),
    )


def _headline(told: Told, annual: float, design: float, area_m2: float, margin_pct: float) -> dict[str, Any]:
    """Return the figures of sizing.csv."""
    peak, night = int(np.argmax(told.load)), told.night
    kw = design * area_m2 / 1000.0
    return {
        "peak_w_m2": float(told.load[peak]),
        "peak_at": told.time[peak],
        "load_exceeded_35_h_w_m2": told.exceeded[0],
        "load_exceeded_88_h_w_m2": told.exceeded[1],
        "design_night_w_m2": float("nan") if night is None else night.design_w_m2,
        "design_outside_c": float("nan") if night is None else night.outside.temp_c,
        "annual_heat_kwh_m2": annual,
        "full_load_hours": annual * 1000.0 / design if design > 0.0 else 0.0,
        "design_heat_kw": kw,
        "boiler_kw": kw * (1.0 + margin_pct / 100.0),
    }


def rerun(
    case: HeatCase,
    result: HeatResult,
    time: Times,
    capacity_w_m2: float,
    solver: Callable[..., HeatResult] | None = None,
) -> FiniteRun:
    """Run the proposed heating with its finite capacity: hours short and lowest temperature.

    When the first, unlimited run never asks for more than the capacity, it stands as it is.
    """
    again = float(result.heat_delivered.max(initial=0.0)) > capacity_w_m2
    if again:
        if solver is None:
            from canopy.balance import solve

            solver = solve
        limited = replace(case, heating=replace(case.heating, capacity_w_m2=capacity_w_m2))
        result = solver(limited, result)  # warm: all but the coldest hours stay as they are
    hours = case.outside.step_s / S_PER_H
    asked = np.isfinite(case.climate.heat_at)
    missing = np.where(asked, case.climate.heat_at, -np.inf) - result.temp_air
    short = asked & (missing > BELOW_SETPOINT_K)
    lowest = int(np.argmin(result.temp_air))
    return FiniteRun(
        capacity_w_m2=capacity_w_m2,
        limited_h=float(np.count_nonzero(result.heat_delivered >= capacity_w_m2 - 0.05)) * hours,
        deficit_h=float(np.count_nonzero(short)) * hours,
        deficit_kh=float(missing[short].sum()) * hours,
        lowest_air_c=float(result.temp_air[lowest]),
        lowest_at=time[lowest],
        solved_again=again,
    )
