"""Dirt on the covering, hour by hour: less light through, more kept by the outermost layer."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from canopy.light import HouseTransmission
from canopy.seasonal import day_number
from canopy.studykeys import CoveringKeys
from canopy.surfaces import Dirt
from weather.record import Times

Floats = NDArray[np.float64]


def dirt_left(keys: CoveringKeys | None, time: Times) -> Floats | None:
    """Return the share of light (N,) that dirt leaves, or None where the study names no dirt."""
    if keys is None or not keys.dirt_by_month:
        return None
    washes = tuple(day_number(day) - 1 for day in keys.wash_days)
    return Dirt(tuple(keys.dirt_by_month), washes).factor(time)


def soiled(house: HouseTransmission, left: Floats | None) -> HouseTransmission:
    """Return a transmission under dirt that leaves a share (N,); the rest stays in the outermost layer."""
    if left is None:
        return house
    lost = 1.0 - left
    beam, sky = house.covering_beam.copy(), house.covering_sky.copy()
    beam[0] += lost * (house.beam + house.beam_scattered)
    sky[0] += lost * house.sky
    return replace(
        house,
        beam=house.beam * left,
        beam_scattered=house.beam_scattered * left,
        sky=house.sky * left,
        covering_beam=beam,
        covering_sky=sky,
    )
