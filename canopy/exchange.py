"""Air against surfaces and air against outside: published correlations, each with its slope for the solver.

Every function takes the temperature difference (and what else drives it) and returns the conductance or
flow together with its derivative, arrays of any common shape. Conductances are W m-2 K-1 of the surface's
own m2; flows are m3 s-1 per m2 floor.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy.optics import Gap
from weather.constants import GRAVITY

Floats = NDArray[np.float64]

SMALL_K: Final = 0.05  # K, rounds the cusp of |dT| at zero; changes a flux by less than 1e-3 W/m2
STILL_AIR_M_S: Final = 0.10  # air speed among the crop of a closed, heated house (Stanghellini 1987)
VENT_CELL_M: Final = 16.0  # m of floor that air crosses from inlet to outlet; two spans, common practice
PLATE_M: Final = 1.0  # m, run of the air between bars, hoops, beds; common practice
LEAF_WIDTH_M: Final = 0.05  # m, characteristic leaf size (Stanghellini 1987, tomato leaflets)
VENT_HEIGHT_M: Final = 1.0  # m, vertical height of an open vent; common practice
VENT_DISCHARGE: Final = 0.644  # Boulard & Baille (1995), Agric. For. Meteorol. 73:133
VENT_WIND: Final = 0.09  # same source, global wind coefficient
LEAK_STACK: Final = 0.000145  # (L/s)2 cm-4 K-1, ASHRAE Fundamentals, basic infiltration model, one storey
LEAK_WIND: Final = 0.000174  # (L/s)2 cm-4 (m/s)-2, same model, shelter class 3
LEAK_REF_WIND_M_S: Final = 4.0  # a house's leakage is stated at this wind
LEAK_REF_K: Final = 20.0  # and this temperature difference
STOWED_MIX_M_S: Final = 0.05  # exchange of two spaces through open area beside buoyancy; common practice
SLIT: Final = 0.01  # open share added under the root of the buoyant exchange
MIXED_K: Final = 0.3  # rounds |dT| in flows between spaces
AIR_CONDUCTIVITY: Final = 0.026  # W m-1 K-1, air near 290 K
AIR_VISCOSITY_M2_S: Final = 1.5e-5  # kinematic, air near 290 K
AIR_PRANDTL: Final = 0.71

INSIDE_COVER: Final[dict[str, float]] = {"gable": 1.70, "arch": 2.21}
"""W m-2 K-4/3: gable, Bot (1983) as used by De Zwart (1996), x cos(slope)^-2/3; arch, Papadakis et al.
(1992), J. Agric. Eng. Res. 51:191 (turbulent free convection under a film)."""
WARM_FLOOR: Final = 1.70  # W m-2 K-4/3, De Zwart (1996), floor warmer than the air
COOL_FLOOR: Final = 1.20  # W m-2 K-4/3, floor cooler than the air, see `floor_convection`
SCREEN_FACE: Final = 1.70  # W m-2 K-4/3, De Zwart (1996), each face of a drawn screen


def inside_cover(form: Literal["gable", "arch"], slope_deg: float) -> float:
    """Coefficient of the inner face's free convection, W m-2 K-4/3 of cover (see INSIDE_COVER)."""
    tilt = np.cos(np.radians(min(slope_deg, 60.0))) ** (-2.0 / 3.0) if form == "gable" else 1.0
    return float(INSIDE_COVER[form] * tilt)


def outside_convection(form: Literal["gable", "arch"], wind_m_s: Floats) -> Floats:
    """Outer face of the covering against the wind at the house, W m-2 K-1 of cover.

    Multi-span glass: 2.8 + 1.2 v below 4 m/s, 2.5 v^0.8 above (Bot 1983). Rounded film house:
    0.95 + 6.76 v^0.49 (Papadakis, Frangoudakis & Kyritsis 1992), measured up to 6.3 m/s, beyond with
    v^0.8 from there. Both were had against wind near the house, so the wind factor belongs to `wind_m_s`.
    """
    v = np.maximum(wind_m_s, 0.0)
    if form == "gable":
        return np.where(v < 4.0, 2.8 + 1.2 * v, 2.5 * v**0.8)
    edge = 6.3
    return np.where(v <= edge, 0.95 + 6.76 * v**0.49, (0.95 + 6.76 * edge**0.49) * (v / edge) ** 0.8)


