"""Long-wave exchange in thermal bands between floor, pipes, stand, screens, covering layers and outside.

Every plane is a layer with transmission, a reflectance for each face and, by Kirchhoff's law, the emission
that is left. In each band the fluxes between the planes are solved with all inter-reflections by the adding
method; what comes out is one symmetric matrix of exchange areas (m2 per m2 floor) per band. A net flux is
then `area * (E_i - E_j)` with the blackbody emission E of the band at each surface's own temperature.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import THERMAL, BandSet
from canopy.planck import share_below
from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K

Floats = NDArray[np.float64]

FIT_LOW_C: Final = -75.0  # range of the fitted band shares; beyond it they are still smooth
FIT_HIGH_C: Final = 115.0
FIT_DEGREE: Final = 6


def share_between(low_um: float, high_um: float, temp_k: Floats) -> Floats:
    """Share of blackbody power between two wavelengths (0 and inf allowed), shape of `temp_k`."""
    temp = np.asarray(temp_k, dtype=float)

    def below(wavelength_um: float) -> Floats:
        if np.isinf(wavelength_um):
            return np.ones_like(temp)
        return share_below(wavelength_um * temp) if wavelength_um > 0.0 else np.zeros_like(temp)

    return below(high_um) - below(low_um)


@lru_cache(maxsize=16)
def _share_fit(bands: BandSet) -> NDArray[np.float64]:
    """Power-series coefficients (degree+1, T-1) of the band shares over the scaled temperature."""
    nodes = np.cos(np.pi * (np.arange(64) + 0.5) / 64)
    temp_k = ZERO_C_K + 0.5 * (FIT_LOW_C + FIT_HIGH_C) + 0.5 * (FIT_HIGH_C - FIT_LOW_C) * nodes
    edges = [0.0, *bands.edges[1:-1], np.inf]
    columns = []
    for low, high in pairwise(edges[:-1]):
        cheb = np.polynomial.chebyshev.chebfit(nodes, share_between(low, high, temp_k), FIT_DEGREE)
        columns.append(np.polynomial.chebyshev.cheb2poly(cheb))
    table = np.array(columns, dtype=np.float64).reshape(len(bands) - 1, FIT_DEGREE + 1)
    return np.asarray(table.T, dtype=np.float64)


def band_emission(temp_c: Floats, bands: BandSet = THERMAL) -> tuple[Floats, Floats]:
    """Blackbody emission per band and its slope, W/m2 and W m-2 K-1, shape (T, *temp_c.shape).

    The shares are polynomials fitted to Planck's law (Chebyshev, within 1e-5 of each share from -45 to
    95 degC); the outer bands reach to 0 and infinity, and the last one is the rest, so that the bands sum
    to sigma T^4 exactly.
    """
    coefficients = _share_fit(bands)
    temp_k = temp_c + ZERO_C_K
    square = temp_k * temp_k
    slope_all = (4.0 * STEFAN_BOLTZMANN) * square * temp_k
    all_bands = 0.25 * slope_all * temp_k
    value = np.empty((len(bands), *temp_c.shape))
    slope = np.empty_like(value)
    z = (temp_c - 0.5 * (FIT_LOW_C + FIT_HIGH_C)) / (0.5 * (FIT_HIGH_C - FIT_LOW_C))
    value[-1], slope[-1] = all_bands, slope_all
    for band in range(len(bands) - 1):
        c = coefficients[:, band]
        share = np.full_like(temp_c, c[-1])
        rise = np.zeros_like(temp_c)
        for k in range(FIT_DEGREE - 1, -1, -1):
            rise *= z
            rise += share
            share *= z
            share += c[k]
        np.multiply(all_bands, share, out=value[band])
        rise *= all_bands
        rise *= 2.0 / (FIT_HIGH_C - FIT_LOW_C)
        np.multiply(slope_all, share, out=slope[band])
        slope[band] += rise
        value[-1] -= value[band]
        slope[-1] -= slope[band]
    return value, slope


@dataclass(frozen=True)
class Plane:
    """One plane of the stack, from the floor upwards; every array broadcasts to (T, K), K cases at once.

    `size` is its m2 per m2 floor; fluxes are kept per m2 floor. `surface` is False for a fictive plane that
    only redirects (the step from the floor's area to that of the covering) and has no temperature.
    """

    pass_up: Floats
    pass_down: Floats
    reflect_below: Floats  # of what arrives from below
    reflect_above: Floats  # of what arrives from above
    size: float = 1.0
    surface: bool = True


def widening(size: float) -> Plane:
    """Step from the floor's area to a covering of `size` m2 per m2 floor that sees itself by 1 - 1/size."""
    one, zero = np.ones((1, 1)), np.zeros((1, 1))
    return Plane(one, one / size, zero, one - 1.0 / size, surface=False)


def opaque(emissivity: Floats) -> Plane:
    """A plane that nothing passes, with this emissivity upwards."""
    e = np.asarray(emissivity, dtype=float)
    return Plane(0 * e, 0 * e, 1.0 - e, 1.0 - e)


@dataclass(frozen=True)
class ExchangeAreas:
    """Exchange areas per m2 floor: `pair[i, j]` (n, n, T, K) symmetric; `outside[i]` (n, T, K).

    `outside[i]` is the share of what falls on the covering from outside that surface i absorbs (per m2
    cover); by reciprocity its exchange area with outside is `cover_size * outside[i]`.
    """

    pair: Floats
    outside: Floats
    cover_size: float


def exchange_areas(planes: list[Plane]) -> ExchangeAreas:
    """Solve a stack of planes (floor first, outermost covering layer last) by the adding method."""
    shape = np.broadcast_shapes(*(np.shape(p.pass_up) for p in planes))
    m = len(planes)
    below = [np.zeros(shape)] * (m + 1)  # reflectance of all below interface i, for flux going down
    above = [np.zeros(shape)] * (m + 1)  # reflectance of all above interface i, for flux going up
    for i, p in enumerate(planes):
        below[i + 1] = p.reflect_above + p.pass_down * p.pass_up * below[i] / (1 - p.reflect_below * below[i])
    for i in range(m - 1, -1, -1):
        p = planes[i]
        above[i] = p.reflect_below + p.pass_up * p.pass_down * above[i + 1] / (
            1 - p.reflect_above * above[i + 1]
        )
    take_below = [1 - p.pass_up - p.reflect_below for p in planes]
    take_above = [1 - p.pass_down - p.reflect_above for p in planes]

    def absorbed(start: int, upward: bool, source: Floats) -> list[Floats]:
        """Absorption in every plane of a source that starts at interface `start`, up or down."""
        up = [np.zeros(shape)] * (m + 1)
        down = [np.zeros(shape)] * (m + 1)
        gain = source / (1 - above[start] * below[start])
        up[start] = gain if upward else below[start] * gain
        down[start] = above[start] * gain if upward else gain
        for i in range(start, m):
            p = planes[i]
            up[i + 1] = p.pass_up * up[i] / (1 - p.reflect_above * above[i + 1])
            down[i + 1] = above[i + 1] * up[i + 1]
        for i in range(start - 1, -1, -1):
            p = planes[i]
            down[i] = p.pass_down * down[i + 1] / (1 - p.reflect_below * below[i])
            up[i] = below[i] * down[i]
        return [take_below[i] * up[i] + take_above[i] * down[i + 1] for i in range(m)]

    solid = [i for i, p in enumerate(planes) if p.surface]
    pair = np.zeros((len(solid), len(solid), *shape))
    for row, i in enumerate(solid):
        size = planes[i].size
        upward = absorbed(i + 1, True, size * take_above[i] + np.zeros(shape))
        downward = absorbed(i, False, size * take_below[i] + np.zeros(shape)) if i > 0 else None
        for column, j in enumerate(solid):
            pair[row, column] = upward[j] + (downward[j] if downward is not None else 0.0)
    from_outside = absorbed(m, False, np.ones(shape))
    outside = np.array([from_outside[j] for j in solid])
    return ExchangeAreas(pair, outside, planes[-1].size)
