"""What many years say that one typical year cannot: spread, coldest spells, return levels."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.loadcurve import heating_only

Floats = NDArray[np.float64]
Times = NDArray[np.datetime64]

MIN_YEARS: Final = 10  # below this no return level is computed
RETURN_YEARS: Final = (10.0, 20.0, 50.0)
CONFIDENCE: Final = 0.90
PIVOT_DRAWS: Final = 20_000
PIVOT_SEED: Final = 20240229
WHOLE_YEAR_SHARE: Final = 0.95  # a calendar year counts when this share of its hours is there
SPELL_H: Final = (1, 24, 72)
YEAR_H: Final = 8760.0
S_PER_H: Final = 3600.0


@dataclass(frozen=True)
class ReturnLevel:
    """A level that is reached once in `years` years on average, with its 90 % interval."""

    years: float
    level: float
    low: float
    high: float


@dataclass(frozen=True)
class Spell:
    """The coldest mean over a number of hours."""

    hours: int
    mean_c: float
    start: np.datetime64


@dataclass(frozen=True)
class YearLoad:
    """One year's heating: highest hour (W/m2 floor), heat (kWh/m2), cold."""

    year: int
    peak_w_m2: float
    heat_kwh_m2: float
    coldest_hour_c: float
    spells: tuple[Spell, ...]


@dataclass(frozen=True)
class ManyYears:
    """Spread over whole years: peaks (W/m2 floor), annual heat (kWh/m2), coldest spells, return levels."""

    years: tuple[int, ...]  # (Y,)
    peak_w_m2: Floats  # (Y,)
    annual_heat_kwh_m2: Floats  # (Y,)
    coldest_hour_c: Floats  # (Y,)
    spells: tuple[Spell, ...]  # over all years
    levels: tuple[ReturnLevel, ...]  # empty: not computed
    note: str  # how the levels were had, or why not


def coldest_spells(
    time: Times, temp_air: Floats, step_s: float, hours: tuple[int, ...] = SPELL_H
) -> tuple[Spell, ...]:
    """Return the coldest running means of the outside air, degC, one per length in hours."""
    total = np.concatenate(([0.0], np.cumsum(np.asarray(temp_air, float))))
    found = []
    for length in hours:
        steps = max(1, round(length * S_PER_H / step_s))
        if steps > len(temp_air):
            continue
        means = (total[steps:] - total[:-steps]) / steps
        at = int(np.argmin(means))
        found.append(Spell(length, float(means[at]), time[at]))
    return tuple(found)


def gumbel_fit(sample: Floats) -> tuple[float, float]:
    """Return location and scale of a Gumbel law by L-moments.

    Hosking (1990), J. R. Stat. Soc. B 52:105, table 2: scale = l2 / ln 2, location = l1 - gamma scale,
    with the unbiased sample L-moments l1 (mean) and l2 = 2 b1 - b0. `sample` (n,).
    """
    location, scale = _fit(np.asarray(sample, float)[None, :])
    return float(location[0]), float(scale[0])


def _fit(samples: Floats) -> tuple[Floats, Floats]:
    x = np.sort(samples, axis=-1)
    n = x.shape[-1]
    b0 = x.mean(axis=-1)
    b1 = (x * (np.arange(n) / (n - 1))).mean(axis=-1)
    scale = (2.0 * b1 - b0) / np.log(2.0)
    return b0 - np.euler_gamma * scale, scale


def _reduced(years: float) -> float:
    """Return the Gumbel reduced variate of a return period in years (> 1)."""
    return float(-np.log(-np.log1p(-1.0 / years)))


@lru_cache(maxsize=8)
def _drawn_fits(count: int) -> tuple[Floats, Floats]:
    """Return location and scale fitted to many samples of the standard Gumbel law."""
    return _fit(np.random.default_rng(PIVOT_SEED).gumbel(size=(PIVOT_DRAWS, count)))


def return_levels(yearly_max: Floats, periods: tuple[float, ...] = RETURN_YEARS) -> tuple[ReturnLevel, ...]:
    """Return levels of yearly maxima with 90 % intervals; needs at least `MIN_YEARS` values.

    The level is location + y scale. Both estimates move and stretch with the data, so that
    (true level - estimated level) / estimated scale has one law for every Gumbel parent of the same number of
    years; its quantiles are drawn once with a fixed seed and give an interval that covers 90 % at any n.
    A Gumbel tail has no upper end, a heating load has one (the coldest air there is): the level errs upwards.
    """
    x = np.asarray(yearly_max, float)
    if len(x) < MIN_YEARS:
        return ()
    location, scale = gumbel_fit(x)
    loc, sc = _drawn_fits(len(x))
    tail = (1.0 - CONFIDENCE) / 2.0
    levels = []
    for years in periods:
        y = _reduced(years)
        low, high = np.quantile((y - (loc + y * sc)) / sc, (tail, 1.0 - tail))
        level = location + y * scale
        levels.append(ReturnLevel(years, level, level + float(low) * scale, level + float(high) * scale))
    return tuple(levels)


def year_load(
    time: Times, load: Floats, temp_air: Floats, step_s: float, sized: Floats | None = None
) -> YearLoad:
    """Return what one year brings to the comparison: `load` (N,) W/m2 floor, `temp_air` (N,) degC outside.

    `sized` (N,): the load that peaks are taken from, where not `load` itself (`sizing.without_opening`).
    """
    return YearLoad(
        year=int(time[len(time) // 2].astype("datetime64[Y]").astype(int)) + 1970,
        peak_w_m2=float(np.max(heating_only(load if sized is None else sized))),
        heat_kwh_m2=float(np.sum(load)) * step_s / S_PER_H / 1000.0,
        coldest_hour_c=float(np.min(temp_air)),
        spells=coldest_spells(time, temp_air, step_s),
    )


def combine(loads: Sequence[YearLoad]) -> ManyYears | None:
    """Return the spread over years that were computed one by one, or None for less than two."""
    if len(loads) < 2:
        return None
    peaks = np.array([one.peak_w_m2 for one in loads])
    levels = return_levels(peaks)
    if levels:
        note = (
            f"Gumbel law by L-moments (Hosking 1990), {len(loads)} yearly peaks; 90 % interval by its pivot"
        )
    else:
        note = f"return level not computed: {len(loads)} years, {MIN_YEARS} are needed"
    spells = [spell for one in loads for spell in one.spells]
    coldest = [min((s for s in spells if s.hours == h), key=lambda s: s.mean_c) for h in SPELL_H]
    return ManyYears(
        years=tuple(one.year for one in loads),
        peak_w_m2=peaks,
        annual_heat_kwh_m2=np.array([one.heat_kwh_m2 for one in loads]),
        coldest_hour_c=np.array([one.coldest_hour_c for one in loads]),
        spells=tuple(coldest),
        levels=levels,
        note=note,
    )


def many_years(
    time: Times, load: Floats, temp_air: Floats, step_s: float, sized: Floats | None = None
) -> ManyYears | None:
    """Return what several years in a row say, or None for less than two whole calendar years.

    `time` (N,) start of each step, `load` (N,) W/m2 floor, `temp_air` (N,) degC outside. Calendar years; a
    year with less than 95 % of its hours is left out.
    """
    label = time.astype("datetime64[Y]").astype(int) + 1970
    found, counts = np.unique(label, return_counts=True)
    least = WHOLE_YEAR_SHARE * YEAR_H * S_PER_H / step_s
    rows = [label == year for year, count in zip(found, counts, strict=True) if count >= least]
    peaks = load if sized is None else sized
    return combine([year_load(time[r], load[r], temp_air[r], step_s, peaks[r]) for r in rows])
