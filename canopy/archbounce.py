"""Light that an arched roof mirrors down to the crop: inside of the far half, outside across the valley.

At a point of the arc with slope a, the sun at height e in the section (radians) is mirrored to the height
2 a - e. Inner faces: a > e; the way down must not meet the arc again, a chord of the circle, so
3 a - 2 e > slope at the gutter; flatter light leaves again and is thrown into the next span (`archthrow`),
as is light that outer faces mirror down (e / 2 < a < e).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from canopy.archbasis import spread
from canopy.archtrace import Arc, Passes, Points, Sums, crossings, follow, section_height
from canopy.house import House
from canopy.rays import Floats, Ints, Rays

INNER_POINTS, BACK_POINTS = 40, 10
LEAST_LIGHT = 1e-6
"""Sampled light below this share of the light on the floor is left out."""


@dataclass(frozen=True)
class InnerWays:
    """Light mirrored by the inside: weights on nodes of the incidence, which mirror and way in share."""

    nodes: Floats  # (M, nodes) times reflectance x transmittance
    gable: Floats  # (M, nodes) times reflectance; came in through the gable end
    passes: Passes
    back: Floats  # (M, nodes) all light that meets the inside, times transmittance: what it may absorb


def valid(arc: Arc, low: Floats, high: Floats) -> Floats:
    """Mean number of spans that have light landing low..high m from their left gutter inside the house."""
    n, w = arc.spans, arc.width
    k = np.arange(-n, n + 2)
    each = np.clip(n - np.abs(k), 0, n).astype(float)
    knots = np.concatenate([k * w, [(n + 2) * w]])
    area = np.concatenate([[0.0], np.cumsum(each * w)])
    a, b = np.minimum(low, high), np.maximum(low, high)
    wide = b - a > 1e-9 * w
    mean = (np.interp(b, knots, area) - np.interp(a, knots, area)) / np.where(wide, b - a, 1.0)
    single = np.clip(n - np.abs(np.floor(0.5 * (a + b) / w)), 0, n)
    return np.asarray(np.where(wide, mean, single), dtype=np.float64)


def way_down(arc: Arc, slope: Floats, height: Floats) -> tuple[Floats, Floats]:
    """Return where light mirrored at points of that slope crosses the gutter line and where it lands.

    Metres from the left gutter of its span; landing on the crop plane.
    """
    turn = 2.0 * slope - height
    lean = np.cos(turn) / np.sin(turn)
    up = arc.radius * np.cos(slope) - arc.sunk
    gutter = 0.5 * arc.width - arc.radius * np.sin(slope) - up * lean
    return gutter, gutter - arc.above * lean


def past_gutters(arc: Arc, low: Floats, high: Floats, lean: Floats) -> Floats:
    """Return the share of lines between low and high on the gutter line that no gutter box stops.

    `lean` is how far lines go across per metre of height; a box shades [-half, half + depth lean] around it.
    """
    if arc.gutter_width == 0.0:
        return np.ones_like(low)
    half, reach, w = 0.5 * arc.gutter_width, arc.gutter_depth * lean, arc.width
    right, left = half + np.maximum(reach, 0.0), half + np.maximum(-reach, 0.0)
    gap = np.maximum(w - right - left, 0.0)

    def area(x: Floats) -> Floats:
        period = np.floor(x / w)
        return period * gap + np.clip(x - period * w - right, 0.0, gap)

    size = np.where(np.abs(high - low) > 1e-9, high - low, 1e-9)
    return np.asarray(np.clip((area(low + size) - area(low)) / size, 0.0, 1.0))


def grid(low: Floats, high: Floats, breaks: Floats, count: int) -> tuple[Floats, Floats]:
    """Cut low..high (U,) into `count` pieces, one edge on the break if it lies within; return mids, sizes."""
    share = (breaks - low) / np.maximum(high - low, 1e-12)
    before = np.where((share > 0.0) & (share < 1.0), np.clip(np.rint(share * count), 1, count - 1), count)
    split = np.where(before < count, breaks, high)[:, None]
    at, before = np.arange(count), before[:, None]
    first, second = (split - low[:, None]) / before, (high[:, None] - split) / np.maximum(count - before, 1)
    step = np.where(at < before, first, second)
    mid = np.where(at < before, low[:, None] + (at + 0.5) * first, split + (at - before + 0.5) * second)
    return mid, step


def touch(arc: Arc, height: Floats) -> Floats:
    """Return how far from the sun's height lies the slope whose line to the sun touches the first neighbour.

    The line of a point with slope a meets the gutter line R (1 - cos(a - e)) / sin(e) further out than the
    line that touches the point's own arc.
    """
    return np.asarray(np.arccos(np.clip(1.0 - arc.width * np.sin(height) / arc.radius, -1.0, 1.0)))


def inner(arc: Arc, house: House, rays: Rays) -> InnerWays:
    """Light that the inside of the half facing away from the sun mirrors down."""
    rows, height = len(rays.up), section_height(rays)
    sums = Sums(rows)
    sums.gable_nodes = np.zeros_like(sums.single)
    use = np.flatnonzero(height < arc.edge - 1e-6)
    e = height[use][:, None]
    begin = (arc.edge + 2.0 * e) / 3.0
    slope, step = grid(
        begin[:, 0], np.full(len(use), arc.edge), height[use] + touch(arc, height[use]), INNER_POINTS
    )
    low_gutter, low = way_down(arc, slope - 0.5 * step, e)
    high_gutter, high = way_down(arc, slope + 0.5 * step, e)
    spans = valid(arc, low, high)
    turn = 2.0 * slope - e
    x = 0.5 * arc.width - arc.radius * np.sin(slope)
    up = np.maximum(arc.radius * np.cos(slope) - arc.sunk, 0.0)
    lean = np.cos(turn) / np.sin(turn)
    past = past_gutters(arc, low_gutter, high_gutter, lean)
    row = np.repeat(use, INNER_POINTS)
    across = np.hypot(rays.across, rays.up)[row]
    facing = np.sin(slope - e).ravel()  # incidence in the section
    flux = across * facing * (arc.radius * step * np.ones_like(slope)).ravel()
    flux /= rays.up[row] * arc.width * arc.spans
    rooms = np.ceil(spans - 1e-9).astype(np.int64).ravel()
    mid = 0.5 * (low + high).ravel()
    skip = np.maximum(np.floor(mid / arc.width), 0.0).astype(np.int64)
    skip = np.minimum(skip, arc.spans - rooms)
    weight = np.where(rooms > 0, flux * past.ravel() * spans.ravel() / np.maximum(rooms, 1), 0.0)
    tall = arc.above + up.ravel()
    drift = rays.drift[row] / arc.length
    # along the ridge per metre of height on the way from the crop to the mirror
    way = rays.along[row] / (across * np.sin(turn.ravel())) / arc.length
    meets_x = x.ravel() - up.ravel() / rays.slope[row]
    meets, stopped = crossings(arc, meets_x, height[row])
    points = Points(
        row, meets_x, weight, height[row], rays.slope[row], drift, (way - drift) * tall,
        np.minimum(way * tall, 1.0), across, rays.along[row],
        np.zeros_like(skip), skip, skip + rooms, meets, stopped,
    )  # fmt: skip
    points = points.some(weight > LEAST_LIGHT)
    passes = follow(arc, house, points, sums)
    return InnerWays(sums.single, sums.gable_nodes, passes, _back(arc, rays, use))


def _back(arc: Arc, rays: Rays, use: Ints) -> Floats:
    """Return all light that meets the inside of the half facing away, by incidence, (M, nodes)."""
    e = section_height(rays)[use]
    step = (arc.edge - e) / BACK_POINTS
    facing = np.sin(step[:, None] * (np.arange(BACK_POINTS) + 0.5)).ravel()
    row = np.repeat(use, BACK_POINTS)
    across = np.hypot(rays.across, rays.up)[row]
    light = across * facing * np.repeat(step, BACK_POINTS) * arc.radius / (rays.up[row] * arc.width)
    return spread(row, across * facing, light, len(rays.up))
