"""Where the house stands: a checked `Site`, and the clocks that schedules and daily sums use."""

from __future__ import annotations

import math
from functools import cache, lru_cache
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError, nearest
from weather.record import Floats, Site, Times, Weather

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

NOMINAL_YEAR: Final = 1990  # the clock of typical years: non-leap, begins on a Monday
CIVIL_YEAR: Final = 2018  # same weekdays as 1990, with the daylight-saving rules of today
ZONE_SLACK_H: Final = 3.6  # zones lie at most this far off longitude/15 (western China, Kiribati excepted)


@lru_cache(maxsize=64)
def time_zone(name: str) -> ZoneInfo:
    """Return the IANA zone of a name; UserError with the nearest name when there is none."""
    from zoneinfo import ZoneInfo, available_timezones

    try:
        if not name or name != name.strip():
            raise ValueError(name)
        return ZoneInfo(name)
    except (KeyError, ValueError, OSError):
        known = sorted(available_timezones())
        raise UserError(
            f'site -> timezone: "{name}" is not an IANA zone such as "Europe/Amsterdam"{nearest(name, known)}'
        ) from None


def standard_offset_h(zone: str, year: int = CIVIL_YEAR) -> float:
    """Return the standard-time offset of a zone from UTC, hours: the lesser of January's and July's."""
    from datetime import datetime

    tz = time_zone(zone)
    offsets = []
    for month in (1, 7):
        delta = datetime(year, month, 1, 12, tzinfo=tz).utcoffset()
        assert delta is not None
        offsets.append(delta.total_seconds() / 3600.0)
    return min(offsets)


def _off_longitude_h(longitude: float, offset_h: float) -> float:
    """Return how far a clock lies from mean solar time, hours, -12..12."""
    return (offset_h - longitude / 15.0 + 12.0) % 24.0 - 12.0


def check_coordinates(latitude: float, longitude: float, offset_h: float | None = None) -> None:
    """Refuse coordinates out of range and those that read as latitude and longitude swapped."""
    swap = "; latitude and longitude look swapped"
    if not (math.isfinite(latitude) and -90.0 <= latitude <= 90.0):
        hint = swap if abs(longitude) <= 90.0 and abs(latitude) <= 180.0 else ""
        raise UserError(f"site -> latitude: found {latitude:g}, allowed -90 to 90 degrees north{hint}")
    if not (math.isfinite(longitude) and -180.0 <= longitude <= 180.0):
        raise UserError(f"site -> longitude: found {longitude:g}, allowed -180 to 180 degrees east")
    if offset_h is None:
        return
    off = _off_longitude_h(longitude, offset_h)
    turned = abs(_off_longitude_h(latitude, offset_h))
    if abs(off) <= ZONE_SLACK_H and not (abs(off) > 2.0 and turned < 1.0 and abs(longitude) <= 90.0):
        return
    if abs(longitude) <= 90.0 and turned < 2.5:
        hint = swap
    elif abs(_off_longitude_h(-longitude, offset_h)) < 2.5:
        hint = "; the sign of the longitude looks wrong (east is positive)"
    else:
        hint = ""
    raise UserError(
        f"site: longitude {longitude:g} does not fit the time zone (UTC{offset_h:+g} h lies {abs(off):.1f} h "
        f"off the sun there, allowed {ZONE_SLACK_H:g}){hint}"
    )


def make_site(latitude: float, longitude: float, elevation: float | None, timezone: str) -> Site:
    """Return a checked site; an absent elevation comes from pvlib's coarse map (100 m off in mountains)."""
    check_coordinates(latitude, longitude, standard_offset_h(timezone))
    if elevation is None:
        elevation = look_up_elevation(latitude, longitude)
    if not (math.isfinite(elevation) and -500.0 <= elevation <= 6000.0):
        raise UserError(f"site -> elevation: found {elevation:g}, allowed -500 to 6000 m")
    return Site(float(latitude), float(longitude), float(elevation), timezone)


