"""Heat through gaps and whole coverings: gas in a gap by slope and spacing, U-values of banded stacks.

EN 673:2011 for the gas table, upright, 45 degree and level gaps and the boundary coefficients; Hollands,
Unny, Raithby & Konicek (1976), J. Heat Transfer 98:189 for slopes to 60 degrees, the warm side below.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from canopy.bands import THERMAL, BandSet
from canopy.optics import Covering, Gap, ThermalOptics
from canopy.planck import band_emission
from weather.constants import GRAVITY

Floats = NDArray[np.float64]
Gas = Literal["air", "argon"]
Method = Literal["hollands", "en673"]

EN_MEAN_K: Final = 283.0  # EN 673, 5.3: mean temperature of the gap
EN_DELTA_K: Final = 15.0  # EN 673, 5.3: temperature difference over all gaps
REFERENCE_EMISSIVITY: Final = 0.837  # EN 673, 5.2: bare soda-lime glass

_REFERENCE_K: Final = 283.15


@dataclass(frozen=True)
class _Gas:
    """EN 673 table 1 at 10 degC and per kelvin."""

    conductivity: float  # W m-1 K-1
    conductivity_per_k: float
    viscosity: float  # Pa s
    viscosity_per_k: float
    density: float  # kg m-3, goes with 1/T
    heat: float  # J kg-1 K-1


_GASES: Final = {
    "air": _Gas(0.02496, 8.0e-5, 1.761e-5, 5.0e-8, 1.232, 1008.0),
    "argon": _Gas(0.01684, 5.0e-5, 2.164e-5, 6.33e-8, 1.699, 519.0),
}
_EN_SLOPES: Final = np.array([0.0, 45.0, 90.0])
_EN_FACTOR: Final = np.array([0.16, 0.10, 0.035])  # EN 673, 5.3.1: Nu = A (Gr Pr)^n
_EN_POWER: Final = np.array([0.28, 0.31, 0.38])
_STEEP_DEG: Final = 60.0


def gas_conductivity(mean_t_k: ArrayLike, gas: Gas = "air") -> Floats:
    """Return conductivity of a still gas, W m-1 K-1 (EN 673 table 1: straight between -10 and 20 degC)."""
    row = _GASES[gas]
    warm = np.asarray(mean_t_k, dtype=np.float64) - _REFERENCE_K
    return np.asarray(row.conductivity + row.conductivity_per_k * warm)


def _rayleigh(mean_t_k: Floats, gas: Gas) -> Floats:
    """Return the Rayleigh number per K and m3; the table's straight lines serve -50 to 100 degC."""
    row = _GASES[gas]
    viscosity = row.viscosity + row.viscosity_per_k * (mean_t_k - _REFERENCE_K)
    density = row.density * _REFERENCE_K / mean_t_k
    return np.asarray(
        GRAVITY * density**2 * row.heat / (mean_t_k * viscosity * gas_conductivity(mean_t_k, gas))
    )


def gap_convection(
    delta_t: ArrayLike,
    mean_t_k: ArrayLike,
    thickness_m: float,
    slope_deg: float,
    gas: Gas = "air",
    method: Method = "hollands",
) -> Floats:
    """Return conductance of the gas in a gap, W m-2 K-1, on the broadcast of delta_t and mean_t_k.

    Parameters: inner less outer face temperature (K; negative where heat flows down), mean temperature (K),
    gap (m), slope from the horizontal (0 level, 90 upright).
    """
    return gap_convection_slope(delta_t, mean_t_k, thickness_m, slope_deg, gas, method)[0]


def gap_convection_slope(
    delta_t: ArrayLike,
    mean_t_k: ArrayLike,
    thickness_m: float,
    slope_deg: float,
    gas: Gas = "air",
    method: Method = "hollands",
) -> tuple[Floats, Floats]:
    """Return `gap_convection` and its derivative by delta_t (W m-2 K-2), mean temperature held.

    Heat downwards: Nu = 1 + (Nu_upright - 1) sin(slope), Arnold et al. (1976) as used in ISO 15099.
    """
    d, t = np.broadcast_arrays(np.asarray(delta_t, dtype=np.float64), np.asarray(mean_t_k, dtype=np.float64))
    k = gas_conductivity(t, gas)
    scale = _rayleigh(np.asarray(t), gas) * thickness_m**3
    ra = scale * np.abs(d)
    if method == "en673":
        up, slope_up = _power_law(
            ra,
            float(np.interp(slope_deg, _EN_SLOPES, _EN_FACTOR)),
            float(np.interp(slope_deg, _EN_SLOPES, _EN_POWER)),
        )
    else:
        up, slope_up = _inclined(ra, slope_deg)
    upright, slope_upright = _power_law(ra, _EN_FACTOR[2], _EN_POWER[2])
    share = np.sin(np.radians(slope_deg))
    nu = np.where(d >= 0.0, up, 1.0 + (upright - 1.0) * share)
    by_ra = np.where(d >= 0.0, slope_up, slope_upright * share)
    return np.asarray(k * nu / thickness_m), np.asarray(k / thickness_m * by_ra * scale * np.sign(d))


def _power_law(ra: Floats, factor: float, power: float) -> tuple[Floats, Floats]:
    """Return Nu = max(1, A Ra^n) and its derivative."""
    safe = np.maximum(ra, 1e-12)
    nu = factor * safe**power
    return np.maximum(1.0, nu), np.where(nu > 1.0, power * nu / safe, 0.0)


