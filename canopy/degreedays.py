"""Degree days of the outside air, by base temperature: the yardstick for heating bills and contracts."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Times = NDArray[np.datetime64]

HOURS_PER_DAY: Final = 24.0
S_PER_H: Final = 3600.0
BASES_C: Final = (8.0, 10.0, 12.0, 14.0, 16.0, 18.0, 20.0)
"""Base temperatures of the table, degC: frost-free houses up to tropical crops."""

TABLE_BASE_C: Final = 18.0
"""Base of the daily column: the usual one of degree-day tables in Europe (65 °F = 18.3 °C in the US)."""


@dataclass(frozen=True)
class DegreeDays:
    """Heating degree days by base temperature.

    `hourly` integrates the hours (K d: mean over the day of max(0, base - outside)); `daily_mean` takes
    max(0, base - daily mean), which is what published tables carry and is never larger.
    """

    bases_c: Floats  # (B,)
    hourly: Floats  # (B,) K d over the record
    daily_mean: Floats  # (B,) K d over the record
    by_month: Floats  # (B, M) K d from the hours
    months: tuple[str, ...]  # (M,) "YYYY-MM"


def below(temp_air: Floats, base_c: float | Floats) -> Floats:
    """Return (N,) kelvin below the base temperature, never negative."""
    return np.asarray(np.maximum(0.0, np.asarray(base_c) - np.asarray(temp_air, float)))


def degree_days(
    time: Times, temp_air: Floats, step_s: float, bases_c: tuple[float, ...] = BASES_C
) -> DegreeDays:
    """Return degree days of a record, K d.

    `time` (N,) start of each step in order, `temp_air` (N,) degC. Definition: sum of positive differences
    between base and outside temperature (ISO 15927-6:2007 works from hours for accumulated differences;
    daily-mean tables use max(0, base - mean of the day)).
    """
    bases = np.asarray(bases_c, float)
    day_share = step_s / (S_PER_H * HOURS_PER_DAY)
    missing = below(temp_air[None, :], bases[:, None]) * day_share  # (B, N) K d
    days = time.astype("datetime64[D]")
    day_first = np.flatnonzero(np.r_[True, days[1:] != days[:-1]])
    day_length = np.diff(np.r_[day_first, len(days)])
    day_mean = np.add.reduceat(np.asarray(temp_air, float), day_first) / day_length
    by_day = below(day_mean[None, :], bases[:, None]) * (day_length * day_share)
    months = time.astype("datetime64[M]")
    month_first = np.flatnonzero(np.r_[True, months[1:] != months[:-1]])
    return DegreeDays(
        bases_c=bases,
        hourly=missing.sum(axis=1),
        daily_mean=by_day.sum(axis=1),
        by_month=np.add.reduceat(missing, month_first, axis=1),
        months=tuple(str(m) for m in months[month_first]),
    )
