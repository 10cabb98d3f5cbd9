"""Dirt on a covering: light lost by month, and days on which it is washed off."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Times = NDArray[np.datetime64]

YEAR_DAYS = 365
MONTH_DAYS = (31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)


@dataclass(frozen=True)
class Dirt:
    """Light that dirt takes: the share lost in the middle of each month, and days when it is washed off.

    A wash leaves `left_by_wash` of the loss; the month's own level is back after `recovery_days`.
    """

    loss_by_month: tuple[float, ...]  # 12 values, share of light, January ... December
    wash_days: tuple[int, ...] = ()  # day of a 365 day year, 0 = 1 January
    left_by_wash: float = 0.1
    recovery_days: float = 30.0

    def daily_loss(self) -> Floats:
        """Return the share of light lost on each day of a year that repeats itself, (365,)."""
        middle = np.cumsum(MONTH_DAYS) - 0.5 * np.array(MONTH_DAYS)
        loss = np.interp(
            np.arange(YEAR_DAYS) + 0.5, middle, np.array(self.loss_by_month), period=float(YEAR_DAYS)
        )
        left = np.ones(YEAR_DAYS)
        for wash in self.wash_days:
            since = (np.arange(YEAR_DAYS) - wash) % YEAR_DAYS / self.recovery_days
            left = np.minimum(left, self.left_by_wash + (1.0 - self.left_by_wash) * np.minimum(since, 1.0))
        return np.asarray(loss * left)

    def factor(self, time: Times) -> Floats:
        """Return the share of light that dirt leaves at each time, (N,)."""
        return np.asarray(1.0 - self.daily_loss()[day_of_year(time)])


def day_of_year(time: Times) -> NDArray[np.intp]:
    """Return the day of a 365 day year (0 = 1 January; 29 February counts as 28), (N,)."""
    day = time.astype("datetime64[D]")
    year = day.astype("datetime64[Y]")
    number = (day - year.astype("datetime64[D]")).astype(np.intp)
    length = ((year + 1).astype("datetime64[D]") - year.astype("datetime64[D]")).astype(np.intp)
    late = (length == 366) & (number >= 59)
    return np.asarray(number - late)
