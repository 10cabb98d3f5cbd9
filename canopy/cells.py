"""Directions and wavelength cells: where optics are evaluated, and with which weights they are averaged."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from canopy.bands import BandSet
from canopy.materials import reference_sunlight
from canopy.planck import share_below

Floats = NDArray[np.float64]

ANGLES = np.radians([*range(0, 45, 5), *range(45, 60, 3), *range(60, 90, 2), 89, 90])
"""Incidence angles of `SolarOptics`: 5 degree steps, from 45 on 3, from 60 on 2. Straight lines between
them are within .0012 of a clear sheet to 89 degrees, .0025 beyond."""

NODES = 12
"""Gauss-Legendre nodes in cos(theta) for isotropic light."""

_SOLAR_STEPS = ((0.28, 0.40, 24), (0.40, 0.75, 35), (0.75, 1.35, 30), (1.35, 2.80, 58), (2.80, 4.0, 12))
_THERMAL_STEPS = ((3.0, 8.0, 100), (8.0, 14.0, 100))
_FAR_CELLS = 80


@dataclass(frozen=True)
class Cells:
    """Wavelength cells (W,) of a band set: centre of weight, and share of its band's power, (B, W)."""

    wavelength_um: Floats
    share: Floats


@dataclass(frozen=True)
class Directions:
    """Angles (M,): first those reported, then the nodes; weights (M,) of isotropic light, 0 for the first."""

    theta: Floats
    weights: Floats
    reported: int


@lru_cache(maxsize=8)
def directions(angles: tuple[float, ...] = ()) -> Directions:
    """Return reported angles (radians; none by default) and Gauss nodes with the weights 2 cos d(cos)."""
    x, w = np.polynomial.legendre.leggauss(NODES)
    mu = 0.5 * (x + 1.0)
    theta = np.concatenate([np.array(angles, dtype=np.float64), np.arccos(mu)])
    weights = np.concatenate([np.zeros(len(angles)), w * mu])
    return Directions(theta, weights / weights.sum(), len(angles))


def _cell_edges(bands: BandSet, steps: tuple[tuple[float, float, int], ...], far: bool) -> Floats:
    """Return the built-in cell edges inside the bands together with the bands' own edges."""
    pieces = [np.linspace(a, b, n + 1) for a, b, n in steps]
    if far:
        pieces.append(np.geomspace(steps[-1][1], 200.0, _FAR_CELLS + 1))
        pieces.append(np.geomspace(0.2, steps[0][0], 60))
    grid = np.concatenate([*pieces, np.array(bands.edges)])
    grid = grid[(grid >= bands.edges[0] - 1e-12) & (grid <= bands.edges[-1] + 1e-12)]
    grid = np.unique(np.round(grid, 9))
    return np.asarray(grid)


def _shares(bands: BandSet, edges: Floats, power: Floats) -> Floats:
    """Return (B, W) shares of each band's power."""
    middle = 0.5 * (edges[1:] + edges[:-1])
    row = np.clip(np.searchsorted(np.array(bands.edges), middle) - 1, 0, len(bands) - 1)
    share = np.zeros((len(bands), middle.size))
    share[row, np.arange(middle.size)] = power
    total = share.sum(axis=1, keepdims=True)
    width = np.zeros_like(share)
    width[row, np.arange(middle.size)] = np.diff(edges)
    flat = width / width.sum(axis=1, keepdims=True)
    return np.asarray(np.where(total > 0.0, share / np.maximum(total, 1e-300), flat))


@lru_cache(maxsize=8)
def solar_cells(bands: BandSet) -> Cells:
    """Return cells weighted by ASTM G173 global sunlight, each at its energy-weighted mean wavelength."""
    edges = _cell_edges(bands, _SOLAR_STEPS, far=False)
    w, s = reference_sunlight()
    grid = np.unique(np.concatenate([w, edges]))
    density = np.interp(grid, w, s)
    run = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]) * np.diff(grid))])
    moment = density * grid
    run_m = np.concatenate([[0.0], np.cumsum(0.5 * (moment[1:] + moment[:-1]) * np.diff(grid))])
    power = np.diff(np.interp(edges, grid, run))
    centre = np.diff(np.interp(edges, grid, run_m)) / np.maximum(power, 1e-300)
    middle = 0.5 * (edges[1:] + edges[:-1])
    centre = np.where(power > 1e-12, centre, middle)
    return Cells(np.clip(centre, edges[:-1], edges[1:]), _shares(bands, edges, power))


@lru_cache(maxsize=8)
def thermal_cells(bands: BandSet, temp_k: float) -> Cells:
    """Return cells weighted by blackbody radiation at one temperature."""
    edges = _cell_edges(bands, _THERMAL_STEPS, far=True)
    power = np.diff(share_below(edges * temp_k))
    return Cells(0.5 * (edges[1:] + edges[:-1]), _shares(bands, edges, power))
