"""The part of the year that a study looks at."""

from __future__ import annotations

import numpy as np

from weather.errors import UserError
from weather.record import Bools, Times


def season(time: Times, first_day: str | None, last_day: str | None) -> Bools:
    """Return which hours lie between two days of the year, both included, (N,); may wrap."""
    days = time.astype("datetime64[D]")
    month = days.astype("datetime64[M]").astype(np.int64) % 12 + 1
    key = month * 100 + (days - days.astype("datetime64[M]").astype("datetime64[D]")).astype(np.int64) + 1
    first = _day_key(first_day, "first_day", 101)
    last = _day_key(last_day, "last_day", 1231)
    inside = (key >= first) & (key <= last) if first <= last else (key >= first) | (key <= last)
    return np.asarray(inside)


def _day_key(text: str | None, name: str, default: int) -> int:
    if text is None:
        return default
    try:
        month, day = text.split("-")
        np.datetime64(f"2000-{int(month):02d}-{int(day):02d}")
        return int(month) * 100 + int(day)
    except (ValueError, TypeError):
        raise UserError(
            f'weather -> {name}: "{text}" is not a day, allowed "MM-DD" such as "10-15"'
        ) from None