def look_up_elevation(latitude: float, longitude: float) -> float:
    """Return metres above the sea from pvlib's coarse map; the sea and unknown places count as 0."""
    from pvlib.location import lookup_altitude

    # the map has no row for the pole itself
    found = float(lookup_altitude(min(max(latitude, -89.9), 89.9), min(max(longitude, -179.9), 179.9)))
    return found if math.isfinite(found) and found > -500.0 else 0.0


def zone_of_offset(offset_h: float) -> str:
    """Return a fixed-offset IANA zone for whole hours, else the nearest one (schedules only)."""
    hours = round(offset_h)
    if abs(hours) > 12:
        hours = int(math.copysign(12, hours))
    return "Etc/GMT" if hours == 0 else f"Etc/GMT{-hours:+d}"


def mid_times_utc(weather: Weather) -> Times:
    """Return the middle of each step in UTC, (N,) datetime64[s]."""
    shift = round(weather.step_s / 2.0 - 3600.0 * weather.utc_offset_h)
    return np.asarray(
        weather.time.astype("datetime64[s]") + np.timedelta64(shift, "s"), dtype="datetime64[s]"
    )


def day_of_year(weather: Weather) -> NDArray[np.int64]:
    """Return 1..366 of each step's start in local standard time, (N,)."""
    days = weather.time.astype("datetime64[D]")
    return np.asarray((days - days.astype("datetime64[Y]").astype("datetime64[D]")).astype(np.int64) + 1)


def local_days(weather: Weather) -> NDArray[np.datetime64]:
    """Return the standard-time day of each step, (N,) datetime64[D]."""
    return weather.time.astype("datetime64[D]")


def solar_hours(weather: Weather) -> Floats:
    """Return true solar time at mid-step, (N,) hours 0..24 (equation of time: Spencer 1971)."""
    return solar_time(mid_times_utc(weather), weather.site.longitude)


def solar_time(utc: Times, longitude: float) -> Floats:
    """Return true solar time, hours 0..24 (equation of time: Spencer 1971; Duffie & Beckman eq. 1.5.3)."""
    days = utc.astype("datetime64[D]")
    hour = (utc - days).astype("timedelta64[s]").astype(float) / 3600.0
    day = (days - days.astype("datetime64[Y]").astype("datetime64[D]")).astype(float)
    b = 2.0 * np.pi * day / 365.0
    minutes = 229.18 * (
        0.000075
        + 0.001868 * np.cos(b)
        - 0.032077 * np.sin(b)
        - 0.014615 * np.cos(2 * b)
        - 0.04089 * np.sin(2 * b)
    )
    return np.asarray((hour + longitude / 15.0 + minutes / 60.0) % 24.0)


def civil_hours(weather: Weather) -> Floats:
    """Return the civil hour of day at mid-step, (N,) 0..24, daylight saving included.

    The nominal clock of typical years follows today's rules, read from a year with the same weekdays.
    """
    utc = mid_times_utc(weather)
    if weather.typical or weather.clear_sky:
        utc = utc + (np.datetime64(f"{CIVIL_YEAR}-01-01", "s") - np.datetime64(f"{NOMINAL_YEAR}-01-01", "s"))
    return np.asarray((_day_seconds(utc) / 3600.0 + _zone_offsets_h(utc, weather.site.timezone)) % 24.0)


def _day_seconds(utc: Times) -> Floats:
    return np.asarray((utc - utc.astype("datetime64[D]")).astype("timedelta64[s]").astype(float))


def _zone_offsets_h(utc: Times, zone: str) -> Floats:
    """Return the civil offset from UTC at each time, hours; hour by hour only on days when it jumps."""
    from datetime import UTC, datetime

    tz = time_zone(zone)

    @cache
    def offset(second: int) -> float:
        delta = datetime.fromtimestamp(second, UTC).astimezone(tz).utcoffset()
        assert delta is not None
        return delta.total_seconds() / 3600.0

    seconds = utc.astype("datetime64[s]").astype(np.int64)
    day = seconds // 86400
    result = np.empty(len(seconds))
    for value in np.unique(day):
        rows = np.flatnonzero(day == value)
        start, end = offset(int(value) * 86400), offset(int(value + 1) * 86400)
        if start == end:
            result[rows] = start
        else:
            result[rows] = [offset(int(s)) for s in seconds[rows]]
    return result
