"""From a file's rows and the study's wishes to a checked `Weather`: label, grid, fill, close, complete."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from weather import psychro
from weather.air import Air, complete_air
from weather.errors import UserError
from weather.grid import LEAST_HOURS, Hours, to_hours
from weather.labels import noon_offset_h, settle
from weather.quality import closure, limits, longwave_findings, missing_codes, plausibility
from weather.radiation import SkySun, Solar, complete
from weather.raw import RawWeather
from weather.record import Finding, Site, Times, Weather
from weather.request import WeatherRequest
from weather.season import season
from weather.site import check_coordinates, make_site, solar_time, standard_offset_h, zone_of_offset
from weather.sky import (
    ClearSky,
    clear_sky,
    cloudiness,
    linke_turbidity,
    sky_longwave,
)
from weather.sun import Sun, extraterrestrial_normal, sun_positions

FAR_DEG = 0.5  # beyond this the file's place is another place than the study's
REFUSED_NORTH_DEG, REFUSED_EAST_DEG = 2.0, 3.0  # beyond this it has another climate and another sun


@dataclass(frozen=True)
class Place:
    """The study's site, and where the sun is computed (the file's place when it is far off)."""

    site: Site
    latitude: float
    longitude: float
    utc_offset_h: float  # of the stamps as declared
    clock_h: float  # whole hours that put the stamps onto the zone's standard time
    findings: tuple[Finding, ...]


def settle_place(request: WeatherRequest, raw: RawWeather) -> Place:
    """Return the study's site and the sun's place, with what had to be settled between study and file."""
    findings: list[Finding] = []
    given = (request.latitude, request.longitude)
    latitude = raw.latitude if request.latitude is None else request.latitude
    longitude = raw.longitude if request.longitude is None else request.longitude
    if latitude is None or longitude is None:
        raise UserError(f"site: {raw.source} names no place; give latitude and longitude")
    zone = request.timezone or raw.timezone
    offset = raw.utc_offset_h if raw.utc_offset_h is not None else request.utc_offset
    if zone is None:
        if offset is None:
            raise UserError(f"site: {raw.source} names no time zone; give timezone")
        fits = abs((offset - longitude / 15.0 + 12.0) % 24.0 - 12.0) <= 2.0
        kept = offset if fits else float(round(longitude / 15.0))  # a file in UTC from far away
        zone = zone_of_offset(kept)
        text = f"no civil time zone given: schedules follow UTC{kept:+g} h without daylight saving"
        findings.append(Finding("time-zone", "note", text))
    if offset is None:
        offset = standard_offset_h(zone)
    elevation = request.elevation
    if elevation is None:
        near = None in given or _far(latitude, longitude, raw) <= FAR_DEG
        elevation = raw.elevation if near and raw.elevation is not None else None
    site = make_site(latitude, longitude, elevation, zone)
    _refuse_elsewhere(latitude, longitude, raw)
    distance = _far(latitude, longitude, raw)
    if distance > FAR_DEG and raw.latitude is not None and raw.longitude is not None:
        text = (
            f"the file's place ({raw.latitude:.2f}, {raw.longitude:.2f}) lies {distance:.1f} degrees from "
            f"the study's ({latitude:.2f}, {longitude:.2f}); its sun is used as the radiation belongs to it"
        )
        findings.append(Finding("site", "warning", text))
        latitude, longitude = raw.latitude, raw.longitude
    clock = float(round(standard_offset_h(site.timezone) - offset))
    if raw.latitude is not None and raw.longitude is not None and raw.utc_offset_h:
        check_coordinates(raw.latitude, raw.longitude, raw.utc_offset_h)
    return Place(site, latitude, longitude, offset, clock, tuple(findings))


def _refuse_elsewhere(latitude: float, longitude: float, raw: RawWeather) -> None:
    """Refuse a file that was measured under another sky; a record without a place passes."""
    if raw.latitude is None or raw.longitude is None:
        return
    north = abs(latitude - raw.latitude)
    east = abs((longitude - raw.longitude + 180.0) % 360.0 - 180.0)
    if north > REFUSED_NORTH_DEG or east > REFUSED_EAST_DEG:
        raise UserError(
            f"site: the study stands at {latitude:g}, {longitude:g}, {raw.source} at {raw.latitude:g}, "
            f"{raw.longitude:g}; at most {REFUSED_NORTH_DEG:g} degrees of latitude and {REFUSED_EAST_DEG:g} "
            "of longitude apart (leave latitude and longitude out to take the file's place)"
        )


def _far(latitude: float, longitude: float, raw: RawWeather) -> float:
    """Return degrees of a great circle between the study's place and the file's, 0 when the file has none."""
    if raw.latitude is None or raw.longitude is None:
        return 0.0
    a, b = np.radians(latitude), np.radians(raw.latitude)
    along = np.radians(longitude - raw.longitude)
    cosine = np.sin(a) * np.sin(b) + np.cos(a) * np.cos(b) * np.cos(along)
    return float(np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0))))


def assemble(request: WeatherRequest, raw: RawWeather, place: Place) -> Weather:
    """Return the checked record of a file: stamps settled, hours gridded, gaps filled, radiation closed."""
    raw = _labelled(request, raw, place)
    declared = request.label is not None or request.utc_offset is not None
    timing = settle(raw, place.latitude, place.longitude, place.utc_offset_h, declared)
    move = np.timedelta64(round(timing.clock_s + 3600.0 * place.clock_h), "s")
    centre = raw.stamp + move + np.timedelta64(round(timing.sun_offset_s), "s")
    sun_offset = 1800.0
    if raw.step_s == 3600.0:
        start = centre.astype("datetime64[h]").astype("datetime64[s]")
        sun_offset = float(np.median((centre - start).astype(np.int64)))
    else:
        start = centre - np.timedelta64(round(raw.step_s / 2.0), "s")
    place = replace(place, utc_offset_h=place.utc_offset_h + place.clock_h)
    findings = [*raw.findings, *missing_codes(raw), *place.findings, *timing.findings, *_clock(place)]
    hours = to_hours(raw, start)
    if len(hours.time) < LEAST_HOURS:
        raise UserError(f"{raw.source}: {len(hours.time)} hours, at least {LEAST_HOURS} are needed")
    sky = sky_sun(hours.time, place, sun_offset)
    columns, found = limits(hours.columns, sky)
    findings += [*hours.findings, *found, *closure(columns, sky)]
    columns, found = plausibility(columns, sky, hours.time, place.site, raw.typical)
    hours = replace(hours, columns=columns)
    solar = complete(columns, sky, hours.time, raw.typical, request.allow_long_gaps)
    air = complete_air(hours, place.site, raw.typical, request.allow_long_gaps)
    return finish(
        request, raw, place, hours, sky, solar, air, (*findings, *found, *solar.findings, *air.findings)
    )


def _clock(place: Place) -> list[Finding]:
    if not place.clock_h:
        return []
    text = f"clock moved by {place.clock_h:+g} h onto standard time of {place.site.timezone}"
    return [Finding("clock", "note", text)]


def _labelled(request: WeatherRequest, raw: RawWeather, place: Place) -> RawWeather:
    """Return the record with the declared label, or for a user's own record the one that noon speaks for."""
    if request.label is not None:
        return replace(raw, label=request.label, sun_offset_s=None)
    if raw.format != "logger" or raw.step_s < 900.0:  # half a short step does not matter: end of the step
        return raw
    start = replace(raw, label="start")
    late = [noon_offset_h(other, place.longitude, place.utc_offset_h) for other in (raw, start)]
    choice = 0
    if late[0] is not None and late[1] is not None:
        for clock in (0.0, place.utc_offset_h):  # as declared, else written in UTC
            off = [abs(noon + clock) for noon in late if noon is not None]
            if min(off) <= 0.5:
                choice = int(off[1] < off[0])
                break
    text = "stamps taken as the {} of their step (no label declared; solar noon speaks for it)"
    chosen, word = (start, "start") if choice else (raw, "end")
    note = Finding("label", "note", text.format(word))
    return replace(chosen, findings=(*chosen.findings, note))


