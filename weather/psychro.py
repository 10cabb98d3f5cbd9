"""Moist air: saturation, dew point, humidity, wet bulb, density. Arrays or numbers in, arrays out.

Temperatures degC, pressures Pa, humidity ratio kg/kg dry air. "ASHRAE" is ASHRAE Handbook Fundamentals
(2017), chapter 1. Its saturation pressure is over ice below the triple point and over water above. Weather
services report dew point and relative humidity over (supercooled) WATER at all temperatures (WMO-No. 8,
annex 4.A), so the weather readers use the `over="water"` forms; inside a house both are the same.
"""

from __future__ import annotations

from typing import Final, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from weather.constants import (
    CP_AIR,
    CP_VAPOUR,
    GAS_CONSTANT,
    LATENT_HEAT_0C,
    MOLAR_MASS_AIR,
    MOLAR_MASS_WATER,
    WATER_AIR_RATIO,
    ZERO_C_K,
)

Floats = NDArray[np.float64]
Over = Literal["ashrae", "water"]

TRIPLE_POINT_C: Final = 0.01  # degC, water, ITS-90
STANDARD_PRESSURE_PA: Final = 101_325.0  # Pa, standard atmosphere
SMALLEST_VAPOUR_PA: Final = 1e-2  # Pa, floor for logarithms: frost point about -88 degC


def _ln_water(temp_k: Floats) -> Floats:
    """ln of saturation pressure over liquid water, 0..200 degC (ASHRAE eq. 6)."""
    return np.asarray(
        -5.8002206e3 / temp_k
        + 1.3914993
        + temp_k * (-4.8640239e-2 + temp_k * (4.1764768e-5 - 1.4452093e-8 * temp_k))
        + 6.5459673 * np.log(temp_k)
    )


def _ln_ice(temp_k: Floats) -> Floats:
    """ln of saturation pressure over ice, -100..0 degC (ASHRAE eq. 5)."""
    return np.asarray(
        -5.6745359e3 / temp_k
        + 6.3925247
        + temp_k * (-9.677843e-3 + temp_k * (6.2215701e-7 + temp_k * (2.0747825e-9 - 9.484024e-13 * temp_k)))
        + 4.1635019 * np.log(temp_k)
    )


def _ln_supercooled(temp_k: Floats) -> Floats:
    """ln of saturation pressure over supercooled water, 123..332 K (Murphy & Koop 2005, eq. 10)."""
    ln_t = np.log(temp_k)
    return np.asarray(
        54.842763
        - 6763.22 / temp_k
        - 4.210 * ln_t
        + 0.000367 * temp_k
        + np.tanh(0.0415 * (temp_k - 218.8))
        * (53.878 - 1331.22 / temp_k - 9.44523 * ln_t + 0.014025 * temp_k)
    )


def _ln_saturation(temp_c: Floats, over: Over) -> Floats:
    temp_k = temp_c + ZERO_C_K
    cold = temp_c <= TRIPLE_POINT_C
    if not np.any(cold):
        return _ln_water(temp_k)
    below = _ln_ice(temp_k) if over == "ashrae" else _ln_supercooled(temp_k)
    return np.where(cold, below, _ln_water(temp_k))


def saturation_pressure(temp_c: ArrayLike, over: Over = "ashrae") -> Floats:
    """Saturation vapour pressure, Pa (ASHRAE eq. 5 and 6; supercooled water: Murphy & Koop 2005, eq. 10).

    Valid -100..200 degC. `over="water"` stays over liquid water below the triple point, as weather services
    do.
    """
    return np.exp(_ln_saturation(np.asarray(temp_c, dtype=float), over))


def saturation_slope(temp_c: ArrayLike) -> Floats:
    """Slope of the saturation pressure with temperature, Pa/K (derivative of ASHRAE eq. 5 and 6)."""
    temp = np.asarray(temp_c, dtype=float)
    t = temp + ZERO_C_K
    ice = (
        5.6745359e3 / t**2
        - 9.677843e-3
        + t * (2 * 6.2215701e-7 + t * (3 * 2.0747825e-9 - 4 * 9.484024e-13 * t))
        + 4.1635019 / t
    )
    water = 5.8002206e3 / t**2 - 4.8640239e-2 + t * (2 * 4.1764768e-5 - 3 * 1.4452093e-8 * t) + 6.5459673 / t
    return np.asarray(saturation_pressure(temp) * np.where(temp <= TRIPLE_POINT_C, ice, water))


def dew_point(vapour_pa: ArrayLike, over: Over = "ashrae") -> Floats:
    """Dew point (below 0.01 degC with over="ashrae": frost point), degC, of a vapour pressure in Pa.

    Newton steps on the logarithm of the saturation formulas, from the Magnus form (Alduchov & Eskridge 1996).
    """
    ln_e = np.log(np.maximum(np.asarray(vapour_pa, dtype=float), SMALLEST_VAPOUR_PA))
    x = ln_e - np.log(610.94)
    temp = np.asarray(243.04 * x / (17.625 - x))
    for _ in range(5):
        step = 1e-3
        here = _ln_saturation(temp, over)
        # one-sided towards the cold so that the branch never changes within a step
        slope = (here - _ln_saturation(temp - step, over)) / step
        temp = np.asarray(temp - (here - ln_e) / slope)
    return temp


def vapour_pressure(temp_c: ArrayLike, relative_humidity_pct: ArrayLike, over: Over = "ashrae") -> Floats:
    """Vapour pressure, Pa, from temperature and relative humidity in % (ASHRAE eq. 22)."""
    return np.asarray(
        saturation_pressure(temp_c, over) * np.asarray(relative_humidity_pct, dtype=float) / 100.0
    )


