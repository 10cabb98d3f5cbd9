"""Trace a gable house: straight beam, far side wall, far gable end, inner and outer faces of the slopes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from canopy.gablepath import (
    Bundle,
    GablePaths,
    Line,
    Outer,
    Section,
    _Sums,
    follow,
    neighbours,
    rear_height,
    ridge_box_height,
    section,
)
from canopy.house import House
from canopy.rays import Bools, Floats, Ints, Rays, cut, gather, house_rays

__all__ = ["house_rays", "trace_gable"]


def trace_gable(house: House, rays: Rays) -> GablePaths:
    """Return every term of a gable house for M directions, straight and with one mirror bounce."""
    sec = section(house, rays)
    sin_front, cos_front = _sin_cos(sec.tan_front)
    sin_rear, cos_rear = _sin_cos(sec.tan_rear)
    straight, far_wall, far_gable = _straight(sec, rays)
    every = np.arange(len(rays.up))
    return GablePaths(
        straight=straight,
        far_wall=far_wall,
        far_gable=far_gable,
        inner=_inner(sec, rays),
        outer_rear=_outer(sec, rays, every, mirrored=False),
        outer_front=_outer(sec, rays, every, mirrored=True),
        cos_front=rays.across * sin_front + rays.up * cos_front,
        cos_rear=np.abs(rays.up * cos_rear - rays.across * sin_rear),
        cos_wall=rays.across,
        cos_gable=rays.along,
    )


def _sin_cos(tan: Floats) -> tuple[Floats, Floats]:
    cos = 1.0 / np.sqrt(1.0 + tan * tan)
    return tan * cos, cos


def _breaks(sec: Section, slope: Floats, ridge: Floats, shift: Floats) -> list[Floats]:
    """Return where the sequence of sheets changes along one period of the gutter line, each (M,)."""
    w = sec.width
    breaks = [shift, np.mod(ridge, w)]
    if sec.gutter_width > 0.0:
        half, reach = 0.5 * sec.gutter_width, sec.gutter_depth / slope
        breaks += [half + reach, np.full_like(slope, w - half)]
        breaks += [np.mod(reach - half, w), np.mod(reach, w)]
    if sec.ridge_width > 0.0:
        half, reach = 0.5 * sec.ridge_width, sec.ridge_depth / slope
        breaks += [np.mod(ridge + at, w) for at in (half + reach, -half, reach - half)]
    return breaks


def _line(sec: Section, slope: Floats, drift: Floats, more: tuple[Floats, ...] = ()) -> Line:
    """Return the pieces of all lines from the crop plane; `more` are further breaks."""
    w = sec.width
    ridge = sec.ridge_at - sec.rise / slope
    ahead = sec.above / slope
    cells = np.floor(ahead / w)
    shift = ahead - cells * w
    cuts = cut([*_breaks(sec, slope, ridge, shift), *more], w)
    meets, stopped = neighbours(sec, cuts.mid, cuts.at(ridge), cuts.at(slope))
    cell = cuts.at(cells).astype(np.int64) + (cuts.mid < cuts.at(shift))
    none = np.zeros_like(cuts.mid)
    return Line(
        cuts=cuts,
        weight=(cuts.high - cuts.low) / (w * sec.spans),
        slope=cuts.at(slope),
        drift=cuts.at(drift) / sec.length,
        shift_low=none,
        shift_high=none,
        cell=cell,
        first=np.zeros_like(cell),
        last=np.full_like(cell, sec.spans),
        meets=meets,
        stopped=stopped,
    )


def _some(line: Line, use: Bools) -> Line:
    """Return some of the pieces of a line."""
    cuts = replace(
        line.cuts,
        row=line.cuts.row[use],
        low=line.cuts.low[use],
        high=line.cuts.high[use],
        mid=line.cuts.mid[use],
    )
    names = (
        "weight",
        "slope",
        "drift",
        "shift_low",
        "shift_high",
        "cell",
        "first",
        "last",
        "meets",
        "stopped",
    )
    return Line(cuts, **{name: getattr(line, name)[use] for name in names})


def _gutter_height(sec: Section, line: Line, use: Bools, back: Ints | int) -> tuple[Floats, Floats]:
    """Return the height where the gutter box `back` spans before the line's own left gutter is met."""
    left = -0.5 * sec.gutter_width - sec.width * back
    slope = line.slope[use]
    low, high = line.cuts.low[use], line.cuts.high[use]
    return (
        sec.above + np.maximum(slope * (left - low), -sec.gutter_depth),
        sec.above + np.maximum(slope * (left - high), -sec.gutter_depth),
    )


