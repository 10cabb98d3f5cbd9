"""Filling gaps: short ones by interpolation, longer ones from the days around, long ones refused."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError
from weather.record import Bools, Finding, Floats, Times

SHORT_H: Final = 6  # up to here linear in time
LONG_H: Final = 72  # beyond here refused unless the study allows
MOST_MISSING: Final = 0.5  # a quantity with more gaps than this is never filled


@dataclass(frozen=True)
class Filled:
    """A column without gaps, which of its hours were filled, and what to say."""

    values: Floats
    filled: Bools
    finding: Finding | None


def runs(mask: Bools) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return starts and lengths of the runs of True."""
    edge = np.diff(np.concatenate([[0], mask.astype(np.int8), [0]]))
    start = np.flatnonzero(edge == 1)
    return start, np.flatnonzero(edge == -1) - start


def fill(
    values: Floats, time: Times, title: str, periodic: bool, allow_long: bool, wanted: Bools | None = None
) -> Filled:
    """Fill NaN in an hourly column, (N,): up to 6 h linearly, longer ones by hours of the days around.

    `wanted` limits what counts (daylight, for radiation); gaps elsewhere are bridged without being counted.
    UserError for gaps beyond 72 h (unless `allow_long`) and for more gaps than values.
    """
    gap = ~np.isfinite(values)
    if not gap.any():
        return Filled(values, np.zeros(len(values), dtype=bool), None)
    counted = gap if wanted is None else gap & wanted
    base = len(values) if wanted is None else int(wanted.sum())
    if counted.sum() > MOST_MISSING * base or gap.all():
        raise UserError(
            f"weather: {title} is missing in {int(counted.sum())} of {base} hours, at most half may be filled"
        )
    start, length = runs(gap)
    longest = int(length.max())
    if longest > LONG_H and not allow_long:
        k = int(length.argmax())
        raise UserError(
            f"weather: {title} is missing for {longest} h from {str(time[start[k]])[:16].replace('T', ' ')}, "
            f"allowed {LONG_H} h (allow_long_gaps = true fills it from the days around)"
        )
    result = _interpolated(values, gap, np.arange(len(values)), periodic)
    long_rows = np.zeros(len(values), dtype=bool)
    edge = (start == 0) | (start + length == len(values))  # nothing on one side to draw a line to
    for j in np.flatnonzero((length > SHORT_H) | (edge & (not periodic))):
        long_rows[start[j] : start[j] + length[j]] = True
    if long_rows.any():
        result[long_rows] = _between_days(values, gap, periodic)[long_rows]
    return Filled(result, counted, _finding(title, counted, int((long_rows & counted).sum()), longest))


def _finding(title: str, counted: Bools, by_days: int, longest: int) -> Finding | None:
    total = int(counted.sum())
    if not total:
        return None
    text = f"{title}: {total} hours filled, {total - by_days} of them linearly in time"
    if by_days:
        text += f", {by_days} between the same hours of the days around"
    return Finding(
        "filled", "warning" if longest > LONG_H else "corrected", f"{text} (longest {longest} h)", total
    )


def _interpolated(values: Floats, gap: Bools, x: NDArray[np.int64], periodic: bool) -> Floats:
    result = values.copy()
    period = float(len(values)) if periodic else None
    result[gap] = np.interp(x[gap], x[~gap], values[~gap], period=period)
    return result


def _between_days(values: Floats, gap: Bools, periodic: bool) -> Floats:
    """Interpolate over days, each hour of the day by itself."""
    result = values.copy()
    x = np.arange(len(values))
    for hour in range(24):
        rows = x[hour::24]
        good = rows[~gap[rows]]
        if len(good):
            bad = rows[gap[rows]]
            result[bad] = np.interp(bad, good, values[good], period=float(len(values)) if periodic else None)
    still = ~np.isfinite(result)
    return _interpolated(result, still, x, periodic) if still.any() else result