def forced_cube(air_speed_sq: Floats) -> tuple[Floats, Floats]:
    """Cube of the forced convection of a long plate, and its slope with the speed squared.

    Nu = 0.037 Re^0.8 Pr^1/3 (turbulent flat plate, heat-transfer textbooks) over PLATE_M.
    """
    unit = 0.037 * AIR_PRANDTL ** (1 / 3) * AIR_CONDUCTIVITY / PLATE_M * (PLATE_M / AIR_VISCOSITY_M2_S) ** 0.8
    cube = unit**3 * air_speed_sq**1.2
    return cube, 1.2 * cube / air_speed_sq


def cube_law(coefficient: float | Floats, diff: Floats, forced: Floats) -> tuple[Floats, Floats, Floats]:
    """Mixed convection h = (h_free^3 + h_forced^3)^(1/3), h_free = coefficient |diff|^(1/3).

    Returns h, dh/d(diff), dh/d(forced cube). The cubic blend of free and forced flow is Churchill (1977). The
    cusp of |diff| is rounded so that h is the forced one at diff = 0, whatever the coefficient.
    """
    size = np.sqrt(diff * diff + SMALL_K**2)
    cubed = coefficient**3
    cube = cubed * (size - SMALL_K) + forced
    h = np.cbrt(cube)
    by_cube = 1.0 / (3.0 * h * h)
    return h, by_cube * cubed * diff / size, by_cube


def floor_convection(diff: Floats, forced: Floats) -> tuple[Floats, Floats, Floats]:
    """Floor against air, `diff` = floor - air: h, dh/d(diff), dh/d(forced cube).

    De Zwart (1996): 1.7 |dT|^1/3 on a warm floor; on a cool one 1.3 |dT|^1/4, here 1.2 |dT|^1/3 (within 10 %
    from 1 to 10 K) so that both meet at dT = 0, where only the air's own movement is left.
    """
    coefficient = np.where(diff > 0.0, WARM_FLOOR, COOL_FLOOR)
    return cube_law(coefficient, diff, forced)


def leaf_boundary(diff: Floats, air_speed_sq: Floats) -> tuple[Floats, Floats, Floats]:
    """Boundary-layer conductance of a leaf face, m/s: g, dg/d(diff), dg/d(speed^2).

    r = 1174 l^0.5 / (l |dT| + 207 u^2)^0.25 s/m (Stanghellini 1987, Transpiration of greenhouse crops).
    """
    size = np.sqrt(diff * diff + SMALL_K**2)
    base = LEAF_WIDTH_M * size + 207.0 * air_speed_sq
    g = np.sqrt(np.sqrt(base)) / (1174.0 * np.sqrt(LEAF_WIDTH_M))
    by_base = 0.25 * g / base
    return g, by_base * LEAF_WIDTH_M * diff / size, by_base * 207.0


def leakage(changes_per_h: float, height_m: float, wind_m_s: Floats, diff: Floats) -> tuple[Floats, Floats]:
    """Leakage of a closed house, m3 s-1 per m2 floor, and its slope with inside - outside temperature.

    Shape of the ASHRAE basic infiltration model, Q ~ (Cs |dT| + Cw v^2)^0.5, scaled so that the stated air
    changes hold at 4 m/s and 20 K.
    """
    size = np.sqrt(diff * diff + MIXED_K**2)
    drive = LEAK_STACK * size + LEAK_WIND * wind_m_s**2
    unit = changes_per_h * height_m / 3600.0
    unit /= np.sqrt(LEAK_STACK * LEAK_REF_K + LEAK_WIND * LEAK_REF_WIND_M_S**2)
    flow = unit * np.sqrt(drive)
    return flow, 0.5 * flow / drive * LEAK_STACK * diff / size


