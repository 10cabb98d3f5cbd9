"""From transmittance and reflectance at normal incidence to n and k of a sheet of known thickness.

A plane-parallel sheet thicker than the light is coherent, with all internal reflections: face reflectances
r1, r2 and internal transmittance t are three unknowns for T, R front, R back. The thickness turns t into k,
and r with k into n.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.sheets import crossing_of, face_powers

Floats = NDArray[np.float64]

OPAQUE = 1e-4  # internal transmittance that bounds k from below
SEEN = 3e-3  # internal transmittance below which a laboratory's noise hides k
_R_MAX = 0.98


@dataclass(frozen=True)
class Inverted:
    """A sheet wavelength by wavelength (W,): index of each face, extinction, crossing straight through."""

    index_front: Floats
    index_back: Floats
    k: Floats  # where nothing comes through only a lower bound
    crossing: Floats  # exp(-4 pi k d / lambda)

    @property
    def opaque(self) -> NDArray[np.bool_]:
        """Wavelengths where k cannot be had because nothing comes through."""
        return np.asarray(self.crossing <= SEEN)


def index_with(reflectance: Floats, k: Floats) -> Floats:
    """Return n > 1 of a face with this normal reflectance: r = ((n-1)^2 + k^2)/((n+1)^2 + k^2)."""
    r = np.clip(reflectance, 0.0, _R_MAX)
    centre = (1.0 + r) / (1.0 - r)
    return np.asarray(centre + np.sqrt(np.maximum(0.0, centre**2 - 1.0 - k**2)))


def equal_faces(transmit: Floats, reflect: Floats) -> tuple[Floats, Floats]:
    """Return (r, t) of a sheet with equal faces.

    R = r (1 + t T) and T = (1-r)^2 t/(1 - r^2 t^2), solved for r in closed form (Furler 1991, ASHRAE Trans.
    98/1; Rubin, von Rottkay & Powles 1998, Sol. Energy 62:149).
    """
    beta = transmit**2 - reflect**2 + 2.0 * reflect + 1.0
    root = np.sqrt(np.maximum(0.0, beta**2 - 4.0 * (2.0 - reflect) * reflect))
    r = np.clip(2.0 * reflect / (beta + root), 0.0, _R_MAX)
    return r, crossing_of(transmit, r, r)


def invert(
    wavelength_um: Floats,
    thickness_um: float,
    transmit: Floats,
    front: Floats,
    back: Floats | None = None,
) -> Inverted:
    """Return the sheet that has these values (W,) at normal incidence; `back` None means equal faces."""
    if back is None:
        r1, t = equal_faces(transmit, front)
        r2 = r1
    else:
        r1, r2, t = face_powers(transmit, front, back)
    k = -np.log(np.maximum(t, OPAQUE)) * wavelength_um / (4.0 * np.pi * thickness_um)
    return Inverted(index_with(r1, k), index_with(r2, k), k, t)
