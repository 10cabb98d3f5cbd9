"""Light that an arch throws over the valley into the span behind, off its outside or flat off its inside.

Slopes and heights are angles in the section, as in `archbounce`. Every sample is a point of the arc with
the span of slopes around it, so that gutters and the ends of the house cut off the right share of it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from canopy.archbounce import LEAST_LIGHT, grid, past_gutters, touch, valid, way_down
from canopy.archtrace import Arc, section_height
from canopy.house import House
from canopy.rays import Bools, Floats, Ints, Rays
from canopy.structure import bars_open

THROWN_POINTS = 28


@dataclass(frozen=True)
class Beyond:
    """One more neighbour between mirror and sun: of the lines that have come as far as it, (P,) each."""

    points: Ints
    cosine: Floats  # at its arc
    clear: Floats  # share that misses it: no span there, or the gable end lies before it
    behind: Floats  # share that came in through its gable end, times what bars leave open
    deep: Floats  # share that crosses its arc twice, times what bars leave open


@dataclass(frozen=True)
class ThrownWays:
    """Light mirrored into a span behind: mirror x entry x neighbours crossed on both ways, point by point."""

    row: Ints
    weight: Floats
    mirror: Floats  # cosine at the mirror
    entry: Floats  # cosine where it comes in
    between: tuple[tuple[Ints, Floats], ...]  # points that cross one more neighbour going in, cosines there
    beyond: tuple[Beyond, ...]  # neighbours towards the sun
    gable: Floats  # weight of what came in through the gable end, not through the arc above the mirror


@dataclass(frozen=True)
class _Samples:
    """Points of the arc, (P,) each."""

    row: Ints
    across: Floats  # sun's component in the section
    turn: Floats  # height of the mirrored sun
    x: Floats  # of the point, from the left gutter
    up: Floats  # above the gutter line
    cells: Ints  # spans gone back before the gutter line is reached
    own: Floats  # where it is reached, in its span
    mirror: Floats  # cosine of incidence at the point
    begun: Floats  # share of the length that lies beyond the gable end on the way there
    weight: Floats
    spans: Floats  # spans whose light lands inside

    def some(self, use: Bools) -> _Samples:
        """Return some of the points."""
        return _Samples(*(getattr(self, name)[use] for name in self.__dataclass_fields__))


def outer(arc: Arc, house: House, rays: Rays) -> ThrownWays:
    """Light that the outside of the half facing away mirrors down into the next span."""
    height = section_height(rays)
    use = np.flatnonzero((height < 2.0 * arc.edge - 1e-6) & (arc.spans > 1))
    e = height[use]
    return _thrown(arc, house, rays, use, (0.5 * e, np.minimum(e, arc.edge)))


def outer_front(arc: Arc, house: House, rays: Rays) -> ThrownWays:
    """Light that the outside of the half facing a high sun mirrors down into the span before it."""
    height = np.pi - section_height(rays)
    use = np.flatnonzero((height < 2.0 * arc.edge - 1e-6) & (arc.spans > 1))
    e = height[use]
    return _thrown(arc, house, rays, use, (0.5 * e, np.minimum(e, arc.edge)), front=True)


def through(arc: Arc, house: House, rays: Rays) -> ThrownWays:
    """Light that the inside mirrors so flat that it leaves through the same arc and enters the next span."""
    height = section_height(rays)
    use = np.flatnonzero((height < arc.edge - 1e-6) & (arc.spans > 1))
    e = height[use]
    return _thrown(arc, house, rays, use, (e, (arc.edge + 2.0 * e) / 3.0), within=True)


def _thrown(
    arc: Arc,
    house: House,
    rays: Rays,
    use: Ints,
    slopes: tuple[Floats, Floats],
    *,
    front: bool = False,
    within: bool = False,
) -> ThrownWays:
    """Follow light mirrored between two slopes of the arc back to the spans behind.

    `front`: the mirror faces the sun (seen from behind); `within`: it is the inside of the arc.
    """
    points = _samples(arc, rays, use, slopes, front=front, within=within)
    points = points.some((points.weight > LEAST_LIGHT) & (points.cells >= 1))
    row, across = points.row, points.across
    entry = across * np.sqrt(1.0 - arc.offset(points.own, points.turn) ** 2)
    along = rays.along[row]
    weight = points.weight * bars_open(house, points.mirror, along) * bars_open(house, entry, along)
    between = []
    for i in range(1, int(points.cells.max(initial=1))):
        more = np.flatnonzero(points.cells > i)
        offset = arc.offset(points.own[more] - i * arc.width, points.turn[more])
        cosine = across[more] * np.sqrt(1.0 - offset**2)
        weight[more] *= bars_open(house, cosine, along[more]) ** 2
        between.append((more, cosine))
    at = (arc.width - points.x if front else points.x) - points.up / rays.slope[row]
    sure = points.cells if front else np.zeros_like(points.cells)
    ended = points.begun
    if within:
        height = section_height(rays)[row]
        rest = np.maximum(arc.leaves(arc.offset(at, height), height)[1] - points.up, 0.0)
        ended = np.minimum(ended + rays.drift[row] / arc.length * rest, 1.0)
    beyond = _beyond(arc, house, rays, points, at, ended, sure)
    side = weight * (ended - points.begun)
    return ThrownWays(row, weight * (1.0 - ended), points.mirror, entry, tuple(between), beyond, side)


def _samples(
    arc: Arc, rays: Rays, use: Ints, slopes: tuple[Floats, Floats], *, front: bool, within: bool
) -> _Samples:
    """Return the points between two slopes with all that does not depend on sheets and bars."""
    e = section_height(rays)[use][:, None]
    e = np.pi - e if front else e
    breaks = e[:, 0] + (1.0 if within else -1.0) * touch(arc, e[:, 0])
    mids, step = grid(*slopes, breaks, THROWN_POINTS)
    far = -float(arc.spans + 1) * arc.width
    ends = (mids - 0.4999 * step, mids + 0.4999 * step)
    (low_gutter, low), (high_gutter, high) = ((np.maximum(x, far) for x in way_down(arc, a, e)) for a in ends)
    past = past_gutters(arc, low_gutter, high_gutter, 1.0 / np.tan(2.0 * mids - e)).ravel()
    spans = valid(arc, low, high).ravel()
    turn, slope = (2.0 * mids - e).ravel(), mids.ravel()
    up = np.maximum(arc.radius * np.cos(slope) - arc.sunk, 0.0)
    gutter = np.maximum(way_down(arc, mids, e)[0], far).ravel()
    row = np.repeat(use, THROWN_POINTS)
    across = np.hypot(rays.across, rays.up)[row]
    mirror = across * np.abs(np.sin(mids - e)).ravel()
    flux = mirror * arc.radius * step.ravel() / (rays.up[row] * arc.width * arc.spans)
    way = rays.along[row] / (across * np.sin(turn)) / arc.length
    cells = np.ceil(-gutter / arc.width).astype(np.int64)
    sun = np.full(len(row), 1e9) if front else rays.slope[row]
    return _Samples(
        row=row,
        across=across,
        turn=turn,
        x=0.5 * arc.width - arc.radius * np.sin(slope),
        up=up,
        cells=cells,
        own=gutter + cells * arc.width,
        mirror=mirror,
        begun=np.minimum(way * (arc.above + up), 1.0),
        weight=flux * spans * past * _free(arc, slope, sun),
        spans=spans,
    )


def _beyond(
    arc: Arc, house: House, rays: Rays, points: _Samples, x: Floats, ended: Floats, sure: Ints
) -> tuple[Beyond, ...]:
    """Return the neighbours towards the sun of lines at x on the gutter line.

    `sure` neighbours are there for every span whose light lands inside. Along the ridge, mirrors between the
    shares `begun` and 1 - (`ended` - `begun`) of the length see the sun through the roof; each neighbour that
    is met at height h lies before the gable end for those below 1 - drift (h - height of the mirror).
    """
    row, spans = points.row, points.spans
    height = section_height(rays)[row]
    meets = np.floor((x - arc.tangent(height)) / arc.width).astype(np.int64)
    drift = rays.drift[row] / arc.length
    last = 1.0 - ended  # length of the mirrors' strip that has come as far, from `begun` on
    found = []
    for i in range(1, int(meets.max(initial=0)) + 1):
        more = np.flatnonzero((meets >= i) & (spans > i - 1 - sure))
        if not len(more):
            break
        h, up, rest = height[more], points.up[more], 1.0 - points.begun[more]
        offset = arc.offset(x[more] - i * arc.width, h)
        cosine = points.across[more] * np.sqrt(1.0 - offset**2)
        gone = np.maximum(i - sure[more], 0)
        there = np.where(gone > 0, np.clip((spans[more] - gone) / (spans[more] - gone + 1.0), 0.0, 1.0), 1.0)
        enter = np.clip(rest - drift[more] * (arc.enters(offset, h) - up), 0.0, last[more])
        leave = np.clip(rest - drift[more] * (arc.leaves(offset, h)[1] - up), 0.0, enter)
        whole = np.maximum(last[more], 1e-12)
        open_bars = bars_open(house, cosine, rays.along[row[more]])
        behind, deep = there * (enter - leave) / whole, there * leave / whole
        found.append(Beyond(more, cosine, 1.0 - behind - deep, behind * open_bars, deep * open_bars**2))
        last = last.copy()
        last[more] = leave
    return tuple(found)


def _free(arc: Arc, slope: Floats, sun: Floats) -> Floats:
    """Return 1 where no crown box stops the way, else 0."""
    free = np.ones_like(slope)
    if arc.ridge_width > 0.0:
        left = 0.5 * arc.width - 0.5 * arc.ridge_width
        x = 0.5 * arc.width - arc.radius * np.sin(slope)
        up = arc.radius * np.cos(slope) - arc.sunk
        free[up + sun * np.maximum(left - x, 0.0) <= arc.rise] = 0.0
    return free
