"""Optics of a covering from its layers: solar bands by angle, diffuse, thermal bands by layer, dry and wet.

Every wavelength cell, polarisation and direction is computed apart and averaged at the end: over ASTM G173
sunlight in the solar bands, over a blackbody in the thermal ones. Isotropic values are integrals over angle.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR, THERMAL, BandSet
from canopy.cells import ANGLES, Cells, Directions, directions, solar_cells, thermal_cells
from canopy.optics import SolarOptics, ThermalOptics
from canopy.sheet import Passage
from canopy.sheets import MaterialSheet, SpectralLayer, water_absorption
from canopy.stack import Element, Response, Stack

Floats = NDArray[np.float64]
Wetness = Literal["dry", "film", "drops"]

WATER_FILM_UM = 50.0  # flat condensate film under a roof, common practice (20-100 µm)
REFERENCE_K = 283.0  # temperature of the blackbody that weighs thermal bands


@dataclass(frozen=True)
class Drops:
    """Condensed drops on the inner face: covered share, share of light on them sent back, mean depth in µm.

    Measured: clear glass loses about 3 points of hemispherical PAR under natural condensation at roof slope
    (Swinkels, measuring protocol for materials with condensation, Wageningen UR); at normal incidence glass
    loses 3 % and PE 22 % when upright without run-off (Pollet & Pieters 1999, J. Agric. Eng. Res. 74:369).
    """

    cover: float
    sent_back: float
    depth_um: float


GLASS_DROPS = Drops(0.6, 0.055, 100.0)
"""Flat drops of a wettable face: 3 points of hemispherical PAR on clear glass."""
PLASTIC_DROPS = Drops(0.6, 0.17, 150.0)
"""High drops (contact angle 40-90 degrees), half of what was measured without run-off: common practice."""


WEB_SCATTER = {"pmma": 0.10, "polycarbonate": 0.40}
"""Share of light that each crossing of an extruded web scatters: set so that twin-wall polycarbonate of
8-10 mm passes .65-.67 of diffuse PAR, acrylic of 16 mm .75 (published .61-.70 and .74-.77, from memory)."""


@dataclass(frozen=True)
class Webs:
    """Upright webs in the gap between two walls of a multi-wall sheet.

    A web passes or mirrors light without changing its angle to the sheet; each crossing absorbs, and scatters
    half forward, half back. Light that meets a web end-on is led through.
    """

    spacing_m: float
    thickness_m: float
    height_m: float  # the gap between the walls
    material: str
    scatter: float | None = None  # share scattered per crossing; None: by material, `WEB_SCATTER`

    def crossings(self, theta: Floats) -> Floats:
        """Return the mean number of webs crossed, (M,): azimuth mean of h tan(theta) |cos phi| / spacing."""
        return np.asarray(2.0 / np.pi * np.tan(np.minimum(theta, 1.5705)) * self.height_m / self.spacing_m)

    def conductance(self, conductivity: float) -> float:
        """Return heat conductance through the webs, W m-2 K-1, for the solid's conductivity in W m-1 K-1."""
        return conductivity * self.thickness_m / self.spacing_m / self.height_m


def build_solar(
    layers: Sequence[SpectralLayer],
    bands: BandSet = SOLAR,
    *,
    webs: Sequence[Webs | None] | None = None,
    wetness: Wetness = "dry",
    drops: Drops = GLASS_DROPS,
    water_um: float = WATER_FILM_UM,
    angles: Floats = ANGLES,
) -> SolarOptics:
    """Return solar optics of layers listed from outside to inside.

    Parameters
    ----------
    layers : sheets (`MaterialSheet`, `EquivalentSheet` or any `SpectralLayer`), outermost first.
    webs : one entry per gap (L - 1), None for a gap without webs.
    wetness, drops, water_um : water on the inner face of the innermost layer.
    angles : reported incidence angles, radians, rising.
    """
    cells = solar_cells(bands)
    where = directions(tuple(float(a) for a in angles))
    elements = _elements(layers, webs, wetness, drops, water_um, cells, where)
    stack = Stack(elements, where.weights, len(layers))
    return _averaged(stack.response(outside=True), stack.response(outside=False), cells, where)


def _elements(
    layers: Sequence[SpectralLayer],
    webs: Sequence[Webs | None] | None,
    wetness: Wetness,
    drops: Drops,
    water_um: float,
    cells: Cells,
    where: Directions,
) -> list[Element]:
    """Return sheets, webs and drops as elements."""
    out: list[Element] = []
    last = len(layers) - 1
    for i, layer in enumerate(layers):
        water = water_um if wetness == "film" and i == last else 0.0
        passage = layer.passage(cells.wavelength_um, where.theta, water)
        out.append(_hazy(passage, layer.haze, where.theta, i))
        if webs is not None and i < last and webs[i] is not None:
            out.append(_web_element(webs[i], i, cells, where.theta))
    if wetness == "drops":
        out.append(_drop_element(drops, last, cells, where.theta))
    return out


def haze_at(haze: float, theta: Floats) -> Floats:
    """Return the scattered share of transmitted light by incidence angle, (M,); the same in every band.

    Bouguer's law of a scattering sheet of n = 1.5: 1 - (1 - haze)^(1 / cos inside).
    """
    inside = np.sqrt(1.0 - (np.sin(theta) / 1.5) ** 2)
    return np.asarray(1.0 - (1.0 - haze) ** (1.0 / inside))


