"""Edge against middle of a house: straight light at single points of the crop plane, on request.

Every point looks along every direction and counts what it crosses: flat panels (arcs as 8 or 16 flats),
upright walls and gable ends, opaque boxes. Slower than `lightpath`, which knows only the mean over the plane.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.house import House, check_shape
from canopy.optics import SolarOptics
from canopy.rays import Floats
from canopy.sheettable import SheetTable, place, sheet_table
from canopy.skyparts import Hills, hill_height, sky_shares
from canopy.structure import bars_open
from weather.record import Weather

FACETS, FEW_FACETS, MANY_SPANS = 16, 8, 50
RING_DEG, TURN_DEG = 10.0, 10.0
"""Cells of the sky in which a season's light is gathered."""
LEAST_PASSED = 1e-9
PAR = SOLAR.index("par")
Side = Literal["low_x", "high_x", "low_y", "high_y"]


@dataclass(frozen=True)
class FloorMap:
    """PAR that reaches points of the crop plane straight, per unit on the horizontal outside."""

    x_m: Floats  # (X,) across the spans, from the side that faces ridge_azimuth - 90 degrees
    y_m: Floats  # (Y,) along the ridge, towards ridge_azimuth
    transmission: Floats  # (Y, X)

    def edge(self, side: Side, strip_m: float) -> tuple[float, float]:
        """Return the mean of a strip along one side, over that side's middle third, and its real width, m.

        Sides: side walls "low_x" and "high_x", gable ends "low_y" and "high_y"; at least one point wide.
        """
        across = side.endswith("x")
        values, at = (self.transmission, self.x_m) if across else (self.transmission.T, self.y_m)
        step = 2.0 * float(at[0])
        count = min(max(round(strip_m / step), 1), len(at))
        strip = values[_middle(len(values))][
            :, slice(count) if side.startswith("low") else slice(-count, None)
        ]
        return float(strip.mean()), count * step

    @property
    def middle(self) -> float:
        """Mean of the middle third of the house, across and along."""
        rows, columns = self.transmission.shape
        return float(self.transmission[_middle(rows), _middle(columns)].mean())


