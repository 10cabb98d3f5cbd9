"""Ellipsoidal leaf angles: what a stand intercepts by direction, and where leaves scatter it.

Azimuths of leaves are even. Only azimuth means of the radiance enter fluxes over a diffuse ground, and
for even azimuths the mean of a product over a leaf is the product of means, so nothing is lost.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

GRAZING_DEG: Final = 89.5
"""Zenith angles above this are taken as this one: the extinction coefficient has a pole at the horizon."""

_NODES: Final = 192  # midpoints over leaf inclination; a kink lies where leaf and ray are parallel


def ellipsoid_area(chi: float) -> float:
    """Return the surface of the leaf ellipsoid over that of its projection upwards, times chi.

    Campbell (1986), Agric. For. Meteorol. 36:317, exact for spheroids of either kind.
    chi: horizontal over vertical half axis, 1 for spherical leaf angles.
    """
    if abs(chi - 1.0) < 1e-6:
        return 2.0
    if chi < 1.0:
        e = math.sqrt(1.0 - chi**2)
        return chi + math.asin(e) / e
    e = math.sqrt(1.0 - chi**-2)
    return chi + math.log((1.0 + e) / (1.0 - e)) / (2.0 * e * chi)


def extinction(chi: float, zenith_rad: Floats) -> Floats:
    """Return Kb per leaf area, per m2 on the horizontal: sqrt(chi2 + tan2 z) / ellipsoid_area.

    Campbell (1986). Angles (…,) in radians, clipped at `GRAZING_DEG`.
    """
    tan = np.tan(np.minimum(zenith_rad, math.radians(GRAZING_DEG)))
    return np.asarray(np.sqrt(chi**2 + tan**2) / ellipsoid_area(chi))


def projection(chi: float, mu: Floats) -> Floats:
    """Return the mean projection of leaf area across a ray of cosine mu: Kb mu, without a pole."""
    return np.asarray(np.sqrt((chi * mu) ** 2 + 1.0 - mu**2) / ellipsoid_area(chi))


def inclination_density(chi: float, inclination_rad: Floats) -> Floats:
    """Return the density of leaf inclination, per radian, that belongs to the ellipsoid.

    Campbell (1990), Agric. For. Meteorol. 49:173: 2 chi3 sin t / (L (cos2 t + chi2 sin2 t)2).
    """
    sin, cos = np.sin(inclination_rad), np.cos(inclination_rad)
    return np.asarray(2.0 * chi**3 * sin / (ellipsoid_area(chi) * (cos**2 + (chi * sin) ** 2) ** 2))


@dataclass(frozen=True)
class LeafFaces:
    """Leaf inclinations as a quadrature: half of the light meets upper faces, half lower ones, unevenly."""

    inclination: Floats  # (J,) radians
    share: Floats  # (J,) of leaf area; they add up to 1

    def facing(self, mu: Floats) -> tuple[Floats, Floats]:
        """Return azimuth means of the positive and negative part of cos(ray, normal), (M, J) each."""
        a = mu[:, None] * np.cos(self.inclination)
        b = np.sqrt(1.0 - mu[:, None] ** 2) * np.sin(self.inclination)
        turn = np.arccos(np.clip(-a / np.maximum(b, 1e-300), -1.0, 1.0))
        positive = (a * turn + b * np.sin(turn)) / math.pi
        return positive, positive - a


def leaf_faces(chi: float) -> LeafFaces:
    """Return the inclinations of an ellipsoidal distribution."""
    step = 0.5 * math.pi / _NODES
    inclination = (np.arange(_NODES, dtype=np.float64) + 0.5) * step
    share = inclination_density(chi, inclination)
    return LeafFaces(inclination, share / share.sum())


def phase(faces: LeafFaces, mu_from: Floats, mu_to: Floats) -> tuple[Floats, Floats]:
    """Return azimuth means of |cos||cos'| over leaves, same side and opposite side, (M, N) each.

    For rays that travel with cosines `mu_from` and `mu_to`, both counted downwards: "same" is the part in
    which the light leaves on the side it did not come from (leaf transmittance), "opposite" the part thrown
    back (leaf reflectance). Ross (1981), The Radiation Regime and Architecture of Plant Stands, ch. II.
    """
    up_from, down_from = faces.facing(mu_from)
    up_to, down_to = faces.facing(mu_to)
    same = (up_from * faces.share) @ up_to.T + (down_from * faces.share) @ down_to.T
    opposite = (up_from * faces.share) @ down_to.T + (down_from * faces.share) @ up_to.T
    return same, opposite
