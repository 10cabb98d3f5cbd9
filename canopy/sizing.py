"""The size of the heating: simulated hours, design night and many years side by side, and what follows."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy.degreedays import DegreeDays, degree_days
from canopy.designnight import DesignNight
from canopy.energy import Energy
from canopy.heatcase import HeatCase, HeatResult
from canopy.heatstore import StoreSizes, store_sizes
from canopy.loadcurve import EXCEEDED_99_6_H, EXCEEDED_99_H, YEAR_H, LoadCurve, exceeded, load_curve
from canopy.returns import ManyYears, Spell, coldest_spells, many_years

Floats = NDArray[np.float64]
Times = NDArray[np.datetime64]
Basis = Literal[
    "design night", "simulated hours (99.6 %)", "coldest of several years", "return level", "none"
]

SIZING_YEARS: Final = 20.0  # return period that a size is taken from, where it can be computed
BELOW_SETPOINT_K: Final = 0.1  # as in the hourly tables
WHOLE_YEAR_SHARE: Final = 0.95
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
    stores: Callable[[Floats, float], StoreSizes] = store_sizes,
) -> Sizing:
    """Return the sizing of one candidate from its hourly heat.

    `heat` (N,) W/m2 floor over the whole record, `time` (N,) start of each step, `temp_outside` (N,) degC;
    `typical`: months from different years; `many` what other years gave (a record of several years in a row
    gives it by itself). Percentiles are over all hours, scaled to the record's length.
    """
    q = np.asarray(heat, float)
    hours = len(q) * step_s / S_PER_H
    years = hours / YEAR_H
    peak = int(np.argmax(q))
    loads = exceeded(q, EXCEEDED_99_6_H), exceeded(q, EXCEEDED_99_H)
    several = many if many is not None or typical else many_years(time, q, temp_outside, step_s)
    night_w = 0.0 if night is None else night.design_w_m2
    design, basis = choose(night_w, loads[0], several)
    total = float(q.sum()) * step_s / S_PER_H / 1000.0
    annual = total / years if years > 1.0 + (1.0 - WHOLE_YEAR_SHARE) else total
    kw = design * floor_area_m2 / 1000.0
    return Sizing(
        peak_w_m2=float(q[peak]),
        peak_at=time[peak],
        load_exceeded_35_h_w_m2=loads[0],
        load_exceeded_88_h_w_m2=loads[1],
        design_night_w_m2=night_w if night is not None else float("nan"),
        design_outside_c=night.outside.temp_c if night is not None else float("nan"),
        annual_heat_kwh_m2=annual,
        full_load_hours=annual * 1000.0 / design if design > 0.0 else 0.0,
        design_heat_kw=kw,
        margin_pct=margin_pct,
        boiler_kw=kw * (1.0 + margin_pct / 100.0),
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
        explained=_explain(q[peak], time[peak], loads, night, basis, several, typical, years, capped)
        + _short_pipes(pipes_short_h, night),
    )


def _explain(
    peak: float,
    peak_at: np.datetime64,
    loads: tuple[float, float],
    night: DesignNight | None,
    basis: Basis,
    many: ManyYears | None,
    typical: bool,
    years: float,
    capped: bool,
) -> tuple[str, ...]:
    """Return the comparison of simulated hours and design night in sentences."""
    when = str(peak_at.astype("datetime64[m]")).replace("T", " ")
    said = [
        f"Highest simulated hour {peak:.0f} W/m2 ({when}); exceeded in 35 h a year {loads[0]:.0f}, "
        f"in 88 h {loads[1]:.0f} W/m2."
    ]
    if typical:
        said.append("The record is a typical year: its extremes are removed, a colder year is not in it.")
    if years < WHOLE_YEAR_SHARE:
        said.append(f"The record is {years:.2f} years long: percentiles are scaled to its length.")
    if capped:
        said.append("The study limits the heating: simulated loads are cut off at that limit.")
    if night is not None:
        said.append(
            f"Design night {night.design_w_m2:.0f} W/m2 at {night.outside.temp_c:.1f} °C outside, "
            f"{night.inside_c:.1f} °C inside, {night.outside.wind_m_s:.1f} m/s, clear and dark, covering "
            f"dry, {_screens(night)}; on paper (U x area) {night.hand.total_w_m2:.0f} W/m2 "
            "without a screen."
        )
        if night.drawn is not None:
            said.append(
                f"The same night with screens open takes {night.open.total_w_m2:.0f} W/m2; with the design "
                f"heat an open house holds its set-point down to {night.hold_open_c:.1f} °C outside."
            )
        said.append(f"Recovery: {night.recovery.text}.")
        said.append(_why(peak, night))
    if many is not None:
        said.append(
            f"{len(many.years)} years: peak {many.peak_w_m2.min():.0f}-{many.peak_w_m2.max():.0f} W/m2; "
            f"{many.note}."
        )
    said.append(f"The design heat is taken from: {basis}.")
    return tuple(said)


def _screens(night: DesignNight) -> str:
    return "no screen" if night.design.screens == "none" else f"screens {night.design.screens}"


def _short_pipes(hours: float, night: DesignNight | None) -> tuple[str, ...]:
    """Return what the pipes lack, if anything."""
    said = []
    if hours > 0.0:
        said.append(
            f"In {hours:.0f} hours the pipes at their highest flow temperature cannot hold the set-point: "
            "simulated loads are cut off there; more pipe or hotter water is needed."
        )
    if night is not None and night.pipes_note:
        said.append(f"On the design night the pipes fall short: {night.pipes_note}.")
    return tuple(said)


def _why(peak: float, night: DesignNight) -> str:
    """Return why the two answers differ."""
    if peak > night.design_w_m2:
        return (
            "The simulated peak is higher than the design night: it falls on a colder or windier hour, or on "
            "the rise of the set-point, when air, crop and pipes take up heat as well."
        )
    return (
        "The design night is higher than the simulated peak: it holds wind, clear sky and cold together for "
        "a whole night and takes nothing from the soil, which in a real night gives heat back."
    )


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