def sky_sun(time: Times, place: Place, sun_offset_s: float) -> SkySun:
    """Return the sun `sun_offset_s` after the start of each hour and the clear sky under it."""
    utc = time + np.timedelta64(round(sun_offset_s - 3600.0 * place.utc_offset_h), "s")
    elevation = place.site.elevation
    sun: Sun = sun_positions(utc, place.latitude, place.longitude, elevation)
    extra = extraterrestrial_normal(utc)
    clear: ClearSky = clear_sky(
        sun.apparent_zenith,
        extra,
        linke_turbidity(utc, place.latitude, place.longitude),
        elevation,
        float(psychro.standard_pressure(elevation)),
    )
    return SkySun(sun, clear, extra, place.latitude)


def finish(
    request: WeatherRequest,
    raw: RawWeather,
    place: Place,
    hours: Hours,
    sky: SkySun,
    solar: Solar,
    air: Air,
    findings: tuple[Finding, ...],
) -> Weather:
    """Compute long-wave where it is wanted and put the parts together."""
    n = len(hours.time)
    empty = np.full(n, np.nan)
    longwave = hours.columns.get("longwave_down", empty)
    if request.longwave == "file" and not np.isfinite(longwave).any():
        raise UserError(f'weather -> longwave: "file", but {raw.source} has no long-wave radiation')
    cover = hours.columns.get("cloud_cover")
    known = cover if cover is not None and np.isfinite(cover).all() else None
    cloud, polar = cloudiness(solar.ghi, sky.clear.ghi, sky.sun.apparent_zenith, 3600.0, known)
    utc = hours.time + np.timedelta64(round(1800.0 - 3600.0 * place.utc_offset_h), "s")
    model = sky_longwave(air.vapour, air.temp, cloud, solar_time(utc, place.longitude))
    modelled = ~np.isfinite(longwave) if request.longwave != "model" else np.ones(n, dtype=bool)
    findings += longwave_findings(longwave, model, modelled)
    if polar.any() and known is None and modelled.any():
        text = f"{int(polar.sum())} hours of polar night have no sun to tell clouds by: mean cloudiness taken"
        findings += (Finding("polar-night", "warning", text, int(polar.sum())),)
    albedo = hours.columns.get("albedo", empty)
    return Weather(
        site=place.site,
        title=raw.title,
        source=raw.source,
        utc_offset_h=place.utc_offset_h,
        step_s=3600.0,
        typical=raw.typical,
        clear_sky=request.clear_sky,
        time=hours.time,
        ghi=solar.ghi,
        dni=solar.dni,
        dhi=solar.dhi,
        dni_extra=sky.dni_extra,
        ghi_clear=sky.clear.ghi,
        temp_air=air.temp,
        temp_dew=air.dew,
        relative_humidity=air.humidity,
        vapour_pressure=air.vapour,
        pressure=air.pressure,
        wind_speed=air.wind,
        precipitable_water=air.water,
        longwave_down=np.where(modelled, model, longwave),
        longwave_modelled=modelled,
        albedo=np.where(np.isfinite(albedo), albedo, request.albedo),
        zenith=sky.sun.apparent_zenith,
        azimuth=sky.sun.azimuth,
        filled=solar.filled | air.filled,
        in_season=season(hours.time, request.first_day, request.last_day),
        findings=findings,
        design=raw.design,
    )
