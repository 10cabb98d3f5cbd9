"""Crops in rows, on benches or gutters: boxes of leaves of endless length with bare floor between.

What a row lets through is exact: along a sun ray the share of its way that lies inside rows is piecewise
linear in where the ray starts, so its transmission integrates in closed form. Gaps for isotropic light and
what points of the floor see of the sky are integrals of the same expression over directions.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.leafangle import ellipsoid_area, projection
from canopy.standtable import LEAST_LAI, diffuse_gap, lai_interpolate, lai_nodes

Floats = NDArray[np.float64]

FLOOR_POINTS: Final = 20  # across one spacing, from row middle to row middle
_MU_NODES: Final = 20
_TURN_NODES: Final = 16
_DEPTH_NODES: Final = 5  # denser near the top
_LEAST_SWEEP: Final = 1e-6  # of the spacing: a ray along the rows


@lru_cache(maxsize=1)
def _depth_table() -> tuple[Floats, Floats]:
    """Return mean depth (share, negative so that it rises) and optical thickness of an even layer.

    Of light that is met in a layer of thickness x: mean depth 1 / x - 1 / (exp(x) - 1).
    """
    thick = np.geomspace(1e-3, 3000.0, 600)
    return 1.0 / np.expm1(np.minimum(thick, 700.0)) - 1.0 / thick, thick


@dataclass(frozen=True)
class Rows:
    """Rows of box section, m and degrees.

    width: of a row; spacing: middle to middle, at least the width; height: of the leafy part;
    azimuth: direction of the rows from north, clockwise.
    """

    width: float
    spacing: float
    height: float
    azimuth: float

    @property
    def cover(self) -> float:
        """Share of the floor under rows."""
        return self.width / self.spacing

    def _inside(self, x: Floats) -> Floats:
        """Return how much of 0..x (in spacings, rows start at whole numbers) lies in rows."""
        whole = np.floor(x)
        return np.asarray(whole * self.cover + np.minimum(x - whole, self.cover))

    def sweep(self, zenith_rad: Floats, across_rad: Floats) -> Floats:
        """Return how far a ray moves across the rows on its way down, in spacings."""
        far = self.height * np.tan(zenith_rad) * np.abs(np.sin(across_rad)) / self.spacing
        return np.asarray(np.maximum(far, _LEAST_SWEEP))

    def gap(self, thickness: Floats, sweep: Floats) -> Floats:
        """Return the gap fraction of black leaves: mean over x of exp(-thickness inside(x .. x + sweep)).

        thickness: Kb lai, the optical thickness that even leaves would have, of any shape; sweep: same shape.
        """
        zero = np.zeros_like(sweep)
        turns = np.stack([zero, zero + self.cover, -sweep % 1.0, (self.cover - sweep) % 1.0])
        turns = np.sort(turns, axis=0)
        turns = np.concatenate([turns, turns[:1] + 1.0])
        met = thickness / self.cover * (self._inside(turns + sweep) - self._inside(turns)) / sweep
        step = 0.5 * np.abs(np.diff(met, axis=0))
        middle = np.exp(-0.5 * (met[1:] + met[:-1]))
        # integral of exp of a straight line: value in the middle times sinh(step) / step
        swell = np.where(
            step > 1e-4, np.sinh(np.minimum(step, 300.0)) / np.where(step > 1e-4, step, 1.0), 1.0
        )
        return np.asarray((np.diff(turns, axis=0) * middle * swell).sum(0))

    def like_zenith(self, thickness: Floats, sweep: Floats, chi: float, like_lai: Floats) -> Floats:
        """Return where the sun stands in the even stand of `like_lai` that is met at the same mean depth.

        The mean depth is the integral of exact gaps over parts of the rows' height, as a share of it.
        """
        points, weights = np.polynomial.legendre.leggauss(_DEPTH_NODES)
        root, weights = 0.5 * (points + 1.0), 0.5 * weights
        above = np.zeros_like(sweep)
        for part, weight in zip(root**2, 2.0 * root * weights, strict=True):
            above += weight * (1.0 - self.gap(thickness * part, np.maximum(sweep * part, _LEAST_SWEEP**2)))
        depth = 1.0 - above / np.maximum(1.0 - self.gap(thickness, sweep), 1e-30)
        thick = np.interp(-depth, *_depth_table())
        tan2 = (thick / np.maximum(like_lai, 1e-30) * ellipsoid_area(chi)) ** 2 - chi**2
        return np.asarray(np.arctan(np.sqrt(np.maximum(tan2, 0.0))))

    def reaching(self, thickness: Floats, sweep: Floats) -> Floats:
        """Return the share of a beam that reaches points of the floor, (FLOOR_POINTS, ...)."""
        point = 0.5 * self.cover + (np.arange(FLOOR_POINTS) + 0.5) / FLOOR_POINTS
        point = point.reshape(-1, *([1] * np.ndim(sweep)))
        inside = (self._inside(point + sweep) - self._inside(point)) / (self.cover * sweep)
        return np.asarray(np.exp(-thickness * inside))


def rows_of(
    width: float | None, spacing: float | None, height: float, azimuth: float | None, ridge_azimuth: float
) -> Rows | None:
    """Return a crop's rows, along the ridge unless an azimuth is given; None when it has no rows."""
    if width is None or spacing is None:
        return None
    return Rows(width, spacing, height, ridge_azimuth if azimuth is None else azimuth)


