"""The homogeneous stand over a black ground as a table over leaf area and sun height, one per leaf and chi.

Stored per unit of intercepted light, which is smooth down to the smallest canopy: the share that leaves
downwards and upwards after scattering (the rest is absorbed), and what sunlit leaves meet of the diffuse
field. Interpolation is cubic in both directions (Lagrange, four points); `tests/benchmarks` prints its cost.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array

from canopy.leafangle import GRAZING_DEG, extinction, projection
from canopy.ordinates import beam_field, diffuse_field, make_modes

Floats = NDArray[np.float64]

LEAST_LAI: Final = 1e-3
"""Stands thinner than this are treated as this thin by the table; what they intercept stays exact."""
MOST_LAI: Final = 24.0
"""Stands denser than this (a hedge counts by its own density) behave like this one."""

_LAI_KNEE: Final = 0.4  # leaf area nodes are even in log(1 + lai / knee)
_LAI_NODES: Final = 36
_SUN_NODES: Final = 56  # even in the square root of the sun's height: denser at the horizon
_LOW_SUN: Final = math.sqrt(1.0 - GRAZING_DEG / 90.0)
_GAP_NODES: Final = 64


def diffuse_gap(chi: float, lai: Floats) -> Floats:
    """Return the gap fraction of black leaves for isotropic light: 2 integral exp(-Kb lai) mu dmu, (N,)."""
    points, weights = np.polynomial.legendre.leggauss(_GAP_NODES)
    mu = (0.5 * (points + 1.0)) ** 2  # more nodes near the horizon
    weight = 0.5 * weights * 2.0 * np.sqrt(mu) * 2.0 * mu
    return np.asarray(np.exp(-np.outer(lai, projection(chi, mu) / mu)) @ (weight / weight.sum()))


@dataclass(frozen=True)
class Shares:
    """Answers per unit of intercepted light: (B, N) each, over a black ground.

    Sunlit: what sunlit leaves meet of the diffuse field, of which they absorb 1 - scatter.
    """

    beam_down: Floats
    beam_up: Floats
    beam_met_sunlit: Floats  # of light scattered out of the beam
    top_met_sunlit: Floats  # of isotropic light from the top, per unit intercepted of it
    below_met_sunlit: Floats  # of isotropic light from below


@dataclass(frozen=True)
class StandTable:
    """One leaf at one leaf-angle distribution. Axes: leaf area node, zenith node, answers by band."""

    chi: float
    scatter: Floats  # (B,)
    beam: Floats  # (D * Z, 5 B)
    diffuse: Floats  # (D, 2 B + 1): down, up, interception

    def beam_shares(self, lai: Floats, zenith_rad: Floats) -> Shares:
        """Return answers for N hours, a beam at `zenith_rad` on a stand of `lai`."""
        lower, across = _lai_weights(lai)
        sun, along = _sun_weights(zenith_rad)
        rows, steps = lower[:, None] + np.arange(4), sun[:, None] + np.arange(4)
        columns = rows[:, :, None] * _SUN_NODES + steps[:, None, :]
        weights = across[:, :, None] * along[:, None, :]
        answer = _weighted(columns.reshape(len(lai), -1), weights.reshape(len(lai), -1), self.beam)
        parts = answer.T.reshape(5, len(self.scatter), len(lai))
        return Shares(*parts)

    def diffuse_shares(self, lai: Floats) -> tuple[Floats, Floats]:
        """Return what leaves downwards and upwards of intercepted isotropic light, (B, N) each."""
        answer = lai_interpolate(lai, self.diffuse)
        bands = len(self.scatter)
        return answer[:, :bands].T, answer[:, bands : 2 * bands].T

    def interception(self, lai: Floats) -> Floats:
        """Return the share of isotropic light that leaves meet, (N,)."""
        return lai_interpolate(lai, self.diffuse[:, -1]) * np.minimum(lai / LEAST_LAI, 1.0)


def _weighted(columns: NDArray[np.intp], weights: Floats, table: Floats) -> Floats:
    """Return rows of a table, weighted: (N, K) columns and weights on (M, A) give (N, A)."""
    count, width = columns.shape
    starts = np.arange(0, count * width + 1, width)
    matrix = csr_array((weights.ravel(), columns.ravel(), starts), shape=(count, len(table)))
    return np.asarray(matrix @ table)


def lai_nodes() -> Floats:
    """Return the leaf areas that tables are kept for, (D,), rising."""
    top = math.log1p(MOST_LAI / _LAI_KNEE)
    bottom = math.log1p(LEAST_LAI / _LAI_KNEE)
    return np.asarray(_LAI_KNEE * np.expm1(np.linspace(bottom, top, _LAI_NODES)))


def lai_interpolate(lai: Floats, values: Floats) -> Floats:
    """Return values kept at `lai_nodes`, (D,) or (D, A), at leaf areas (N,)."""
    lower, across = _lai_weights(lai)
    found = _weighted(lower[:, None] + np.arange(4), across, values.reshape(len(values), -1))
    return found.reshape(len(lai), *values.shape[1:])


def _lai_weights(lai: Floats) -> tuple[NDArray[np.intp], Floats]:
    bottom, top = math.log1p(LEAST_LAI / _LAI_KNEE), math.log1p(MOST_LAI / _LAI_KNEE)
    place = (np.log1p(np.clip(lai, LEAST_LAI, MOST_LAI) / _LAI_KNEE) - bottom) / (top - bottom)
    return _cubic(place * (_LAI_NODES - 1), _LAI_NODES)


def _sun_weights(zenith_rad: Floats) -> tuple[NDArray[np.intp], Floats]:
    height = np.sqrt(np.maximum(1.0 - zenith_rad / (0.5 * math.pi), _LOW_SUN**2))
    place = (height - _LOW_SUN) / (1.0 - _LOW_SUN)
    return _cubic(place * (_SUN_NODES - 1), _SUN_NODES)


def _cubic(place: Floats, nodes: int) -> tuple[NDArray[np.intp], Floats]:
    """Return the first of four neighbouring nodes and their Lagrange weights, (N,) and (N, 4)."""
    first = np.clip(np.floor(place).astype(np.intp) - 1, 0, nodes - 4)
    x = place - first
    a, b, c, d = x, x - 1.0, x - 2.0, x - 3.0
    return first, np.stack([-b * c * d / 6.0, a * c * d / 2.0, -a * b * d / 2.0, a * b * c / 6.0], axis=1)


@lru_cache(maxsize=16)
def _build(reflect: tuple[float, ...], transmit: tuple[float, ...], chi: float) -> StandTable:
    """Solve every node."""
    modes = make_modes(np.array(reflect), np.array(transmit), chi)
    lai = lai_nodes()
    zenith = 0.5 * math.pi * (1.0 - np.linspace(_LOW_SUN, 1.0, _SUN_NODES) ** 2)
    kb = extinction(chi, zenith)
    met = -np.expm1(-kb * lai[:, None])
    met_diffuse = 1.0 - diffuse_gap(chi, lai)
    beam, top = beam_field(modes, lai, zenith), diffuse_field(modes, lai)
    below = diffuse_field(modes, lai, from_below=True)
    down, up = beam.fluxes()
    sunlit = [beam.met_in_sun(kb) / met]
    sunlit += [field.met_in_sun(kb) / met_diffuse[:, None] for field in (top, below)]
    answers = np.stack([down / met, up / met, *sunlit])  # (5, B, D, Z)
    through, back = (flux[:, :, 0] for flux in top.fluxes())
    # the ordinates' own gap, so that the difference is what leaves scatter downwards
    straight = np.exp(-np.outer(lai, modes.meet / modes.mu)) @ (2.0 * modes.weight * modes.mu)
    own = 1.0 - straight
    diffuse = np.concatenate([(through - straight) / own, back / own, met_diffuse[None]])
    size = answers.shape
    return StandTable(
        chi=chi,
        scatter=modes.scatter,
        beam=np.ascontiguousarray(answers.reshape(size[0] * size[1], -1).T),
        diffuse=np.ascontiguousarray(diffuse.T),
    )


def stand_table(reflect: Floats, transmit: Floats, chi: float) -> StandTable:
    """Return the table of a leaf, (B,) reflectance and transmittance, kept for the next call."""
    return _build(tuple(map(float, reflect)), tuple(map(float, transmit)), float(chi))
