"""Screens and grounds from their rows: strips and holes put together, area by area.

A drawn fabric is a share `o` of holes and strips of one or more kinds. Light that meets a hole passes
straight, light that meets a strip does what the strip does. Oblique light sees less hole because yarn has
thickness.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.library_rows import Row, table
from canopy.optics import Ground, Screen, SolarOptics, ThermalOptics
from canopy.sheet import cosine_inside, face
from canopy.sheets import from_normal

Floats = NDArray[np.float64]

ANGLES: Final[Floats] = np.deg2rad(np.linspace(0.0, 90.0, 46))
"""Angles of incidence of every fabric: 0 to 90 in steps of 2 degrees."""
_STRIP_INDEX: Final = 1.5  # refractive index of the polymers that scattering strips are made of
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(48)
_MU: Final[Floats] = 0.5 * (_NODES + 1.0)  # cosines of the quadrature for isotropic light
_HEMISPHERE: Final[Floats] = _WEIGHTS * _MU  # 2 mu dmu on 0..1
_SPECIFIC_HEAT: Final = 1500.0  # J kg-1 K-1 of fabric, between polyester 1250 and polyethylene 2300


def hole_view(theta: Floats, depth: float) -> Floats:
    """Share of a hole of depth-to-width `depth` that light at `theta` (A,) still passes, mean over azimuth.

    Plane geometry: a slit seen at azimuth phi keeps 1 - depth tan(theta) |cos(phi)| of its width.
    """
    phi = (np.arange(64) + 0.5) * np.pi / 128.0
    slope = depth * np.tan(np.minimum(theta, np.deg2rad(89.999)))
    share = np.maximum(0.0, 1.0 - slope[:, None] * np.cos(phi)).mean(axis=1)
    return np.where(theta >= np.pi / 2 - 1e-9, 0.0, share)


def _strip(strip: Mapping[str, Any], theta: Floats, side: str) -> tuple[Floats, Floats, Floats]:
    """Return (transmit, reflect, specular share of both) of one strip, each (B, A), for light from `side`.

    Clear strips (haze below 1) follow the sheet whose normal values they have. Scattering strips take in
    what their surface lets in, in proportion to 1 - Fresnel reflectance, and send back the rest.
    """
    transmit, reflect = np.array(strip["transmit"]), np.array(strip[f"reflect_{side}"])
    haze = float(strip["haze"])
    if haze < 1.0:
        sheet = from_normal(transmit, reflect_outer=reflect, edges_um=np.array(SOLAR.edges))
        passage = sheet.passage(0.5 * (SOLAR.lower + SOLAR.upper), theta)
        through, back = passage.down.mean(axis=0), passage.reflect_outside.mean(axis=0)
        return through, back, np.full_like(through, 1.0 - haze)
    entry = _entry(theta) / _entry(np.zeros(1))
    through = transmit[:, None] * entry
    taken = (1.0 - transmit - reflect)[:, None] * entry
    return through, 1.0 - through - taken, np.zeros_like(through)


def _entry(theta: Floats) -> Floats:
    """Return 1 - Fresnel reflectance of a strip's surface, (A,)."""
    air, solid = np.ones(1, dtype=np.complex128), np.full(1, _STRIP_INDEX, dtype=np.complex128)
    cosine = np.cos(theta)[None, :].astype(np.complex128)
    back = face(air, solid, cosine, cosine_inside(solid, np.sin(theta))).reflect_outside
    return np.asarray(1.0 - back.mean(axis=0)[0])


def _mix(row: Row, theta: Floats, side: str) -> tuple[Floats, Floats, Floats, Floats]:
    """Return (beam_beam, beam_diffuse, reflect, specular), each (B, A), for light from `side`."""
    openness = row.figures["openness"].value
    hole = openness * hole_view(theta, float(row.table["hole_depth"]))
    straight, scattered, back, mirror = 0.0, 0.0, 0.0, 0.0
    for name, share in row.table["strips"].items():
        through, sent_back, clear = _strip(table("strip", name), theta, side)
        straight = straight + share * through * clear
        scattered = scattered + share * through * (1.0 - clear)
        back = back + share * sent_back
        mirror = mirror + share * sent_back * clear
    solid = 1.0 - hole
    beam = hole + solid * np.asarray(straight)
    return beam, solid * np.asarray(scattered), solid * np.asarray(back), solid * np.asarray(mirror)


def _solar(row: Row) -> SolarOptics:
    beam, scattered, back, mirror = _mix(row, ANGLES, "outside")
    diffuse: dict[str, tuple[Floats, Floats]] = {}
    for side in ("outside", "inside"):
        b, d, r, _ = _mix(row, np.arccos(_MU), side)
        diffuse[side] = ((b + d) @ _HEMISPHERE, r @ _HEMISPHERE)
    through, sent_up = diffuse["outside"][0], diffuse["outside"][1]
    sent_down = diffuse["inside"][1]
    return SolarOptics(
        angles=ANGLES,
        beam_beam=beam,
        beam_diffuse=scattered,
        beam_reflect=back,
        beam_specular=mirror,
        beam_absorbed=(1.0 - beam - scattered - back)[None],
        diffuse_in=through,
        diffuse_out=through,
        reflect_outside=sent_up,
        reflect_inside=sent_down,
        absorbed_from_outside=(1.0 - through - sent_up)[None],
        absorbed_from_inside=(1.0 - through - sent_down)[None],
    )


def _thermal(row: Row) -> ThermalOptics:
    """Holes as isotropic radiation sees them, strips by share."""
    hole = row.figures["openness"].value * float(
        hole_view(np.arccos(_MU), float(row.table["hole_depth"])) @ _HEMISPHERE
    )
    transmit, outside, inside = np.zeros(3), np.zeros(3), np.zeros(3)
    for name, share in row.table["strips"].items():
        strip = table("strip", name)
        t = np.array(strip["thermal_transmit"])
        transmit += share * t
        outside += share * (1.0 - t - np.array(strip["emissivity_outside"]))
        inside += share * (1.0 - t - np.array(strip["emissivity_inside"]))
    solid = 1.0 - hole
    return ThermalOptics((hole + solid * transmit)[None], (solid * outside)[None], (solid * inside)[None])


def build_screen(row: Row) -> Screen:
    """Return the screen of a library row."""
    return Screen(
        name=row.name,
        title=row.title,
        kind=row.table["kind"],
        provenance=row.provenance,
        source=row.source,
        solar=_solar(row),
        thermal=_thermal(row),
        openness=row.figures["openness"].value,
        air_permeability=row.figures["air_permeability"].value,
        vapour_open=bool(row.table["vapour_open"]),
        heat_capacity=float(row.table["mass_g_m2"]) * 1e-3 * _SPECIFIC_HEAT,
        parked_shade=row.figures["parked_shade"].value,
    )


def build_ground(row: Row) -> Ground:
    """Return the ground of a library row."""
    return Ground(
        name=row.name,
        title=row.title,
        provenance=row.provenance,
        source=row.source,
        reflect=np.array(row.table["reflect"]),
        emissivity=np.array(row.table["emissivity"]),
        conductivity=row.figures["conductivity"].value,
        volumetric_heat=row.figures["volumetric_heat"].value,
        surface_resistance=row.figures["surface_resistance"].value,
        wetness=row.figures["wetness"].value,
    )
