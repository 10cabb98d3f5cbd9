"""The sky in thermal bands: a window part (8-14 µm) and the rest, with the weather's total kept."""

from __future__ import annotations

from itertools import pairwise
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import THERMAL, BandSet
from canopy.longwave import share_between
from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K

Floats = NDArray[np.float64]

WINDOW_UM: Final = (8.0, 14.0)  # atmospheric window
REST_DEPTH: Final = 0.118  # what the rest of the spectrum lacks to a black sky in dry air; fitted, see below
REST_SCALE_PA: Final = 420.0  # vapour pressure over which that lack fades
WINDOW_MIN: Final = 0.05  # a clear, dry window still emits (ozone, aerosol)
WINDOW_MAX: Final = 1.0


def window_and_rest(
    longwave_down: Floats, temp_air_c: Floats, vapour_pressure_pa: Floats
) -> tuple[Floats, Floats, Floats]:
    """Emissivity of the window and of the rest, and the Planck share of the window, each (N,).

    Outside the window the sky is nearly black: 1 - .118 exp(-e / 4.2 hPa) (fit to banded clear-sky
    emission; the idea of a window and a rest is Berdahl & Fromberg 1982, Solar Energy 29:299). The window
    then carries what is left of the measured total, inside .05 ... 1, and the rest closes the sum. Under
    fog or a warm cloud base either may exceed 1: the layer is warmer than the air at screen height.
    """
    black = STEFAN_BOLTZMANN * (temp_air_c + ZERO_C_K) ** 4
    share = share_between(WINDOW_UM[0], WINDOW_UM[1], temp_air_c + ZERO_C_K)
    total = longwave_down / black
    rest = 1.0 - REST_DEPTH * np.exp(-vapour_pressure_pa / REST_SCALE_PA)
    window = np.clip((total - rest * (1.0 - share)) / share, WINDOW_MIN, WINDOW_MAX)
    window = np.minimum(window, total / share)  # never more than the whole
    rest = (total - window * share) / (1.0 - share)
    return window, rest, share


def sky_bands(
    longwave_down: Floats, temp_air_c: Floats, vapour_pressure_pa: Floats, bands: BandSet = THERMAL
) -> Floats:
    """Downward sky radiation per thermal band, W/m2 on the horizontal, (T, N); sums to `longwave_down`.

    The outer bands reach to 0 and infinity. A band that lies partly in the window takes each part with its
    own emissivity, weighted by Planck's law at air temperature.
    """
    temp_k = temp_air_c + ZERO_C_K
    window, rest, _ = window_and_rest(longwave_down, temp_air_c, vapour_pressure_pa)
    black = STEFAN_BOLTZMANN * temp_k**4
    edges = [0.0, *bands.edges[1:-1], np.inf]
    rows = []
    for low, high in pairwise(edges):
        inside_low, inside_high = max(low, WINDOW_UM[0]), min(high, WINDOW_UM[1])
        whole = share_between(low, high, temp_k)
        inside = share_between(inside_low, inside_high, temp_k) if inside_high > inside_low else 0.0 * whole
        rows.append(black * (window * inside + rest * (whole - inside)))
    sky = np.array(rows)
    return np.asarray(sky * (longwave_down / sky.sum(axis=0)))  # rounding only
