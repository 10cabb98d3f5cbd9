"""The exact way of a beam through gable roofs, straight and with one mirror bounce.

Method: project the vertices of the cross-section on the gutter line along the sun. In an endless row of equal
spans a line that leaves the crop plane crosses, in this order: the slope that faces the sun (`front`), then
for each neighbour that it still meets the slope that faces away (`rear`) and the front again. The number of
neighbours depends on one coordinate only, so an hour needs a handful of terms: weight x sheets crossed. Side
walls end the row of spans, gable ends end the house along the ridge; the share of the floor from which light
comes in through them is a closed form of the path's length. Gutters and ridges are opaque boxes with depth.
Mirror bounces: upright faces by unfolding the house, slopes by the mirrored sun (inner face of the rear slope
when the sun is lower than the slope, outer faces across the valley when it is lower than twice the slope).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.house import House
from canopy.rays import Bools, Cuts, Floats, Ints, Rays, capped_mean, gather


@dataclass(frozen=True)
class Bundle:
    """Weights per unit of crop plane of the sheets crossed, K neighbours at most; M directions."""

    roof: Floats  # (K+1, M) front x (rear x front)^k
    end_behind: Floats  # (K+1, M) front x (rear x front)^k x rear x gable end
    wall: Floats  # (M,) sunward side wall alone
    rear: Floats  # (M,) rear slope alone (high sun)
    gable: Floats  # (M,) gable end alone


@dataclass(frozen=True)
class Outer:
    """Light that an outer face throws across the valley: reflected x entry x (crossed pair)^i."""

    rows: Ints  # (Q,) directions in which it happens
    weight: Floats  # (K, Q)
    cos_entry: Floats  # (Q,) at the sheet through which it comes in


@dataclass(frozen=True)
class GablePaths:
    """All terms of a gable house for M directions, cosines of incidence included."""

    straight: Bundle
    far_wall: Bundle  # times the wall's reflectance
    far_gable: Bundle  # times the gable end's reflectance
    inner: Bundle  # times the rear slope's reflectance
    outer_rear: Outer  # times the rear slope's reflectance
    outer_front: Outer  # times the front slope's reflectance
    cos_front: Floats
    cos_rear: Floats
    cos_wall: Floats
    cos_gable: Floats


@dataclass(frozen=True)
class Section:
    """The section of one span, seen with the sun on the right: (M,) arrays where the side matters."""

    width: float
    spans: int
    length: float
    above: float  # crop plane to gutter line
    rise: float
    tan_rear: Floats
    tan_front: Floats
    ridge_at: Floats  # from the left gutter line
    gutter_width: float
    gutter_depth: float
    ridge_width: float
    ridge_depth: float

    def mirrored(self, rows: NDArray[np.int64]) -> Section:
        """Return the section seen from the other side, for some of the directions."""
        return self.some(rows, swap=True)

    def some(self, rows: NDArray[np.int64], *, swap: bool = False) -> Section:
        """Return the section for some of the directions."""
        rear, front, at = self.tan_rear[rows], self.tan_front[rows], self.ridge_at[rows]
        if swap:
            rear, front, at = front, rear, self.width - at
        return Section(
            self.width,
            self.spans,
            self.length,
            self.above,
            self.rise,
            rear,
            front,
            at,
            self.gutter_width,
            self.gutter_depth,
            self.ridge_width,
            self.ridge_depth,
        )


def section(house: House, rays: Rays) -> Section:
    """Return the section of a gable house for every direction."""
    tan = np.tan(np.radians(np.maximum([house.pitch, house.pitch_other], 1e-10)))
    side = rays.other_side.astype(int)
    front: Floats = tan[side]
    rear: Floats = tan[1 - side]
    rise = float(house.span_width * tan[0] * tan[1] / (tan[0] + tan[1]))
    gutter = house.gutter_depth > 0.0
    ridge = house.ridge_depth > 0.0
    return Section(
        house.span_width,
        house.spans,
        house.length,
        house.gutter_height - house.crop_plane_height,
        rise,
        rear,
        front,
        rise / rear,
        house.gutter_width if gutter else 0.0,
        house.gutter_depth if house.gutter_width else 0.0,
        house.ridge_width if ridge else 0.0,
        house.ridge_depth if house.ridge_width else 0.0,
    )


@dataclass(frozen=True)
class Line:
    """Pieces of lines towards the sun, described where they cross (or would cross) the gutter line.

    A line is at `x` (from the left gutter of its cell) on the gutter line; `cell` is how many spans it has
    gone below the gutters before; its house has room for it from `first` to `last` spans before the sunward
    wall. Share of the floor's length at height h above the crop plane: drift * h + shift.
    """

    cuts: Cuts
    weight: Floats  # per unit of crop plane
    slope: Floats
    drift: Floats  # per metre of height, of the house's length
    shift_low: Floats
    shift_high: Floats
    cell: Ints
    first: Ints
    last: Ints
    meets: Ints  # neighbours whose rear slope it crosses; -1: leaves through the rear slope
    stopped: Ints  # cell in which a ridge box stops it; a large number if none

    def share(self, low: Floats, high: Floats, use: Bools) -> Floats:
        """Return the mean share of the floor from which height low..high lies beyond the gable end."""
        drift = self.drift[use]
        return capped_mean(drift * low + self.shift_low[use], drift * high + self.shift_high[use])

    def spans_with(self, cells: int) -> Ints:
        """Return how many spans have room for that many cells beyond `cell`."""
        return np.clip(self.last - np.maximum(self.first, self.cell + cells), 0, self.last - self.first)


NEVER = 1_000_000


def front_height(sec: Section, line: Line, use: Bools, i: int) -> tuple[Floats, Floats]:
    """Return the height where the front slope of neighbour i is crossed, at both ends of each piece."""
    tan = line.cuts.at(sec.tan_front)[use]
    slope = line.slope[use]
    factor = slope * tan / (slope + tan)
    reach = sec.width * (i + 1)
    low, high = line.cuts.low[use], line.cuts.high[use]
    return sec.above + factor * (reach - low), sec.above + factor * (reach - high)


def rear_height(sec: Section, line: Line, use: Bools, i: int) -> tuple[Floats, Floats]:
    """Return the height where the rear slope of neighbour i is crossed, at both ends of each piece."""
    tan = line.cuts.at(sec.tan_rear)[use]
    slope = line.slope[use]
    gap = tan - slope
    factor = slope * tan / np.where(np.abs(gap) < 1e-12, 1e-12, gap)
    at = sec.width * i
    low, high = line.cuts.low[use], line.cuts.high[use]
    return sec.above + factor * (at - low), sec.above + factor * (at - high)


def ridge_box_height(sec: Section, line: Line, use: Bools, i: int) -> tuple[Floats, Floats]:
    """Return the height where the ridge box of neighbour i is met, at both ends of each piece."""
    left = line.cuts.at(sec.ridge_at)[use] - 0.5 * sec.ridge_width + sec.width * i
    bottom = sec.rise - sec.ridge_depth
    slope = line.slope[use]
    low, high = line.cuts.low[use], line.cuts.high[use]
    return (
        sec.above + np.maximum(slope * (left - low), bottom),
        sec.above + np.maximum(slope * (left - high), bottom),
    )


def neighbours(sec: Section, x: Floats, ridge: Floats, slope: Floats) -> tuple[Ints, Ints]:
    """Return how many neighbours a line meets and the cell whose ridge box stops it.

    `ridge` is the projection of the ridge on the gutter line; x - ridge in whole widths counts neighbours.
    """
    w = sec.width
    meets = np.floor((x - ridge) / w).astype(np.int64)
    if sec.ridge_width == 0.0:
        return meets, np.full_like(meets, NEVER)
    left_over = x - ridge - meets * w
    behind = 0.5 * sec.ridge_width + sec.ridge_depth / slope
    back = np.floor((behind - left_over) / w).astype(np.int64)
    stopped = np.where(left_over <= behind, np.maximum(meets - back, np.minimum(meets, 0)), NEVER)
    stopped = np.where((stopped == NEVER) & (left_over >= w - 0.5 * sec.ridge_width), meets + 1, stopped)
    return meets, np.where(stopped < 0, NEVER, stopped)


@dataclass
class _Sums:
    """Growing sums of one bundle."""

    rows: int
    depth: int

    def __post_init__(self) -> None:
        """Start from nothing."""
        self.roof = np.zeros((self.depth, self.rows))
        self.behind = np.zeros((self.depth, self.rows))
        self.wall = np.zeros(self.rows)
        self.rear = np.zeros(self.rows)
        self.gable = np.zeros(self.rows)
        self.mirror_roof = np.zeros((self.depth, self.rows))  # the same light after the far gable end

    def bundle(self) -> Bundle:
        """Return what has been summed."""
        return Bundle(self.roof, self.behind, self.wall, self.rear, self.gable)


def follow(sec: Section, line: Line, sums: _Sums) -> None:
    """Follow lines that leave through a front slope from neighbour to neighbour and add their terms."""
    use = line.meets >= 0
    before = np.zeros(int(use.sum()))
    mirrored = np.zeros_like(before)
    for i in range(sums.depth):
        count = line.spans_with(i)
        more = use & (line.meets >= i) & (line.stopped >= i) & (count > 0)
        before, mirrored = before[more[use]], mirrored[more[use]]
        use = more
        if not use.any():
            return
        row, weight = line.cuts.row[use], line.weight[use]
        low, high = front_height(sec, line, use, i)
        hit = line.stopped[use] == i
        if hit.any():
            box_low, box_high = ridge_box_height(sec, line, use, i)
            low = np.where(hit, np.minimum(low, box_low), low)
            high = np.where(hit, np.minimum(high, box_high), high)
        out = line.share(low, high, use)
        inside = np.maximum(out - before, 0.0)
        target = sums.gable if i == 0 else sums.behind[i - 1]
        target += gather(row, weight * count[use] * inside, sums.rows)
        mirrored = mirrored + inside
        goes_on = (line.meets[use] > i) | ((line.stopped[use] == i + 1) & (line.meets[use] == i))
        next_count = np.where(goes_on, line.spans_with(i + 1)[use], 0)
        behind_low, behind_high = rear_height(sec, line, use, i + 1)
        boxed = (line.meets[use] == i) & goes_on
        if boxed.any():
            box_low, box_high = ridge_box_height(sec, line, use, i + 1)
            behind_low = np.where(boxed, box_low, behind_low)
            behind_high = np.where(boxed, box_high, behind_high)
        before = np.where(
            goes_on,
            line.share(np.where(goes_on, behind_low, 0.0), np.where(goes_on, behind_high, 0.0), use),
            out,
        )
        before = np.maximum(before, out)
        free = np.where(hit, 0.0, (count[use] - next_count) * (1.0 - out) + next_count * (before - out))
        sums.roof[i] += gather(row, weight * free, sums.rows)
        ends = np.where(hit, 0.0, count[use] - next_count)
        sums.mirror_roof[i] += gather(row, weight * ends * mirrored, sums.rows)
        use = use.copy()
        use[use] = ~hit
        before, mirrored = before[~hit], mirrored[~hit]
