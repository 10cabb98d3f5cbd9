"""Seasonal shading paint: sprayed on by date, worn off by weather, scattering what it lets through."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from weather.errors import UserError
from weather.record import Weather

Floats = NDArray[np.float64]

PAINT_BAND_FACTOR = (1.15, 1.0, 0.97, 0.92, 0.80)
"""Optical depth of white chalk paint per band, PAR = 1: pigment of about a micrometre scatters long waves
less (common practice; single paints differ by .1)."""
PAINT_DIFFUSING = 0.7
"""Share of the beam let through by a full coat that has been scattered (common practice)."""
FULL_SHADE = 0.5
"""Shade of PAR at which a coat counts as full."""
PAINT_ABSORBED = 0.08
"""Share of the light that paint holds back which it absorbs (and hands to the outer sheet); white paint
reflects the rest (common practice)."""


@dataclass(frozen=True)
class Paint:
    """Paint on the whole covering, hour by hour; (B, N)."""

    through: Floats  # share of all light let through
    beam: Floats  # share of the beam let through unscattered
    absorbed: Floats  # share of all light kept by the coat


def paint_factor(weather: Weather, rows: Sequence[Sequence[object]]) -> Floats:
    """Return the share of PAR that paint takes away, hour by hour, (N,).

    rows: ("MM-DD", shade 0-0.9, wear-off days) each. A coat starts at its shade on its day and fades in a
    straight line to nothing at the end of its wear-off; a new coat on an old one adds optical depth.

    Raises
    ------
    UserError
        For a row that is not of this form.
    """
    hours = weather.time.astype("datetime64[s]")
    year = hours.astype("datetime64[Y]")
    day = (hours - year).astype("timedelta64[s]").astype(float) / 86400.0
    depth = np.zeros(len(hours))
    for row in rows:
        start, shade, wear = _row(row)
        age = np.mod(day - start, 365.0)
        left = shade * np.clip(1.0 - age / wear, 0.0, 1.0)
        depth -= np.log1p(-left)
    return -np.expm1(-depth)


def paint_optics(shade: Floats) -> Paint:
    """Return the coat's optics in the solar bands for shades of PAR (N,).

    The coat is a scattering layer of optical depth -ln(1 - shade) in PAR, scaled by band.
    """
    factor = np.array(PAINT_BAND_FACTOR)[:, None]
    if len(factor) != len(SOLAR):
        raise ValueError(f"paint is tabled for {len(factor)} bands, not {len(SOLAR)}")
    depth = -np.log1p(-np.clip(shade, 0.0, 0.95))
    through = np.exp(-factor * depth)
    scattered = PAINT_DIFFUSING * np.clip(depth / -np.log1p(-FULL_SHADE), 0.0, 1.0)
    return Paint(through, through * (1.0 - scattered), PAINT_ABSORBED * (1.0 - through))


def _row(row: Sequence[object]) -> tuple[float, float, float]:
    """Return day of year (0 = 1 January), shade and wear-off days."""
    where = f"house -> paint: {list(row)!r}"
    if len(row) != 3:
        raise UserError(f'{where}; allowed is ["MM-DD", shade 0-0.9, wear-off days]')
    text, shade, wear = row
    try:
        date = np.datetime64(f"1990-{text}", "D")
    except ValueError:
        raise UserError(f"{where}; the date is MM-DD") from None
    numbers = [float(x) for x in (shade, wear) if isinstance(x, int | float) and not isinstance(x, bool)]
    if len(numbers) != 2 or not 0.0 <= numbers[0] <= 0.9 or not numbers[1] > 0.0:
        raise UserError(f"{where}; shade lies in 0-0.9 and wear-off days above 0")
    return float((date - np.datetime64("1990-01-01", "D")).astype(int)), numbers[0], numbers[1]
