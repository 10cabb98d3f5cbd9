"""A number, or numbers by date: set-points hold from their date on, leaf area runs straight between dates."""

from __future__ import annotations

import re
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
_MONTH_DAYS = (31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)


def day_number(text: object) -> int:
    """Return the day of a non-leap year (1-365) of a "MM-DD" text.

    Errors: ValueError with what is allowed.
    """
    hit = re.fullmatch(r"(\d\d)-(\d\d)", text) if isinstance(text, str) else None
    if hit:
        month, day = int(hit[1]), int(hit[2])
        if 1 <= month <= 12 and 1 <= day <= _MONTH_DAYS[month - 1]:
            return sum(_MONTH_DAYS[: month - 1]) + day
    shown = repr(text)[:40]
    raise ValueError(f'{shown} is no day of the year; write "MM-DD", 01-01 to 12-31 without 02-29')


def day_text(day: int) -> str:
    """Return "MM-DD" of a day (1-365) of a non-leap year."""
    month = 0
    while day > _MONTH_DAYS[month]:
        day -= _MONTH_DAYS[month]
        month += 1
    return f"{month + 1:02d}-{day:02d}"


@dataclass(frozen=True)
class Seasonal:
    """Values by day of a nominal 365-day year; one value holds all year."""

    days: tuple[int, ...]
    values: tuple[float, ...]

    def steps(self, day_of_year: Floats) -> Floats:
        """Return (N,) values that hold from their date until the next; the year wraps round."""
        values = np.asarray(self.values)
        at = np.searchsorted(np.asarray(self.days), np.minimum(np.floor(day_of_year), 365), side="right") - 1
        return np.asarray(values[at], dtype=np.float64)  # -1 wraps to the last date of the year before

    def linear(self, day_of_year: Floats) -> Floats:
        """Return (N,) values straight between dates; the year wraps round."""
        if len(self.days) == 1:
            return np.full(np.shape(day_of_year), self.values[0])
        line = np.interp(np.asarray(day_of_year, float), self.days, self.values, period=365.0)
        return np.asarray(line, dtype=np.float64)


def parse(raw: object, low: float, high: float) -> Seasonal:
    """Return a `Seasonal` from a number or [["MM-DD", number], ...].

    Errors: ValueError in words when it is neither, unordered, or outside low..high.
    """
    if isinstance(raw, Seasonal):
        return raw
    pairs = raw if isinstance(raw, list) else [["01-01", raw]]
    days: list[int] = []
    values: list[float] = []
    for pair in pairs:
        if not (isinstance(pair, list) and len(pair) == 2):
            raise ValueError('write a number or [["MM-DD", number], ...]')
        value = pair[1]
        if isinstance(value, bool) or not isinstance(value, int | float) or value != value:
            shown = repr(value)[:40]
            raise ValueError(f'{shown} is not a number; write a number or [["MM-DD", number], ...]')
        if not low <= value <= high:
            shown = f"{value:g}" if isinstance(value, float) else str(value)[:20]
            raise ValueError(f"{shown} is outside {low:g} to {high:g}")
        days.append(day_number(pair[0]))
        values.append(float(value))
    if not days or any(b <= a for a, b in pairwise(days)):
        raise ValueError("dates must rise and none may stand twice")
    return Seasonal(tuple(days), tuple(values))
