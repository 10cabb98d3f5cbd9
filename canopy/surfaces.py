"""What weather and years do to a covering: dirt by month with wash days, age, how optics take the loss."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from canopy.optics import SolarOptics

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


def age_factor(years: float, loss_per_year: float) -> float:
    """Return the share of light left after years of yellowing and chalking, each taking the same share."""
    return float((1.0 - loss_per_year) ** years)


def dimmed(optics: SolarOptics, factor: Floats | float) -> SolarOptics:
    """Return optics whose transmission both ways is times `factor` (scalar or per band, at most 1).

    What no longer passes is absorbed in the outermost layer (dirt, weathered skin); reflection stays.
    """
    f = np.broadcast_to(np.asarray(factor, dtype=np.float64), optics.diffuse_in.shape)
    lost = 1.0 - f
    beam = optics.beam_absorbed.copy()
    beam[0] += lost[:, None] * (optics.beam_beam + optics.beam_diffuse)
    down, up = optics.absorbed_from_outside.copy(), optics.absorbed_from_inside.copy()
    down[0] += lost * optics.diffuse_in
    up[0] += lost * optics.diffuse_out
    return replace(
        optics,
        beam_beam=optics.beam_beam * f[:, None],
        beam_diffuse=optics.beam_diffuse * f[:, None],
        beam_absorbed=beam,
        diffuse_in=optics.diffuse_in * f,
        diffuse_out=optics.diffuse_out * f,
        absorbed_from_outside=down,
        absorbed_from_inside=up,
    )


def clouded(optics: SolarOptics, share: float) -> SolarOptics:
    """Return optics with this share of the unscattered beam turned into diffuse (dust, crazing, ageing)."""
    moved = share * optics.beam_beam
    return replace(optics, beam_beam=optics.beam_beam - moved, beam_diffuse=optics.beam_diffuse + moved)