def _middle(count: int) -> slice:
    return slice(count // 3, count - count // 3)


def season_light(
    weather: Weather, hours: NDArray[np.intp], *, horizon: Hills | None = None
) -> tuple[Floats, Floats, Floats]:
    """Return where the light of some hours comes from: zenith, azimuth (degrees) and share, (D,) each.

    Beam and circumsolar light are gathered by cells of the sky at their mean direction by energy, the rest of
    the sky is even (Perez parts of `skyparts`; the horizon's part stands in the lowest ring). Shares are of
    all light on the horizontal in the open; what hills hide is left out.
    """
    up = np.cos(np.radians(weather.zenith[hours]))
    shares = sky_shares(weather)
    dhi = weather.dhi[hours]
    around, dome, band = (dhi * s[hours] for s in (shares.circumsolar, shares.dome, shares.band))
    direct = np.where(up > 0.0, weather.dni[hours] * np.maximum(up, 0.0) + around, 0.0)
    rings, turns = round(90.0 / RING_DEG), round(360.0 / TURN_DEG)
    ring = np.minimum((weather.zenith[hours] / RING_DEG).astype(int), rings - 1)
    cell = ring * turns + (weather.azimuth[hours] // TURN_DEG).astype(int) % turns
    flat, turn = np.sin(np.radians(weather.zenith[hours])), np.radians(weather.azimuth[hours])
    parts = (flat * np.sin(turn), flat * np.cos(turn), np.maximum(up, 0.0), np.ones_like(up))
    x, y, z, sun = (np.bincount(cell, weights=direct * v, minlength=rings * turns) for v in parts)
    lit = sun > 0.0
    edges = np.sin(np.radians(RING_DEG * np.arange(rings + 1))) ** 2
    sky = np.diff(edges) * float(dome.sum())
    sky[-1] = max(sky[-1] + float(band.sum()), 0.0)
    middles = np.degrees(np.arcsin(np.sqrt(0.5 * (edges[1:] + edges[:-1]))))
    middle = TURN_DEG * (np.arange(turns) + 0.5)
    zenith: Floats = np.concatenate(
        [np.degrees(np.arctan2(np.hypot(x, y), z))[lit], np.repeat(middles, turns)]
    )
    azimuth: Floats = np.concatenate([np.degrees(np.arctan2(x, y))[lit] % 360.0, np.tile(middle, rings)])
    light: Floats = np.concatenate([sun[lit], np.repeat(sky / turns, turns)])
    free = 90.0 - zenith > hill_height(horizon, azimuth)
    return zenith[free], azimuth[free], light[free] / float(light.sum())


def floor_map(
    house: House,
    solar: SolarOptics,
    zenith_deg: Floats,
    azimuth_deg: Floats,
    share: Floats,
    *,
    across: int = 40,
    along: int = 12,
) -> FloorMap:
    """Return the map for light from directions (D,), degrees, with shares (D,) of light on the horizontal."""
    check_shape(house)
    x = (np.arange(across) + 0.5) * house.width / across
    y = (np.arange(along) + 0.5) * house.length / along
    table = sheet_table(solar).total[PAR][None]
    total = np.zeros((across, along))
    section, boxes = _section(house), _boxes(house)
    for zenith, azimuth, part in zip(zenith_deg, azimuth_deg, share, strict=True):
        if part == 0.0 or zenith >= 90.0:
            continue
        z, a = np.radians(min(zenith, 89.0)), np.radians(azimuth - house.ridge_azimuth)
        sun = (float(np.sin(z) * np.sin(a)), float(np.sin(z) * np.cos(a)), float(np.cos(z)))
        look = _Look(house, table, x, y, sun)
        passed = look.roof(section) * look.upright(section)
        total += part * np.where(look.stopped(boxes), 0.0, passed)
    return FloorMap(x, y, total.T)


def _section(house: House) -> Floats:
    """Return the roof line as points (P, 2): x and height above the crop plane."""
    if house.form == "gable":
        rise = house.roof_rise
        left = rise / np.tan(np.radians(house.pitch_other)) if rise > 0.0 else 0.5 * house.span_width
        span = np.array([[0.0, 0.0], [left, rise]])
    else:
        facets = FACETS if house.spans <= MANY_SPANS else FEW_FACETS
        turn = np.linspace(-1.0, 1.0, facets + 1)[:-1] * np.radians(house.arc_edge_deg)
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


def _boxes(house: House) -> Floats:
    """Return gutters and ridges as (K, 4): left, right, bottom and top above the crop plane."""
    above = house.gutter_height - house.crop_plane_height
    boxes = []
    if house.gutter_width > 0.0 and house.gutter_depth > 0.0:
        half, low = 0.5 * house.gutter_width, above - house.gutter_depth
        boxes += [
            (i * house.span_width - half, i * house.span_width + half, low, above)
            for i in range(house.spans + 1)
        ]
    if house.ridge_width > 0.0 and house.ridge_depth > 0.0:
        top, half = above + house.roof_rise, 0.5 * house.ridge_width
        line = _section(house)
        ridge = line[:-1][np.argmax(line[:-1, 1])][0] % house.span_width
        boxes += [
            (i * house.span_width + ridge - half, i * house.span_width + ridge + half,
             top - house.ridge_depth, top)
            for i in range(house.spans)
        ]  # fmt: skip
    return np.array(boxes).reshape(-1, 4)


@dataclass(frozen=True)
class _Look:
    """Points at x (X,) by y (Y,) looking in one direction."""

    house: House
    table: Floats
    x: Floats
    y: Floats
    sun: tuple[float, float, float]

    def _sheet(self, normal: Floats, side: Floats) -> Floats:
        """Return what sheets and their bars pass."""
        light: Floats = SheetTable.read(self.table, place(normal))[0] * bars_open(self.house, normal, side)
        return light

    def _inside(self, along: Floats) -> NDArray[np.bool_]:
        """Whether lines (K,) are still between the gable ends after `along` metres: (K, Y)."""
        at = self.y + along[:, None] * self.sun[1]
        return np.asarray((at >= 0.0) & (at <= self.house.length))

    def roof(self, line: Floats) -> Floats:
        """Return what roof panels pass, (X, Y)."""
        sx, sy, sz = self.sun
        (x0, z0), (dx, dz) = line[:-1].T, np.diff(line, axis=0).T
        size = np.hypot(dx, dz)
        normal = (-dz * sx + dx * sz) / size
        seen = np.abs(normal) > 1e-9
        x0, z0, dx, dz, size, normal = (v[seen] for v in (x0, z0, dx, dz, size, normal))
        # the point of each panel's plane that each line meets
        reach = (self.x[:, None] - x0) * dz + z0 * dx
        along = reach / (normal * size)
        share = ((self.x[:, None] + along * sx - x0) * dx + (along * sz - z0) * dz) / size**2
        point, panel = np.nonzero((along > 0.0) & (share >= 0.0) & (share < 1.0))
        passed = self._sheet(np.abs(normal), np.full_like(normal, abs(sy)))
        lost = np.log(np.maximum(passed, LEAST_PASSED))[panel, None] * self._inside(along[point, panel])
        total = np.zeros((len(self.x), len(self.y)))
        np.add.at(total, point, lost)
        return np.asarray(np.exp(total))

    def upright(self, line: Floats) -> Floats:
        """Return what side walls and gable ends pass, (X, Y)."""
        house, (sx, sy, sz) = self.house, self.sun
        above = house.gutter_height - house.crop_plane_height
        passed = np.ones((len(self.x), len(self.y)))
        wall, gable = self._sheet(np.abs(np.array([sx, sy])), np.abs(np.array([sy, sx])))
        if abs(sx) > 1e-9:
            far = ((house.width if sx > 0.0 else 0.0) - self.x) / sx
            hit = (far * sz <= above)[:, None] & self._inside(far)
            passed = np.where(hit, passed * wall, passed)
        if abs(sy) > 1e-9:
            far = ((house.length if sy > 0.0 else 0.0) - self.y) / sy
            reach = self.x[:, None] + far * sx
            hit = (reach >= 0.0) & (reach <= house.width)
            hit &= far * sz <= np.interp(reach, line[:, 0], line[:, 1])
            passed = np.where(hit, passed * gable, passed)
        return np.asarray(passed)

    def stopped(self, boxes: Floats) -> NDArray[np.bool_]:
        """Whether gutters or ridges stop the light, (X, Y)."""
        dark = np.zeros((len(self.x), len(self.y)), dtype=bool)
        sx, sy, sz = (s if abs(s) > 1e-12 else 1e-12 for s in self.sun)
        left, right, low, high = boxes.T
        a, b = (left - self.x[:, None]) / sx, (right - self.x[:, None]) / sx
        near = np.maximum(np.maximum(np.minimum(a, b), low / sz), 0.0)
        far = np.minimum(np.maximum(a, b), high / sz)
        point, box = np.nonzero(near < far)
        a, b = -self.y / sy, (self.house.length - self.y) / sy
        start = np.maximum(near[point, box, None], np.minimum(a, b))
        end = np.minimum(far[point, box, None], np.maximum(a, b))
        np.logical_or.at(dark, point, start < end)
        return dark
