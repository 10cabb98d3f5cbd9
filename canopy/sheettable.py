"""One covering state on an even grid of cos(incidence), so that a lookup is index arithmetic."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.optics import SolarOptics

Floats = NDArray[np.float64]
Ints = NDArray[np.int32]

STEPS = 1024
"""Intervals of cos(incidence): linear reading is within 3e-6 of the curve for clear sheets."""


@dataclass(frozen=True)
class Place:
    """Where incidences lie on the grid: lower node and the share of the way to the next."""

    node: Ints
    part: Floats

    def some(self, rows: NDArray[np.int64]) -> Place:
        """Return the places of some rows."""
        return Place(self.node[rows], self.part[rows])


def place(cosine: Floats) -> Place:
    """Return where cosines of incidence (0 ... 1) lie on the grid."""
    at = np.clip(cosine, 0.0, 1.0) * STEPS
    node = np.minimum(at.astype(np.int32), STEPS - 1)
    return Place(node, at - node)


@dataclass(frozen=True)
class SheetTable:
    """Solar optics of one covering on the even grid; (B, STEPS + 1), absorbed (L * B, STEPS + 1)."""

    beam: Floats
    total: Floats  # beam and scattered
    reflect: Floats
    specular: Floats
    absorbed: Floats
    hazy: bool

    @staticmethod
    def read(table: Floats, where: Place) -> Floats:
        """Return the values (rows of `table`, places), linear between nodes."""
        low = table.take(where.node, axis=1)
        high = table.take(where.node + 1, axis=1)
        high -= low
        high *= where.part
        high += low
        return high


def sheet_table(solar: SolarOptics) -> SheetTable:
    """Resample a covering's angle tables (any rising grid from 0 to pi/2) with a monotone cubic."""
    bands = solar.beam_beam.shape[0]
    layers = solar.beam_absorbed.shape[0]
    rows = np.vstack(
        [
            solar.beam_beam,
            solar.beam_diffuse,
            solar.beam_reflect,
            solar.beam_specular,
            solar.beam_absorbed.reshape(layers * bands, -1),
        ]
    )
    angle = np.arccos(np.linspace(0.0, 1.0, STEPS + 1))
    fine = _monotone_cubic(solar.angles, rows, np.clip(angle, solar.angles[0], solar.angles[-1]))
    beam, scattered = fine[:bands], fine[bands : 2 * bands]
    return SheetTable(
        beam=beam,
        total=beam + scattered,
        reflect=fine[2 * bands : 3 * bands],
        specular=fine[3 * bands : 4 * bands],
        absorbed=fine[4 * bands :],
        hazy=bool(solar.beam_diffuse.max() > 0.0),
    )


def _monotone_cubic(x: Floats, y: Floats, at: Floats) -> Floats:
    """Monotone piecewise cubic through (x, y rows), Fritsch & Butland (1984) slopes."""
    step = np.diff(x)
    rise = np.diff(y, axis=1) / step
    left, right = rise[:, :-1], rise[:, 1:]
    w1, w2 = 2.0 * step[1:] + step[:-1], step[1:] + 2.0 * step[:-1]
    same = left * right > 0.0
    safe_left, safe_right = np.where(same, left, 1.0), np.where(same, right, 1.0)
    inner = np.where(same, (w1 + w2) / (w1 / safe_left + w2 / safe_right), 0.0)
    # an even function of the angle starts level; the far end takes the last chord
    slope = np.hstack([np.zeros((len(y), 1)), inner, rise[:, -1:]])
    i = np.clip(np.searchsorted(x, at, side="right") - 1, 0, len(x) - 2)
    h = step[i]
    t = (at - x[i]) / h
    a, b = y[:, i], y[:, i + 1]
    da, db = slope[:, i] * h, slope[:, i + 1] * h
    return np.asarray(a + t * (da + t * (3.0 * (b - a) - 2.0 * da - db + t * (2.0 * (a - b) + da + db))))