@dataclass(frozen=True)
class RowSight:
    """What rows of one shape and leaf angle do with isotropic light, by leaf area of the floor."""

    met: Floats  # (D,) share of isotropic light that leaves meet
    like: (
        Floats  # (D,) leaf area of the even stand with the same recollision probability, per that of the rows
    )
    sky: Floats  # (D, FLOOR_POINTS) share of the sky that points of the floor see

    def interception(self, lai: Floats) -> Floats:
        """Return the share of isotropic light that leaves meet, (N,)."""
        return lai_interpolate(lai, self.met) * np.minimum(lai / LEAST_LAI, 1.0)

    def like_lai(self, lai: Floats) -> Floats:
        """Return the even stand's leaf area with the same recollision probability, (N,)."""
        return lai * lai_interpolate(lai, self.like)

    def floor_sky(self, lai: Floats) -> Floats:
        """Return what points of the floor see of the sky, (N, FLOOR_POINTS)."""
        return lai_interpolate(lai, self.sky)


@lru_cache(maxsize=32)
def row_sight(rows: Rows, chi: float) -> RowSight:
    """Return what rows do with isotropic light.

    The chance that light from a leaf meets another is 1 - met / lai for black leaves in any arrangement
    (Stenberg 2007, Remote Sens. Environ. 109:221): rows act inside like a denser even stand.
    """
    lai = lai_nodes()
    points, weights = np.polynomial.legendre.leggauss(_MU_NODES)
    mu = (0.5 * (points + 1.0)) ** 2  # more nodes near the horizon
    weight = weights * mu**1.5
    weight /= weight.sum()
    points, along = np.polynomial.legendre.leggauss(_TURN_NODES)
    turn, along = 0.25 * np.pi * (points + 1.0), 0.5 * along
    sweep = rows.sweep(np.arccos(mu)[:, None], turn)
    thick = lai[:, None, None] * (projection(chi, mu) / mu)[:, None]
    whole = np.broadcast_to(sweep, thick.shape[:1] + sweep.shape)
    thick = np.broadcast_to(thick, whole.shape)
    met = 1.0 - np.einsum("m,t,dmt->d", weight, along, rows.gap(thick, whole))
    sky = np.einsum("m,t,pdmt->dp", weight, along, rows.reaching(thick, whole), optimize=True)
    sky = 0.5 * (sky + sky[:, ::-1])  # half of the sky lies on either side
    fine = np.geomspace(lai[0], 40.0 * lai[-1], 2000)
    stay = 1.0 - (1.0 - diffuse_gap(chi, fine)) / fine
    like = np.interp(1.0 - met / lai, stay, fine)
    return RowSight(met, like / lai, sky)
