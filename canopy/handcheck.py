"""A heating load as it is worked out on paper: U x area x difference, leakage, foundation, clear-sky extra.

Apart from the hourly balance: a nominal U (EN 673 surface coefficients), no temperatures solved.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Final

import numpy as np

from canopy.bands import THERMAL
from canopy.glazing_u import u_value as nominal_u
from canopy.heatcase import CoveringHeat, Shell
from canopy.longwave import share_between
from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K

OUTSIDE_W_M2_K: Final = 25.0  # EN 673: nominal, about 4 m/s, radiation included
BLACK_RADIATION: Final = 4.1 / 0.837  # W m-2 K-1, black to black: EN 673 takes 4.1 for an emissivity of .837
AIR_WH_M3_K: Final = 1.0 / 3.0  # heat of air per m3 and K, the rule of thumb: 1.2 kg/m3 x 1006 J/kgK / 3600
MEAN_C: Final = 10.0  # weights of the thermal bands


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


def band_mean(values: np.ndarray, temp_c: float = MEAN_C) -> float:
    """Return a thermal property (T,) averaged over the bands by Planck's law at a temperature."""
    edges = [0.0, *THERMAL.edges[1:-1], np.inf]
    temp = np.array([temp_c + ZERO_C_K])
    weights = [float(share_between(a, b, temp)[0]) for a, b in pairwise(edges)]
    return float(np.dot(weights, values))


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
    optics = covering.dry
    through = float(np.prod([band_mean(row) for row in optics.transmit]))
    u = nominal_u(optics, covering.resistance, covering.gaps) if u_value is None else u_value
    ratio = shell.roof_ratio + shell.wall_ratio
    difference = inside_c - outside_c
    seen = shell.roof_ratio * shell.roof_sky_view + shell.wall_ratio * shell.wall_sky_view
    deficit = max(0.0, STEFAN_BOLTZMANN * (outside_c + ZERO_C_K) ** 4 - sky_w_m2)
    outer = band_mean(1.0 - optics.transmit[0] - optics.reflect_outside[0])
    extra = seen * deficit * (outer * max(0.0, u - BLACK_RADIATION * through) / OUTSIDE_W_M2_K + through)
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
