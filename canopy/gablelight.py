"""Give a gable house its covering: terms of `gablepath` times what the sheets pass."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.gablepath import Bundle, GablePaths, Outer, section
from canopy.gabletrace import trace_gable
from canopy.house import House
from canopy.passing import Passed, Sheets
from canopy.rays import Floats, Rays
from canopy.sheettable import Place, SheetTable, place
from canopy.structure import bars_open


@dataclass(frozen=True)
class _Terms:
    """One bundle without its empty parts: (k, directions, roof weights, end-behind weights)."""

    powers: tuple[tuple[NDArray[np.int64] | None, Floats, Floats | None], ...]
    wall: Floats | None
    rear: Floats | None
    gable: Floats | None


@dataclass(frozen=True)
class _Entry:
    """Outer bounce ready for lookups."""

    rows: NDArray[np.int64]
    weight: Floats
    entry: Place
    open: Floats


@dataclass(frozen=True)
class GableLight:
    """Geometry of a gable house for M directions, ready to be given coverings."""

    front: Place
    rear: Place
    wall: Place
    gable: Place
    open_front: Floats
    open_rear: Floats
    open_wall: Floats
    open_gable: Floats
    straight: _Terms
    far_wall: _Terms
    far_gable: _Terms
    inner: _Terms
    outer_rear: _Entry
    outer_front: _Entry
    lit_front: Floats  # (3, M) sunlight on front slopes per floor, behind 0, 1, 2 pairs of neighbours' slopes
    lit_rear: Floats  # (M,) on rear slopes from outside
    lit_wall: Floats
    lit_gable: Floats
    sunny: Floats  # (M,) what a perfectly clear sheet would pass straight, bars and boxes taken off
    down: Floats  # (M,) of light going up this way from the crop: share that a slope mirrors down

    def give(self, sheets: Sheets) -> Passed:
        """Return what one covering state passes and absorbs."""
        read = SheetTable.read
        front = read(sheets.roof.total, self.front) * self.open_front
        rear = read(sheets.roof.total, self.rear) * self.open_rear
        wall = read(sheets.wall.total, self.wall) * self.open_wall
        gable = read(sheets.gable.total, self.gable) * self.open_gable
        pair = front * rear
        straight = _sum(self.straight, front, rear, wall, gable, pair)
        beam = straight
        if sheets.hazy:
            clear = read(sheets.roof.beam, self.front) * self.open_front
            clear_rear = read(sheets.roof.beam, self.rear) * self.open_rear
            clear_wall = read(sheets.wall.beam, self.wall) * self.open_wall
            clear_gable = read(sheets.gable.beam, self.gable) * self.open_gable
            beam = _sum(self.straight, clear, clear_rear, clear_wall, clear_gable, clear * clear_rear)
        on_wall = _sum(self.far_wall, front, rear, wall, gable, pair)
        on_gable = _sum(self.far_gable, front, rear, wall, gable, pair)
        on_rear = _sum(self.inner, front, rear, wall, gable, pair)
        bounce = on_wall * read(sheets.wall.reflect, self.wall)
        bounce += on_gable * read(sheets.gable.reflect, self.gable)
        bounce += on_rear * read(sheets.roof.reflect, self.rear)
        for entry, again, mirror in (
            (self.outer_rear, rear, self.rear),
            (self.outer_front, front, self.front),
        ):
            _throw(bounce, entry, again, mirror, sheets.roof)
        absorbed = self._absorbed(sheets, pair, on_wall, on_gable, on_rear)
        return Passed(beam, straight, bounce, absorbed)

    def _absorbed(
        self, sheets: Sheets, pair: Floats, on_wall: Floats, on_gable: Floats, on_rear: Floats
    ) -> Floats:
        """Return what each layer keeps of the sun: lit faces from outside, far faces from inside."""
        read = SheetTable.read
        layers = len(sheets.roof.absorbed) // len(pair)

        def kept(table: Floats, where: Place, light: Floats) -> Floats:
            share = read(table, where).reshape(layers, len(pair), -1)
            return share * light

        on_front = self.lit_front[0] + pair * (self.lit_front[1] + pair * self.lit_front[2])
        total = kept(sheets.roof.absorbed, self.front, on_front)
        total += kept(sheets.roof.absorbed, self.rear, on_rear + self.lit_rear)
        total += kept(sheets.wall.absorbed, self.wall, on_wall + self.lit_wall)
        total += kept(sheets.gable.absorbed, self.gable, on_gable + self.lit_gable)
        return total


def _sum(terms: _Terms, front: Floats, rear: Floats, wall: Floats, gable: Floats, pair: Floats) -> Floats:
    """Return the sum of a bundle's terms, (B, M)."""
    total = np.zeros_like(front)
    for k, (rows, roof, behind) in enumerate(terms.powers):
        if rows is None:
            base = front
        else:
            base, crossed = front[:, rows], pair[:, rows]
            for _ in range(k):
                base *= crossed
        term = base * roof
        if behind is not None:
            term += base * behind * (rear * gable if rows is None else rear[:, rows] * gable[:, rows])
        if rows is None:
            total += term
        else:
            total[:, rows] += term
    for weight, sheet in ((terms.wall, wall), (terms.rear, rear), (terms.gable, gable)):
        if weight is not None:
            total += sheet * weight
    return total


