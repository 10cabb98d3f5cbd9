"""What light does in one house: the records between geometry, stand and heat.

Axes: B solar bands, N hours, L covering layers, S screens. Every W/m2 is per m2 of FLOOR.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class SunBands:
    """Outside sunlight split into solar bands; the bands sum to dni and dhi in every hour."""

    direct: Floats  # (B, N) W/m2 normal to the beam
    diffuse: Floats  # (B, N) W/m2 on the horizontal
    direct_umol_per_j: Floats  # (N,) photons 400-700 nm per joule of direct PAR
    diffuse_umol_per_j: Floats  # (N,) photons 400-700 nm per joule of diffuse PAR


@dataclass(frozen=True)
class HouseTransmission:
    """How one covering state on one house passes light to the crop plane, per unit outside on the horizontal.

    Shares are of outside beam on the horizontal (`dni * cos z`) or of outside diffuse on the horizontal.
    """

    beam: Floats  # (B, N) arrives as beam
    beam_scattered: Floats  # (B, N) arrives as diffuse: haze and first bounce
    sky: Floats  # (B, N) outside diffuse that arrives as diffuse (isotropic, circumsolar, horizon, ground)
    isotropic: Floats  # (B,) the part for an isotropic sky, the classic whole-house diffuse transmission
    covering_beam: Floats  # (L, B, N) absorbed in each covering layer, per unit of outside horizontal beam
    covering_sky: Floats  # (L, B, N) the same per unit of outside diffuse
    structure_beam: Floats  # (B, N) stopped by gutters, ridges and bars, per unit of outside horizontal beam
    structure_sky: Floats  # (B, N) the same per unit of outside diffuse
    return_down: Floats  # (B,) share of light going up from the crop that the house sends down again
    sunny: Floats  # (N,) share of the crop plane that the straight beam reaches
    covering_up: Floats = field(default_factory=lambda: np.zeros((1, 1)))
    # ^ (L, B) of light going up from the crop, absorbed in each covering layer


@dataclass(frozen=True)
class StandResponse:
    """What a leaf canopy over its ground does with light that falls on its top, per unit on the horizontal.

    Laws: crop + ground + up == 1 for beam and for diffuse, in every band and hour.
    """

    beam_crop: Floats  # (B, N) of beam, absorbed by leaves
    beam_ground: Floats  # (B, N) of beam, absorbed by what lies under the crop
    beam_up: Floats  # (B, N) of beam, sent upwards
    diffuse_crop: Floats  # (B, N)
    diffuse_ground: Floats  # (B, N)
    diffuse_up: Floats  # (B, N)
    sunlit_lai: Floats  # (N,) m2 sunlit leaf per m2 floor
    beam_crop_sunlit: Floats  # (B, N) of beam, absorbed by sunlit leaves
    diffuse_crop_sunlit: Floats  # (B, N) of diffuse, absorbed by sunlit leaves
    beam_gap: Floats  # (N,) black-leaf gap fraction along the sun
    diffuse_gap: Floats  # (N,) black-leaf gap fraction for isotropic radiation (long-wave)


@dataclass(frozen=True)
class Light:
    """Light in one house, one covering state (dry or wet), screens as drawn, hour by hour."""

    outside_beam: Floats  # (B, N) on the horizontal
    outside_diffuse: Floats  # (B, N)
    inside_beam: Floats  # (B, N) at the top of the crop, downwards
    inside_diffuse: Floats  # (B, N) at the top of the crop, downwards, returned light included
    crop: Floats  # (B, N) absorbed by leaves
    crop_sunlit: Floats  # (B, N) the part absorbed by sunlit leaves
    ground: Floats  # (B, N) absorbed under the crop
    crop_up: Floats  # (B, N) upwards at the top of the crop: beam + diffuse - up = crop + ground
    covering: Floats  # (L, B, N) absorbed by each covering layer
    screen: Floats  # (S, B, N) absorbed by each screen
    structure: Floats  # (B, N) absorbed by gutters, ridges, bars (goes to the house air)
    sunlit_lai: Floats  # (N,)
    sunny: Floats  # (N,) share of the crop plane that the straight beam reaches (0 when no sun)
