"""Water in the house air: saturation fast enough for the solver, stomata, Lewis, the film on the covering."""

from __future__ import annotations

from functools import lru_cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

from weather.constants import CP_AIR, CP_VAPOUR, CP_WATER, LATENT_HEAT_0C, WATER_AIR_RATIO
from weather.psychro import TRIPLE_POINT_C, saturation_pressure

Floats = NDArray[np.float64]

REFERENCE_C: Final = 20.0  # liquid water at this temperature carries no heat in the balance
LATENT_HEAT: Final = LATENT_HEAT_0C - (CP_WATER - CP_VAPOUR) * REFERENCE_C  # J/kg at the reference
LEWIS: Final = 0.857 ** (-2.0 / 3.0)  # (heat over vapour diffusivity of air, .857)^-2/3; handbooks
FOG_S: Final = 36.0  # s, how fast vapour above saturation turns to fog and settles; short against the hour
FILM_FULL_KG_M2: Final = 0.010  # film that counts as a fully wet face: 10 µm of water; see `film_step`
FILM_MAX_KG_M2: Final = 0.060  # kg per m2 cover held before run-off; common practice, 40-100 g/m2
STOMATA_MIN_S_M: Final = 82.0  # Stanghellini (1987), tomato, minimum leaf resistance
STOMATA_MAX_S_M: Final = 5000.0  # cuticle in the dark and cold; common practice
STOMATA_RANGE_C: Final = (10.0, 33.0)  # leaf temperatures that the response covers
DEFICIT_SCALE_PA: Final = 400.0  # see `stomata`

_FIT_LOW_C, _FIT_HIGH_C, _FIT_DEGREE = -80.0, 110.0, 6


