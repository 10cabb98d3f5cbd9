"""Sheets of a covering as spectral layers: from a material, or from what was measured at normal incidence."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from canopy.cells import directions
from canopy.coats import Coat
from canopy.materials import Material, material, reference_sunlight
from canopy.sheet import Complexes, Floats, Passage, cosine_inside, face, grazing, join, passing
from canopy.thinfilm import coated_face

UV_TO_UM = 0.40


class SpectralLayer(Protocol):
    """One layer that carries a temperature: gives its passage at any wavelengths and angles."""

    @property
    def haze(self) -> float:
        """Share of the transmitted beam that is scattered, at normal incidence."""

    def passage(self, wavelength_um: Floats, theta: Floats, water_um: float = 0.0) -> Passage:
        """Return (2, W, M) powers; `water_um` of flat water lie on the inner face."""


@dataclass(frozen=True)
class MaterialSheet:
    """A sheet of a shipped material (by name) or of any `Material`, with a coat on either face.

    `uv_transmit`: normal transmittance of the UV band (.28-.40 µm, ASTM G173 weights) after an absorber that
    dims all of the band alike; None leaves the bare material.
    """

    material: str | Material
    thickness_m: float
    outer: Coat | None = None
    inner: Coat | None = None
    haze: float = 0.0
    uv_transmit: float | None = None

    @property
    def constants(self) -> Material:
        """The material itself."""
        return material(self.material) if isinstance(self.material, str) else self.material

    def passage(self, wavelength_um: Floats, theta: Floats, water_um: float = 0.0) -> Passage:
        """Return (2, W, M) powers of the sheet in air, wet inner face on request."""
        index = self.constants.index_at(wavelength_um)
        um = self.thickness_m * 1e6
        extra = np.where(wavelength_um < UV_TO_UM, self._uv_dimming(), 1.0)
        return _wet_slab(index, um, extra, wavelength_um, theta, water_um, (self.outer, self.inner))

    def _uv_dimming(self) -> float:
        """Return the factor on the crossing of the sheet that brings the UV band to `uv_transmit`."""
        if self.uv_transmit is None:
            return 1.0
        return _uv_factor(self.constants, self.thickness_m, self.uv_transmit)


_UV_CACHE: dict[tuple[str, float, float, float, float], float] = {}


def _uv_factor(constants: Material, thickness_m: float, target: float) -> float:
    """Return f so that the UV band's normal transmittance with every crossing times f is the target."""
    key = (constants.name, float(constants.n.sum()), float(constants.k.sum()), thickness_m, target)
    if key not in _UV_CACHE:
        w, power = reference_sunlight()
        use = (w >= 0.28) & (w < UV_TO_UM)
        w, power = w[use], power[use]
        index = constants.index_at(w)
        normal = np.zeros(1)
        bare = _faces(index, w, normal)
        once = passing(index, cosine_inside(index, np.sin(normal)), thickness_m * 1e6, w)
        low, high = 0.0, 1.0
        for _ in range(40):
            f = 0.5 * (low + high)
            t = join(bare[0], bare[1], f * once).down.mean(axis=0)[:, 0]
            low, high = (f, high) if float(t @ power / power.sum()) < target else (low, f)
        _UV_CACHE[key] = 0.5 * (low + high)
    return _UV_CACHE[key]


def _faces(index: Complexes, wavelength_um: Floats, theta: Floats) -> tuple[Passage, Passage]:
    """Return outer and inner bare faces of a sheet in air."""
    air = np.ones(wavelength_um.shape, dtype=np.complex128)
    cos_air = np.broadcast_to(np.cos(theta).astype(np.complex128), (wavelength_um.size, theta.size))
    top = face(air, index, cos_air, cosine_inside(index, np.sin(theta)))
    return top, turned(top)


def turned(element: Passage) -> Passage:
    """Return the element upside down."""
    return Passage(element.up, element.down, element.reflect_inside, element.reflect_outside)


