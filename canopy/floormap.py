"""Edge against middle of a house: straight light at single points of the crop plane, on request.

Every point looks along every direction and counts what it crosses: flat panels (arcs in `FACETS` flats),
upright walls and gable ends, opaque boxes. Slower than `lightpath`, which knows only the mean over the plane.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from canopy.bands import SOLAR
from canopy.house import House, check_shape
from canopy.optics import SolarOptics
from canopy.rays import Floats
from canopy.sheettable import SheetTable, place, sheet_table
from canopy.structure import bars_open

FACETS = 16
PAR = SOLAR.index("par")


@dataclass(frozen=True)
class FloorMap:
    """PAR that reaches points of the crop plane straight, per unit on the horizontal outside."""

    x_m: Floats  # (X,) across the spans, from the side that faces ridge_azimuth - 90 degrees
    y_m: Floats  # (Y,) along the ridge, towards ridge_azimuth
    transmission: Floats  # (Y, X)


def floor_map(
    house: House,
    solar: SolarOptics,
    zenith_deg: Floats,
    azimuth_deg: Floats,
    weight: Floats,
    *,
    across: int = 40,
    along: int = 12,
) -> FloorMap:
    """Return the map for light from directions (D,) with weights (D,) of light on the horizontal."""
    check_shape(house)
    x = (np.arange(across) + 0.5) * house.width / across
    y = (np.arange(along) + 0.5) * house.length / along
    gx, gy = (v.ravel() for v in np.meshgrid(x, y))
    table = sheet_table(solar).total[PAR][None]
    total = np.zeros(len(gx))
    section = _section(house)
    for zenith, azimuth, part in zip(zenith_deg, azimuth_deg, weight, strict=True):
        if part == 0.0 or zenith >= 90.0:
            continue
        z, a = np.radians(min(zenith, 89.0)), np.radians(azimuth - house.ridge_azimuth)
        sun = (float(np.sin(z) * np.sin(a)), float(np.sin(z) * np.cos(a)), float(np.cos(z)))
        total += part * _through(house, section, table, gx, gy, sun)
    return FloorMap(x, y, (total / float(np.sum(weight))).reshape(len(y), len(x)))


def _section(house: House) -> Floats:
    """Return the roof line as points (P, 2): x and height above the crop plane."""
    if house.form == "gable":
        rise = house.roof_rise
        left = rise / np.tan(np.radians(house.pitch_other)) if rise > 0.0 else 0.5 * house.span_width
        span = np.array([[0.0, 0.0], [left, rise]])
    else:
        turn = np.linspace(-1.0, 1.0, FACETS + 1)[:-1] * np.radians(house.arc_edge_deg)
        span = np.stack(
            [
                0.5 * house.span_width + house.arc_radius * np.sin(turn),
                house.arc_radius * np.cos(turn) - house.arc_radius + house.rise,
            ],
            axis=1,
        )
    moved = [span + np.array([i * house.span_width, 0.0]) for i in range(house.spans)]
    line = np.concatenate([*moved, np.array([[house.width, 0.0]])])
    line[:, 1] += house.gutter_height - house.crop_plane_height
    return line


def _through(
    house: House, line: Floats, table: Floats, x: Floats, y: Floats, sun: tuple[float, float, float]
) -> Floats:
    """Return what straight light keeps on its way to points, (P,)."""
    sx, sy, sz = sun
    passed = np.ones_like(x)
    step = np.diff(line, axis=0)
    for (x0, z0), (dx, dz) in zip(line[:-1], step, strict=True):
        size = float(np.hypot(dx, dz))
        normal = (-dz * sx + dx * sz) / size
        if abs(normal) < 1e-9:
            continue
        # the point of the panel's plane that the line meets
        along = ((x0 - x) * -dz + z0 * dx) / (normal * size)
        share = ((x + along * sx - x0) * dx + (along * sz - z0) * dz) / size**2
        at = y + along * sy
        hit = (along > 0.0) & (share >= 0.0) & (share < 1.0) & (at >= 0.0) & (at <= house.length)
        passed = np.where(hit, passed * _sheet(house, table, abs(normal), abs(sy)), passed)
    passed = _upright(house, line, table, (x, y), sun, passed)
    return _boxes(house, line, x, y, sun, passed)


def _sheet(house: House, table: Floats, normal: float, side: float) -> float:
    """Return what one sheet and its bars pass."""
    cosine = np.array([normal])
    return float(SheetTable.read(table, place(cosine))[0, 0] * bars_open(house, cosine, np.array([side]))[0])


def _upright(
    house: House,
    line: Floats,
    table: Floats,
    at: tuple[Floats, Floats],
    sun: tuple[float, float, float],
    passed: Floats,
) -> Floats:
    """Take off side walls and gable ends."""
    (x, y), (sx, sy, sz) = at, sun
    above = house.gutter_height - house.crop_plane_height
    if abs(sx) > 1e-9:
        far = ((house.width if sx > 0.0 else 0.0) - x) / sx
        hit = (far * sz <= above) & (y + far * sy >= 0.0) & (y + far * sy <= house.length)
        passed = np.where(hit, passed * _sheet(house, table, abs(sx), abs(sy)), passed)
    if abs(sy) > 1e-9:
        far = ((house.length if sy > 0.0 else 0.0) - y) / sy
        reach = x + far * sx
        hit = (reach >= 0.0) & (reach <= house.width)
        hit &= far * sz <= np.interp(reach, line[:, 0], line[:, 1])
        passed = np.where(hit, passed * _sheet(house, table, abs(sy), abs(sx)), passed)
    return passed


def _boxes(
    house: House, line: Floats, x: Floats, y: Floats, sun: tuple[float, float, float], passed: Floats
) -> Floats:
    """Take off what gutters and ridges stop."""
    above = house.gutter_height - house.crop_plane_height
    boxes = []
    if house.gutter_width > 0.0 and house.gutter_depth > 0.0:
        half = 0.5 * house.gutter_width
        boxes += [
            (i * house.span_width, half, above - house.gutter_depth, above) for i in range(house.spans + 1)
        ]
    if house.ridge_width > 0.0 and house.ridge_depth > 0.0:
        top = above + house.roof_rise
        ridges = line[:-1][np.argmax(line[:-1, 1])][0] % house.span_width
        boxes += [
            (i * house.span_width + ridges, 0.5 * house.ridge_width, top - house.ridge_depth, top)
            for i in range(house.spans)
        ]
    for middle, half, low, high in boxes:
        near, far = np.zeros_like(x), np.full_like(x, np.inf)
        for at, start, end, part in (
            (x, middle - half, middle + half, sun[0]),
            (y, 0.0, house.length, sun[1]),
            (np.zeros_like(x), low, high, sun[2]),
        ):
            step = part if abs(part) > 1e-12 else 1e-12
            a, b = (start - at) / step, (end - at) / step
            near, far = np.maximum(near, np.minimum(a, b)), np.minimum(far, np.maximum(a, b))
        passed = np.where(near < far, 0.0, passed)
    return passed
