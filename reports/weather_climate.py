"""Monthly climate, design temperatures and extremes of a weather record, in numbers and in words."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.designoutside import percentile_temperature
from canopy.loadcurve import EXCEEDED_99_6_H, EXCEEDED_99_H
from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K
from weather.record import Floats, Weather

MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")


@dataclass(frozen=True)
class Climate:
    """One value per month of the year that the record holds, (M,), and per day, (D,)."""

    months: tuple[str, ...]
    global_kwh: Floats  # kWh/m2 a month (mean over the years of the record)
    clear_kwh: Floats
    clearness: Floats  # global over clear sky
    diffuse_share: Floats
    temp_mean: Floats
    temp_min: Floats
    temp_max: Floats
    humidity: Floats
    wind: Floats
    longwave: Floats
    sky_below_air: Floats  # K
    days: NDArray[np.datetime64]
    day_min: Floats
    day_mean: Floats
    day_max: Floats
    day_clearness: Floats
    day_longwave: Floats
    light_words: str
    sky_words: str


def sky_depression(weather: Weather) -> Floats:
    """Return how far the sky's black temperature lies below the air's, K, (N,)."""
    sky = (weather.longwave_down / STEFAN_BOLTZMANN) ** 0.25 - ZERO_C_K
    return np.asarray(weather.temp_air - sky)


def climate(weather: Weather) -> Climate:
    """Return the climate of a record by calendar month and by day."""
    month = weather.time.astype("datetime64[M]").astype(np.int64)
    of_year = month % 12
    present = np.unique(of_year)
    hours = weather.step_s / 3600.0
    spans = np.array([len(np.unique(month[of_year == k])) for k in present], dtype=float)
    below = sky_depression(weather)

    def total(values: Floats) -> Floats:
        return np.array([values[of_year == k].sum() for k in present])

    def mean(values: Floats) -> Floats:
        return np.array([values[of_year == k].mean() for k in present])

    global_kwh = total(weather.ghi) * hours / 1000.0 / spans
    clear_kwh = total(weather.ghi_clear) * hours / 1000.0 / spans
    with np.errstate(divide="ignore", invalid="ignore"):
        clearness = np.where(clear_kwh > 0.05, global_kwh / clear_kwh, np.nan)
        diffuse = total(weather.dhi) * hours / 1000.0 / spans
        share = np.where(global_kwh > 0.05, diffuse / global_kwh, np.nan)
    days, index = np.unique(weather.time.astype("datetime64[D]"), return_inverse=True)
    count = np.bincount(index)
    clear_day = np.bincount(index, weather.ghi_clear)
    light_day = np.bincount(index, weather.ghi)
    order = np.flatnonzero(np.diff(index, prepend=-1))
    night = weather.zenith > 90.0
    kept = "" if not night.any() else f" and {below[night].mean():.0f} K by night"
    year = float(global_kwh.sum())
    return Climate(
        months=tuple(MONTHS[k] for k in present),
        global_kwh=global_kwh,
        clear_kwh=clear_kwh,
        clearness=clearness,
        diffuse_share=share,
        temp_mean=mean(weather.temp_air),
        temp_min=np.array([weather.temp_air[of_year == k].min() for k in present]),
        temp_max=np.array([weather.temp_air[of_year == k].max() for k in present]),
        humidity=mean(weather.relative_humidity),
        wind=mean(weather.wind_speed),
        longwave=mean(weather.longwave_down),
        sky_below_air=mean(below),
        days=days,
        day_min=np.minimum.reduceat(weather.temp_air, order),
        day_mean=np.bincount(index, weather.temp_air) / count,
        day_max=np.maximum.reduceat(weather.temp_air, order),
        day_clearness=np.where(clear_day > 100.0, light_day / np.maximum(clear_day, 1.0), np.nan),
        day_longwave=np.bincount(index, weather.longwave_down) / count,
        light_words=(
            f"{year:.0f} kWh/m² of global radiation in the months shown, "
            f"{100.0 * year / max(float(clear_kwh.sum()), 1e-9):.0f} % of a clear sky; "
            f"{100.0 * weather.dhi.sum() / max(float(weather.ghi.sum()), 1e-9):.0f} % of it diffuse."
        ),
        sky_words=(
            f"The sky radiates as a black surface {below.mean():.0f} K colder than the air on the mean{kept}."
        ),
    )


def _cell(value: float, digits: int) -> str:
    return f"{value:.{digits}f}" if np.isfinite(value) else "-"


def month_rows(found: Climate) -> list[tuple[str, ...]]:
    """Return one row of ready texts per month."""
    columns = (
        (found.global_kwh, 1),
        (100.0 * found.clearness, 0),
        (100.0 * found.diffuse_share, 0),
        (found.temp_mean, 1),
        (found.temp_min, 1),
        (found.temp_max, 1),
        (found.humidity, 0),
        (found.wind, 1),
        (found.longwave, 0),
        (found.sky_below_air, 1),
    )
    return [
        (name, *(_cell(float(values[k]), digits) for values, digits in columns))
        for k, name in enumerate(found.months)
    ]


def design_lines(weather: Weather, found: Climate) -> list[str]:
    """Return design temperatures and extremes in words."""
    own = percentile_temperature(weather.temp_air, EXCEEDED_99_6_H)
    second = percentile_temperature(weather.temp_air, EXCEEDED_99_H)
    lines = [f"heating design temperature of the record: {own:.1f} degC (99.6 %), {second:.1f} degC (99 %)"]
    if len(weather) < 8300:
        lines.append("the record is shorter than a year: its percentiles are no design temperatures")
    if weather.design is not None:
        lines.append(
            f"as printed in the file: {weather.design.heating_99_6_c:.1f} degC (99.6 %), "
            f"{weather.design.heating_99_c:.1f} degC (99 %), {weather.design.source}"
        )
    if weather.typical:
        lines.append(
            "a typical year has its extremes removed: take sizes from many years or printed conditions"
        )
    low, high = int(weather.temp_air.argmin()), int(weather.temp_air.argmax())
    cold = int(found.day_mean.argmin())
    lines.append(
        f"lowest {weather.temp_air[low]:.1f} degC ({_when(weather.time[low])}), highest "
        f"{weather.temp_air[high]:.1f} degC ({_when(weather.time[high])}); coldest day "
        f"{found.day_mean[cold]:.1f} degC ({str(found.days[cold])[5:]})"
    )
    lines.append(
        f"wind {weather.wind_speed.mean():.1f} m/s on the mean, {weather.wind_speed.max():.1f} at most; "
        f"pressure {weather.pressure.mean() / 100.0:.0f} hPa"
    )
    return lines


def _when(time: np.datetime64) -> str:
    return str(time.astype("datetime64[m]"))[5:16].replace("T", " ")
