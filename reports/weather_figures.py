"""Figures of the weather page: light, clock against sun, clearness, temperature, long-wave."""

from __future__ import annotations

import base64
from typing import Any

import numpy as np

from canopy.designoutside import percentile_temperature
from canopy.loadcurve import EXCEEDED_99_6_H, EXCEEDED_99_H
from reports.blocks import Figure, Mark, Spec
from reports.figures import FAINT, QUIET, axis, layout, line, pack
from reports.weather_climate import Climate
from weather.record import Floats, Weather

GLOBAL = Mark("global radiation", "#b98300", kind="block")
CLEAR = Mark("clear sky", "#27307f", "dash", "circle-open")
RISE = Mark("sunrise and sunset of a flat horizon", "#27307f", kind="line")
AIR = Mark("air, lowest to highest of the day", "#c97f1e", kind="block")
MEAN = Mark("air, mean of the day", "#8a3d0a")
SKY = Mark("long-wave from the sky, mean of the day", "#27307f")
SURFACE = Mark("black surface at air temperature", "#8a3d0a", "dot")
DAY = Mark("clearness of the day", "#178068", kind="point")
HOURS = Mark("air temperature, hours in rising order", "#27307f")
DESIGN = Mark("99.6 and 99 %", "#a3262a", "dash")
LAMP = [[0.0, "#14203a"], [0.25, "#4a4f8a"], [0.5, "#b0656c"], [0.75, "#e8a33d"], [1.0, "#fff6cf"]]
MOST_DAYS = 1100


def _dates(found: Climate) -> Spec:
    days = found.days
    if len(days) > 1 and (np.diff(days.astype(int)) == 1).all():
        return {"x0": str(days[0]), "dx": 86_400_000}
    return {"x": np.datetime_as_string(days, unit="D").tolist()}


def _time_axis(found: Climate, **more: Any) -> Spec:
    days = len(found.days)
    form = "%d %b" if days < 70 else "%b" if days < 400 else "%b %Y"
    return axis("", type="date", tickformat=form, hoverformat="%d %b %Y", showgrid=False, **more)


def month_light(found: Climate) -> Figure:
    """Return global radiation by month beside the clear sky."""
    months = list(found.months)
    bars: Spec = {
        "type": "bar",
        "name": GLOBAL.name,
        "x": months,
        "y": pack(found.global_kwh),
        "marker": {"color": GLOBAL.colour},
        "hovertemplate": "%{x}: %{y:.1f} kWh/m²<extra></extra>",
    }
    clear = line(CLEAR, months, found.clear_kwh, "kWh/m²")
    return Figure(
        "light-months",
        "Global radiation by month",
        "Bars: global radiation of each month. Line: the same under a clear sky all month. "
        + found.light_words,
        ({"data": [bars, clear], "layout": layout(axis(""), axis("kWh/m² a month", rangemode="tozero"))},),
        (GLOBAL, CLEAR),
        320,
    )


