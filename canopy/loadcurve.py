"""Load-duration curve of a heating load and what it says about boiler sizes. Plain arrays in, records out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

YEAR_H: Final = 8760.0
EXCEEDED_99_6_H: Final = 35.0  # hours a year beyond the 99.6 % value (ASHRAE Fundamentals ch. 14)
EXCEEDED_99_H: Final = 88.0  # hours a year beyond the 99 % value (the same)
BASE_LOAD_H: Final = 4000.0  # full-load hours that a base-load unit should reach: common practice 4000-5000
PART_LOAD_EDGES: Final = (0.0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0)
SIZES: Final = (0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0)
S_PER_H: Final = 3600.0
IDLE_W_M2: Final = 0.01  # less than this is no heating but the last digit of a solution


@dataclass(frozen=True)
class LoadCurve:
    """How often which load occurs and what a smaller boiler still covers. W/m2 floor, hours of record."""

    hours: Floats  # (K,) hours of the record in which the load is at least `load`
    load: Floats  # (K,) W/m2, falling
    part_load: Floats  # (P,) hours in each tenth of the design load; the last takes everything above
    part_load_edges: Floats  # (P+1,) shares of the design load
    idle_h: float  # hours without heating
    size_share: Floats  # (S,) boiler size as a share of the design load
    heat_share: Floats  # (S,) share of the record's heat that such a boiler covers
    full_load_h: Floats  # (S,) full-load hours of such a boiler
    base_load_w_m2: float  # largest size that still runs `BASE_LOAD_H` full-load hours a year; 0 if none


def exceeded(load: Floats, hours_per_year: float) -> float:
    """Return the load that is exceeded in `hours_per_year` of 8760 h, scaled to the record's length.

    `load` (N,) W/m2. With 8760 hours and 35 h: the 36th largest value, so that 35 hours lie above it.
    Between two ranks the value runs straight. The share of time counts, whatever the step.
    """
    falling = np.sort(np.asarray(load, float))[::-1]
    rank = hours_per_year / YEAR_H * len(falling)
    return float(np.interp(rank, np.arange(len(falling)), falling))


def heating_only(load: Floats) -> Floats:
    """Return the load with hours of no heating at exactly zero."""
    q = np.asarray(load, float)
    return np.where(q < IDLE_W_M2, 0.0, q)


def covered(load: Floats, size_w_m2: float) -> float:
    """Return the share (0-1) of the heat that a boiler of a size covers hour by hour; 1 without any load."""
    total = float(np.sum(load))
    return 1.0 if total <= 0.0 else float(np.sum(np.minimum(load, size_w_m2))) / total


def base_load(load: Floats, step_s: float, hours_per_year: float = BASE_LOAD_H) -> float:
    """Return the largest size, W/m2, whose full-load hours reach `hours_per_year` (scaled to the record).

    A unit of size s delivers sum min(q, s); its full-load hours sum min(q, s) / s fall with s, and between
    two sorted loads they are linear in 1/s, so the size has a closed form. 0: no size reaches them.
    """
    rising = np.sort(heating_only(load))
    n = len(rising)
    need = hours_per_year / YEAR_H * n  # steps at full load
    steps_s = np.arange(n, 0, -1)  # loads at or above rising[k]
    below_sum = np.concatenate(([0.0], np.cumsum(rising)[:-1]))
    with np.errstate(divide="ignore", invalid="ignore"):
        full = np.where(rising > 0.0, (below_sum + steps_s * rising) / rising, np.inf)
    if rising[-1] <= 0.0 or np.count_nonzero(rising) < need:
        return 0.0
    k = int(np.flatnonzero(full >= need)[-1])  # the answer lies between rising[k] and rising[k + 1]
    if k == n - 1:
        return float(rising[-1])
    inside = float(below_sum[k + 1])  # sum of loads up to rising[k]
    slack = need - (n - 1 - k)
    return float(rising[k + 1]) if slack <= 0.0 else inside / slack


def load_curve(load: Floats, design_w_m2: float, step_s: float = S_PER_H, points: int = 200) -> LoadCurve:
    """Return the duration curve of a load and the part-load and coverage tables around a design load.

    `load` (N,) W/m2 floor, `design_w_m2` > 0 (0 allowed: tables of an unheated house are zero).
    """
    step_h = step_s / S_PER_H
    q = heating_only(load)
    falling = np.sort(q)[::-1]
    pick = np.unique(np.linspace(0, len(q) - 1, min(points, len(q))).round().astype(int))
    edges = np.asarray(PART_LOAD_EDGES)
    share = np.asarray(SIZES)
    running = q[q > 0.0]
    if design_w_m2 <= 0.0:
        empty = np.zeros(len(share))
        return LoadCurve(
            (pick + 1) * step_h, falling[pick], np.zeros(len(edges) - 1), edges,
            float(np.count_nonzero(q <= 0.0)) * step_h, share, np.ones(len(share)), empty, 0.0,
        )  # fmt: skip
    which = np.minimum(np.ceil(running / design_w_m2 * (len(edges) - 1) - 1e-12) - 1, len(edges) - 2)
    counts = np.bincount(np.maximum(which, 0).astype(int), minlength=len(edges) - 1)
    sizes = share * design_w_m2
    served = np.array([float(np.sum(np.minimum(q, s))) for s in sizes])
    total = float(q.sum())
    return LoadCurve(
        hours=(pick + 1) * step_h,
        load=falling[pick],
        part_load=np.asarray(counts * step_h, float),
        part_load_edges=edges,
        idle_h=float(np.count_nonzero(q <= 0.0)) * step_h,
        size_share=share,
        heat_share=served / total if total > 0.0 else np.ones(len(sizes)),
        full_load_h=served * step_h / sizes,
        base_load_w_m2=base_load(q, step_s),
    )
