"""What the heat balance takes and gives: plain records between control, light, solver and report.

Axes: N hours, L covering layers (outermost first), S screens (outermost first), T thermal bands.
Every W/m2 is per m2 of FLOOR unless the name says cover. Temperatures in degC at this edge.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from canopy.optics import Gap, Ground, Screen, ThermalOptics

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True)
class Outside:
    """The weather that the heat side needs, hour by hour."""

    step_s: float
    temp_air: Floats  # (N,) degC
    vapour_pressure: Floats  # (N,) Pa
    pressure: Floats  # (N,) Pa
    wind_speed: Floats  # (N,) m/s at 10 m in the open
    sky_bands: Floats  # (T, N) W/m2 downward on the horizontal in each thermal band
    sun_up: Bools  # (N,) mid-hour sun above the horizon


@dataclass(frozen=True)
class Shell:
    """The house as heat sees it, per m2 of floor."""

    form: Literal["gable", "arch"]
    floor_area_m2: float
    roof_ratio: float  # m2 roof covering per m2 floor
    wall_ratio: float  # m2 side walls and gable ends per m2 floor
    roof_sky_view: float  # view factor of the roof to the sky, the rest sees neighbouring roofs and ground
    wall_sky_view: float
    roof_slope_deg: float  # area mean
    mean_height_m: float  # volume per floor area
    ridge_height_m: float
    perimeter_per_floor: float  # m of outer foundation per m2 floor
    perimeter_loss: float  # W m-1 K-1 of foundation
    wind_factor: float  # wind at the house per wind at 10 m in the open (height and shelter)
    leakage_per_hour: float  # air changes per h at 4 m/s and 20 K, closed vents (`exchange`)
    vent_area_ratio: float  # m2 opening per m2 floor, fully open
    vent_factor: float  # discharge left by an insect net: 1 without
    walls_screened: bool = False  # drawn screens close side walls and gable ends too


@dataclass(frozen=True)
class CoveringHeat:
    """Thermal side of a covering."""

    dry: ThermalOptics
    wet: ThermalOptics
    heat_capacity: tuple[float, ...]  # (L,) J m-2 K-1 per m2 of sheet
    resistance: tuple[float, ...]  # (L,) m2 K/W
    gaps: tuple[Gap, ...]  # (L-1,)


@dataclass(frozen=True)
class SolarGain:
    """Absorbed sunlight, W/m2 floor, in one covering state."""

    crop: Floats  # (N,)
    crop_sunlit: Floats  # (N,)
    ground: Floats  # (N,)
    covering: Floats  # (L, N)
    screen: Floats  # (S, N)
    air: Floats  # (N,) structure and whatever is handed straight to the house air


@dataclass(frozen=True)
class CropHeat:
    """The stand as heat and vapour see it."""

    lai: Floats  # (N,) m2/m2; 0 = empty house
    gap: Floats  # (N,) long-wave gap fraction of the stand
    emissivity: Floats  # (T,)
    water_kg_per_lai: float  # kg water per m2 leaf (leaves and stems)
    sunlit_lai: Floats  # (N,)


@dataclass(frozen=True)
class Climate:
    """Set-points after ramps, and screens as decided from outside conditions, hour by hour."""

    heat_at: Floats  # (N,) degC; -inf: no heating
    vent_at: Floats  # (N,) degC
    humidity_max_pct: Floats  # (N,) 100 = no humidity control
    screen_drawn: Floats  # (S, N) 0 stowed ... 1 drawn
    min_pipe_c: Floats  # (N,) lowest pipe temperature while heating is on; -inf: none
    limit_c: Floats  # (N,) the crop's lower limit, for hours below it
    screen_gap_max: Floats | None = None  # (N,) widest gap, share of area, that drawn screens may open


@dataclass(frozen=True)
class Heating:
    """Emitters and their limit."""

    capacity_w_m2: float  # inf: unlimited
    pipe_diameter_m: float
    pipe_m_per_m2: float
    flow_max_c: float


@dataclass(frozen=True)
class HeatCase:
    """Everything that one candidate-year of heat needs."""

    outside: Outside
    shell: Shell
    covering: CoveringHeat
    screens: tuple[Screen, ...]
    crop: CropHeat
    ground: Ground
    climate: Climate
    heating: Heating
    gain_dry: SolarGain
    gain_wet: SolarGain
    periodic: bool = True  # the last hour hands its stores to the first


@dataclass(frozen=True)
class HeatResult:
    """Temperatures (degC) and fluxes (W/m2 floor), hour by hour; losses and stores taken up are positive.

    Identity, every hour: heat_delivered + solar == sky_loss + surroundings_loss + convection_loss
    + air_change_loss + venting + perimeter_loss + deep_loss + drain_loss + soil_store + air_store
    + vapour_store + crop_store + pipe_store + covering_store, to `closure`.
    """

    temp_air: Floats
    temp_leaf: Floats
    temp_leaf_sunlit: Floats
    temp_floor: Floats
    temp_covering: Floats  # (L, N)
    temp_screen: Floats  # (S, N)
    temp_pipe: Floats
    vapour_pressure: Floats  # Pa
    relative_humidity: Floats  # %
    wet: Floats  # (N,) 0 dry ... 1 wet inner face of the covering
    solar: Floats  # absorbed sun that entered the balance
    heat_delivered: Floats
    heat_for_humidity: Floats  # the part of heat_delivered that humidity venting costs
    sky_loss: Floats
    through_loss: Floats  # of sky_loss, straight through the covering
    skin_loss: Floats  # of sky_loss, leaving the outer face
    surroundings_loss: Floats  # long-wave to ground and neighbours outside
    convection_loss: Floats
    air_change_loss: Floats  # leakage, sensible and latent
    venting: Floats  # vents, sensible and latent
    perimeter_loss: Floats
    deep_loss: Floats
    soil_store: Floats
    air_store: Floats
    vapour_store: Floats
    crop_store: Floats
    pipe_store: Floats
    covering_store: Floats  # covering layers and screens
    drain_loss: Floats  # heat carried off by run-off and fog water
    transpiration: Floats  # kg m-2 h-1
    floor_evaporation: Floats  # kg m-2 h-1
    condensation: Floats  # kg m-2 h-1 on covering and screens
    vent_open: Floats  # 0 ... 1
    screen_drawn: Floats  # (S, N) after humidity gaps
    air_changes_per_h: Floats  # leakage and vents
    closure: Floats  # (N,) gains - losses - stores
    iterations: int
    retried_hours: int
    worst: str  # which hour and node is worst, for run.json
    notes: tuple[str, ...] = field(default=())
    start: Floats | None = None  # the solved iterate, for a like case to start from (see `balance`)