def _inclined(ra: Floats, slope_deg: float) -> tuple[Floats, Floats]:
    """Return Nu and dNu/dRa, warm side below: Hollands et al. (1976) to 60, then to EN 673 upright."""
    beta = np.radians(min(slope_deg, _STEEP_DEG))
    x = np.maximum(ra * np.cos(beta), 1e-12)
    first = 1.0 - 1708.0 / x
    second = 1.0 - 1708.0 * np.sin(1.8 * beta) ** 1.6 / x
    third = np.cbrt(x / 5830.0) - 1.0
    on1, on3 = first > 0.0, third > 0.0
    nu = 1.0 + 1.44 * np.where(on1, first * second, 0.0) + np.where(on3, third, 0.0)
    d1 = 1708.0 / x**2
    by_x = 1.44 * np.where(on1, d1 * second + first * (1.0 - second) / x, 0.0)
    by_x = by_x + np.where(on3, np.cbrt(x / 5830.0) / (3.0 * x), 0.0)
    by_ra = by_x * np.cos(beta)
    if slope_deg <= _STEEP_DEG:
        return np.asarray(nu), np.asarray(by_ra)
    part = (slope_deg - _STEEP_DEG) / (90.0 - _STEEP_DEG)
    upright, slope = _power_law(ra, _EN_FACTOR[2], _EN_POWER[2])
    return np.asarray((1 - part) * nu + part * upright), np.asarray((1 - part) * by_ra + part * slope)


def exchange_matrix(t: Floats, r_out: Floats, r_in: Floats) -> Floats:
    """Return exchange factors of a stack in one band, (2L + 2, 2L + 2), symmetric, rows sum to emissivity.

    Nodes: outside (black), outer and inner face of each layer from outside to inside, inside (black). Entry
    i, j is the share of what i would emit as a black face that j absorbs. Arguments (L,).
    """
    count = t.size
    size = 2 * count + 2
    # unknowns: down and up in gaps 0 ... L; columns: emission of each node
    a = np.eye(2 * (count + 1))
    source = np.zeros((2 * (count + 1), size))
    up = count + 1
    e_out, e_in = 1.0 - t - r_out, 1.0 - t - r_in
    source[0, 0] = 1.0
    source[up + count, size - 1] = 1.0
    for j in range(count):
        a[j + 1, j] -= t[j]
        a[j + 1, up + j + 1] -= r_in[j]
        source[j + 1, 2 + 2 * j] = e_in[j]
        a[up + j, up + j + 1] -= t[j]
        a[up + j, j] -= r_out[j]
        source[up + j, 1 + 2 * j] = e_out[j]
    field = np.linalg.solve(a, source)
    take = np.zeros((size, size))
    take[0] = field[up]
    take[size - 1] = field[count]
    for j in range(count):
        take[1 + 2 * j] = e_out[j] * field[j]
        take[2 + 2 * j] = e_in[j] * field[up + j + 1]
    return np.asarray(take.T)


def u_value(
    thermal: ThermalOptics,
    resistance: Sequence[float],
    gaps: Sequence[Gap],
    *,
    he: float = 25.0,
    hi: float = 7.7,
    slope_deg: float = 90.0,
    bands: BandSet = THERMAL,
    method: Method = "en673",
) -> float:
    """Return the U-value of a stack, W m-2 K-1 per m2 of covering, also of layers that pass long-wave.

    he, hi are surface coefficients over bare glass (emissivity .837, EN 673 5.2); their convective part is
    what radiation at 283 K leaves. Both sides are black at the air's temperature. Each gap takes the same
    share of EN 673's 15 K.
    """
    count = len(resistance)
    size = 2 * count + 2
    weight = _band_coefficients(bands)
    g = np.zeros((size, size))
    for b in range(len(bands)):
        g += weight[b] * exchange_matrix(
            thermal.transmit[:, b], thermal.reflect_outside[:, b], thermal.reflect_inside[:, b]
        )
    convective = REFERENCE_EMISSIVITY * float(weight.sum())
    links = [(0, 1, he - convective), (size - 2, size - 1, hi - convective)]
    links += [(1 + 2 * j, 2 + 2 * j, 1.0 / max(resistance[j], 1e-9)) for j in range(count)]
    for j, gap in enumerate(gaps):
        gas = gap_convection(EN_DELTA_K / len(gaps), EN_MEAN_K, gap.thickness_m, slope_deg, gap.gas, method)
        links.append((2 + 2 * j, 3 + 2 * j, float(gas) + gap.web_conductance))
    for i, j, h in links:
        g[i, j] += h
        g[j, i] += h
    np.fill_diagonal(g, 0.0)
    laplace = np.diag(g.sum(axis=1)) - g
    inner = slice(1, size - 1)
    temps = np.zeros(size)
    temps[-1] = 1.0
    temps[inner] = np.linalg.solve(laplace[inner, inner], g[inner, size - 1])
    return float(g[size - 1] @ (1.0 - temps))


def _band_coefficients(bands: BandSet) -> Floats:
    """Return 4 sigma T^3 of each band at 283 K by its share of emission, W m-2 K-1, outer bands to 0 and inf.

    EN 673 weighs emissivity by emission (EN 12898), so this does too; weights by the derivative of emission
    would put .01 more on the emissivity of glass.
    """
    return np.asarray(4.0 * band_emission(bands, EN_MEAN_K, to_ends=True) / EN_MEAN_K)


def covering_u_value(covering: Covering, *, wet: bool = False, slope_deg: float = 90.0) -> float:
    """Return the U-value of a covering with EN 673's coefficients, W m-2 K-1 per m2 of covering."""
    thermal = covering.thermal_wet if wet else covering.thermal_dry
    return u_value(thermal, covering.resistance, covering.gaps, slope_deg=slope_deg)