def carpet(weather: Weather, found: Climate) -> Figure:
    """Return global radiation by hour and day, with sunrise and sunset: a wrong clock shows at a glance."""
    midnight = weather.time[0].astype("datetime64[D]").astype("datetime64[s]")
    place = ((weather.time - midnight).astype(np.int64) // 3600).astype(int)
    count = min(int(place[-1]) // 24 + 1, MOST_DAYS)
    hours = np.full(24 * count, np.nan)
    hours[place[place < 24 * count]] = weather.ghi[place < 24 * count]
    light = hours.reshape(count, 24).T
    first = str(midnight)[:10]
    heat: Spec = {
        "type": "heatmap",
        "z": {
            "dtype": "f4",
            "bdata": base64.b64encode(np.ascontiguousarray(light, dtype="<f4").tobytes()).decode("ascii"),
            "shape": f"24, {count}",
        },
        "x0": first,
        "dx": 86_400_000,
        "y0": 0.5,
        "dy": 1,
        "colorscale": LAMP,
        "colorbar": {"title": {"text": "W/m²"}, "thickness": 12, "outlinewidth": 0},
        "hovertemplate": "%{x|%d %b}, mid-hour %{y}: %{z:.0f} W/m²<extra></extra>",
    }
    rise, down = _horizon(weather, midnight, count)
    lines = [
        {
            "type": "scatter",
            "mode": "lines",
            "name": RISE.name,
            "x0": first,
            "dx": 86_400_000,
            "y": pack(values),
            "line": {"color": "#7fd0ff", "width": 1.5},
            "hoverinfo": "skip",
        }
        for values in (rise, down)
    ]
    ticks = {"tickvals": [0, 6, 12, 18, 24], "range": [0, 24]}
    return Figure(
        "carpet",
        "Every hour of light, and where the sun rises and sets",
        "Global radiation by hour of the record's standard time (upwards) and day (to the right), with lines "
        "of sunrise and sunset. Light outside the lines, or a shift against them, is a wrong clock.",
        ({"data": [heat, *lines], "layout": layout(_time_axis(found), axis("hour", **ticks))},),
        (Mark(RISE.name, "#7fd0ff"),),
        360,
        note="Hours are the record's own standard time; light shifted against the lines is a wrong clock.",
    )


def _horizon(weather: Weather, midnight: np.datetime64, count: int) -> tuple[Floats, Floats]:
    """Return sunrise and sunset in hours of the record's clock, (days,), NaN in polar day and night."""
    from weather.site import solar_time
    from weather.sun import SUNRISE_ZENITH_DEG, declination, sunset_hour_angle

    noon = midnight + (np.arange(count) * 24 + 12) * np.timedelta64(3600, "s")
    utc = noon - np.timedelta64(round(3600 * weather.utc_offset_h), "s")
    shift = solar_time(utc, weather.site.longitude) - 12.0  # solar less clock time
    shift = (shift + 12.0) % 24.0 - 12.0
    half = (
        12.0
        / np.pi
        * sunset_hour_angle(weather.site.latitude, np.asarray(declination(utc)), SUNRISE_ZENITH_DEG)
    )
    half = np.where((half > 0.01) & (half < 11.99), half, np.nan)
    return np.asarray(12.0 - shift - half), np.asarray(12.0 - shift + half)


def clearness(weather: Weather, found: Climate) -> Figure:
    """Return daily clearness, global over clear sky."""
    dots: Spec = {
        "type": "scatter",
        "mode": "markers",
        "name": DAY.name,
        **_dates(found),
        "y": pack(found.day_clearness),
        "marker": {"color": DAY.colour, "size": 5, "opacity": 0.7},
        "hovertemplate": "%{x|%d %b}: %{y:.2f}<extra></extra>",
    }
    y = axis("global / clear sky", rangemode="tozero")
    one = [{"type": "line", "xref": "paper", "x0": 0, "x1": 1, "y0": 1, "y1": 1, "line": {"color": QUIET}}]
    above = int((found.day_clearness > 1.1).sum())
    return Figure(
        "clearness",
        "Clearness day by day",
        f"Daily global radiation over clear-sky radiation; {above} days lie above 1.1.",
        ({"data": [dots], "layout": layout(_time_axis(found), y, shapes=one)},),
        (DAY,),
        300,
        note="Clear sky: Ineichen & Perez with long-term turbidity; days above 1 are cleaner than usual.",
    )


def temperature(found: Climate) -> Figure:
    """Return lowest, mean and highest air temperature of every day."""
    place = _dates(found)
    edge: Spec = {
        "type": "scatter",
        "mode": "lines",
        **place,
        "line": {"color": AIR.colour, "width": 0.6},
        "hoverinfo": "skip",
    }
    mean: Spec = {
        "type": "scatter",
        "mode": "lines",
        "name": MEAN.name,
        **place,
        "y": pack(found.day_mean),
        "line": {"color": MEAN.colour, "width": 1.4},
        "hovertemplate": "%{x|%d %b}: %{y:.1f} °C<extra></extra>",
    }
    data = [
        {**edge, "name": f"{AIR.name} (lowest)", "y": pack(found.day_min)},
        {
            **edge,
            "name": AIR.name,
            "y": pack(found.day_max),
            "fill": "tonexty",
            "fillcolor": "rgba(201,127,30,.28)",
        },
        mean,
    ]
    return Figure(
        "temperature",
        "Air temperature day by day",
        "Span between the lowest and the highest air temperature of each day, and its mean.",
        ({"data": data, "layout": layout(_time_axis(found), axis("°C"))},),
        (AIR, MEAN),
        320,
    )


def duration(weather: Weather, found: Climate) -> Figure:
    """Return the coldest tenth of hours in rising order with the design percentiles."""
    del found
    count = max(2, len(weather) // 10)
    rising = np.sort(weather.temp_air)[:count]
    marks = [percentile_temperature(weather.temp_air, hours) for hours in (EXCEEDED_99_6_H, EXCEEDED_99_H)]
    curve: Spec = {
        "type": "scatter",
        "mode": "lines",
        "name": HOURS.name,
        "x0": 1,
        "dx": 1,
        "y": pack(rising),
        "line": {"color": HOURS.colour, "width": 2},
        "hovertemplate": "%{x} hours at or below %{y:.1f} °C<extra></extra>",
    }
    shapes = [
        {
            "type": "line",
            "xref": "paper",
            "x0": 0,
            "x1": 1,
            "y0": value,
            "y1": value,
            "line": {"color": DESIGN.colour, "dash": "dash", "width": 1},
        }
        for value in marks
    ]
    return Figure(
        "duration",
        "The coldest tenth of the hours",
        f"Air temperature of the coldest {count} hours in rising order; 99.6 % at {marks[0]:.1f} degC, "
        f"99 % at {marks[1]:.1f} degC.",
        ({"data": [curve], "layout": layout(axis("hours"), axis("°C"), shapes=shapes)},),
        (HOURS, DESIGN),
        300,
    )


def longwave(weather: Weather, found: Climate) -> Figure:
    """Return long-wave from the sky by day, beside a black surface at air temperature."""
    from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K

    _, index = np.unique(weather.time.astype("datetime64[D]"), return_inverse=True)
    black = np.bincount(index, STEFAN_BOLTZMANN * (weather.temp_air + ZERO_C_K) ** 4) / np.bincount(index)
    data = [
        {
            "type": "scatter",
            "mode": "lines",
            "name": mark.name,
            **_dates(found),
            "y": pack(values),
            "line": {"color": mark.colour, "width": 1.4, "dash": mark.dash},
            "hovertemplate": f"{mark.name}<br>%{{x|%d %b}}: %{{y:.0f}} W/m²<extra></extra>",
        }
        for mark, values in ((SURFACE, black), (SKY, found.day_longwave))
    ]
    share = 100.0 * weather.longwave_modelled.mean()
    return Figure(
        "longwave",
        "Long-wave from the sky day by day",
        f"{found.sky_words} {share:.0f} % of the hours are computed, the others read from the file.",
        ({"data": data, "layout": layout(_time_axis(found, gridcolor=FAINT), axis("W/m²"))},),
        (SKY, SURFACE),
        320,
    )
