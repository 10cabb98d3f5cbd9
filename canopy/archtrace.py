"""The way of a beam through arched roofs: circular arcs side by side, straight and with one mirror bounce.

As with gables, lines towards the sun are sorted by where they cross the gutter line; between two breaks the
sequence of arcs is fixed. The incidence changes along an arc, so every piece carries Gauss points. A line
that crosses one arc only is linear in what the sheet passes: its weight goes to nodes of cos(incidence), and
all hours become one matrix (`archbasis`). Lines that meet neighbouring arcs are handed on point by point.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from canopy.archbasis import SINGLE, spread, spread_many
from canopy.house import House
from canopy.rays import Bools, Floats, Ints, Rays, cut
from canopy.structure import bars_open


def _rule(count: int) -> tuple[Floats, Floats]:
    """Gauss nodes and weights on 0..1 through x = s^2 (3 - 2 s): smooth past a tangent at either end."""
    node, weight = np.polynomial.legendre.leggauss(count)
    s = 0.5 * (node + 1.0)
    return s**2 * (3.0 - 2.0 * s), 3.0 * weight * s * (1.0 - s)


FULL_RULE, SHORT_RULE = _rule(8), _rule(4)
SHORT_PIECE = 0.12
"""Pieces below this share of a span, and lines that meet two neighbours or more, get the short rule."""


@dataclass(frozen=True)
class Arc:
    """One span's arc, seen with the sun on the right."""

    width: float
    spans: int
    length: float
    above: float  # crop plane to gutter line
    radius: float
    sunk: float  # centre below the gutter line, m (may be negative)
    edge: float  # slope at the gutter, radians
    gutter_width: float
    gutter_depth: float
    ridge_width: float
    ridge_depth: float

    @property
    def rise(self) -> float:
        """Gutter line to crown."""
        return self.radius - self.sunk

    def offset(self, x: Floats, height: Floats) -> Floats:
        """Sine of incidence in the section of lines at x on the gutter line, sun at `height` radians."""
        cross = (x - 0.5 * self.width) * np.sin(height) - self.sunk * np.cos(height)
        return np.asarray(np.clip(-cross / self.radius, -1.0, 1.0))

    def leaves(self, offset: Floats, height: Floats) -> tuple[Floats, Floats]:
        """Return turn (radians from upright) and height above the gutter line where a line leaves the arc."""
        turn = 0.5 * np.pi - height - np.arcsin(offset)
        return turn, np.maximum(self.radius * np.cos(turn) - self.sunk, 0.0)

    def enters(self, offset: Floats, height: Floats) -> Floats:
        """Return the height above the gutter line where a line enters a neighbour's arc."""
        turn = -0.5 * np.pi - height + np.arcsin(offset)
        return np.maximum(self.radius * np.cos(turn) - self.sunk, 0.0)

    def tangent(self, height: Floats) -> Floats:
        """Return where the line that just touches the arc crosses the gutter line; 0 with a flatter edge."""
        sine = np.sin(height)
        touch = 0.5 * self.width - (self.radius - self.sunk * np.cos(height)) / sine
        return np.where(height < self.edge, np.minimum(touch, 0.0), 0.0)


def arc_of(house: House) -> Arc:
    """Return the arc of an arched house."""
    gutter = house.gutter_width > 0.0 and house.gutter_depth > 0.0
    ridge = house.ridge_width > 0.0 and house.ridge_depth > 0.0
    return Arc(
        width=house.span_width,
        spans=house.spans,
        length=house.length,
        above=house.gutter_height - house.crop_plane_height,
        radius=house.arc_radius,
        sunk=house.arc_radius - house.rise,
        edge=float(np.radians(house.arc_edge_deg)),
        gutter_width=house.gutter_width if gutter else 0.0,
        gutter_depth=house.gutter_depth if gutter else 0.0,
        ridge_width=house.ridge_width if ridge else 0.0,
        ridge_depth=house.ridge_depth if ridge else 0.0,
    )


@dataclass(frozen=True)
class Passes:
    """Lines that cross one arc and then, cell by cell, a neighbour's arc twice (point by point)."""

    row: Ints
    cosine: tuple[Floats, ...]  # own arc, then each neighbour's
    point: tuple[Ints, ...]  # for each neighbour: which points reach it
    free: tuple[Floats, ...]  # weight of those that end after this neighbour
    behind: tuple[Floats, ...]  # weight of those that leave through the gable end inside it
    mirrored: tuple[Floats, ...]  # as `free`, of the same lines after the far gable end


