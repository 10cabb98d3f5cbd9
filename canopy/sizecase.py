"""Sizing of one candidate: from its plan, heat case and heat result to `Sizing` and `DesignNight`."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from canopy.designnight import DesignNight, Solver, design_night
from canopy.designoutside import DesignOutside, design_outside
from canopy.emitters import flow_temperature
from canopy.energy import Supply, energy
from canopy.heatcase import HeatCase, HeatResult
from canopy.heatstore import store_sizes
from canopy.returns import ManyYears
from canopy.sizing import BELOW_SETPOINT_K, S_PER_H, FiniteRun, Sizing, rerun, size
from weather.record import Weather

Floats = NDArray[np.float64]

AT_LIMIT_K = 0.05  # pipes this close to their highest temperature are at the limit


@dataclass(frozen=True)
class SizingShared:
    """What every candidate of a study shares."""

    weather: Weather
    outside: DesignOutside
    civil_hour: Floats  # (N,)


def sizing_shared(weather: Weather) -> SizingShared:
    """Return the design conditions and civil hours of a record."""
    from weather.site import civil_hours

    return SizingShared(weather, design_outside(weather), civil_hours(weather))


def size_candidate(
    heating: Any,
    case: HeatCase,
    result: HeatResult,
    shared: SizingShared,
    u_value: float | None = None,
    solver: Solver | None = None,
    many: ManyYears | None = None,
) -> tuple[Sizing, DesignNight | None]:
    """Return sizing and design night; `heating` are the plan's `canopy.study.HeatingKeys`.

    Solves the design night (screens open and drawn), and the year again with the proposed boiler where the
    unlimited run asked for more. `u_value` replaces the nominal U of the paper calculation; `many` is what
    the other years of the study gave (`returns.combine`).
    """
    weather, area = shared.weather, case.shell.floor_area_m2
    night = design_night(case, shared.outside, solver, u_value)
    stores = store_sizes
    if heating.store is not None:
        keys = heating.store
        stores = partial(
            store_sizes,
            volumes_m3=tuple(keys.volumes_m3_per_1000_m2),
            spread_k=keys.spread_k,
            loss_per_h=keys.standing_loss_per_h,
            reserve_pct=keys.reserve_pct,
        )
    found = size(
        result.heat_delivered,
        weather.time,
        weather.temp_air,
        area,
        night,
        heating.margin_pct,
        weather.typical,
        weather.step_s,
        capped=bool(np.isfinite(case.heating.capacity_w_m2)),
        pipes_short_h=_pipes_short_h(case, result),
        many=many,
        stores=stores,
    )
    finite = None
    if found.design_w_m2 > 0.0:
        finite = rerun(case, result, weather.time, found.boiler_w_m2, solver)
    said = found.explained + ((_finite_words(finite, found.boiler_kw),) if finite is not None else ())
    used = _energy(heating, result, shared, found, area)
    return replace(found, finite=finite, energy=used, explained=said), night


def _finite_words(finite: FiniteRun, boiler_kw: float) -> str:
    """Return in words what the proposed boiler does in this record."""
    with_it = f"With the proposed {boiler_kw:.0f} kW the house"
    if finite.deficit_h == 0.0:
        return f"{with_it} holds its set-point in every hour of this record."
    when = str(finite.lowest_at.astype("datetime64[h]")).replace("T", " ")
    return (
        f"{with_it} stays more than .1 K below its set-point in {finite.deficit_h:.0f} hours of this record; "
        f"the lowest air temperature is {finite.lowest_air_c:.1f} °C ({when}:00)."
    )


def _pipes_short_h(case: HeatCase, result: HeatResult) -> float:
    """Return the hours in which pipes at their highest temperature leave the house below its set-point."""
    hot = result.temp_pipe >= case.heating.flow_max_c - AT_LIMIT_K
    cold = result.temp_air < case.climate.heat_at - BELOW_SETPOINT_K
    return float(np.count_nonzero(hot & cold)) * case.outside.step_s / S_PER_H


def _energy(heating: Any, result: HeatResult, shared: SizingShared, found: Sizing, area: float) -> Any:
    weather = shared.weather
    supply = Supply(
        fuel=heating.fuel,
        efficiency=heating.efficiency,
        price_per_kwh=heating.price_per_kwh,
        co2_kg_per_kwh=heating.co2_kg_per_kwh,
        tariff=heating.tariff,
        heat_pump=heating.heat_pump,
        heat_pump_tariff=heating.heat_pump_tariff,
    )
    flow = flow_temperature(result.temp_pipe, result.heat_delivered, found.design_w_m2)
    return energy(
        result.heat_delivered,
        flow,
        weather.temp_air,
        weather.relative_humidity,
        shared.civil_hour,
        area,
        supply,
        weather.step_s,
    )
