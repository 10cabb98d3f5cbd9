"""From transmittance and reflectance at normal incidence to n and k of a sheet of known thickness.

A plane-parallel sheet thicker than the light is coherent, with all internal reflections: face reflectances
r1, r2 and internal transmittance t are three unknowns for T, R front, R back. The thickness turns t into k,
and r with k into n. Where nothing comes through, the phase of the face's reflection follows from its
reflectance at all other wavelengths (Kramers-Kronig), and n and k from both.
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


def reflection_phase(wavelength_um: Floats, reflectance: Floats) -> Floats:
    """Return the phase (W,), radians, of the amplitude that a face reflects at normal incidence.

    phi(w0) = -1/pi * integral of ln|(w + w0)/(w - w0)| d ln|r|/dw dw over frequency w: the Kramers-Kronig
    relation of reflectance after partial integration (Wooten 1972, Optical Properties of Solids, ch. 6 and
    appendix G); ln|r| is taken as straight between points and level beyond the ends.
    """
    grid = np.geomspace(wavelength_um[0], wavelength_um[-1], min(1500, 2 * wavelength_um.size))
    amplitude = np.sqrt(np.clip(np.interp(grid, wavelength_um, reflectance), 1e-6, _R_MAX))
    frequency = 1.0 / grid[::-1]
    slope = np.diff(np.log(amplitude[::-1])) / np.diff(frequency)
    x, at = frequency[None, :], frequency[:, None]
    apart = np.abs(x - at)
    whole = (x + at) * np.log(x + at) - (x - at) * np.log(np.maximum(apart, 1e-300))
    phase = -(np.diff(whole, axis=1) @ slope) / np.pi
    return np.asarray(np.interp(wavelength_um, grid, phase[::-1]))


def constants_from_phase(reflectance: Floats, phase: Floats) -> tuple[Floats, Floats]:
    """Return n and k of a face with r = sqrt(R) exp(i phase) = (n - 1 + i k)/(n + 1 + i k)."""
    root = np.sqrt(np.clip(reflectance, 0.0, _R_MAX))
    below = 1.0 + root**2 - 2.0 * root * np.cos(phase)
    return np.asarray((1.0 - root**2) / below), np.maximum(2.0 * root * np.sin(phase) / below, 0.0)


def with_dark_bands(found: Inverted, wavelength_um: Floats) -> Inverted:
    """Return the sheet with n and k where nothing comes through, from the reflectance of all wavelengths."""
    n, k = found.index_front, found.k
    face = ((n - 1.0) ** 2 + k**2) / ((n + 1.0) ** 2 + k**2)
    dark_n, dark_k = constants_from_phase(face, reflection_phase(wavelength_um, face))
    dark = found.opaque & (dark_k > k)
    index = np.where(dark, dark_n, n)
    return Inverted(index, index, np.where(dark, dark_k, k), found.crossing)