@dataclass(frozen=True)
class Ways:
    """Straight light or its mirror image: M directions."""

    single: Floats  # (M, nodes) one arc
    passes: Passes
    wall: Floats  # (M,) side wall
    gable: Floats  # (M,) gable end


@dataclass(frozen=True)
class Points:
    """Gauss points of lines towards the sun; (P,) each. See `gablepath.Line` for cell, first, last."""

    row: Ints
    x: Floats
    weight: Floats
    height: Floats  # of the sun in the section, radians
    slope: Floats
    drift: Floats  # share of the house's length per metre of height
    shift: Floats  # share of the length that comes on top of drift * height (after a bounce)
    begun: Floats  # share of the length that lies beyond the gable end where the line begins
    across: Floats  # sun's component in the section
    along: Floats
    cell: Ints
    first: Ints
    last: Ints
    meets: Ints
    stopped: Ints

    def share(self, height: Floats) -> Floats:
        """Return the share of the floor from which a height (above the crop plane) lies beyond the gable."""
        return np.minimum(self.drift * height + self.shift, 1.0)

    def some(self, use: Bools | Ints) -> Points:
        """Return some of the points."""
        at = np.flatnonzero(use) if use.dtype == np.bool_ else use
        return Points(*(getattr(self, name).take(at) for name in self.__dataclass_fields__))

    def spans_with(self, cells: int) -> Ints:
        """Return how many spans have room for that many cells beyond `cell`."""
        return np.clip(self.last - np.maximum(self.first, self.cell + cells), 0, self.last - self.first)


NEVER = 1_000_000


def section_height(rays: Rays) -> Floats:
    """Return the sun's height in the cross-section, radians."""
    return np.arctan2(rays.up, np.maximum(rays.across, 1e-9))


def crossings(arc: Arc, x: Floats, height: Floats) -> tuple[Ints, Ints]:
    """Return neighbours met and the cell whose crown box stops the line."""
    meets = np.floor((x - arc.tangent(height)) / arc.width).astype(np.int64)
    meets = np.maximum(meets, 0)
    if arc.ridge_width == 0.0:
        return meets, np.full_like(meets, NEVER)
    slope = np.tan(height)
    ahead = x - (0.5 * arc.width - arc.rise / slope)
    reach = 0.5 * arc.ridge_width + arc.ridge_depth / slope
    cell = np.maximum(np.ceil((ahead - reach) / arc.width), 0.0).astype(np.int64)
    return meets, np.where(ahead - cell * arc.width >= -0.5 * arc.ridge_width, cell, NEVER)


def straight_points(arc: Arc, rays: Rays) -> tuple[Points, Bools, Ints]:
    """Return the Gauss points of all lines from the crop plane, whether a gutter box stops them and which."""
    w, slope, height = arc.width, rays.slope, section_height(rays)
    ahead = arc.above / slope
    cells = np.floor(ahead / w)
    shift = ahead - cells * w
    breaks = [shift, np.mod(arc.tangent(height), w)]
    half, reach = 0.5 * arc.gutter_width, arc.gutter_depth / slope
    if half > 0.0:
        breaks += [half + reach, np.full_like(slope, w - half), np.mod(reach, w)]
    # a way to the side wall as long as the house: from here on all leaves through the gable end
    whole = np.mod((arc.above - arc.length / np.maximum(rays.drift, 1e-9)) / slope, w)
    breaks.append(np.where(rays.drift * arc.above > arc.length, whole, 0.0))
    if arc.ridge_width > 0.0:
        crown = 0.5 * w - arc.rise / slope
        breaks += [np.mod(crown + arc.ridge_depth / slope + 0.5 * arc.ridge_width, w)]
        breaks += [np.mod(crown - 0.5 * arc.ridge_width, w)]
    cuts = cut(breaks, w)
    size = cuts.high - cuts.low
    many = crossings(arc, cuts.mid, cuts.at(height))[0] >= 2
    short = many | (size < SHORT_PIECE * w)
    rows, places, sizes = [], [], []
    for use, (nodes, weights) in ((~short, FULL_RULE), (short, SHORT_RULE)):
        rows.append(np.repeat(cuts.row[use], len(nodes)))
        places.append((cuts.low[use, None] + size[use, None] * nodes).ravel())
        sizes.append((size[use, None] * weights).ravel())
    row, x = np.concatenate(rows), np.concatenate(places)
    weight = np.concatenate(sizes) / (w * arc.spans)
    meets, stopped = crossings(arc, x, height[row])
    cell = cells[row].astype(np.int64) + (x < shift[row])
    zero = np.zeros_like(cell)
    points = Points(
        row, x, weight, height[row], slope[row], rays.drift[row] / arc.length,
        np.zeros_like(x), np.zeros_like(x),
        np.hypot(rays.across, rays.up)[row], rays.along[row], cell, zero, zero + arc.spans, meets, stopped,
    )  # fmt: skip
    near = (x <= half + reach[row]) & (half > 0.0)
    stops = near | ((x >= w - half) & (half > 0.0))
    return points, stops, np.where(near, 0, -1)


