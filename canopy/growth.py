"""Leaf area through the year: straight between dates, or grown from each planting to its removal."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, Protocol

import numpy as np
from numpy.typing import NDArray

from canopy.seasonal import Seasonal, day_number
from weather.errors import UserError

Floats = NDArray[np.float64]

YEAR_DAYS: Final = 365.0


class Planting(Protocol):
    """One crop between two dates ("MM-DD"; the removal may lie in the next year)."""

    @property
    def planted(self) -> str:
        """First day with the crop."""

    @property
    def removed(self) -> str:
        """First day without it."""

    @property
    def start_lai(self) -> float:
        """Leaf area of the plants as planted, m2 per m2 floor."""

    @property
    def final_lai(self) -> float:
        """Leaf area that the crop is kept at."""

    @property
    def days_to_final(self) -> float:
        """Days from planting to the final leaf area."""


def lai_series(spec: Seasonal | Sequence[Planting], day_of_year: Floats) -> Floats:
    """Return leaf area per floor area, (N,), for days of a 365-day year (1.0 is 1 January, 0 h).

    Dates: straight between them, over the new year too. Plantings: `grown` from planting to removal, 0 in
    the empty house between.

    Errors: UserError when two plantings overlap or one is removed on the day it is planted.
    """
    day = np.asarray(day_of_year, float)
    if isinstance(spec, Seasonal):
        return np.asarray(spec.linear(day), float)
    check_plantings(spec)
    lai = np.zeros(day.shape)
    for one in spec:
        age = (day - day_number(one.planted)) % YEAR_DAYS
        there = age < _stay(one)
        lai = np.where(there, grown(age, one.start_lai, one.final_lai, one.days_to_final), lai)
    return lai


def grown(age_days: Floats, start: float, final: float, days_to_final: float) -> Floats:
    """Return leaf area at an age, (N,): a determinate sigmoid that ends level at `days_to_final`.

    Yin et al. (2003), Ann. Bot. 91:361, beta growth function with the fastest growth half way:
    start + (final - start) (1 + (te - t) / (te - tm)) (t / te)^(te / (te - tm)), tm = te / 2.
    """
    x = np.clip(age_days / days_to_final, 0.0, 1.0)
    return np.asarray(start + (final - start) * (3.0 - 2.0 * x) * x**2)


def check_plantings(plantings: Sequence[Planting]) -> None:
    """Refuse plantings that overlap; UserError names both."""
    for k, one in enumerate(plantings):
        if one.planted == one.removed:
            raise UserError(
                f"crop.planting {k + 1}: planted and removed on {one.planted}; removed must be another day"
            )
        for j, other in enumerate(plantings):
            after = (day_number(other.planted) - day_number(one.planted)) % YEAR_DAYS
            if j != k and after < _stay(one):
                raise UserError(
                    f"crop.planting {j + 1}: planted {other.planted} while planting {k + 1} "
                    f"({one.planted} to {one.removed}) still stands; remove that first"
                )


def _stay(one: Planting) -> float:
    return (day_number(one.removed) - day_number(one.planted)) % YEAR_DAYS
