"""What a reader hands to the checks: the file's own rows in SI units, gaps as NaN, nothing mended yet."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np

from weather.record import DesignConditions, Finding, Floats, Times

Label = Literal["start", "end", "middle"]

QUANTITIES: Final = (
    "ghi",
    "dni",
    "dhi",
    "temp_air",
    "temp_dew",
    "relative_humidity",
    "pressure",
    "wind_speed",
    "precipitable_water",
    "longwave_down",
    "albedo",
    "cloud_cover",
)
"""Columns a reader may give: W/m2, degC, %, Pa, m/s, cm, fraction 0..1 (albedo and cloud cover)."""

TITLES: Final = {
    "ghi": "global radiation",
    "dni": "direct normal radiation",
    "dhi": "diffuse radiation",
    "temp_air": "air temperature",
    "temp_dew": "dew point",
    "relative_humidity": "relative humidity",
    "pressure": "pressure",
    "wind_speed": "wind speed",
    "precipitable_water": "precipitable water",
    "longwave_down": "long-wave radiation",
    "albedo": "ground albedo",
    "cloud_cover": "cloud cover",
}


@dataclass(frozen=True)
class RawWeather:
    """Rows as a file gives them, (M,) in the order of the file.

    `label` says where in its step the stamp of a radiation value lies. `sun_offset_s` is set where values are
    instantaneous: seconds from the stamp to the instant.
    """

    title: str
    source: str
    format: str
    latitude: float | None
    longitude: float | None
    elevation: float | None
    utc_offset_h: float | None  # of the stamps
    timezone: str | None  # IANA, where the file names one
    stamp: Times
    step_s: float
    label: Label
    typical: bool
    columns: dict[str, Floats]
    rows_lost: int  # rows of the file that could not be read
    findings: tuple[Finding, ...] = ()
    design: DesignConditions | None = None
    sun_offset_s: float | None = None


def column(
    values: Floats, missing: tuple[float, ...] = (), scale: float = 1.0, offset: float = 0.0
) -> Floats:
    """Return values in SI with the format's missing codes as NaN."""
    result = np.array(values, dtype=float)
    for code in missing:
        result[result == code] = np.nan
    return np.asarray(result * scale + offset)