def _coat_films(coat: Coat | None, wavelength_um: Floats) -> list[tuple[Complexes, float]]:
    """Return (index, thickness) of a coat's films; none for a solar coat in the thermal range."""
    if coat is None or (coat.solar_only and wavelength_um[0] >= 2.9):
        return []
    return [(f.index(wavelength_um), f.thickness_um) for f in coat.films]


def _wet_slab(
    index: Complexes,
    thickness_um: float,
    dimming: Floats,
    wavelength_um: Floats,
    theta: Floats,
    water_um: float,
    coats: tuple[Coat | None, Coat | None],
) -> Passage:
    """Return sheet and water film in optical contact, all reflections as powers."""
    cos_in = cosine_inside(index, np.sin(theta))
    once = passing(index, cos_in, thickness_um, wavelength_um) * dimming[:, None]
    top, bottom = _faces(index, wavelength_um, theta)
    films = _coat_films(coats[0], wavelength_um)
    if films:
        top = coated_face(films, index, wavelength_um, theta)
    films = _coat_films(coats[1], wavelength_um)
    if water_um > 0.0:
        water = material("water").index_at(wavelength_um)
        cos_water = cosine_inside(water, np.sin(theta))
        if films:
            contact = coated_face(films, index, wavelength_um, theta, inside=True, beyond=water)
        else:
            contact = face(index, water, cos_in, cos_water)
        lower = _faces(water, wavelength_um, theta)[1]
        bottom = join(contact, lower, passing(water, cos_water, water_um, wavelength_um))
    elif films:
        bottom = coated_face(films, index, wavelength_um, theta, inside=True)
    return grazing(join(top, bottom, once), theta)


@dataclass(frozen=True)
class EquivalentSheet:
    """A sheet known by what passes and returns, not by its material: one Fresnel slab per wavelength or band.

    Each face has a real index that gives its reflectance, `crossing` is the share that crosses once straight
    through; slanted light crosses along the refracted path. That is its angular law. With `edges_um` (W + 1)
    values are steps over bands, else linear between `wavelength_um` (W,).
    """

    index_outer: Floats  # (W,)
    index_inner: Floats  # (W,)
    crossing: Floats  # (W,) at normal incidence, 0 ... 1
    wavelength_um: Floats | None = None
    edges_um: Floats | None = None
    haze: float = 0.0

    def _at(self, values: Floats, wavelength_um: Floats) -> Floats:
        if self.edges_um is not None:
            row = np.searchsorted(self.edges_um, wavelength_um, side="right") - 1
            return np.asarray(values[np.clip(row, 0, values.size - 1)])
        if self.wavelength_um is None:
            raise ValueError("EquivalentSheet needs wavelength_um or edges_um")
        return np.asarray(np.interp(wavelength_um, self.wavelength_um, values))

    def passage(self, wavelength_um: Floats, theta: Floats, water_um: float = 0.0) -> Passage:
        """Return (2, W, M) powers of the sheet in air, wet inner face on request."""
        outer = self._at(self.index_outer, wavelength_um).astype(np.complex128)
        inner = self._at(self.index_inner, wavelength_um).astype(np.complex128)
        middle = 0.5 * (outer + inner)
        slant = cosine_inside(middle, np.sin(theta)).real
        cross = np.maximum(self._at(self.crossing, wavelength_um), 1e-300)[:, None] ** (1.0 / slant)
        top, _ = _faces(outer, wavelength_um, theta)
        _, bottom = _faces(inner, wavelength_um, theta)
        if water_um > 0.0:
            water = material("water").index_at(wavelength_um)
            cos_water = cosine_inside(water, np.sin(theta))
            contact = face(inner, water, cosine_inside(inner, np.sin(theta)), cos_water)
            lower = _faces(water, wavelength_um, theta)[1]
            bottom = join(contact, lower, passing(water, cos_water, water_um, wavelength_um))
        return grazing(join(top, bottom, cross), theta)


