"""Hours to days, months and season: one way of adding up, used by every table."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from canopy.columns import DAILY, How

Floats = NDArray[np.float64]
Times = NDArray[np.datetime64]

MOL_PER_UMOL = 1e-6
KW_PER_W = 1e-3
S_PER_H = 3600.0
H_PER_DAY = 24.0


def groups(time: Times, unit: str) -> tuple[Times, NDArray[np.intp]]:
    """Return the distinct days ("D") or months ("M") of (H,) times, in order, and each one's first row."""
    label = time.astype(f"datetime64[{unit}]")
    first = np.flatnonzero(np.r_[True, label[1:] != label[:-1]])
    return label[first], first


def gather(values: Floats, first: NDArray[np.intp], how: How, step_s: float) -> Floats:
    """Return one value per group of consecutive hours.

    `values` (H,) rates as in `columns`; kwh: W/m2 to kWh/m2; mol: µmol m-2 s-1 to mol/m2;
    sum: per-hour rate to amount; hours: shares of an hour to hours; degree_days: K to K d; mean, min, max.
    """
    hours = step_s / S_PER_H
    if how == "kwh":
        return np.add.reduceat(values, first) * (hours * KW_PER_W)
    if how == "mol":
        return np.add.reduceat(values, first) * (step_s * MOL_PER_UMOL)
    if how == "degree_days":
        return np.asarray(np.add.reduceat(values, first) * (hours / H_PER_DAY))
    if how in ("sum", "hours"):
        return np.add.reduceat(values, first) * hours
    if how == "min":
        return np.minimum.reduceat(values, first)
    if how == "max":
        return np.maximum.reduceat(values, first)
    counts = np.diff(np.r_[first, len(values)])
    return np.asarray(np.add.reduceat(values, first) / counts)


def by_group(hourly: Mapping[str, Floats], first: NDArray[np.intp], step_s: float) -> dict[str, Floats]:
    """Return every daily column of `columns.DAILY`, one value per group."""
    return {day: gather(hourly[column.name], first, how, step_s) for day, column, how in DAILY}


def season(hourly: Mapping[str, Floats], step_s: float) -> dict[str, float]:
    """Return every daily column over the whole reported season, one number each."""
    whole = np.zeros(1, dtype=np.intp)
    return {name: float(v[0]) for name, v in by_group(hourly, whole, step_s).items()}