@lru_cache(maxsize=1)
def _saturation_fit() -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Power series of ln(saturation pressure) over scaled temperature, ice side and water side."""
    out = []
    for low, high in ((_FIT_LOW_C, TRIPLE_POINT_C), (TRIPLE_POINT_C + 1e-9, _FIT_HIGH_C)):
        mid, half = 0.5 * (low + high), 0.5 * (high - low)
        nodes = np.cos(np.pi * (np.arange(40) + 0.5) / 40)
        log = np.log(saturation_pressure(mid + half * nodes))
        cheb = np.polynomial.chebyshev.chebfit(nodes, log, _FIT_DEGREE)
        out.append(np.asarray(np.polynomial.chebyshev.cheb2poly(cheb), dtype=np.float64))
    return out[0], out[1]


def _side(temp_c: Floats, low: float, high: float, c: NDArray[np.float64]) -> tuple[Floats, Floats]:
    half = 0.5 * (high - low)
    z = (temp_c - 0.5 * (low + high)) / half
    value = np.full_like(temp_c, c[-1])
    slope = np.zeros_like(temp_c)
    for k in range(len(c) - 2, -1, -1):
        slope *= z
        slope += value
        value *= z
        value += c[k]
    np.exp(value, out=value)
    slope *= value
    slope /= half
    return value, slope


def saturation(temp_c: Floats) -> tuple[Floats, Floats]:
    """Saturation pressure (Pa; over ice below 0.01 degC) and its slope (Pa/K).

    Polynomials of ln e fitted to `weather.psychro.saturation_pressure`, within 1e-5 over -60 ... 90 degC.
    """
    ice, water = _saturation_fit()
    value, slope = _side(temp_c, TRIPLE_POINT_C, _FIT_HIGH_C, water)
    cold = temp_c <= TRIPLE_POINT_C
    if cold.any():
        cold_value, cold_slope = _side(temp_c, _FIT_LOW_C, TRIPLE_POINT_C, ice)
        np.copyto(value, cold_value, where=cold)
        np.copyto(slope, cold_slope, where=cold)
    return value, slope


def mixing_ratio(vapour_pa: Floats, pressure_pa: Floats) -> tuple[Floats, Floats]:
    """Humidity ratio kg/kg dry air (ASHRAE ch. 1 eq. 20) and its slope per Pa."""
    dry = pressure_pa - vapour_pa
    return WATER_AIR_RATIO * vapour_pa / dry, WATER_AIR_RATIO * pressure_pa / (dry * dry)


def lewis_latent(pressure_pa: Floats) -> Floats:
    """Latent heat flux per Pa for each W m-2 K-1 of convection (Lewis): W m-2 Pa-1 per W m-2 K-1."""
    return np.asarray(LATENT_HEAT * WATER_AIR_RATIO * LEWIS / (pressure_pa * CP_AIR))


def light_factor(absorbed_w_m2_leaf: Floats) -> Floats:
    """Rise of the stomatal resistance in weak light, (I + 4.3) / (I + .54) (Stanghellini 1987).

    `absorbed_w_m2_leaf`: absorbed short-wave per m2 of leaf SURFACE (both sides), I = R / (2 LAI).
    """
    return np.asarray((absorbed_w_m2_leaf + 4.3) / (absorbed_w_m2_leaf + 0.54))


def stomata(temp_leaf_c: Floats, light: Floats, day: Floats) -> tuple[Floats, Floats]:
    """Leaf internal resistance without the humidity response, s/m, and its slope with leaf temperature.

    r = 82 s/m x light x temperature (Stanghellini 1987): 1 + .023 (T - 24.5)^2 by day,
    1 + .005 (T - 33.6)^2 by night, held beyond STOMATA_RANGE_C where she did not measure, never above
    STOMATA_MAX_S_M. The response to dry air, in that work 1 + 4.3 D^2 (kPa) up to 3.8, enters in
    `transpiration` as 1 + D / 0.4 kPa (form of Leuning 1995, scale fitted by us to that curve over
    0-1.5 kPa): with the square a drier air can lower the flux, and the hour has more than one answer.
    """
    by = np.where(day > 0.5, 0.023, 0.005)
    seen = np.clip(temp_leaf_c, STOMATA_RANGE_C[0], STOMATA_RANGE_C[1])
    off = seen - np.where(day > 0.5, 24.5, 33.6)
    r = STOMATA_MIN_S_M * light * (1.0 + by * off * off)
    slope = STOMATA_MIN_S_M * light * 2.0 * by * off * (seen == temp_leaf_c)
    high = r > STOMATA_MAX_S_M
    return np.where(high, STOMATA_MAX_S_M, r), np.where(high, 0.0, slope)


def transpiration(
    deficit_pa: Floats, boundary_m_s: Floats, resistance_s_m: Floats, unit: Floats
) -> tuple[Floats, Floats, Floats, Floats]:
    """Latent heat leaving the leaves, W/m2: value, slopes with deficit, boundary conductance, resistance.

    `unit` = 2 LAI rho cp / gamma (W m-2 Pa-1 per m/s); deficit = saturation at the leaf
    less the air's vapour. Big leaf, both faces (Stanghellini 1987). A deficit below
    zero is dew: no stomata between.
    """
    wet = deficit_pa < 0.0
    dry = np.maximum(deficit_pa, 0.0)
    inner = np.where(wet, 0.0, resistance_s_m * (1.0 + dry / DEFICIT_SCALE_PA))
    total = 1.0 / boundary_m_s + inner
    value = unit * deficit_pa / total
    per_total = -value / total
    by_deficit = unit / total + per_total * np.where(wet, 0.0, resistance_s_m / DEFICIT_SCALE_PA)
    by_boundary = -per_total / (boundary_m_s * boundary_m_s)
    by_resistance = per_total * np.where(wet, 0.0, 1.0 + dry / DEFICIT_SCALE_PA)
    return value, by_deficit, by_boundary, by_resistance


def film_step(before: Floats, inflow: Floats) -> tuple[Floats, Floats, Floats, Floats, Floats]:
    """One implicit step of the water film on the inner face, kg per m2 cover.

    `inflow` is what a fully wet face would take up in the step (negative: give off). A face with less than
    FILM_FULL_KG_M2 is wet in patches: its wet share w = film / full carries evaporation and the wet optics.
    Above FILM_MAX_KG_M2 the rest runs off. Returns film, net uptake (run-off included), run-off, and the
    slopes of the film with `before` and with `inflow`. (Uptake: slope with `before` is that of film + run-off
    less one; see `film_slopes`.)
    """
    grown = before + inflow
    taking = inflow >= 0.0
    patchy = ~taking & (grown < FILM_FULL_KG_M2)
    divisor = 1.0 - np.minimum(inflow, 0.0) / FILM_FULL_KG_M2
    free = np.where(patchy, before / divisor, grown)
    over = np.maximum(free - FILM_MAX_KG_M2, 0.0)
    by_before = np.where(patchy, 1.0 / divisor, 1.0)
    by_inflow = np.where(patchy, before / (FILM_FULL_KG_M2 * divisor * divisor), 1.0)
    return free - over, free - before, over, by_before, by_inflow


def film_share(before: Floats, inflow: Floats) -> tuple[Floats, Floats, Floats]:
    """Share of `inflow` that a step of `film_step` really takes up, with its slopes by `before` and `inflow`.

    1 on a fully wet or a collecting face; film / (full - inflow) where patches dry.
    """
    patchy = (inflow < 0.0) & (before + inflow < FILM_FULL_KG_M2)
    room = FILM_FULL_KG_M2 - np.minimum(inflow, 0.0)
    share = np.where(patchy, before / room, 1.0)
    return share, np.where(patchy, 1.0 / room, 0.0), np.where(patchy, before / room**2, 0.0)
