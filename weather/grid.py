"""From a file's own rows to whole hours: order, repeats, missing hours, leap days, means that keep energy."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError
from weather.raw import RawWeather
from weather.record import Bools, Finding, Floats, Times

HOUR_S: Final = 3600.0
LEAST_SHARE: Final = 0.5  # an hour with less of it covered by readings is a gap
LEAST_HOURS: Final = 24
MAX_HOURS: Final = 60 * 8784  # sixty years


@dataclass(frozen=True)
class Hours:
    """Whole hours, (N,): starts, values (NaN = gap) and hours made of part of their readings."""

    time: Times
    columns: dict[str, Floats]
    thin: Bools  # (N,) some readings of the hour are missing
    findings: tuple[Finding, ...]


def to_hours(raw: RawWeather, start: Times) -> Hours:
    """Return whole hours from rows that begin at `start`, (M,), on the file's standard clock.

    Typical years go onto the nominal year. Steps shorter or other than an hour are averaged by the time they
    share with each hour, so that the energy of the record is kept. UserError for rows that make no series.
    """
    if len(start) == 0:
        raise UserError(f"{raw.source}: no rows")
    return _typical_hours(raw, start) if raw.typical else _real_hours(raw, start)


def _typical_hours(raw: RawWeather, start: Times) -> Hours:
    findings: list[Finding] = []
    days = start.astype("datetime64[D]")
    month = days.astype("datetime64[M]").astype(np.int64) % 12
    day = (days - days.astype("datetime64[M]").astype("datetime64[D]")).astype(np.int64)
    leap = (month == 1) & (day == 28)
    if leap.any():
        text = f"29 February left out of the typical year ({int(leap.sum())} rows)"
        findings.append(Finding("leap-day", "note", text, int(leap.sum())))
    nominal = np.datetime64("1990-01", "M") + month.astype("timedelta64[M]")
    seconds = (start - days.astype("datetime64[s]")).astype(np.int64)
    moved = nominal.astype("datetime64[D]").astype("datetime64[s]") + (day * 86400 + seconds).astype(
        "timedelta64[s]"
    )
    rows = np.flatnonzero(~leap)
    if raw.step_s == HOUR_S:
        first = np.datetime64("1990-01-01T00:00:00", "s")
        return _slots(raw, moved[rows], rows, first, 8760, findings)
    order = rows[np.argsort(moved[rows], kind="stable")]
    first = np.datetime64("1990-01-01T00:00:00", "s")
    return _averaged(raw, moved[order], order, first, 8760, findings)


def _real_hours(raw: RawWeather, start: Times) -> Hours:
    findings: list[Finding] = []
    backwards = int((np.diff(start).astype(np.int64) < 0).sum())
    order = np.argsort(start, kind="stable")
    if backwards:
        text = f"{backwards} rows stand before their predecessor in time; sorted"
        findings.append(Finding("order", "corrected", text, backwards))
    times = start[order]
    half = np.timedelta64(1800 if raw.step_s == HOUR_S else 0, "s")
    first = (times[0] + half).astype("datetime64[h]").astype("datetime64[s]")
    if raw.step_s == HOUR_S:
        last = (times[-1] + half).astype("datetime64[h]").astype("datetime64[s]")
        hours = int((last - first).astype(np.int64) // 3600) + 1
    else:
        end = times[-1] + np.timedelta64(round(raw.step_s), "s")
        hours = int(-(-(end - first).astype(np.int64) // 3600))
    if hours > MAX_HOURS:
        raise UserError(f"{raw.source}: the dates run from {times[0]} to {times[-1]}, allowed 60 years")
    if raw.step_s == HOUR_S:
        return _slots(raw, times, order, first, hours, findings)
    return _averaged(raw, times, order, first, hours, findings)


def _duplicates(repeated: int, findings: list[Finding]) -> None:
    if repeated:
        text = f"{repeated} rows repeat an hour that is already there; the first of each kept"
        findings.append(Finding("duplicated", "corrected", text, repeated))


def _missing(missing: int, hours: int, findings: list[Finding]) -> None:
    if missing:
        text = f"{missing} of {hours} hours are not in the file"
        findings.append(Finding("missing-hours", "warning", text, missing))


def _slots(
    raw: RawWeather,
    times: Times,
    rows: NDArray[np.int64],
    first: np.datetime64,
    hours: int,
    findings: list[Finding],
) -> Hours:
    """Put hourly rows into their hours (the sun, not this, keeps a constant offset from the full hour)."""
    slot = ((times - first).astype(np.int64) + 1800) // 3600
    inside = (slot >= 0) & (slot < hours)
    slot, rows = slot[inside], rows[inside]
    unique, index = np.unique(slot, return_index=True)
    _duplicates(len(slot) - len(unique), findings)
    _missing(hours - len(unique), hours, findings)
    columns = {}
    for name, values in raw.columns.items():
        filled = np.full(hours, np.nan)
        filled[unique] = values[rows[index]]
        columns[name] = filled
    time = first + np.arange(hours) * np.timedelta64(3600, "s")
    return Hours(time, columns, np.zeros(hours, dtype=bool), tuple(findings))


def _averaged(
    raw: RawWeather,
    times: Times,
    rows: NDArray[np.int64],
    first: np.datetime64,
    hours: int,
    findings: list[Finding],
) -> Hours:
    """Average steps of any length over the hours by the time they share with each."""
    begin = (times - first).astype(np.int64).astype(float)
    unique, index = np.unique(begin, return_index=True)
    _duplicates(len(begin) - len(unique), findings)
    begin, rows = begin[index], rows[index]
    end = np.minimum(begin + raw.step_s, np.append(begin[1:], np.inf))
    edges: Floats = np.arange(hours + 1, dtype=np.float64) * HOUR_S
    covered = np.diff(_integral(edges, begin, end, np.ones(len(begin)))) / HOUR_S
    if not raw.typical and hours > 1:  # a record may begin and end within an hour
        skip = int(covered[0] < LEAST_SHARE)
        drop = int(covered[-1] < LEAST_SHARE)
        edges, covered = edges[skip : len(edges) - drop], covered[skip : len(covered) - drop]
        first, hours = first + skip * np.timedelta64(3600, "s"), len(covered)
    _missing(int((covered < LEAST_SHARE).sum()), hours, findings)
    thin = (covered >= LEAST_SHARE) & (covered < 1.0 - 1e-6)
    columns = {}
    for name, values in raw.columns.items():
        picked = values[rows]
        good = np.isfinite(picked)
        share = np.diff(_integral(edges, begin[good], end[good], np.ones(int(good.sum())))) / HOUR_S
        total = np.diff(_integral(edges, begin[good], end[good], picked[good])) / HOUR_S
        enough = share >= LEAST_SHARE
        columns[name] = np.where(enough, total / np.where(enough, share, 1.0), np.nan)
        thin |= enough & (share < 1.0 - 1e-6)
    if thin.any():
        text = f"{int(thin.sum())} hours lack some of their readings; the mean of the others stands for them"
        findings.append(Finding("thin-hours", "note", text, int(thin.sum())))
    time = first + np.arange(hours) * np.timedelta64(3600, "s")
    return Hours(time, columns, thin, tuple(findings))


def _integral(at: Floats, begin: Floats, end: Floats, values: Floats) -> Floats:
    """Integral up to each time in `at` of steps with constant values, nothing between the steps."""
    if len(begin) == 0:
        return np.zeros(len(at))
    knots = np.stack([begin, end], axis=1).ravel()
    gains = np.stack([np.zeros(len(begin)), (end - begin) * values], axis=1).ravel()
    return np.asarray(np.interp(at, knots, np.cumsum(gains)))
