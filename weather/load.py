"""From a request to a checked `Weather`, or to several of them."""

from __future__ import annotations

from dataclasses import fields, replace
from typing import Any

import numpy as np

from weather.air import complete_air
from weather.assemble import Place, assemble, finish, settle_place, sky_sun
from weather.clearyear import clear_year
from weather.errors import UserError
from weather.files import FORMATS, SUFFIXES, read_file
from weather.grid import to_hours
from weather.radiation import Solar, close
from weather.raw import RawWeather
from weather.record import Bools, Weather
from weather.request import WeatherRequest
from weather.site import make_site, standard_offset_h
from weather.typical import shipped_path, shipped_year


def load_weather(request: WeatherRequest) -> Weather:
    """Return the weather of a study, hour by hour, checked and without gaps. UserError for bad input.

    Typical years and the clear-sky year stand on the nominal year 1990; real records keep their own dates,
    with 29 February as a day like others, and may run over several years. Hours begin at full hours of the
    standard time of the site's zone (to the nearest whole hour). Air values stay in the hour beside whose
    radiation the file writes them.
    """
    sources = (request.file is not None, bool(request.files), request.shipped is not None, request.clear_sky)
    if sum(sources) != 1:
        raise UserError(
            f"weather: {sum(sources)} sources given, exactly one of file, shipped, clear_sky is needed"
        )
    if request.clear_sky:
        return _clear_sky_year(request)
    raw = _read(request)
    try:
        return assemble(request, raw, settle_place(request, raw))
    except UserError as error:
        name = request.file.name if request.file is not None else ""
        if name and name not in str(error):
            raise UserError(f"{name}: {error}") from None
        raise


def load_many(request: WeatherRequest) -> tuple[Weather, ...]:
    """Return one record per file of `files`, or of a folder given as `file`, or per year of one long file.

    Files are taken in the order given, those of a folder by name. UserError names the file that fails.
    """
    paths = request.files
    if request.file is not None and request.file.is_dir():
        paths = tuple(
            sorted(p for p in request.file.iterdir() if p.suffix.lower() in SUFFIXES and p.is_file())
        )
        if not paths:
            raise UserError(f"weather -> file: the folder {request.file} holds no weather files ({FORMATS})")
    if not paths:
        return split_years(load_weather(request))
    return tuple(
        year
        for path in paths
        for year in split_years(load_weather(replace(request, file=path, files=(), shipped=None)))
    )


def split_years(weather: Weather) -> tuple[Weather, ...]:
    """Return one record for each calendar year that has all its hours, or the record as it is."""
    year = weather.time.astype("datetime64[Y]")
    found = np.unique(year)
    whole = [y for y in found if int((year == y).sum()) >= 8760]
    if len(found) < 2 or not whole:
        return (weather,)
    return tuple(_cut(weather, year == y, f"{weather.title}, {y}") for y in whole)


def _cut(weather: Weather, rows: Bools, title: str) -> Weather:
    arrays: dict[str, Any] = {
        item.name: value[rows]
        for item in fields(weather)
        if isinstance(value := getattr(weather, item.name), np.ndarray)
    }
    return replace(weather, title=title, **arrays)


def _read(request: WeatherRequest) -> RawWeather:
    if request.shipped is not None:
        year = shipped_year(request.shipped)
        raw = read_file(shipped_path(year))
        return replace(raw, title=year.title, source=year.source, timezone=year.timezone)
    if request.files:
        if len(request.files) > 1:
            raise UserError(
                f"weather -> files: {len(request.files)} files are several records, one is needed here"
            )
        return read_file(request.files[0], request.columns, request.units, request.timezone)
    assert request.file is not None
    return read_file(request.file, request.columns, request.units, request.timezone)


def _clear_sky_year(request: WeatherRequest) -> Weather:
    if request.latitude is None or request.longitude is None or request.timezone is None:
        raise UserError("weather -> clear_sky: needs latitude, longitude and timezone under site")
    if request.longwave == "file":
        raise UserError('weather -> longwave: "file", but a clear-sky year has no file')
    site = make_site(request.latitude, request.longitude, request.elevation, request.timezone)
    offset = float(round(standard_offset_h(site.timezone)))
    raw = clear_year(site, offset)
    place = Place(site, site.latitude, site.longitude, offset, 0.0, ())
    hours = to_hours(raw, raw.stamp)
    sky = sky_sun(hours.time, place, 1800.0)
    dni, dhi = close(sky.clear.ghi, sky.clear.dni, sky.clear.dhi, sky.cos_zenith, sky.dni_extra)
    solar = Solar(sky.clear.ghi, dni, dhi, np.zeros(len(hours.time), dtype=bool), ())
    air = complete_air(hours, site, True, False)
    return finish(request, raw, place, hours, sky, solar, air, (*raw.findings, *air.findings))


__all__ = ["WeatherRequest", "load_many", "load_weather", "split_years"]
