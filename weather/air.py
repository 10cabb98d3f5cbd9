"""The air side made whole: temperature, humidity, pressure, wind, water in the column."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from weather import psychro
from weather.errors import UserError
from weather.gaps import fill
from weather.grid import Hours
from weather.raw import TITLES
from weather.record import Bools, Finding, Floats, Site
from weather.sky import precipitable_water

CALM_WIND_M_S: Final = 2.67  # FAO-56 ch. 3: 2 m/s at 2 m where wind is unknown; at 10 m by its eq. 47


@dataclass(frozen=True)
class Air:
    """Air side without gaps, (N,): degC, Pa, %, m/s, cm."""

    temp: Floats
    dew: Floats
    humidity: Floats
    vapour: Floats
    pressure: Floats
    wind: Floats
    water: Floats
    filled: Bools
    findings: tuple[Finding, ...]


def complete_air(hours: Hours, site: Site, periodic: bool, allow_long: bool) -> Air:
    """Return the air side without gaps; what the record lacks altogether is computed and said.

    UserError where there is no air temperature or a gap is too long (weather.gaps).
    """
    columns = hours.columns
    n = len(hours.time)
    findings: list[Finding] = []
    filled = hours.thin.copy()

    def whole(name: str, values: Floats) -> Floats:
        done = fill(values, hours.time, TITLES[name], periodic, allow_long)
        np.logical_or(filled, done.filled, out=filled)
        if done.finding:
            findings.append(done.finding)
        return done.values

    def note(check: str, text: str) -> None:
        findings.append(Finding(check, "note", text, n))

    empty = np.full(n, np.nan)
    if not np.isfinite(columns.get("temp_air", empty)).any():
        raise UserError("weather: the record has no air temperature, without which nothing can be computed")
    temp = whole("temp_air", columns["temp_air"])
    vapour = _vapour(columns, temp, n)
    if np.isfinite(vapour).any():
        dew = whole("temp_dew", psychro.dew_point(vapour, "water") + 0.0 * vapour)
    else:
        day = np.arange(n) // 24
        dew = np.array([temp[day == k].min() for k in range(day[-1] + 1)])[day]
        text = "no humidity in the record: dew point taken as the day's lowest temperature (FAO-56 eq. 48)"
        findings.append(Finding("humidity", "warning", text, n))
    dew = np.minimum(dew, temp)
    vapour = psychro.saturation_pressure(dew, "water")
    humidity = np.clip(psychro.relative_humidity(temp, vapour, "water"), 0.0, 100.0)
    pressure = columns.get("pressure", empty)
    if np.isfinite(pressure).any():
        pressure = whole("pressure", pressure)
    else:
        pressure = np.full(n, float(psychro.standard_pressure(site.elevation)))
        note("pressure", "pressure computed from elevation (standard atmosphere)")
    wind = columns.get("wind_speed", empty)
    if np.isfinite(wind).any():
        wind = whole("wind_speed", wind)
    else:
        wind = np.full(n, CALM_WIND_M_S)
        text = f"no wind in the record: {CALM_WIND_M_S} m/s at 10 m taken (FAO-56 ch. 3)"
        findings.append(Finding("wind", "warning", text, n))
    water = columns.get("precipitable_water", empty)
    computed = precipitable_water(temp, humidity)
    if not np.isfinite(water).all():
        missing = int((~np.isfinite(water)).sum())
        text = f"water in the air column of {missing} hours computed from temperature and humidity (Gueymard)"
        findings.append(Finding("precipitable-water", "note", text, missing))
    water = np.where(np.isfinite(water), water, computed)
    return Air(temp, dew, humidity, vapour, pressure, wind, water, filled, tuple(findings))


def _vapour(columns: dict[str, Floats], temp: Floats, n: int) -> Floats:
    """Vapour pressure, Pa, from dew point, else relative humidity, NaN where neither is, (N,)."""
    empty = np.full(n, np.nan)
    dew = columns.get("temp_dew", empty)
    humidity = columns.get("relative_humidity", empty)
    from_dew = psychro.saturation_pressure(np.where(np.isfinite(dew), dew, 0.0), "water")
    from_rh = psychro.vapour_pressure(temp, humidity, "water")
    return np.where(np.isfinite(dew), from_dew, from_rh)