def _gutter_stops(sec: Section, line: Line) -> tuple[Bools, Ints]:
    """Return which lines a gutter box stops before they leave through the roof, and the box (spans back)."""
    if sec.gutter_width == 0.0:
        return np.zeros(len(line.cell), dtype=bool), np.zeros_like(line.cell)
    near = line.cuts.mid <= 0.5 * sec.gutter_width + sec.gutter_depth / line.slope
    ahead = line.cuts.mid >= sec.width - 0.5 * sec.gutter_width
    return near | ahead, np.where(near, 0, -1)


def _straight(sec: Section, rays: Rays) -> tuple[Bundle, Bundle, Bundle]:
    """Return the bundles of the straight beam, of the far side wall and of the far gable end."""
    rows = len(rays.up)
    line = _line(sec, rays.slope, rays.drift)
    sums, gable = _Sums(rows, sec.spans), _Sums(rows, sec.spans)
    _roof_part(sec, line, sums, gable)
    _wall_part(sec, line, sums, gable)
    gable.roof = sums.mirror_roof
    wall = _Sums(rows, sec.spans)
    if (line.cell >= 1).any():
        low = _some(line, line.cell >= 1)
        room = np.minimum(low.cell, sec.spans)
        low = replace(low, first=np.full_like(room, sec.spans), last=sec.spans + room)
        _roof_part(sec, low, wall, None)
        _wall_part(sec, low, wall, None)
        _before_the_wall(sec, low, wall)
    return sums.bundle(), wall.bundle(), gable.bundle()


def _roof_part(sec: Section, line: Line, sums: _Sums, gable: _Sums | None) -> None:
    """Add the lines that leave through the roof of a span of the house (or through the gable end before)."""
    stops, back = _gutter_stops(sec, line)
    count = line.spans_with(0)
    if stops.any():
        share = line.share(*_gutter_height(sec, line, stops, back[stops]), stops)
        sums.gable += gather(line.cuts.row[stops], line.weight[stops] * count[stops] * share, sums.rows)
    free = _some(line, ~stops)
    follow(sec, free, sums)
    use = (free.meets < 0) & (free.spans_with(0) > 0)
    if not use.any():
        return
    low, high = rear_height(sec, free, use, 0)
    row, weight = free.cuts.row[use], free.weight[use] * free.spans_with(0)[use]
    out = free.share(low, high, use)
    hit = free.stopped[use] == 0
    before = out
    if hit.any():
        stop = free.share(*ridge_box_height(sec, free, use, 0), use)
        sums.rear += gather(row, np.where(hit, weight * np.maximum(stop - out, 0.0), 0.0), sums.rows)
        before = np.where(hit, np.minimum(stop, out), out)
    sums.gable += gather(row, weight * before, sums.rows)
    sums.rear += gather(row, np.where(hit, 0.0, weight * (1.0 - out)), sums.rows)
    if gable is not None:
        gable.rear += gather(row, np.where(hit, 0.0, weight * out), sums.rows)


def _wall_part(sec: Section, line: Line, sums: _Sums, gable: _Sums | None) -> None:
    """Add the lines that leave through the sunward side wall below the gutter."""
    reach = 0.5 * sec.gutter_width + sec.gutter_depth / line.slope
    for span in range(2 * sec.spans):
        use = (line.cell > span) & (line.first <= span) & (line.last > span)
        if not use.any():
            continue
        row, weight = line.cuts.row[use], line.weight[use]
        beyond = line.cell[use] - 1 - span  # spans between the wall and the line at gutter height
        fall = line.slope[use]
        low = sec.above - fall * (line.cuts.low[use] + beyond * sec.width)
        high = sec.above - fall * (line.cuts.high[use] + beyond * sec.width)
        stop = (line.cuts.mid[use] + beyond * sec.width <= reach[use]) & (sec.gutter_width > 0.0)
        out = line.share(np.maximum(low, 0.0), np.maximum(high, 0.0), use)
        passed = 1.0 - out
        if stop.any():
            # a box is met before the wall, or behind it by lines that are still short of the gable end
            box = line.share(*_gutter_height(sec, line, use, beyond), use)
            passed = np.where(stop, np.maximum(box - out, 0.0), passed)
            out = np.where(stop, np.minimum(box, out), out)
        sums.gable += gather(row, weight * out, sums.rows)
        sums.wall += gather(row, weight * passed, sums.rows)
        if gable is not None:
            gable.wall += gather(row, np.where(stop, 0.0, weight * out), sums.rows)


