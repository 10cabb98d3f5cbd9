"""The outside of a design night: temperature, wind, humidity and clear sky, each with where it comes from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.loadcurve import EXCEEDED_99_6_H, EXCEEDED_99_H, YEAR_H
from weather.record import Weather

Floats = NDArray[np.float64]

LEAST_WIND_M_S: Final = 4.0  # a calm design night is not counted on: common practice
WHOLE_YEAR_SHARE: Final = 0.95


@dataclass(frozen=True)
class DesignOutside:
    """What the design night stands on; degC, m/s at 10 m in the open, Pa, W/m2."""

    temp_c: float
    temp_source: str
    temp_data_c: float  # the same percentile of the record itself
    wind_m_s: float
    wind_source: str
    humidity_pct: float
    vapour_pressure_pa: float
    pressure_pa: float
    sky_w_m2: float  # clear sky, long-wave on the horizontal
    sky_bands: Floats  # (T,) W/m2
    coldest: NDArray[np.intp]  # rows of the record's coldest 1 % of hours


def percentile_temperature(temp_air: Floats, exceeded_h: float) -> float:
    """Return the temperature that the air is at or below in `exceeded_h` of 8760 h, scaled to the record."""
    rising = np.sort(np.asarray(temp_air, float))
    return float(np.interp(exceeded_h / YEAR_H * len(rising), np.arange(len(rising)), rising))


def design_outside(weather: Weather, others: tuple[Weather, ...] = ()) -> DesignOutside:
    """Return the outside of the design night; `others` are further years of the same place.

    Temperature: the 99.6 % heating design condition printed in the file, else the 99.6 % of
    the record and the further years.
    Wind: the mean of the coldest 1 % of hours, at least 4 m/s. Humidity: their mean. Sky: clear, by the model
    in use.
    """
    from canopy.skybands import sky_bands
    from weather.psychro import vapour_pressure
    from weather.sky import sky_longwave

    every = np.concatenate([one.temp_air for one in (weather, *others)])
    own = percentile_temperature(every, EXCEEDED_99_6_H)
    if weather.design is not None:
        temp, source = weather.design.heating_99_6_c, f"99.6 % design temperature, {weather.design.source}"
    else:
        hours = len(every) * weather.step_s / 3600.0
        temp = own
        records = "this record's" if not others else f"{1 + len(others)} records'"
        source = f"99.6 % of {records} {hours:.0f} hours (no design conditions in the file)"
        if hours < WHOLE_YEAR_SHARE * YEAR_H:
            source += "; the record is shorter than a year"
    count = max(1, round(EXCEEDED_99_H / YEAR_H * len(weather)))
    coldest = np.argsort(weather.temp_air, kind="stable")[:count]
    mean_wind = float(weather.wind_speed[coldest].mean())
    humidity = float(np.clip(weather.relative_humidity[coldest].mean(), 20.0, 100.0))
    vapour = float(vapour_pressure(temp, humidity, over="water"))
    one = np.array([temp])
    sky = sky_longwave(np.array([vapour]), one, np.zeros(1), np.zeros(1))
    return DesignOutside(
        temp_c=temp,
        temp_source=source,
        temp_data_c=own,
        wind_m_s=max(mean_wind, LEAST_WIND_M_S),
        wind_source=(
            f"mean of the coldest {count} steps {mean_wind:.1f} m/s"
            + (f", raised to {LEAST_WIND_M_S:g} m/s" if mean_wind < LEAST_WIND_M_S else "")
        ),
        humidity_pct=humidity,
        vapour_pressure_pa=vapour,
        pressure_pa=float(weather.pressure.mean()),
        sky_w_m2=float(sky[0]),
        sky_bands=sky_bands(sky, one, np.array([vapour]))[:, 0],
        coldest=coldest,
    )
