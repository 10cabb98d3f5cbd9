"""Blackbody radiation: power, band shares, peak, photons. NumPy only; every function takes arrays.

Planck (1901) with the constants of `weather.constants`; shares are the integral of Planck's law from 0 to
wavelength x temperature, divided by sigma T^4.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from canopy.bands import BandSet
from weather.constants import (
    AVOGADRO_PER_MOL,
    C1_W_M2,
    C2_UM_K,
    LIGHT_SPEED_M_S,
    PLANCK_J_S,
    STEFAN_BOLTZMANN,
    WIEN_B_UM_K,
)

Floats = NDArray[np.float64]

_SWITCH: Final = 1.6  # x = C2/(lambda T): exponential series above, power series below
_TERMS: Final = 18  # exp(-18 * 1.6) = 3e-13
_NORM: Final = 15.0 / np.pi**4
# Integral of x^3/(e^x - 1) from 0: x^3 (1/3 - x/8 + sum B_2k x^2k / ((2k + 3) (2k)!)),
# Abramowitz & Stegun 27.1.1
_POWER: Final = (
    (0, 1.0 / 3.0),
    (1, -1.0 / 8.0),
    (2, 1.0 / 60.0),
    (4, -1.0 / 5040.0),
    (6, 1.0 / 272160.0),
    (8, -1.0 / 13305600.0),
    (10, 1.0 / 622702080.0),
    (12, -691.0 / 2730.0 / 15.0 / 479001600.0),
    (14, 7.0 / 6.0 / 17.0 / 87178291200.0),
    (16, -3617.0 / 510.0 / 19.0 / 20922789888000.0),
    (18, 43867.0 / 798.0 / 21.0 / 6402373705728000.0),
)
PHOTON_UMOL_PER_J_UM: Final = 1.0 / (PLANCK_J_S * LIGHT_SPEED_M_S * AVOGADRO_PER_MOL)
"""µmol of photons per joule and µm of wavelength: 8.3594 (E = h c N_A / lambda)."""


def blackbody_power(wavelength_um: ArrayLike, temp_k: ArrayLike) -> Floats:
    """Return hemispherical blackbody power per µm, W m-2 µm-1, on the broadcast of both arguments.

    Planck's law C1 lambda^-5 / (exp(C2 / lambda T) - 1); 0 where the exponent overflows.
    """
    lam = np.asarray(wavelength_um, dtype=np.float64)
    x = C2_UM_K / (lam * np.asarray(temp_k, dtype=np.float64))
    out: Floats = C1_W_M2 * 1e24 / lam**5 / np.expm1(np.minimum(x, 700.0))
    return np.asarray(np.where(x > 700.0, 0.0, out))


def share_below(lambda_t_um_k: ArrayLike) -> Floats:
    """Return the share of blackbody power at wavelengths below lambda, by lambda x T in µm K (0 ... inf).

    Exponential series (Chang & Rhee 1984, Int. Commun. Heat Mass Transfer 11:451) for short wavelengths,
    power series for long ones; error below 1e-12.
    """
    lt = np.asarray(lambda_t_um_k, dtype=np.float64)
    flat = np.atleast_1d(lt).ravel()
    out = np.zeros(flat.shape)
    out[np.isposinf(flat)] = 1.0
    use = (flat > 0.0) & np.isfinite(flat)
    x = np.zeros(flat.shape)
    x[use] = C2_UM_K / flat[use]
    short = use & (x >= _SWITCH)
    if short.any():
        out[short] = _exponential(x[short])
    long = use & (x < _SWITCH)
    if long.any():
        y = x[long]
        total = sum(c * y**p for p, c in _POWER)
        out[long] = 1.0 - _NORM * y**3 * total
    return out.reshape(lt.shape)


def _exponential(x: Floats) -> Floats:
    """Return 15/pi^4 sum e^-nx (x^3/n + 3x^2/n^2 + 6x/n^3 + 6/n^4)."""
    step = np.exp(-np.minimum(x, 700.0))
    power = np.ones_like(x)
    total = np.zeros_like(x)
    for n in range(1, _TERMS + 1):
        power = power * step
        total += power * (((x / n + 3.0 / n**2) * x + 6.0 / n**3) * x + 6.0 / n**4)
    # x^3/n = ((x/n) x) x: Horner above
    return np.asarray(_NORM * total)


def band_share(lower_um: ArrayLike, upper_um: ArrayLike, temp_k: ArrayLike) -> Floats:
    """Return the share of sigma T^4 between two wavelengths (µm; upper may be inf), on the broadcast."""
    t = np.asarray(temp_k, dtype=np.float64)
    return np.asarray(share_below(np.asarray(upper_um) * t) - share_below(np.asarray(lower_um) * t))


def band_emission(bands: BandSet, temp_k: ArrayLike, *, to_ends: bool = False) -> Floats:
    """Return blackbody emission per band, W/m2, shaped (bands, *temp).

    With `to_ends` the outer bands reach to 0 and infinity, so that the bands add up to sigma T^4.
    """
    t = np.asarray(temp_k, dtype=np.float64)
    edges = np.array(bands.edges)
    if to_ends:
        edges[0], edges[-1] = 0.0, np.inf
    below = share_below(edges.reshape(-1, *[1] * t.ndim) * t)
    return np.asarray(np.diff(below, axis=0) * STEFAN_BOLTZMANN * t**4)


def peak_wavelength_um(temp_k: ArrayLike) -> Floats:
    """Return the wavelength of greatest power per µm (Wien's displacement law)."""
    return np.asarray(WIEN_B_UM_K / np.asarray(temp_k, dtype=np.float64))


def photons_umol(wavelength_um: ArrayLike, joules: ArrayLike) -> Floats:
    """Return µmol of photons that carry this energy (J, W/m2, ...) at this wavelength."""
    return np.asarray(np.asarray(joules, dtype=np.float64) * np.asarray(wavelength_um) * PHOTON_UMOL_PER_J_UM)