def _before_the_wall(sec: Section, line: Line, wall: _Sums) -> None:
    """Take off what would leave through the gable end before it meets the far side wall."""
    for span in range(sec.spans):
        use = line.cell > span
        if not use.any():
            return
        # the far wall stands `span` + 1 spans ahead of the line's cell at its start
        beyond = line.cell[use] - 1 - span
        low = sec.above - line.slope[use] * (line.cuts.low[use] + beyond * sec.width)
        high = sec.above - line.slope[use] * (line.cuts.high[use] + beyond * sec.width)
        share = line.share(np.maximum(low, 0.0), np.maximum(high, 0.0), use)
        if sec.gutter_width > 0.0:
            reach = 0.5 * sec.gutter_width + sec.gutter_depth / line.slope[use]
            stop = line.cuts.mid[use] + beyond * sec.width <= reach
            box = line.share(*_gutter_height(sec, line, use, beyond), use)
            share = np.where(stop, np.minimum(box, share), share)
        wall.gable -= gather(line.cuts.row[use], line.weight[use] * share, wall.rows)
    np.maximum(wall.gable, 0.0, out=wall.gable)


def _turned(rays: Rays, tan: Floats, across: Floats) -> tuple[Floats, Floats]:
    """Return (across, up) of the way to a slope facing away that mirrors the sun into it."""
    sin, cos = _sin_cos(tan)
    sin2, cos2 = 2.0 * sin * cos, cos * cos - sin * sin
    return across * cos2 + rays.up * sin2, across * sin2 - rays.up * cos2


def _inner(sec: Section, rays: Rays) -> Bundle:
    """Light that came in through the front slope and is mirrored down by the inside of the rear slope."""
    rows = np.flatnonzero((rays.slope < sec.tan_rear) & (sec.rise > 1e-6))
    sums = _Sums(len(rays.up), sec.spans)
    if not len(rows):
        return sums.bundle()
    part, slope = sec.some(rows), rays.slope[rows]
    sun = Rays(rays.across[rows], rays.along[rows], rays.up[rows], rays.other_side[rows])
    across, up = _turned(sun, part.tan_rear, sun.across)
    across = np.where(np.abs(across) < 1e-9, 1e-9, across)
    first_slope = up / across  # of the way from the crop to the slope; negative: it leans back
    ridge = part.ridge_at - part.rise / slope  # < 0
    top = part.ridge_at - part.rise / first_slope  # where the way to the ridge crosses the gutter line
    back = part.above / first_slope
    w = part.width
    # pieces along the slope, t = 0 at the gutter ... 1 at the ridge; written as x = t * ridge (falling)
    edges = [np.mod(back, w) / top, w / top, *[1.0 + k * w / ridge for k in range(1, sec.spans)]]
    line = _inner_line(part, sun, edges, slope, ridge, top, across / up, up)
    _inner_follow(part, line, ridge, sums, rows)
    return sums.bundle()


def _inner_line(
    sec: Section,
    sun: Rays,
    edges: list[Floats],
    slope: Floats,
    ridge: Floats,
    top: Floats,
    lean: Floats,
    up: Floats,
) -> Line:
    """Return the pieces of the lines that go on towards the sun from the inside of the rear slope."""
    back = sec.above * lean  # from the crop plane to the gutter line, m across
    reach = sec.gutter_depth * lean
    nearest = 0.5 * sec.gutter_width + np.maximum(reach, 0.0)  # free of the gutter boxes from here ...
    farthest = sec.width - 0.5 * sec.gutter_width + np.minimum(reach, 0.0)  # ... to here
    edges = [*edges, nearest / top, farthest / top]
    solid = np.ones_like(top)
    if sec.ridge_width > 0.0:
        solid = np.maximum(1.0 - 0.5 * sec.ridge_width / sec.ridge_at, 1.0 - sec.ridge_depth / sec.rise)
        half, reach = 0.5 * sec.ridge_width, sec.ridge_depth / slope
        boxes = [k * sec.width + at for k in range(3) for at in (half + reach, -half, reach - half)]
        edges = [*edges, *[1.0 + at / ridge for at in boxes], solid]
    cuts = cut(edges, 1.0)
    t, low_t, high_t = cuts.mid, cuts.low, cuts.high
    meets, stopped = neighbours(sec, t * cuts.at(ridge), cuts.at(ridge), cuts.at(slope))
    entry = t * cuts.at(top)
    landing = entry - cuts.at(back)
    # spans from whose light none lands inside: at the far wall, at the near wall
    lost = np.maximum(np.ceil(-landing / sec.width - 1e-12), 0.0).astype(np.int64)
    skip = np.maximum(np.floor(landing / sec.width), 0.0).astype(np.int64)
    blocked = (t > cuts.at(solid)) | (entry < cuts.at(nearest)) | (entry > cuts.at(farthest))
    room = np.clip(sec.spans - lost - skip, 0, sec.spans)
    drift = cuts.at(sun.drift) / sec.length
    way = cuts.at(sun.along / up) / sec.length  # share per metre of height on the way to the slope

    def shift(t: Floats) -> Floats:
        height = sec.above + t * sec.rise
        return height * (way - drift)

    x = cuts.at(ridge)
    moved = replace(cuts, low=low_t * x, high=high_t * x, mid=t * x)
    zero = np.zeros_like(room)
    size = cuts.at(up / sun.up) * np.abs(cuts.at(top)) / (sec.width * sec.spans)
    return Line(
        moved,
        np.where(blocked, 0.0, size * (high_t - low_t)),
        cuts.at(slope),
        drift,
        shift(low_t),
        shift(high_t),
        zero,
        skip,
        skip + room,
        meets,
        stopped,
    )


