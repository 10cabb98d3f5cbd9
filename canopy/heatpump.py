"""Heat pump by source and needed flow temperature, with defrost, limits and a back-up heater.

Performance: regression on maker's and test data of Staffell, Brett, Brandon & Hawkes (2012), Energy Environ.
Sci. 5:9291, in the lift from source to flow water; air source for lifts of 15-60 K, ground source (used for
water too) for 20-60 K. Below the range the performance at its end is taken; hours above it are counted.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
Source = Literal["air", "ground", "water"]

S_PER_H: Final = 3600.0
REGRESSION: Final[dict[Source, tuple[float, float, float]]] = {
    "air": (6.81, -0.121, 0.000630),
    "ground": (8.77, -0.150, 0.000734),
    "water": (8.77, -0.150, 0.000734),
}
LIFT_RANGE_K: Final[dict[Source, tuple[float, float]]] = {
    "air": (15.0, 60.0),
    "ground": (20.0, 60.0),
    "water": (20.0, 60.0),
}
LOWEST_SOURCE_C: Final[dict[Source, float]] = {"air": -15.0, "ground": -5.0, "water": 5.0}  # common practice
GROUND_BELOW_MEAN_K: Final = 5.0  # brine under the year's mean air temperature: common practice
DEFROST_FROM_C: Final = -7.0  # frost forms on the air coil between these: common practice
DEFROST_UNTIL_C: Final = 5.0
DEFROST_HUMIDITY_PCT: Final = 70.0


@dataclass(frozen=True)
class HeatPump:
    """A heat pump as quoted. Heat per m2 floor; temperatures degC."""

    source: Source
    capacity_w_m2: float  # heat at the design outside temperature; more is not counted on in milder hours
    flow_max_c: float = 65.0
    lowest_source_c: float | None = None  # off below; by source if None
    source_c: float | None = None  # ground or water: constant temperature if given
    defrost_pct: float = 8.0  # extra electricity in frosting hours of an air source: common practice 5-10


@dataclass(frozen=True)
class HeatPumpRun:
    """What a heat pump and its back-up do over the record; W/m2 floor."""

    heat: Floats  # (N,) from the heat pump
    electricity: Floats  # (N,) into the heat pump
    backup: Floats  # (N,) heat from the back-up
    cop: Floats  # (N,) 0 where it stands still
    seasonal: float  # heat / electricity over the record; nan when it never runs
    heat_share: float  # of all heat
    too_cold_h: float  # source below its limit while heat was asked for
    too_hot_h: float  # needed flow above its limit
    short_h: float  # capacity reached, back-up helps
    defrost_h: float
    outside_range_h: float  # running at a higher lift than the regression's data


def source_temperature(pump: HeatPump, outside_c: Floats) -> Floats:
    """Return (N,) degC of the heat source: outside air, or a constant for ground and water.

    Without a figure of its own, ground is the record's mean air temperature less 5 K, water the mean.
    """
    if pump.source == "air":
        return np.asarray(outside_c, float)
    mean = float(np.mean(outside_c))
    default = mean - GROUND_BELOW_MEAN_K if pump.source == "ground" else mean
    return np.full(len(outside_c), default if pump.source_c is None else pump.source_c)


def performance(source: Source, source_c: Floats, flow_c: Floats) -> Floats:
    """Return the coefficient of performance, never below 1 (Staffell et al. 2012)."""
    a, b, c = REGRESSION[source]
    lift = np.maximum(np.asarray(flow_c, float) - source_c, LIFT_RANGE_K[source][0])
    return np.asarray(np.maximum(1.0, a + b * lift + c * lift**2))


def run_heat_pump(
    load: Floats,
    flow_c: Floats,
    outside_c: Floats,
    humidity_pct: Floats,
    pump: HeatPump,
    step_s: float = S_PER_H,
) -> HeatPumpRun:
    """Share an hourly load (N,) W/m2 between heat pump and back-up.

    `flow_c` (N,) flow temperature that the emitters need. The pump stands still when its source is below the
    limit or the flow above it (the back-up then carries the whole hour); else it gives what it can.
    """
    q = np.asarray(load, float)
    lowest = LOWEST_SOURCE_C[pump.source] if pump.lowest_source_c is None else pump.lowest_source_c
    source = source_temperature(pump, outside_c)
    asked = q > 0.0
    cold = asked & (source < lowest)
    hot = asked & (flow_c > pump.flow_max_c)
    running = asked & ~cold & ~hot
    heat = np.where(running, np.minimum(q, pump.capacity_w_m2), 0.0)
    running &= heat > 0.0
    frosting = np.zeros(len(q), dtype=bool)
    if pump.source == "air":
        frosting = (
            running
            & (source > DEFROST_FROM_C)
            & (source < DEFROST_UNTIL_C)
            & (humidity_pct > DEFROST_HUMIDITY_PCT)
        )
    cop = performance(pump.source, source, flow_c) / np.where(frosting, 1.0 + pump.defrost_pct / 100.0, 1.0)
    power = np.where(running, heat / cop, 0.0)
    lift = flow_c - source
    high = LIFT_RANGE_K[pump.source][1]
    hours = step_s / S_PER_H
    total, electricity = float(q.sum()), float(power.sum())

    def counted(rows: Bools) -> float:
        return float(np.count_nonzero(rows)) * hours

    return HeatPumpRun(
        heat=heat,
        electricity=power,
        backup=q - heat,
        cop=np.where(running, cop, 0.0),
        seasonal=float(heat.sum()) / electricity if electricity > 0.0 else float("nan"),
        heat_share=float(heat.sum()) / total if total > 0.0 else 0.0,
        too_cold_h=counted(cold),
        too_hot_h=counted(hot),
        short_h=counted(running & (q > pump.capacity_w_m2)),
        defrost_h=counted(frosting),
        outside_range_h=counted(running & (lift > high)),
    )
