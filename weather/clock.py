"""Clocks that follow daylight saving, put back onto standard time."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta

import numpy as np

from weather.record import Bools, Finding, Times
from weather.site import time_zone


def _changes(zone: str, first_year: int, last_year: int) -> list[tuple[datetime, int]]:
    """Return wall-clock times (before the change) and jumps in s of a zone's clock changes."""
    tz = time_zone(zone)
    result = []
    day = datetime(first_year, 1, 1, tzinfo=UTC)
    end = datetime(last_year + 1, 1, 2, tzinfo=UTC)

    def offset(at: datetime) -> timedelta:
        found = at.astimezone(tz).utcoffset()
        assert found is not None
        return found

    while day < end:
        following = day + timedelta(days=1)
        if offset(day) != offset(following):
            low, high = day, following
            while high - low > timedelta(minutes=1):
                middle = low + (high - low) / 2
                low, high = (middle, high) if offset(middle) == offset(day) else (low, middle)
            high = high.replace(second=0, microsecond=0)
            jump = offset(following) - offset(day)
            result.append(((high + offset(day)).replace(tzinfo=None), int(jump.total_seconds())))
        day = following
    return result


def civil_to_standard(stamp: Times, zone: str) -> tuple[Times, Finding | None]:
    """Put stamps that follow daylight saving onto standard time, in the order of the file.

    They follow it when the hour that the clock skips is empty in every year while its neighbours are not, and
    the hour that the clock repeats holds stamps twice. Otherwise they are returned as they are.
    """
    if len(stamp) < 48:
        return stamp, None
    years = stamp.astype("datetime64[Y]").astype(np.int64) + 1970
    if int(years.max()) - int(years.min()) > 60:
        return stamp, None
    skipped = repeated = 0
    springs: list[np.datetime64] = []
    autumns: list[np.datetime64] = []
    hour = np.timedelta64(3600, "s")
    for wall, jump in _changes(zone, int(years.min()), int(years.max())):
        if abs(jump) != 3600:
            continue
        at = np.datetime64(wall, "s")
        if jump > 0:
            inside = int(((stamp > at) & (stamp < at + hour)).sum()) + int((stamp == at).sum())
            near = int(((stamp >= at - 3 * hour) & (stamp < at)).sum())
            if near:
                if inside:
                    return stamp, None
                skipped += 1
                springs.append(at)
        else:
            inside_rows = stamp[(stamp >= at - hour) & (stamp < at)]
            if len(inside_rows):
                if len(np.unique(inside_rows)) == len(inside_rows):
                    return stamp, None
                repeated += 1
                autumns.append(at)
    if not skipped + repeated or (skipped and not repeated and len(springs) < 1):
        return stamp, None
    moved = _to_standard(stamp, springs, autumns)
    text = (
        f"the clock follows daylight saving ({skipped} hours skipped, {repeated} repeated); "
        "put onto standard time"
    )
    return moved, Finding("daylight-saving", "corrected", text, skipped + repeated)


def _to_standard(stamp: Times, springs: list[np.datetime64], autumns: list[np.datetime64]) -> Times:
    """Take an hour off between a spring change and the autumn change after it."""
    hour = np.timedelta64(3600, "s")
    summer = np.zeros(len(stamp), dtype=bool)
    events = sorted([(at, True) for at in springs] + [(at, False) for at in autumns])
    inside = bool(events) and not events[0][1]  # begins in summer
    begin: np.datetime64 | None = None
    for at, spring in [*events, (None, None)]:
        if inside:
            after = np.ones(len(stamp), dtype=bool) if begin is None else stamp >= begin
            before = np.ones(len(stamp), dtype=bool) if at is None else stamp < at
            summer |= after & before
            if at is not None:
                _second_pass(stamp, at, summer)
        inside, begin = bool(spring), at
    return np.where(summer, stamp - hour, stamp)


def _second_pass(stamp: Times, at: np.datetime64, summer: Bools) -> None:
    """The second time round, the hour before the autumn change is standard time."""
    hour = np.timedelta64(3600, "s")
    seen: set[int] = set()
    for row in np.flatnonzero((stamp >= at - hour) & (stamp < at)):
        second = int(stamp[row].astype(np.int64))
        if second in seen:
            summer[row] = False
        seen.add(second)