def _throw(bounce: Floats, entry: _Entry, again: Floats, mirror: Place, roof: SheetTable) -> None:
    """Add light thrown across the valley by outer faces."""
    if not len(entry.rows):
        return
    way_in = SheetTable.read(roof.total, entry.entry) * entry.open
    pair = way_in * again[:, entry.rows]
    series = np.zeros_like(way_in)
    for weight in entry.weight[::-1]:
        series = series * pair + weight
    bounce[:, entry.rows] += SheetTable.read(roof.specular, mirror.some(entry.rows)) * way_in * series


def _terms(bundle: Bundle) -> _Terms:
    """Drop the empty parts of a bundle."""
    powers: list[tuple[NDArray[np.int64] | None, Floats, Floats | None]] = []
    for k, (roof, behind) in enumerate(zip(bundle.roof, bundle.end_behind, strict=True)):
        if k == 0:
            if roof.any() or behind.any():
                powers.append((None, roof, behind if behind.any() else None))
            else:
                powers.append((np.zeros(0, dtype=np.int64), np.zeros(0), None))
            continue
        rows = np.flatnonzero((roof > 0.0) | (behind > 0.0))
        powers.append((rows, roof[rows], behind[rows] if behind.any() else None))
    while powers and powers[-1][0] is not None and not len(powers[-1][0]):
        powers.pop()
    upright = [w if w.any() else None for w in (bundle.wall, bundle.rear, bundle.gable)]
    return _Terms(tuple(powers), *upright)


def gable_light(house: House, rays: Rays) -> GableLight:
    """Trace a gable house for M directions and make it ready for coverings."""
    paths = trace_gable(house, rays)
    open_front = bars_open(house, paths.cos_front, rays.along)
    open_rear = bars_open(house, paths.cos_rear, rays.along)
    open_wall = bars_open(house, rays.across, rays.along)
    open_gable = bars_open(house, rays.along, rays.across)
    opens = (open_front, open_rear, open_wall, open_gable)

    def entry(outer: Outer) -> _Entry:
        is_open = bars_open(house, outer.cos_entry, rays.along[outer.rows])
        return _Entry(outer.rows, outer.weight, place(outer.cos_entry), is_open)

    straight = _terms(paths.straight)
    front, rear, wall, gable = (o[None, :] for o in opens)
    sunny = _sum(straight, front, rear, wall, gable, front * rear)[0]
    lit_front, lit_rear = _lit_slopes(house, rays, paths)
    return GableLight(
        place(paths.cos_front),
        place(paths.cos_rear),
        place(paths.cos_wall),
        place(paths.cos_gable),
        open_front,
        open_rear,
        open_wall,
        open_gable,
        straight,
        _terms(paths.far_wall),
        _terms(paths.far_gable),
        _terms(paths.inner),
        entry(paths.outer_rear),
        entry(paths.outer_front),
        lit_front,
        lit_rear,
        rays.across / rays.up * house.gutter_height / house.width,
        rays.along / rays.up * 0.5 * house.gable_area / house.floor_area,
        sunny,
        _mirrored_down(house, rays, paths),
    )


def _mirrored_down(house: House, rays: Rays, paths: GablePaths) -> Floats:
    """Return the share of light going up along each direction that a slope would mirror downwards."""
    first = paths.straight
    on_front = first.roof.sum(axis=0) + first.end_behind.sum(axis=0)
    sec = section(house, rays)
    lean_front = 1.0 / np.sqrt(1.0 + sec.tan_front**2)
    lean_rear = 1.0 / np.sqrt(1.0 + sec.tan_rear**2)
    front = on_front * (2.0 * paths.cos_front * lean_front > rays.up)
    rear = first.rear * (2.0 * paths.cos_rear * lean_rear > rays.up)
    return np.asarray(front + rear)


def _lit_slopes(house: House, rays: Rays, paths: GablePaths) -> tuple[Floats, Floats]:
    """Return sunlight on the outer faces of front (3, M) and rear (M,) slopes per unit on the floor."""
    sec = section(house, rays)
    w, n = sec.width, sec.spans
    run = w - sec.ridge_at
    front = paths.cos_front / rays.up * np.hypot(run, run * sec.tan_front) / w
    # share of a front slope that has at least i neighbours' ridges above its line to the sun (plane geometry)
    deep = [
        np.clip(1.0 - rays.slope * i * w / np.maximum(sec.rise + rays.slope * run, 1e-12), 0.0, 1.0)
        * (max(n - i, 0) / n)
        for i in (1, 2)
    ]
    shares = np.stack([1.0 - deep[0], deep[0] - deep[1], deep[1]])
    outside = rays.slope > sec.tan_rear
    rear = paths.cos_rear / rays.up * np.hypot(sec.ridge_at, sec.rise) / w
    return shares * front, np.where(outside, rear, 0.0)
