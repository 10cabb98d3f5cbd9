"""The sky: clear-sky sun, beam and diffuse, water vapour, and the long-wave radiation it sends down.

Published emissivity formulas stand alone so that each can be checked; `sky_longwave` is the model in use.
Vapour pressure enters in Pa everywhere and is turned into hPa inside.
"""

from __future__ import annotations

import warnings
from dataclasses import dataclass
from typing import Final

import numpy as np

from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K
from weather.record import Bools, Floats, Times

DAY_ELEVATION_DEG: Final = 5.0  # sun higher than this tells how cloudy it is
DAILY_WAVE: Final = 0.013
CLOUD_POWER: Final = 0.75
INVERSION_SHARE: Final = 0.3
LONG_NIGHT_H: Final = 36.0  # beyond this a night is polar and its dusk says nothing about its middle


@dataclass(frozen=True)
class ClearSky:
    """Clear-sky irradiance, (N,) W/m2."""

    ghi: Floats
    dni: Floats
    dhi: Floats


def brunt(vapour_pa: Floats) -> Floats:
    """Clear-sky emissivity of Brunt (1932) with his mean constants, .52 + .065 sqrt(e/hPa)."""
    return np.asarray(0.52 + 0.065 * np.sqrt(np.asarray(vapour_pa) / 100.0))


def brutsaert(vapour_pa: Floats, temp_c: Floats) -> Floats:
    """Clear-sky emissivity of Brutsaert (1975), 1.24 (e/T)^(1/7), e in hPa."""
    return np.asarray(1.24 * (np.asarray(vapour_pa) / 100.0 / (np.asarray(temp_c) + ZERO_C_K)) ** (1.0 / 7.0))


def idso(vapour_pa: Floats, temp_c: Floats) -> Floats:
    """Clear-sky emissivity of Idso (1981), .70 + 5.95e-5 e exp(1500/T), e in hPa."""
    return np.asarray(
        0.70 + 5.95e-5 * np.asarray(vapour_pa) / 100.0 * np.exp(1500.0 / (np.asarray(temp_c) + ZERO_C_K))
    )


def berdahl_martin(dew_c: Floats) -> Floats:
    """Clear-sky emissivity of Berdahl & Martin (1984), monthly-mean form in the dew point."""
    x = np.asarray(dew_c) / 100.0
    return np.asarray(0.711 + 0.56 * x + 0.73 * x**2)


def swinbank(temp_c: Floats) -> Floats:
    """Clear-sky emissivity of Swinbank (1963), 9.365e-6 T^2."""
    return np.asarray(9.365e-6 * (np.asarray(temp_c) + ZERO_C_K) ** 2)


def prata(vapour_pa: Floats, temp_c: Floats) -> Floats:
    """Clear-sky emissivity of Prata (1996): 1 - (1 + w) exp(-sqrt(1.2 + 3 w)), w = 46.5 e/T cm, e in hPa."""
    w = 46.5 * np.asarray(vapour_pa) / 100.0 / (np.asarray(temp_c) + ZERO_C_K)
    return np.asarray(1.0 - (1.0 + w) * np.exp(-np.sqrt(1.2 + 3.0 * w)))


def crawford_duchon(clear_emissivity: Floats, clearness: Floats) -> Floats:
    """Sky emissivity with cloud: clf + (1 - clf) e_clear, clf = 1 - clearness (Crawford & Duchon 1999)."""
    cloud = 1.0 - np.clip(clearness, 0.0, 1.0)
    return np.asarray(cloud + (1.0 - cloud) * np.asarray(clear_emissivity))


def linke_turbidity(utc: Times, latitude: float, longitude: float) -> Floats:
    """Linke turbidity of the place, (N,), daily between the monthly means of the maps pvlib ships."""
    import pandas as pd
    from pvlib.clearsky import lookup_linke_turbidity

    year = pd.date_range("1990-01-01", periods=365, freq="D", tz="UTC")
    with warnings.catch_warnings():  # pvlib 0.16 asks pandas 3 for a day of the year in the old way
        warnings.simplefilter("ignore")
        table = np.asarray(
            lookup_linke_turbidity(year, min(max(latitude, -89.9), 89.9), min(max(longitude, -179.9), 179.9))
        )
    days = utc.astype("datetime64[D]")
    index = (days - days.astype("datetime64[Y]").astype("datetime64[D]")).astype(np.int64)
    return np.asarray(table[np.minimum(index, 364)], dtype=float)


def clear_sky(
    apparent_zenith: Floats,
    dni_extra: Floats,
    turbidity: Floats,
    elevation: float,
    pressure_pa: float | Floats,
) -> ClearSky:
    """Clear-sky irradiance after Ineichen & Perez (2002) in pvlib, with Kasten & Young (1989) air mass."""
    from pvlib.atmosphere import get_absolute_airmass, get_relative_airmass
    from pvlib.clearsky import ineichen

    up = apparent_zenith < 90.0
    zenith = np.where(up, apparent_zenith, 89.9)
    airmass = get_absolute_airmass(get_relative_airmass(zenith), pressure_pa)
    found = ineichen(zenith, np.asarray(airmass), turbidity, elevation, dni_extra)
    ghi, dni, dhi = (np.where(up, np.maximum(found[key], 0.0), 0.0) for key in ("ghi", "dni", "dhi"))
    return ClearSky(ghi=ghi, dni=dni, dhi=dhi)