@dataclass
class Sums:
    """Growing sums of one kind of light; `mirror` is the same light after the far gable end."""

    rows: int

    def __post_init__(self) -> None:
        """Start from nothing."""
        self.single = np.zeros((self.rows, SINGLE))
        self.mirror = np.zeros((self.rows, SINGLE))
        self.wall = np.zeros(self.rows)
        self.mirror_wall = np.zeros(self.rows)
        self.gable = np.zeros(self.rows)
        self.gable_nodes: Floats | None = None  # gable light by the incidence on the mirror, if asked for


def gutter_height(arc: Arc, points: Points, back: Ints) -> Floats:
    """Return the height above the crop plane where the gutter box `back` spans before is met."""
    left = -0.5 * arc.gutter_width - arc.width * back - points.x
    return arc.above + np.maximum(points.slope * left, -arc.gutter_depth)


def follow(arc: Arc, house: House, points: Points, sums: Sums) -> Passes:
    """Follow lines that leave through an arc to its neighbours; return those that meet any."""
    kept: list[tuple[Ints, Floats, Floats, Floats, Floats]] = []  # point, cosine, free, behind, mirrored
    now = np.flatnonzero(points.spans_with(0) > 0)
    before = points.begun[now]
    gone = np.zeros(len(now))  # share that the far gable end has mirrored so far
    opens = np.ones(len(now))
    for i in range(int(points.meets.max(initial=0)) + 1):
        part = points.some(now) if len(now) < len(points.row) else points
        count = part.spans_with(i)
        offset = arc.offset(part.x - i * arc.width, part.height)
        cosine = part.across * np.sqrt(1.0 - offset**2)
        bar = bars_open(house, cosine, part.along)
        out = part.share(arc.above + arc.leaves(offset, part.height)[1])
        inside = np.maximum(out - before, 0.0)
        gone = gone + inside
        hit = part.stopped == i
        on = (part.meets > i) & ~hit
        further = np.where(on, part.spans_with(i + 1), 0)
        stopped_next = (part.stopped == i + 1) & ~on & ~hit
        ends = np.where(hit, 0, count - further - np.where(stopped_next, part.spans_with(i + 1), 0))
        next_offset = arc.offset(part.x - (i + 1) * arc.width, part.height)
        entry = np.maximum(part.share(arc.above + arc.enters(next_offset, part.height)), out)
        free = part.weight * (ends * (1.0 - out) + further * (entry - out))
        mirrored = part.weight * ends * gone
        if i == 0:
            through = part.weight * count * inside
            sums.gable += np.bincount(part.row, weights=through, minlength=sums.rows)
            if sums.gable_nodes is not None:
                sums.gable_nodes += spread(part.row, cosine, through * bar, sums.rows)
            once, again = spread_many(part.row, cosine, (free * bar, mirrored * bar), sums.rows)
            sums.single += once
            sums.mirror += again
            first_cosine, first_bar = cosine, bar
        else:
            opens = opens * bar
            kept.append(
                (
                    now,
                    cosine,
                    free * opens * bar,
                    part.weight * count * inside * opens,
                    mirrored * opens * bar,
                )
            )
            opens = opens * bar
        go = further > 0
        if i == 0:
            opens = first_bar
            base, base_cosine = now[go], first_cosine[go]
        now, before, gone, opens = now[go], entry[go], gone[go], opens[go]
        if not len(now):
            break
    return _kept(points, kept, base, base_cosine)


