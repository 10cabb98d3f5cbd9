"""What the pipeline hands to the reports: one `CandidateRun` per candidate, one `Run` per study."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from canopy.heatcase import HeatCase, HeatResult, Shell
from canopy.house import House
from canopy.light import HouseTransmission, Light, SunBands
from canopy.optics import Covering, Ground, Leaf, Screen
from canopy.studyfile import Plan, Study
from weather.record import Weather

if TYPE_CHECKING:
    from canopy.greyband import GreyBand

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Closure:
    """One budget and how well it closes: the largest hourly gap, W/m2 floor, and its hour."""

    budget: str
    worst_w_m2: float
    at: str


@dataclass(frozen=True)
class CandidateRun:
    """One candidate: inputs as used, light and heat hour by hour, tables by column name.

    `hourly` holds every column of `columns.COLUMNS` over the reported hours (`Run.hours`); `daily` every
    column of `columns.DAILY` over `Run.days`; `monthly` the same over `Run.months`.
    """

    plan: Plan
    covering: Covering
    screens: tuple[Screen, ...]
    leaf: Leaf
    ground: Ground
    house: House
    shell: Shell
    transmission: HouseTransmission  # dry
    light: Light  # dry and wet blended as the heat side decided, all hours of the record
    heat: HeatResult
    case: HeatCase
    lai: Floats  # (N,) over the whole record
    hourly: Mapping[str, Floats]
    daily: Mapping[str, Floats]
    monthly: Mapping[str, Floats]
    closures: tuple[Closure, ...]
    sizing: Any  # canopy.sizing.Sizing
    design: Any  # canopy.designnight.DesignNight
    notes: tuple[str, ...] = ()  # assumptions that a reader must see
    grey: GreyBand | None = None  # what one grey band would have said, for selective coverings


@dataclass(frozen=True)
class Run:
    """A whole study, computed."""

    study: Study
    weather: Weather
    sun: SunBands
    hours: NDArray[np.intp]  # indices into the weather record that are reported (the season)
    time: NDArray[np.datetime64]  # (H,) start of each reported hour, file's fixed offset
    days: NDArray[np.datetime64]  # (D,) datetime64[D], standard-time days
    months: tuple[str, ...]  # "YYYY-MM"
    candidates: tuple[CandidateRun, ...]
    wall_s: Mapping[str, float]  # seconds by stage
    versions: Mapping[str, str]
    weather_sha256: str
    notes: tuple[str, ...] = field(default=())
