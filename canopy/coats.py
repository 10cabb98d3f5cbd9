"""Coats on the faces of a sheet: coherent films with the constants of a simple published model each."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError, nearest

EV_UM = 1.23984198  # photon energy (eV) x wavelength (µm): h c / e, CODATA 2018


@dataclass(frozen=True)
class CoatFilm:
    """One film: thickness in µm and eps = eps_inf - plasma^2/(E^2 + i damping E), Drude's free carriers (eV).

    plasma_ev = 0 makes a plain dielectric with n = sqrt(eps_inf).
    """

    thickness_um: float
    eps_inf: float
    plasma_ev: float = 0.0
    damping_ev: float = 0.0

    def index(self, wavelength_um: NDArray[np.float64]) -> NDArray[np.complex128]:
        """Return the complex index on wavelengths (W,)."""
        energy = EV_UM / wavelength_um
        eps = self.eps_inf - self.plasma_ev**2 / (energy * (energy + 1j * self.damping_ev))
        return np.asarray(np.sqrt(eps))


@dataclass(frozen=True)
class Coat:
    """A coat, films from the air to the sheet; `solar_only` coats are too thin to matter beyond 3 µm."""

    name: str
    films: tuple[CoatFilm, ...]
    source: str
    solar_only: bool = False


def _nir_mirror() -> tuple[CoatFilm, ...]:
    """Return (L/2 H L/2)^5 centred on .98 µm: the long-wave-pass form's mirror image, Macleod ch. 7."""
    high, low, centre = 2.30**2, 1.46**2, 0.98
    quarter_h, quarter_l = centre / (4.0 * 2.30), centre / (4.0 * 1.46)
    edge = CoatFilm(0.5 * quarter_l, low)
    inner: list[CoatFilm] = []
    for i in range(5):
        inner += [CoatFilm(quarter_h, high)] + ([CoatFilm(quarter_l, low)] if i < 4 else [])
    return (edge, *inner, edge)


COATS = {
    "ar": Coat(
        "ar",
        (CoatFilm(0.110, 1.30**2),),
        "one quarter-wave of porous silica, n 1.30, 110 nm (common practice; theory: Macleod, Thin-Film "
        "Optical Filters, ch. 4)",
        solar_only=True,
    ),
    "low-e": Coat(
        "low-e",
        (CoatFilm(0.36, 3.90, 1.50, 0.125),),
        "fluorine-doped tin oxide .36 µm, Drude model: plasma energy 1.50 eV, damping .125 eV (5e20 carriers "
        "per cm3, 30 cm2/Vs; from memory of published hard coats of 12-15 ohm a square, emissivity .15)",
    ),
    "nir-reflecting": Coat(
        "nir-reflecting",
        _nir_mirror(),
        "(L/2 H L/2)^5 of n 2.30 and 1.46 centred on .98 µm, without absorption (Macleod, Thin-Film Optical "
        "Filters, ch. 7; indices of titania and silica from memory)",
        solar_only=True,
    ),
}


def coat(name: str) -> Coat:
    """Return a coat by name; UserError for an unknown one."""
    if name not in COATS:
        raise UserError(f'coat "{name}": not known; one of {", ".join(COATS)}{nearest(name, tuple(COATS))}')
    return COATS[name]