def _inner_follow(sec: Section, line: Line, ridge: Floats, sums: _Sums, rows: Ints) -> None:
    """Follow the mirrored lines; before they reach the slope no light comes in through the gable end."""
    local = _Sums(len(rows), sec.spans)
    line = _some(line, (line.weight > 0.0) & (line.last > line.first))
    follow(sec, line, local)
    x0 = line.cuts.at(ridge)
    every = np.ones(len(line.cell), dtype=bool)
    early = line.share(
        sec.above + sec.rise * line.cuts.low / x0, sec.above + sec.rise * line.cuts.high / x0, every
    )
    local.gable -= gather(line.cuts.row, line.weight * line.spans_with(0) * early, local.rows)
    np.maximum(local.gable, 0.0, out=local.gable)
    for name in ("roof", "behind"):
        getattr(sums, name)[:, rows] = getattr(local, name)
    sums.gable[rows] = local.gable


def _outer(sec: Section, rays: Rays, every: Ints, *, mirrored: bool) -> Outer:
    """Light that the outer face of a slope throws across the valley, in through the slope opposite."""
    across = -rays.across if mirrored else rays.across
    tan = sec.tan_front if mirrored else sec.tan_rear
    lit = across * _sin_cos(tan)[0] < rays.up * _sin_cos(tan)[1]
    to_x, to_up = _turned(rays, tan, across)
    rows = every[lit & (to_up > 1e-6) & (to_x > 1e-9) & (sec.rise > 1e-6)]
    if not len(rows):
        return Outer(rows, np.zeros((0, 0)), np.zeros(0))
    part = sec.some(rows, swap=mirrored)
    way = Rays(to_x[rows], rays.along[rows], to_up[rows], rays.other_side[rows])
    sin, cos = _sin_cos(part.tan_front)
    # from here on up the slope the ridge box hides the sun
    left = part.ridge_at - 0.5 * part.ridge_width
    high = rays.slope[rows]
    hidden = left if mirrored else (high * left - part.rise) / (high - part.tan_rear)
    hidden = np.where(part.ridge_width > 0.0, hidden, np.inf)
    turn = np.where(part.ridge_width > 0.0, hidden, 0.0) * (part.tan_rear / way.slope - 1.0)
    line = _line(part, way.slope, way.drift, (np.mod(-turn, part.width),))
    stops, _ = _gutter_stops(part, line)
    line = _some(line, ~stops)
    weight = np.zeros((max(part.spans - 1, 0), len(rows)))
    for i in range(1, part.spans):
        use = (line.meets >= i) & (line.stopped >= i) & (line.spans_with(i) > 0)
        if not use.any():
            break
        low, high_end = rear_height(part, line, use, i)
        open_share = 1.0 - line.share(low, high_end, use)
        up_slope = (0.5 * (low + high_end) - part.above) / line.cuts.at(part.tan_rear)[use]
        shadow = up_slope >= line.cuts.at(hidden)[use]
        value = np.where(shadow, 0.0, line.weight[use] * line.spans_with(i)[use] * open_share)
        weight[i - 1] = gather(line.cuts.row[use], value, len(rows))
    weight *= way.up / rays.up[rows]  # the mirrored light falls at another height than the sun's
    return Outer(rows, weight, way.across * sin + way.up * cos)
