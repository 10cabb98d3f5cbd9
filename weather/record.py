"""The records that the weather room hands on: `Site`, `Finding`, `DesignConditions`, `Weather`."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
Times = NDArray[np.datetime64]


@dataclass(frozen=True)
class Site:
    """A place: degrees north and east, metres above the sea, IANA zone for schedules."""

    latitude: float
    longitude: float
    elevation: float
    timezone: str


@dataclass(frozen=True)
class Finding:
    """One thing that the quality checks found, in words with its count."""

    check: str  # short slug: "label-shift", "closure", "missing", ...
    level: Literal["note", "corrected", "warning"]
    text: str
    count: int = 0


@dataclass(frozen=True)
class DesignConditions:
    """Outside temperatures exceeded in all but 35 and 88 hours of a mean year, degC, with their source."""

    heating_99_6_c: float
    heating_99_c: float
    source: str


@dataclass(frozen=True)
class Weather:
    """Hour-by-hour weather: equal-length arrays, SI, no gaps left, every filled hour marked.

    `time` is the START of each hour on the file's own fixed offset (`utc_offset_h`), whatever label the
    file used. Sun position belongs to the middle of the hour, or to the instant within the hour that a file's
    values stand for (satellite years). The law
    `ghi == dhi + dni * max(cos(zenith), 0)` holds to rounding in every hour (zenith: apparent).
    """

    site: Site
    title: str  # how a report names the record
    source: str  # file name and where the data come from
    utc_offset_h: float
    step_s: float
    typical: bool  # months from different years: extremes are removed, no sizing year
    clear_sky: bool  # a computed clear-sky record: an upper bound for light
    time: Times  # (N,) datetime64[s], start of hour, local standard time of the file
    ghi: Floats  # (N,) W/m2 global on the horizontal
    dni: Floats  # (N,) W/m2 direct normal, to be used with the mid-hour sun
    dhi: Floats  # (N,) W/m2 diffuse on the horizontal
    dni_extra: Floats  # (N,) W/m2 extraterrestrial normal
    ghi_clear: Floats  # (N,) W/m2 clear-sky global
    temp_air: Floats  # (N,) degC
    temp_dew: Floats  # (N,) degC
    relative_humidity: Floats  # (N,) %
    vapour_pressure: Floats  # (N,) Pa
    pressure: Floats  # (N,) Pa
    wind_speed: Floats  # (N,) m/s at 10 m in the open
    precipitable_water: Floats  # (N,) cm
    longwave_down: Floats  # (N,) W/m2 from the sky on the horizontal
    longwave_modelled: Bools  # (N,) True where longwave_down is computed, not read
    albedo: Floats  # (N,) of the ground outside
    zenith: Floats  # (N,) degrees, apparent (refracted), mid-hour
    azimuth: Floats  # (N,) degrees from north, clockwise, mid-hour
    filled: Bools  # (N,) True where any used quantity was filled
    in_season: Bools  # (N,) True inside first_day..last_day of the study
    findings: tuple[Finding, ...]
    design: DesignConditions | None  # as printed in the file's header, if any

    def __len__(self) -> int:
        """Return the number of steps."""
        return len(self.time)
