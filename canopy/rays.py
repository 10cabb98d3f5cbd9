"""Sun directions in the frame of a house, and the closed forms that every roof shape shares.

Frame: x across the ridges, y along them, z up; the sun always stands on the +x, +y side (a house with two
pitches is turned over instead). A straight line towards the sun from a point of the crop plane rises `slope`
metres per metre across. All lengths in metres.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.house import House

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

LOWEST_SUN_DEG = 1.0
"""A sun below this stands here for the geometry: it carries under 1e-4 of a year's light."""


@dataclass(frozen=True)
class Rays:
    """Unit vectors towards the sun in the house frame, (M,) each."""

    across: Floats  # >= 0
    along: Floats  # >= 0
    up: Floats  # > 0
    other_side: Bools  # the sun stands on the side of `pitch_other`

    @property
    def slope(self) -> Floats:
        """Rise per metre across (huge when the sun stands along the ridge)."""
        return self.up / np.maximum(self.across, 1e-9)

    @property
    def drift(self) -> Floats:
        """Metres along the ridge per metre of height."""
        return self.along / self.up


def house_rays(house: House, zenith_deg: Floats, azimuth_deg: Floats) -> Rays:
    """Return directions (M,) towards the sun; zenith degrees, azimuth degrees from north clockwise."""
    zenith = np.radians(np.minimum(zenith_deg, 90.0 - LOWEST_SUN_DEG))
    turn = np.radians(azimuth_deg - house.ridge_azimuth)
    flat = np.sin(zenith)
    across = flat * np.sin(turn)
    return Rays(np.abs(across), np.abs(flat * np.cos(turn)), np.cos(zenith), across < 0.0)


def capped_mean(a: Floats, b: Floats) -> Floats:
    """Mean of min(t, 1) for t running evenly from a to b (both >= 0)."""
    span = b - a
    even = np.abs(span) < 1e-7
    area_a = np.where(a < 1.0, 0.5 * a * a, a - 0.5)
    area_b = np.where(b < 1.0, 0.5 * b * b, b - 0.5)
    mean = (area_b - area_a) / np.where(even, 1.0, span)
    flat: Floats = np.where(even, np.minimum(0.5 * (a + b), 1.0), mean)
    return flat


@dataclass(frozen=True)
class Cuts:
    """Pieces of one period with a fixed sequence each, flattened over all directions: (P,) each."""

    row: Ints  # which direction
    low: Floats  # where the piece begins, m
    high: Floats  # where it ends, m
    mid: Floats

    def at(self, values: Floats) -> Floats:
        """Return the value of each piece's direction."""
        taken: Floats = values[self.row]
        return taken


def cut(breaks: list[Floats], length: Floats | float) -> Cuts:
    """Cut 0..length of every direction at its breaks (each (M,)); breaks outside are clipped away."""
    edges = np.stack([np.zeros_like(breaks[0]), *[np.clip(b, 0.0, length) for b in breaks]])
    edges = np.sort(np.vstack([edges, np.broadcast_to(length, breaks[0].shape)[None]]), axis=0)
    keep = np.diff(edges, axis=0) > 0.0
    row = np.nonzero(keep)[1]
    low, high = edges[:-1][keep], edges[1:][keep]
    return Cuts(row, low, high, 0.5 * (low + high))


def gather(row: Ints, values: Floats, rows: int) -> Floats:
    """Sum the values of all pieces of each direction: (rows,)."""
    return np.asarray(np.bincount(row, weights=values, minlength=rows), dtype=np.float64)