def diffuse_of_global(ghi: Floats, zenith: Floats, dni_extra: Floats) -> Floats:
    """Diffuse part of global radiation, W/m2 (Driesse, Jensen & Perez 2024: the continuous Erbs model)."""
    from pvlib.irradiance import erbs_driesse

    split = erbs_driesse(ghi, zenith, dni_extra=dni_extra)
    return np.asarray(np.clip(np.asarray(split["dhi"]), 0.0, ghi))


def precipitable_water(temp_c: Floats, humidity_pct: Floats) -> Floats:
    """Water in the air column, cm, from screen temperature and humidity (Gueymard 1994, in pvlib)."""
    from pvlib.atmosphere import gueymard94_pw

    return np.asarray(gueymard94_pw(temp_c, np.clip(humidity_pct, 1.0, 100.0)), dtype=float)


def cloudiness(
    ghi: Floats,
    ghi_clear: Floats,
    zenith: Floats,
    step_s: float,
    cloud_cover: Floats | None = None,
) -> tuple[Floats, Bools]:
    """Return C = 1 - min(1, sum GHI / sum clear GHI), (N,) 0..1, and where a polar night left it a guess.

    Sums run over three hours with the sun above 5 degrees. Nights are blended linearly between the dusk and
    the dawn value; where a night is longer than 36 h the observed cloud cover is used if the record has one
    (as .75 N^3.4, Kasten & Czeplak 1980), else the mean of the record.
    """
    day = (90.0 - zenith > DAY_ELEVATION_DEG) & (ghi_clear > 0.0)
    n = len(ghi)
    if not day.any():
        guess = np.full(n, 0.4) if cloud_cover is None else 0.75 * np.clip(cloud_cover, 0.0, 1.0) ** 3.4
        return guess, np.ones(n, dtype=bool)
    half = max(round(1.5 * 3600.0 / step_s - 0.5), 0)
    total = _running_sum(np.where(day, ghi, 0.0), half)
    clear = _running_sum(np.where(day, ghi_clear, 0.0), half)
    rows = np.flatnonzero(day)
    known = 1.0 - np.minimum(1.0, total[rows] / clear[rows])
    result = np.interp(np.arange(n), rows, known)
    gap = np.diff(np.concatenate([[-1], rows, [n]]))
    polar = np.zeros(n, dtype=bool)
    for k in np.flatnonzero(gap * step_s > LONG_NIGHT_H * 3600.0):
        start = rows[k - 1] + 1 if k > 0 else 0
        polar[start : rows[k] if k < len(rows) else n] = True
    if polar.any():
        if cloud_cover is not None:
            result[polar] = 0.75 * np.clip(cloud_cover[polar], 0.0, 1.0) ** 3.4
        else:
            result[polar] = float(known.mean())
    return result, polar


def _running_sum(values: Floats, half: int) -> Floats:
    """Sum over the step and `half` steps on either side, (N,)."""
    total = np.concatenate([[0.0], np.cumsum(values)])
    n = len(values)
    index = np.arange(n)
    return np.asarray(total[np.minimum(index + half + 1, n)] - total[np.maximum(index - half, 0)])


def sky_emissivity(vapour_pa: Floats, temp_c: Floats, cloud: Floats, solar_hour: Floats) -> Floats:
    """Emissivity of the whole sky, (N,): Prata's clear-sky form, a small daily wave, and cloud.

    The wave of .013 peaks at solar midnight; clouds fill the rest of the hemisphere with cloud^.75. Both were
    fitted on measured records (BSRN Payerne, SURFRAD Alamosa).
    """
    clear = prata(vapour_pa, temp_c) + DAILY_WAVE * np.cos(2.0 * np.pi * solar_hour / 24.0)
    return np.asarray(np.clip(clear + (1.0 - clear) * cloud**CLOUD_POWER, 0.0, 1.0))


def radiating_temperature(temp_c: Floats, step_s: float) -> Floats:
    """Temperature of the air that radiates, degC, (N,): screen temperature drawn to its 24-hour mean.

    On clear nights the lowest metres cool far more than the few hundred metres above, which send most of the
    radiation: a share INVERSION_SHARE of the difference to the centred 24-hour mean is taken back.
    """
    half = max(round(12.0 * 3600.0 / step_s), 1)
    count = _running_sum(np.ones(len(temp_c)), half)
    return np.asarray(temp_c + INVERSION_SHARE * (_running_sum(temp_c, half) / count - temp_c))


def sky_longwave(
    vapour_pa: Floats, temp_c: Floats, cloud: Floats, solar_hour: Floats, step_s: float = 3600.0
) -> Floats:
    """Long-wave radiation from the sky on the horizontal, W/m2, (N,), for an unbroken record.

    RMSE 13 W/m2 on BSRN Payerne June 2016 and 10 on SURFRAD Alamosa 1 Jan 2016 (tests).
    """
    radiating = radiating_temperature(np.asarray(temp_c, dtype=float), step_s) + ZERO_C_K
    return np.asarray(sky_emissivity(vapour_pa, temp_c, cloud, solar_hour) * STEFAN_BOLTZMANN * radiating**4)