def from_normal(
    transmit: Floats,
    *,
    reflect_outer: Floats | None = None,
    reflect_inner: Floats | None = None,
    index: float | None = None,
    wavelength_um: Floats | None = None,
    edges_um: Floats | None = None,
    haze: float = 0.0,
) -> EquivalentSheet:
    """Return the sheet that has these values (W,) at normal incidence.

    With `index` and without reflectances both faces are bare with that index. With reflectances the index of
    each face follows from them (`reflect_inner` defaults to `reflect_outer`).
    """
    t = np.asarray(transmit, dtype=np.float64)
    if reflect_outer is None:
        if index is None:
            raise ValueError("from_normal needs a reflectance or an index")
        r = np.full(t.shape, ((index - 1.0) / (index + 1.0)) ** 2)
        crossing = crossing_of(t, r, r)
        n = np.full(t.shape, index)
        return EquivalentSheet(n, n, crossing, wavelength_um, edges_um, haze)
    front = np.asarray(reflect_outer, dtype=np.float64)
    back = front if reflect_inner is None else np.asarray(reflect_inner, dtype=np.float64)
    r1, r2, crossing = face_powers(t, front, back)
    return EquivalentSheet(index_of(r1), index_of(r2), crossing, wavelength_um, edges_um, haze)


def from_hemispherical(
    transmit: Floats, index: float, *, edges_um: Floats | None = None, wavelength_um: Floats | None = None
) -> EquivalentSheet:
    """Return the bare-faced sheet of this index that has these transmittances (W,) for isotropic radiation.

    Values above what the faces alone let through are taken as that limit (nothing absorbed).
    """
    t = np.asarray(transmit, dtype=np.float64)
    n = np.full(t.shape, float(index))
    where = directions()
    at = np.arange(t.size, dtype=np.float64)
    low, high = np.zeros(t.shape), np.ones(t.shape)
    for _ in range(50):
        middle = 0.5 * (low + high)
        trial = EquivalentSheet(n, n, middle, wavelength_um=at).passage(at, where.theta)
        below = trial.down.mean(axis=0) @ where.weights < t
        low, high = np.where(below, middle, low), np.where(below, high, middle)
    return EquivalentSheet(n, n, 0.5 * (low + high), wavelength_um, edges_um)


def crossing_of(transmit: Floats, r1: Floats, r2: Floats) -> Floats:
    """Return the share that crosses once, from T = (1-r1)(1-r2) t/(1 - r1 r2 t^2); at most 1."""
    a, b = transmit * r1 * r2, (1.0 - r1) * (1.0 - r2)
    return np.asarray(np.clip(2.0 * transmit / (b + np.sqrt(b * b + 4.0 * a * transmit)), 0.0, 1.0))


def face_powers(transmit: Floats, front: Floats, back: Floats) -> tuple[Floats, Floats, Floats]:
    """Return face reflectances r1, r2 and the crossing t of a slab with T, R front, R back (W,).

    Fixed point of R1 = r1 + (1-r1) T t r2/(1-r2), the same from the back, and `crossing_of`.
    """
    r1, r2 = 0.5 * front, 0.5 * back
    t = crossing_of(transmit, r1, r2)
    for _ in range(200):
        q1 = transmit * t * r2 / (1.0 - r2)
        q2 = transmit * t * r1 / (1.0 - r1)
        new1 = np.clip((front - q1) / np.maximum(1.0 - q1, 1e-9), 0.0, 0.98)
        new2 = np.clip((back - q2) / np.maximum(1.0 - q2, 1e-9), 0.0, 0.98)
        step = max(float(np.max(np.abs(new1 - r1))), float(np.max(np.abs(new2 - r2))))
        r1, r2 = 0.5 * (r1 + new1), 0.5 * (r2 + new2)
        t = crossing_of(transmit, r1, r2)
        if step < 1e-13:
            break
    return r1, r2, t


def index_of(reflectance: Floats) -> Floats:
    """Return the real index >= 1 of a face with this reflectance at normal incidence."""
    root = np.sqrt(np.clip(reflectance, 0.0, 0.98))
    return np.asarray((1.0 + root) / (1.0 - root))


@lru_cache(maxsize=1)
def water_absorption() -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return wavelength (µm) and absorption of water per µm, 4 pi k / lambda."""
    m = material("water")
    return m.wavelength_um, 4.0 * np.pi * m.k / m.wavelength_um
