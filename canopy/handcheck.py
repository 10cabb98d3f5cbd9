"""A heating load as it is worked out on paper: U x area x difference, leakage, foundation, clear-sky extra.

Independent of the hourly balance: nominal surface coefficients of EN 673, no temperatures solved.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Final

import numpy as np

from canopy.bands import THERMAL
from canopy.heatcase import CoveringHeat, Shell
from canopy.longwave import share_between
from canopy.optics import Gap, ThermalOptics
from weather.constants import GRAVITY, STEFAN_BOLTZMANN, ZERO_C_K

OUTSIDE_W_M2_K: Final = 25.0  # EN 673: nominal, about 4 m/s, radiation included
INSIDE_CONVECTION: Final = 3.6  # EN 673: hi = 3.6 + 4.1 e/.837 (4.1: about 10 degC faces)
INSIDE_RADIATION: Final = 4.1
GLASS_EMISSIVITY: Final = 0.837
BLACK_RADIATION: Final = INSIDE_RADIATION / GLASS_EMISSIVITY  # W m-2 K-1, black to black
AIR_WH_M3_K: Final = 1.0 / 3.0  # heat of air per m3 and K, the rule of thumb: 1.2 kg/m3 x 1006 J/kgK / 3600
GAP_MEAN_C: Final = 10.0  # EN 673: mean gap temperature
GAP_DIFFERENCE_K: Final = 15.0  # EN 673: between the faces


@dataclass(frozen=True)
class HandCheck:
    """The paper calculation, W per m2 floor, and what goes into it."""

    u_value: float  # W m-2 K-1 of cover, nominal
    cover_ratio: float  # m2 cover per m2 floor
    difference_k: float
    covering_w_m2: float  # U x area x difference
    sky_extra_w_m2: float  # what a sky colder than the air takes beyond that
    leakage_per_h: float
    leakage_w_m2: float
    perimeter_w_m2: float
    total_w_m2: float
    text: str


def band_mean(values: np.ndarray, temp_c: float = GAP_MEAN_C) -> float:
    """Return a thermal property (T,) averaged over the bands by Planck's law at a temperature."""
    edges = [0.0, *THERMAL.edges[1:-1], np.inf]
    temp = np.array([temp_c + ZERO_C_K])
    weights = [float(share_between(a, b, temp)[0]) for a, b in pairwise(edges)]
    return float(np.dot(weights, values))


def _emissivity(optics: ThermalOptics, layer: int, face: str) -> float:
    reflect = optics.reflect_outside if face == "outside" else optics.reflect_inside
    return band_mean(1.0 - optics.transmit[layer] - reflect[layer])


def gap_u(gap: Gap, emissivity_a: float, emissivity_b: float, upright: bool = False) -> float:
    """Conductance of one gap, W m-2 K-1, after EN 673: gas (Nu = A (Gr Pr)^n, at least 1) and radiation."""
    density, viscosity, conductivity, heat = (
        (1.232, 1.761e-5, 2.496e-2, 1008.0) if gap.gas == "air" else (1.699, 2.164e-5, 1.684e-2, 519.0)
    )  # EN 673 table 1, 10 degC
    factor, power = (0.035, 0.38) if upright else (0.16, 0.28)
    mean = GAP_MEAN_C + ZERO_C_K
    grashof = GRAVITY * gap.thickness_m**3 * GAP_DIFFERENCE_K * density**2 / (mean * viscosity**2)
    nusselt = max(1.0, factor * (grashof * viscosity * heat / conductivity) ** power)
    faces = max(1.0 / max(emissivity_a, 1e-3) + 1.0 / max(emissivity_b, 1e-3) - 1.0, 1.0)
    radiation = 4.0 * STEFAN_BOLTZMANN * mean**3 / faces
    return float(conductivity / gap.thickness_m * nusselt + radiation + gap.web_conductance)


def nominal_u(covering: CoveringHeat, upright: bool = False) -> tuple[float, float]:
    """Return the nominal U of a dry covering, W m-2 K-1 of cover, and its long-wave transmittance.

    Opaque part: 1/U = 1/he + R + sum of gaps + 1/hi (EN 673, hi by the inner emissivity). What passes
    straight through exchanges as black to black on top: a sheet that long-wave passes has no place in EN 673.
    """
    optics = covering.dry
    layers = len(covering.resistance)
    inside = INSIDE_CONVECTION + BLACK_RADIATION * _emissivity(optics, layers - 1, "inside")
    resistance = 1.0 / OUTSIDE_W_M2_K + sum(covering.resistance) + 1.0 / inside
    for at, gap in enumerate(covering.gaps):
        faces = _emissivity(optics, at, "inside"), _emissivity(optics, at + 1, "outside")
        resistance += 1.0 / gap_u(gap, *faces, upright)
    through = float(np.prod([band_mean(optics.transmit[k]) for k in range(layers)]))
    return 1.0 / resistance + BLACK_RADIATION * through, through


def hand_check(
    covering: CoveringHeat,
    shell: Shell,
    inside_c: float,
    outside_c: float,
    sky_w_m2: float,
    u_value: float | None = None,
) -> HandCheck:
    """Work out a design load on paper, W per m2 floor, screens open.

    `sky_w_m2` long-wave from the clear sky. The sky extra is e dR / he as in sol-air temperature (ASHRAE
    Fundamentals ch. 18) for the outer face, and dR x transmittance straight through.
    """
    nominal, through = nominal_u(covering)
    u = nominal if u_value is None else u_value
    ratio = shell.roof_ratio + shell.wall_ratio
    difference = inside_c - outside_c
    seen = shell.roof_ratio * shell.roof_sky_view + shell.wall_ratio * shell.wall_sky_view
    deficit = max(0.0, STEFAN_BOLTZMANN * (outside_c + ZERO_C_K) ** 4 - sky_w_m2)
    outer = _emissivity(covering.dry, 0, "outside")
    extra = seen * deficit * (outer * (u - BLACK_RADIATION * through) / OUTSIDE_W_M2_K + through)
    cover = u * ratio * difference
    leak = shell.leakage_per_hour * shell.mean_height_m * AIR_WH_M3_K * difference
    foundation = shell.perimeter_loss * shell.perimeter_per_floor * difference
    text = (
        f"U {u:.2f} W/m2K x {ratio:.2f} m2 cover/m2 floor x {difference:.1f} K = {cover:.0f}; "
        f"sky {deficit:.0f} W/m2 below black: {extra:.0f}; "
        f"leakage {shell.leakage_per_hour:.2f}/h x {shell.mean_height_m:.2f} m x 1/3 Wh/m3K x "
        f"{difference:.1f} K = {leak:.0f}; foundation {shell.perimeter_loss:.2f} W/mK x "
        f"{shell.perimeter_per_floor:.3f} m/m2 x {difference:.1f} K = {foundation:.0f}"
    )
    total = cover + extra + leak + foundation
    return HandCheck(
        u, ratio, difference, cover, extra, shell.leakage_per_hour, leak, foundation, total, text
    )
