"""What the study asks of the weather room."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from weather.raw import Label


@dataclass(frozen=True)
class WeatherRequest:
    """Site and source of the weather; exactly one of file, files, shipped, clear_sky.

    Site parts that are None are taken from the file's header where it has them (an elevation else from a
    coarse map). `longwave` None uses the file's long-wave radiation where it has some, else the model; "file"
    insists on the file's. `first_day`, `last_day` are "MM-DD" and may wrap over the new year. `columns` maps
    quantities (weather.raw.QUANTITIES, and "time") to a logger's column names, `units` the same quantities to
    unit names (weather.logger.UNITS). `utc_offset` (hours) and `label` say how the stamps are written where
    the file does not tell. `albedo` is used where the file has none.
    """

    latitude: float | None = None
    longitude: float | None = None
    elevation: float | None = None
    timezone: str | None = None
    file: Path | None = None
    files: tuple[Path, ...] = ()
    shipped: str | None = None
    clear_sky: bool = False
    longwave: Literal["file", "model"] | None = None
    first_day: str | None = None
    last_day: str | None = None
    allow_long_gaps: bool = False
    columns: Mapping[str, str] | None = None
    units: Mapping[str, str] | None = None
    utc_offset: float | None = None
    label: Label | None = None
    albedo: float = 0.2