def vent_flow(
    area_ratio: float, net_factor: float, wind_m_s: Floats, diff: Floats, mean_k: Floats
) -> tuple[Floats, Floats]:
    """Air through fully open vents, m3 s-1 per m2 floor, and its slope with inside - outside temperature.

    Boulard & Baille (1995): (A/2) Cd (2 g dT/T h/4 + Cw v^2)^0.5. A net keeps `net_factor` of the discharge.
    """
    size = np.sqrt(diff * diff + MIXED_K**2)
    per_k = 2.0 * GRAVITY * VENT_HEIGHT_M / 4.0 / mean_k
    drive = per_k * size + VENT_WIND * wind_m_s**2
    flow = 0.5 * area_ratio * VENT_DISCHARGE * net_factor * np.sqrt(drive)
    return flow, 0.5 * flow / drive * per_k * diff / size


def screen_flow(
    fabric: Floats, open_part: Floats, permeability: float, diff: Floats, mean_k: Floats
) -> tuple[Floats, Floats, Floats]:
    """Air between the spaces below and above a screen, m3 s-1 per m2 floor.

    Through the drawn fabric K |dT|^(2/3) (Balemans 1989; Miguel 1998), `fabric` its share of the floor;
    through the open part a the buoyant exchange a (0.5 a g |dT| / T)^0.5 (Miguel 1998), with a slit's width
    added under the root so that the first opening counts, and a little mixing. Returns flow, slope with dT,
    slope with `open_part`.
    """
    size = np.sqrt(diff * diff + MIXED_K**2)
    through = fabric * (permeability / 3600.0) * np.cbrt(size) ** 2
    root = np.sqrt(0.5 * GRAVITY * size / mean_k)
    width = np.sqrt(open_part + SLIT)
    buoyant = open_part * width * root
    flow = through + buoyant + STOWED_MIX_M_S * open_part**2
    by_diff = (through * (2 / 3) + 0.5 * buoyant) * diff / (size * size)
    by_open = root * (width + 0.5 * open_part / width) + 2.0 * STOWED_MIX_M_S * open_part
    return flow, by_diff, by_open


def air_speed_sq(flow: Floats, height_m: float) -> tuple[Floats, Floats]:
    """Square of the air speed among the crop, and its slope with the ventilation flow (m3 s-1 per m2 floor).

    Still-air speed and the through-flow of one vent cell, flow x width / height, added as squares.
    """
    reach = VENT_CELL_M / height_m
    return STILL_AIR_M_S**2 + (reach * flow) ** 2, 2.0 * reach**2 * flow


@dataclass(frozen=True)
class GasLayer:
    """What a gap needs: still conductance, Rayleigh number per K, and the law's two numbers."""

    still: float
    rayleigh_per_k: float
    factor: float
    power: float
    web: float


GAS: Final[dict[str, tuple[float, float, float, float]]] = {
    "air": (1.232, 1.761e-5, 2.496e-2, 1008.0),
    "argon": (1.699, 2.164e-5, 1.684e-2, 519.0),
}
"""EN 673 table 1 at 10 degC: density kg/m3, viscosity kg m-1 s-1, conductivity W m-1 K-1, heat J kg-1 K-1."""


def gas_layer(gap: Gap, slope_deg: float) -> GasLayer:
    """A gap between two layers after EN 673: Nu = max(1, A Ra^n), A and n by inclination (heat upwards).

    Upright .035/.38, 45 degrees .10/.31, flat .16/.28; between them linear, as the standard says.
    """
    density, viscosity, conductivity, heat = GAS[gap.gas]
    angles = np.array([0.0, 45.0, 90.0])
    factor = float(np.interp(slope_deg, angles, [0.16, 0.10, 0.035]))
    power = float(np.interp(slope_deg, angles, [0.28, 0.31, 0.38]))
    grashof = GRAVITY * gap.thickness_m**3 * density**2 / (283.15 * viscosity**2)
    prandtl = viscosity * heat / conductivity
    return GasLayer(conductivity / gap.thickness_m, grashof * prandtl, factor, power, gap.web_conductance)


def gap_conductance(layer: GasLayer, diff: Floats) -> tuple[Floats, Floats]:
    """Conductance of a gap without radiation, W m-2 K-1, and its slope with the temperature difference."""
    size = np.sqrt(diff * diff + SMALL_K**2)
    nusselt = layer.factor * (layer.rayleigh_per_k * size) ** layer.power
    flowing = nusselt > 1.0
    h = layer.still * np.where(flowing, nusselt, 1.0) + layer.web
    slope = np.where(flowing, layer.still * nusselt * layer.power * diff / (size * size), 0.0)
    return h, slope
