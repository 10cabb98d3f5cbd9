"""Where the sun stands: pvlib's NREL algorithm wrapped once, and the sun outside the atmosphere."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from weather.constants import SOLAR_CONSTANT_W_M2
from weather.psychro import standard_pressure
from weather.record import Floats, Times

REFRACTION_DEG: Final = (
    0.5667  # refraction at sunrise, degrees (Reda & Andreas 2008, the algorithm's default)
)
SUNRISE_ZENITH_DEG: Final = 90.8333  # upper limb with refraction


@dataclass(frozen=True)
class Sun:
    """Sun positions: (N,) degrees; azimuth from north, clockwise."""

    zenith: Floats  # geometric
    apparent_zenith: Floats  # refracted
    azimuth: Floats


def sun_positions(
    utc: Times,
    latitude: float,
    longitude: float,
    elevation: float = 0.0,
    pressure_pa: float | None = None,
    temp_c: float = 12.0,
    delta_t: float | None = None,
) -> Sun:
    """Return sun positions at UTC times, (N,), to .0003 degrees (Reda & Andreas 2008, NREL/TP-560-34302).

    `pressure_pa` and `temp_c` are yearly means for refraction (standard atmosphere if absent). `delta_t` is
    terrestrial less universal time in s; when absent, pvlib's polynomial at mid-record.
    """
    from pvlib import spa

    seconds = utc.astype("datetime64[s]").astype(np.int64).astype(float)
    pressure = float(standard_pressure(elevation)) if pressure_pa is None else pressure_pa
    if delta_t is None:
        middle = utc[len(utc) // 2].astype("datetime64[M]").astype(int) if len(utc) else 240
        delta_t = float(spa.calculate_deltat(1970 + middle // 12, middle % 12 + 1))
    found = spa.solar_position(
        seconds,
        latitude,
        longitude,
        elevation,
        pressure / 100.0,
        temp_c,
        delta_t,
        REFRACTION_DEG,
        numthreads=1,
    )
    return Sun(zenith=found[1], apparent_zenith=found[0], azimuth=found[4])


def day_angle(utc: Times) -> Floats:
    """Return the day angle 2 pi (n - 1) / 365, radians, n the day with its fraction (Spencer 1971).

    The fraction matters: with whole days the daily sums at 70 degrees are off by .4 MJ/m2 at the equinoxes.
    """
    start = utc.astype("datetime64[Y]").astype("datetime64[s]")
    return np.asarray(2.0 * np.pi * (utc.astype("datetime64[s]") - start).astype(float) / (365.0 * 86400.0))


def extraterrestrial_normal(utc: Times) -> Floats:
    """Return the solar irradiance outside the atmosphere, W/m2 normal, (N,) (Spencer 1971)."""
    b = day_angle(utc)
    squared = (
        1.00011
        + 0.034221 * np.cos(b)
        + 0.00128 * np.sin(b)
        + 0.000719 * np.cos(2 * b)
        + 7.7e-5 * np.sin(2 * b)
    )
    return np.asarray(SOLAR_CONSTANT_W_M2 * squared)


def declination(utc: Times) -> Floats:
    """Return the sun's declination, radians, to .04 degrees (Spencer 1971)."""
    b = day_angle(utc)
    return np.asarray(
        0.006918
        - 0.399912 * np.cos(b)
        + 0.070257 * np.sin(b)
        - 0.006758 * np.cos(2 * b)
        + 0.000907 * np.sin(2 * b)
        - 0.002697 * np.cos(3 * b)
        + 0.00148 * np.sin(3 * b)
    )


def sunset_hour_angle(latitude: float, decl: Floats, zenith_deg: float = 90.0) -> Floats:
    """Return the half day as an angle, radians 0..pi; 0 in polar night, pi in polar day (FAO-56 eq. 25)."""
    phi = np.radians(latitude)
    denominator = np.maximum(np.cos(phi) * np.cos(decl), 1e-12)
    cosine = (np.cos(np.radians(zenith_deg)) - np.sin(phi) * np.sin(decl)) / denominator
    return np.asarray(np.arccos(np.clip(cosine, -1.0, 1.0)))


def day_length_h(latitude: float, utc: Times, zenith_deg: float = 90.0) -> Floats:
    """Return hours of daylight (FAO-56 eq. 34); `zenith_deg=SUNRISE_ZENITH_DEG` for limb and refraction."""
    return np.asarray(24.0 / np.pi * sunset_hour_angle(latitude, declination(utc), zenith_deg))


def extraterrestrial_daily(latitude: float, utc: Times) -> Floats:
    """Return the day's radiation on the horizontal outside the atmosphere, J m-2 d-1 (FAO-56 eq. 21)."""
    decl = declination(utc)
    ws = sunset_hour_angle(latitude, decl)
    phi = np.radians(latitude)
    mean = ws * np.sin(phi) * np.sin(decl) + np.cos(phi) * np.cos(decl) * np.sin(ws)
    return np.asarray(86400.0 / np.pi * extraterrestrial_normal(utc) * mean)
