"""Times written as text: ISO 8601 with or without offset, and the usual national orders of day and month."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

import numpy as np

from weather.errors import UserError
from weather.record import Bools, Floats, Times
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
    quick = _regular_iso(texts)
    if quick is not None:
        return quick
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
            parts[6, k] = _offset_s(zone)
    readable = sum(match is not None for match in found)
    if 0 < zoned < readable:
        raise UserError(f"{where}: {zoned} of {readable} times carry an offset from UTC, all or none must")
    seconds: Floats = parts[3] * 3600.0 + parts[4] * 60.0 + parts[5]
    seconds = np.where((parts[4] < 60.0) & (parts[5] < 60.0), seconds, np.nan)
    time, good = make_times(parts[0], parts[1], parts[2], seconds)
    shift = np.where(np.isfinite(parts[6]), parts[6], 0.0).astype(np.int64).astype("timedelta64[s]")
    return Stamps(time - shift, good, zoned > 0, note)


def _regular_iso(texts: list[str]) -> Stamps | None:
    """Read times that all have the layout YYYY-MM-DD HH:MM[:SS][offset] at once; None when any has not."""
    try:
        packed = np.array(texts, dtype=np.bytes_)
    except UnicodeEncodeError:
        return None
    width = packed.dtype.itemsize
    if not len(texts) or not 16 <= width <= 25:
        return None
    codes = packed.view(np.uint8).reshape(len(texts), width)
    seconds = bool(width >= 19 and (codes[:, 16] == ord(":")).all())
    end = 19 if seconds else 16
    places = [0, 1, 2, 3, 5, 6, 8, 9, 11, 12, 14, 15, *((17, 18) if seconds else ())]
    digits = codes[:, places].astype(np.int64) - 48
    signs = (codes[:, 4] == 45) & (codes[:, 7] == 45) & (codes[:, 13] == 58)
    signs &= (codes[:, 10] == 32) | (codes[:, 10] == 84)
    if not (((digits >= 0) & (digits <= 9)).all() and signs.all()):
        return None
    shift = np.zeros(len(texts), dtype=np.int64)
    zoned = False
    if width > end:
        tails = np.ascontiguousarray(codes[:, end:]).view(f"S{width - end}").ravel()
        kinds, which = np.unique(tails, return_inverse=True)
        offsets = [re.fullmatch(ZONE_PART, kind.decode("latin-1")) for kind in kinds]
        if len(kinds) > 4 or any(match is None or match[1] is None for match in offsets):
            return None
        shift = np.array([_offset_s(match[1]) for match in offsets if match is not None])[which]
        zoned = True
    pair = digits[:, 4:].reshape(len(texts), -1, 2) @ np.array([10, 1])
    year = (digits[:, :4] @ np.array([1000, 100, 10, 1])).astype(float)
    month, day, hour, minute = (pair[:, k].astype(float) for k in range(4))
    second = pair[:, 4].astype(float) if seconds else np.zeros(len(texts))
    of_day = np.where((minute < 60) & (second < 60), hour * 3600.0 + minute * 60.0 + second, np.nan)
    time, good = make_times(year, month, day, of_day)
    return Stamps(time - shift.astype("timedelta64[s]"), good, zoned, "")


def _offset_s(zone: str) -> int:
    """Return the seconds of "Z", "+01:00" or "-0330"."""
    if zone == "Z":
        return 0
    digits = zone.replace(":", "")
    return 60 * (int(digits[1:3]) * 60 + int(digits[3:5])) * (-1 if digits[0] == "-" else 1)
