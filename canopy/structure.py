"""Glazing bars as angle-dependent shading; sizes of the covering per m2 of floor."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from canopy.house import House

Floats = NDArray[np.float64]

STRUCTURE_ABSORPTANCE = 0.5
"""Sunlight kept by gutters, ridges and bars as heat inside: coated or weathered metal absorbs .3-.7, part
of it outside (common practice); the rest is lost."""


def bars_open(house: House, normal: Floats, across_bars: Floats) -> Floats:
    """Return the share of a sheet that its bars leave open to a direction.

    `normal` and `across_bars` are the direction's components along the sheet's normal and across its bars: a
    bar of width w and depth d every s metres shades (w + d tan) / s (plane geometry, neighbours never overlap
    before all is shaded).
    """
    if house.bar_spacing <= 0.0 or (house.bar_width <= 0.0 and house.bar_depth <= 0.0):
        return np.ones_like(normal)
    tan = across_bars / np.maximum(normal, 1e-9)
    share: Floats = np.clip(1.0 - (house.bar_width + house.bar_depth * tan) / house.bar_spacing, 0.0, 1.0)
    return share


def upright_per_floor(house: House) -> tuple[float, float]:
    """Return side walls and gable ends above the crop plane, m2 per m2 of floor."""
    above = house.gutter_height - house.crop_plane_height
    side = 2.0 * house.length * above
    gable = 2.0 * house.spans * (house.span_width * above + house.roof_section)
    return side / house.floor_area, gable / house.floor_area