def _hazy(passage: Passage, haze: float, theta: Floats, layer: int) -> Element:
    """Return a sheet as an element; haze splits what it transmits into straight and scattered."""
    if haze <= 0.0:
        return Element(passage, ((layer, 1.0),))
    kept = 1.0 - haze_at(haze, theta)
    straight = Passage(
        passage.down * kept, passage.up * kept, passage.reflect_outside, passage.reflect_inside
    )
    return Element(straight, ((layer, 1.0),), profile=passage.down * (1.0 - kept), through=1.0)


def _web_element(webs: Webs | None, layer: int, cells: Cells, theta: Floats) -> Element:
    """Return the webs of one gap; what they absorb is shared by the walls above and below."""
    assert webs is not None
    where = directions()
    web = MaterialSheet(webs.material, webs.thickness_m).passage(cells.wavelength_um, where.theta)
    absorbed = np.einsum("pwm,m->w", web.absorbed_down, 0.5 * where.weights)
    solid = webs.thickness_m / webs.spacing_m
    rough = WEB_SCATTER.get(webs.material, 0.40) if webs.scatter is None else webs.scatter
    times = webs.crossings(theta)[None, :]
    left = np.exp(-times * absorbed[:, None])
    scattered = (1.0 - solid) * (1.0 - (1.0 - rough) ** times)
    shape = (2, cells.wavelength_um.size, theta.size)
    straight = np.broadcast_to(left * (1.0 - scattered), shape)
    none = np.zeros(shape)
    profile = np.array(np.broadcast_to(left * scattered, shape))
    owners = ((layer, 0.5), (layer + 1, 0.5))
    return Element(Passage(straight, straight, none, none), owners, profile, 0.5, 0.5, 0.5)


def _drop_element(drops: Drops, layer: int, cells: Cells, theta: Floats) -> Element:
    """Return drops below the sheet: the covered share scatters, sends back and absorbs like its water."""
    w, alpha = water_absorption()
    depth = np.interp(cells.wavelength_um, w, alpha) * drops.depth_um
    passed = np.exp(-depth)
    shape = (2, cells.wavelength_um.size, theta.size)
    straight = np.full(shape, 1.0 - drops.cover)
    none = np.zeros(shape)
    through = drops.cover * (1.0 - drops.sent_back) * passed
    back = drops.cover * drops.sent_back * passed
    return Element(
        Passage(straight, straight, none, none), ((layer, 1.0),), np.ones(shape), through, back, back
    )


def _averaged(down: Response, up: Response, cells: Cells, where: Directions) -> SolarOptics:
    """Return band averages of both responses; polarisations in equal parts."""
    n = where.reported
    share = cells.share

    def beam(values: Floats) -> Floats:
        return np.asarray(share @ values[..., :n].mean(axis=-3))

    def diffuse(values: Floats) -> Floats:
        return np.asarray((values.mean(axis=-3) @ where.weights) @ share.T)

    return SolarOptics(
        angles=where.theta[:n],
        beam_beam=beam(down.straight),
        beam_diffuse=beam(down.scattered),
        beam_reflect=beam(down.specular + down.thrown_back),
        beam_specular=beam(down.specular),
        beam_absorbed=beam(down.absorbed),
        diffuse_in=diffuse(down.straight + down.scattered),
        diffuse_out=diffuse(up.straight + up.scattered),
        reflect_outside=diffuse(down.specular + down.thrown_back),
        reflect_inside=diffuse(up.specular + up.thrown_back),
        absorbed_from_outside=diffuse(down.absorbed),
        absorbed_from_inside=diffuse(up.absorbed),
    )


def build_thermal(
    layers: Sequence[SpectralLayer],
    bands: BandSet = THERMAL,
    *,
    temp_k: float = REFERENCE_K,
    wetness: Wetness = "dry",
    drops: Drops = GLASS_DROPS,
    water_um: float = WATER_FILM_UM,
) -> ThermalOptics:
    """Return hemispherical long-wave properties of each layer by itself, water on the inner face of the last.

    Drops count as a flat film of their mean depth on the covered share of the area.
    """
    cells = thermal_cells(bands, temp_k)
    rows = [_hemispherical(layer, cells, 0.0) for layer in layers]
    if wetness == "film":
        rows[-1] = _hemispherical(layers[-1], cells, water_um)
    elif wetness == "drops":
        wet = _hemispherical(layers[-1], cells, drops.depth_um)
        rows[-1] = drops.cover * wet + (1.0 - drops.cover) * rows[-1]
    t, r_out, r_in = np.stack(rows, axis=1)
    return ThermalOptics(t, r_out, r_in)


def _hemispherical(layer: SpectralLayer, cells: Cells, water_um: float) -> Floats:
    """Return (3, bands): transmittance, outer and inner reflectance for isotropic long-wave."""
    where = directions()
    p = layer.passage(cells.wavelength_um, where.theta, water_um)
    parts = np.stack([p.down, p.reflect_outside, p.reflect_inside])
    return np.asarray((parts.mean(axis=1) @ where.weights) @ cells.share.T)