def relative_humidity(temp_c: ArrayLike, vapour_pa: ArrayLike, over: Over = "ashrae") -> Floats:
    """Relative humidity, %, not clipped (ASHRAE eq. 22)."""
    return np.asarray(100.0 * np.asarray(vapour_pa, dtype=float) / saturation_pressure(temp_c, over))


def vapour_pressure_deficit(temp_c: ArrayLike, vapour_pa: ArrayLike) -> Floats:
    """Saturation pressure less vapour pressure, Pa; negative above saturation."""
    return np.asarray(saturation_pressure(temp_c) - np.asarray(vapour_pa, dtype=float))


def humidity_ratio(vapour_pa: ArrayLike, pressure_pa: ArrayLike = STANDARD_PRESSURE_PA) -> Floats:
    """kg of water vapour per kg of dry air (ASHRAE eq. 20)."""
    e = np.asarray(vapour_pa, dtype=float)
    return np.asarray(WATER_AIR_RATIO * e / (np.asarray(pressure_pa, dtype=float) - e))


def vapour_pressure_of_ratio(ratio: ArrayLike, pressure_pa: ArrayLike = STANDARD_PRESSURE_PA) -> Floats:
    """Vapour pressure, Pa, of a humidity ratio in kg/kg (ASHRAE eq. 20 turned round)."""
    w = np.asarray(ratio, dtype=float)
    return np.asarray(np.asarray(pressure_pa, dtype=float) * w / (WATER_AIR_RATIO + w))


def absolute_humidity(temp_c: ArrayLike, vapour_pa: ArrayLike) -> Floats:
    """kg of water vapour per m3 of moist air (ideal gas)."""
    e = np.asarray(vapour_pa, dtype=float)
    return np.asarray(e * MOLAR_MASS_WATER / (GAS_CONSTANT * (np.asarray(temp_c, dtype=float) + ZERO_C_K)))


def air_density(
    temp_c: ArrayLike, pressure_pa: ArrayLike = STANDARD_PRESSURE_PA, vapour_pa: ArrayLike = 0.0
) -> Floats:
    """kg of moist air per m3: dry air and vapour as ideal gases (ASHRAE eq. 26)."""
    e = np.asarray(vapour_pa, dtype=float)
    dry = np.asarray(pressure_pa, dtype=float) - e
    temp_k = np.asarray(temp_c, dtype=float) + ZERO_C_K
    return np.asarray((dry * MOLAR_MASS_AIR + e * MOLAR_MASS_WATER) / (GAS_CONSTANT * temp_k))


def latent_heat(temp_c: ArrayLike) -> Floats:
    """Heat of vaporisation of water, J/kg (ASHRAE eq. 30 and 31: 2501 - 2.326 t kJ/kg at saturation)."""
    return np.asarray(LATENT_HEAT_0C - 2326.0 * np.asarray(temp_c, dtype=float))


def moist_air_enthalpy(temp_c: ArrayLike, ratio: ArrayLike) -> Floats:
    """J per kg of dry air above dry air and liquid water at 0 degC (ASHRAE eq. 30)."""
    t = np.asarray(temp_c, dtype=float)
    return np.asarray(CP_AIR * t + np.asarray(ratio, dtype=float) * (LATENT_HEAT_0C + CP_VAPOUR * t))


def psychrometric_constant(pressure_pa: ArrayLike, temp_c: ArrayLike = 20.0) -> Floats:
    """cp p / (ratio of molar masses x latent heat), Pa/K (FAO-56 eq. 8)."""
    return np.asarray(CP_AIR * np.asarray(pressure_pa, dtype=float) / (WATER_AIR_RATIO * latent_heat(temp_c)))


def standard_pressure(elevation_m: ArrayLike) -> Floats:
    """Pressure of the standard atmosphere at an elevation, Pa (ASHRAE eq. 3), -5000..11000 m."""
    return np.asarray(
        STANDARD_PRESSURE_PA * (1.0 - 2.25577e-5 * np.asarray(elevation_m, dtype=float)) ** 5.2559
    )


def _ratio_of_wet_bulb(temp_c: Floats, wet_c: Floats, pressure_pa: Floats) -> Floats:
    """Humidity ratio of a wet bulb (ASHRAE eq. 33 above and 35 below 0 degC)."""
    saturated = humidity_ratio(saturation_pressure(wet_c), pressure_pa)
    warm = ((2501.0 - 2.326 * wet_c) * saturated - 1.006 * (temp_c - wet_c)) / (
        2501.0 + 1.86 * temp_c - 4.186 * wet_c
    )
    cold = ((2830.0 - 0.24 * wet_c) * saturated - 1.006 * (temp_c - wet_c)) / (
        2830.0 + 1.86 * temp_c - 2.1 * wet_c
    )
    return np.where(wet_c >= 0.0, warm, cold)


def wet_bulb(
    temp_c: ArrayLike, vapour_pa: ArrayLike, pressure_pa: ArrayLike = STANDARD_PRESSURE_PA
) -> Floats:
    """Thermodynamic wet-bulb temperature, degC, to 1e-6 K (ASHRAE eq. 33 and 35, by bisection)."""
    temp, e, pressure = np.broadcast_arrays(
        *(np.asarray(a, dtype=float) for a in (temp_c, vapour_pa, pressure_pa))
    )
    ratio = humidity_ratio(e, pressure)
    low = np.minimum(dew_point(e), temp)
    high = temp.copy()
    for _ in range(28):  # 100 K / 2^28 < 1e-6 K
        mid = 0.5 * (low + high)
        above = _ratio_of_wet_bulb(temp, mid, pressure) > ratio
        high = np.where(above, mid, high)
        low = np.where(above, low, mid)
    return np.asarray(0.5 * (low + high))
