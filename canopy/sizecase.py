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
from canopy.sizing import BELOW_SETPOINT_K, S_PER_H, Sizing, rerun, size, without_opening
from canopy.sizingwords import boiler_words
from weather.record import Weather

Floats = NDArray[np.float64]

OPENS_BY = 0.3  # share of a screen's area within one step that counts as opening
AT_LIMIT_K = 0.05  # pipes this close to their highest temperature are at the limit


@dataclass(frozen=True)
class SizingShared:
    """What every candidate of a study shares."""

    weather: Weather
    outside: DesignOutside
    civil_hour: Floats  # (N,)


def sizing_shared(weather: Weather, others: tuple[Weather, ...] = ()) -> SizingShared:
    """Return the design conditions of a record (and of further years), and its civil hours."""
    from weather.site import civil_hours

    return SizingShared(weather, design_outside(weather, others), civil_hours(weather))


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
        opening=_opening(result),
        stores=stores,
    )
    finite = None
    if found.design_w_m2 > 0.0:
        finite = rerun(case, result, weather.time, found.boiler_w_m2, solver)
    said = found.explained
    if finite is not None:
        words = boiler_words(
            found.boiler_kw, finite.deficit_h, finite.lowest_air_c, finite.lowest_at, found.pipes_short_h
        )
        said = (*said, words)
    used = _energy(heating, result, shared, found, area)
    return replace(found, finite=finite, energy=used, explained=said), night


def sized_load(result: HeatResult) -> Floats:
    """Return the load that the heating is sized on: heat delivered without the pulse of opening screens."""
    opening = _opening(result)
    return result.heat_delivered if opening is None else without_opening(result.heat_delivered, opening)


def _opening(result: HeatResult) -> NDArray[np.bool_] | None:
    """Return the steps in which a screen opens by a good part, or None without screens."""
    drawn = result.screen_drawn
    if not len(drawn):
        return None
    return np.asarray((drawn < np.roll(drawn, 1, axis=1) - OPENS_BY).any(axis=0))


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