def _kept(
    points: Points, kept: list[tuple[Ints, Floats, Floats, Floats, Floats]], base: Ints, cosine: Floats
) -> Passes:
    """Renumber the points that meet neighbours."""
    number = np.zeros(len(points.row), dtype=np.int64)
    number[base] = np.arange(len(base))
    free, behind = tuple(k[2] for k in kept), tuple(k[3] for k in kept)
    mirrored = tuple(k[4] for k in kept)
    cosines = (cosine, *(k[1] for k in kept))
    return Passes(points.row[base], cosines, tuple(number[k[0]] for k in kept), free, behind, mirrored)


def trace_straight(arc: Arc, house: House, rays: Rays) -> tuple[Ways, Ways, Ways]:
    """Return the straight light and its mirror images in the far side wall and in the far gable end."""
    rows = len(rays.up)
    points, stops, back = straight_points(arc, rays)
    sums = Sums(rows)
    passes = _roof_part(arc, house, points, stops, back, sums)
    _wall_part(arc, points, sums)
    wall = Sums(rows)
    low = points.cell >= 1
    part = points.some(low)
    room = np.minimum(part.cell, arc.spans)
    values = {name: getattr(part, name) for name in part.__dataclass_fields__}
    part = Points(**{**values, "first": np.full_like(room, arc.spans), "last": arc.spans + room})
    wall_passes = _roof_part(arc, house, part, stops[low], back[low], wall)
    _wall_part(arc, part, wall)
    some = part
    for span in range(min(arc.spans, int(part.cell.max(initial=0)))):
        some = some.some(some.cell > span)
        beyond = some.cell - 1 - span
        share = some.share(np.maximum(arc.above - some.slope * (some.x + beyond * arc.width), 0.0))
        if arc.gutter_width > 0.0:
            stop = some.x + beyond * arc.width <= 0.5 * arc.gutter_width + arc.gutter_depth / some.slope
            box = some.share(gutter_height(arc, some, beyond))
            share = np.where(stop, np.minimum(box, share), share)
        wall.gable -= np.bincount(some.row, weights=some.weight * share, minlength=rows)
    np.maximum(wall.gable, 0.0, out=wall.gable)
    return (
        Ways(sums.single, passes, sums.wall, sums.gable),
        Ways(wall.single, wall_passes, wall.wall, wall.gable),
        Ways(sums.mirror, passes, sums.mirror_wall, np.zeros(rows)),
    )


def _roof_part(arc: Arc, house: House, points: Points, stops: Bools, back: Ints, sums: Sums) -> Passes:
    """Add what leaves through the roof of a span of the house, or through the gable end before."""
    if stops.any():
        held = points.some(stops)
        share = held.share(gutter_height(arc, held, back[stops])) * held.weight * held.spans_with(0)
        sums.gable += np.bincount(held.row, weights=share, minlength=sums.rows)
    return follow(arc, house, points.some(~stops), sums)


def _wall_part(arc: Arc, points: Points, sums: Sums) -> None:
    """Add what leaves through the sunward side wall below the gutter."""
    points = points.some(points.cell > points.first)
    for span in range(min(2 * arc.spans, int(points.cell.max(initial=0)))):
        points = points.some(points.cell > span) if span else points
        part = points.some((points.first <= span) & (points.last > span))
        beyond = part.cell - 1 - span
        at = arc.above - part.slope * (part.x + beyond * arc.width)
        out = part.share(np.maximum(at, 0.0))
        passed, ends = 1.0 - out, part.weight
        if arc.gutter_width > 0.0:
            # a box is met before the wall, or behind it by lines that are still short of the gable end
            stop = part.x + beyond * arc.width <= 0.5 * arc.gutter_width + arc.gutter_depth / part.slope
            box = part.share(gutter_height(arc, part, beyond))
            passed = np.where(stop, np.maximum(box - out, 0.0), passed)
            out, ends = np.where(stop, np.minimum(box, out), out), np.where(stop, 0.0, ends)
        sums.gable += np.bincount(part.row, weights=part.weight * out, minlength=sums.rows)
        sums.wall += np.bincount(part.row, weights=part.weight * passed, minlength=sums.rows)
        sums.mirror_wall += np.bincount(part.row, weights=ends * out, minlength=sums.rows)
