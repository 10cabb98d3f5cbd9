"""Stamps in text, and clocks that follow daylight saving."""

from __future__ import annotations

import re
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import Final

import numpy as np

from weather.errors import UserError
from weather.record import Bools, Finding, Floats, Times
from weather.site import time_zone
from weather.textfile import make_times

CLOCK_PART: Final = r"(?:[T ]+(\d{1,2}):(\d{2})(?::(\d{2})(?:[.,]\d+)?)?)?"
ZONE_PART: Final = r"\s*(Z|[+-]\d{2}:?\d{2})?"
ISO: Final = re.compile(r"(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})" + CLOCK_PART + ZONE_PART)
DAY_FIRST: Final = re.compile(r"(\d{1,2})[./-](\d{1,2})[./-](\d{4})" + CLOCK_PART + ZONE_PART)


@dataclass(frozen=True)
class Stamps:
    """Times read from text, (M,); which rows had one; whether an offset was written (then they are UTC)."""

    time: Times
    good: Bools
    utc: bool
    note: str


def read_stamps(texts: list[str], where: str) -> Stamps:
    """Read ISO 8601 (with or without offset), D.M.Y and M/D/Y times; the order of day and month is inferred.

    UserError when no row has a time, day and month cannot be told apart, or only some rows have offsets.
    """
    iso = [ISO.fullmatch(text.strip()) for text in texts]
    if sum(match is not None for match in iso) * 2 >= len(texts):
        return _stamps(iso, (0, 1, 2), where, "")
    found = [DAY_FIRST.fullmatch(text.strip()) for text in texts]
    good = [match for match in found if match is not None]
    if len(good) * 2 < len(texts) or not good:
        raise UserError(
            f'{where}: the time "{texts[0][:30] if texts else ""}" is not readable, '
            "allowed YYYY-MM-DD HH:MM (with or without offset), DD.MM.YYYY HH:MM, MM/DD/YYYY HH:MM"
        )
    first = np.array([int(match[1]) for match in good])
    second = np.array([int(match[2]) for match in good])
    # the day runs through its values faster than the month does; either may exceed 12
    day_first = bool((first > 12).sum() > (second > 12).sum())
    if not (first > 12).any() and not (second > 12).any():
        turns_first, turns_second = (np.diff(x) != 0 for x in (first, second))
        if turns_first.sum() == turns_second.sum():
            raise UserError(
                f'{where}: day and month cannot be told apart in "{texts[0][:30]}"; use YYYY-MM-DD'
            )
        day_first = bool(turns_first.sum() > turns_second.sum())
    order = (2, 1, 0) if day_first else (2, 0, 1)
    return _stamps(found, order, where, f"dates read as {'day.month' if day_first else 'month/day'}.year")


def _stamps(found: list[re.Match[str] | None], order: tuple[int, int, int], where: str, note: str) -> Stamps:
    count = len(found)
    parts = np.full((7, count), np.nan)
    zoned = 0
    for k, match in enumerate(found):
        if match is None:
            continue
        groups = match.groups()
        parts[:3, k] = [float(groups[i]) for i in order]
        parts[3:6, k] = [float(text) if text else 0.0 for text in groups[3:6]]
        zone = groups[6]
        parts[6, k] = 0.0
        if zone is not None:
            zoned += 1
            if zone != "Z":
                digits = zone.replace(":", "")
                minutes = int(digits[1:3]) * 60 + int(digits[3:5])
                parts[6, k] = 60.0 * minutes * (-1.0 if digits[0] == "-" else 1.0)
    readable = sum(match is not None for match in found)
    if 0 < zoned < readable:
        raise UserError(f"{where}: {zoned} of {readable} times carry an offset from UTC, all or none must")
    seconds: Floats = parts[3] * 3600.0 + parts[4] * 60.0 + parts[5]
    seconds = np.where((parts[4] < 60.0) & (parts[5] < 60.0), seconds, np.nan)
    time, good = make_times(parts[0], parts[1], parts[2], seconds)
    shift = np.where(np.isfinite(parts[6]), parts[6], 0.0).astype(np.int64).astype("timedelta64[s]")
    return Stamps(time - shift, good, zoned > 0, note)


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
