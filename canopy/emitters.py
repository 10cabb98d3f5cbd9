"""Heating pipes: area, water, convection, and what part of their radiation meets what is around them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.exchange import SMALL_K
from canopy.heatcase import Heating
from canopy.longwave import Plane
from weather.constants import CP_WATER

Floats = NDArray[np.float64]

PIPE_EMISSIVITY: Final = 0.88  # painted steel; heat-transfer handbooks .85-.95
PIPE_WALL_M: Final = 0.00225  # m, 51 mm welded steel tube; common practice
STEEL_HEAT: Final = 7850.0 * 480.0  # J m-3 K-1, density x specific heat of steel, handbooks
PIPE_FREE: Final = 1.32  # W m-7/4 K-5/4, horizontal cylinder in air, simplified laminar form (McAdams 1954)
FLOW_SPREAD_K: Final = 10.0  # flow less mean water temperature at full design heat; common practice
LEAST_PIPE_M_M2: Final = 1e-4  # keeps the pipe's equation regular in a house without pipes


@dataclass(frozen=True)
class Pipes:
    """Pipes per m2 floor: surface (m2), intercepted share of a flux across their plane, heat J m-2 K-1."""

    surface: float
    intercept: float
    capacity: float
    diameter_m: float


def pipes(heating: Heating) -> Pipes:
    """Size the pipes of a house. An isotropic flux across a thin plane of pipes meets surface/2 of it."""
    length = max(heating.pipe_m_per_m2, LEAST_PIPE_M_M2)
    diameter = max(heating.pipe_diameter_m, 0.01)
    bore = diameter - 2.0 * min(PIPE_WALL_M, 0.2 * diameter)
    water = np.pi / 4.0 * bore**2 * 1000.0 * CP_WATER
    steel = np.pi / 4.0 * (diameter**2 - bore**2) * STEEL_HEAT
    surface = np.pi * diameter * length
    return Pipes(surface, float(-np.expm1(-0.5 * surface)), float(length * (water + steel)), diameter)


def pipe_plane(p: Pipes) -> Plane:
    """The pipes as a plane of the long-wave stack."""
    through = np.array([[1.0 - p.intercept]])
    back = np.array([[p.intercept * (1.0 - PIPE_EMISSIVITY)]])
    return Plane(through, through, back, back)


def pipe_convection(p: Pipes, diff: Floats) -> tuple[Floats, Floats]:
    """Convection of the pipes, W/m2 floor, for pipe - air in K, and its slope: h = 1.32 (dT/D)^0.25."""
    size = np.sqrt(diff * diff + SMALL_K**2)
    h = p.surface * PIPE_FREE * np.sqrt(np.sqrt(size / p.diameter_m))
    return h * diff, h * (1.0 + 0.25 * diff * diff / (size * size))


def flow_temperature(temp_pipe_c: Floats, heat_w_m2: Floats, design_w_m2: float) -> Floats:
    """Flow temperature that an hour needs, degC: mean water temperature plus half the spread at that load."""
    load = heat_w_m2 / max(design_w_m2, 1e-9)
    return np.asarray(temp_pipe_c + FLOW_SPREAD_K * np.clip(load, 0.0, 1.0))
