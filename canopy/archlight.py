"""Give an arched house its covering: weights of `archtrace` and `archbounce` times what the sheet passes."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from canopy.archbasis import SINGLE, Pairs, RowSums, at_nodes, pairs, row_sums, spread
from canopy.archbounce import InnerWays, inner
from canopy.archthrow import Beyond, ThrownWays, outer, outer_front, through
from canopy.archtrace import Arc, Passes, Ways, arc_of, section_height, trace_straight
from canopy.house import House
from canopy.passing import Passed, Sheets
from canopy.rays import Floats, Ints, Rays
from canopy.sheettable import STEPS, Place, SheetTable, place
from canopy.structure import bars_open


@dataclass(frozen=True)
class _Step:
    """One more neighbour: the first `count` points of the chain reach it."""

    count: int
    where: Place
    free: RowSums
    behind: RowSums
    mirrored: RowSums


@dataclass(frozen=True)
class _Chain:
    """Lines that meet neighbours: those that meet one as products, the others point by point."""

    one: Pairs  # own arc x (neighbour)^2
    one_behind: Pairs  # own arc x neighbour x gable end
    one_mirrored: Pairs  # as `one`, of the same lines after the far gable end
    own: Place
    near: Place
    steps: tuple[_Step, ...]

    def give(
        self, out: Floats, first: Floats, table: Floats, gable: Floats, mirrored: Floats | None = None
    ) -> None:
        """Add the chain's light to out (B, M); `first` is a table for the own arc, `table` for neighbours.

        The light of the same lines after the far gable end is added to `mirrored`.
        """
        self.one.add(out, first, table * table)
        self.one_behind.add(out, first, table, gable)
        if mirrored is not None:
            self.one_mirrored.add(mirrored, first, table * table)
        if not self.steps:
            return
        read = SheetTable.read
        light = read(first, self.own) * read(table, self.near) ** 2
        for step in self.steps:
            once = read(table, step.where)
            light = light[:, : step.count] * once
            step.behind.add(out, light, gable)
            light *= once
            step.free.add(out, light)
            if mirrored is not None:
                step.mirrored.add(mirrored, light)


def _chain(passes: Passes, *, mirrored: bool = False) -> _Chain:
    """Make lines that meet neighbours ready for lookups, those that meet most of them first."""
    if not passes.point:
        nobody, none = np.zeros(0, dtype=np.int64), np.zeros(0)
        empty = pairs(nobody, none, none, none)
        return _Chain(empty, empty, empty, place(none), place(none), ())
    first = passes.point[0]
    row, own, near = passes.row[first], passes.cosine[0][first], passes.cosine[1]
    after = passes.mirrored if mirrored else tuple(np.zeros_like(f) for f in passes.free)
    depth = np.zeros(len(passes.row), dtype=np.int64)
    for point in passes.point:
        depth[point] += 1
    order = np.argsort(-depth, kind="stable")[: int((depth >= 2).sum())]
    number = np.zeros(len(passes.row), dtype=np.int64)
    number[order] = np.arange(len(order))
    at_first = np.zeros(len(passes.row), dtype=np.int64)
    at_first[first] = np.arange(len(first))
    steps = []
    for i, point in enumerate(passes.point[1:], start=1):
        turn = np.argsort(number[point])
        sums = [row_sums(passes.row[point[turn]], v[i][turn]) for v in (passes.free, passes.behind, after)]
        steps.append(_Step(len(point), place(passes.cosine[i + 1][turn]), *sums))
    return _Chain(
        pairs(row, own, near, passes.free[0]),
        pairs(row, own, near, passes.behind[0]),
        pairs(row, own, near, after[0]),
        place(passes.cosine[0][order]),
        place(near[at_first[order]]),
        tuple(steps),
    )


@dataclass(frozen=True)
class _Kind:
    """One kind of light: straight, or a mirror image in an upright face."""

    single: Floats
    chain: _Chain
    wall: Floats
    gable: Floats

    def give(
        self, roof: Floats, wall: Floats, gable: Floats, after: _Kind | None = None
    ) -> tuple[Floats, Floats]:
        """Return the light (B, M) for a roof table on the even grid and read values of the upright faces.

        The second array is the light of `after`, the same lines after the far gable end.
        """
        nodes = at_nodes(roof, SINGLE)
        out = np.asarray(nodes @ self.single.T)
        out += wall * self.wall + gable * self.gable
        if after is None:
            self.chain.give(out, roof, roof, gable)
            return out, out
        mirrored = np.asarray(nodes @ after.single.T)
        mirrored += wall * after.wall
        self.chain.give(out, roof, roof, gable, mirrored)
        return out, mirrored


def _kind(ways: Ways, *, mirrored: bool = False) -> _Kind:
    """Make a kind of light ready for coverings."""
    return _Kind(ways.single, _chain(ways.passes, mirrored=mirrored), ways.wall, ways.gable)


@dataclass(frozen=True)
class _Thrown:
    """Light mirrored into a span behind: most as products, what crosses further neighbours point by point."""

    plain: Pairs
    gable: Pairs
    sums: RowSums
    mirror: Place
    entry: Place
    between: tuple[tuple[int, Place], ...]  # how many points, counted from the first, cross one more
    beyond: tuple[tuple[Beyond, Place], ...]
    row: Ints

    def give(
        self, out: Floats, first: Floats, table: Floats, end: Floats, behind: Floats | None = None
    ) -> None:
        """Add the light to out (B, M); `first` is a table for what happens at the mirror.

        `end` (B, M) is what the gable end passes, `behind` as `first` for light that came in through it.
        """
        self.plain.add(out, first, table)
        if behind is not None:
            self.gable.add(out, behind, table, end)
        if not self.between and not self.beyond:
            return
        read = SheetTable.read
        light = read(first, self.mirror) * read(table, self.entry)
        for count, where in self.between:
            light[:, :count] *= read(table, where) ** 2
        if self.beyond:
            rest = np.ones_like(light)
            for near, where in self.beyond[::-1]:
                at, once = near.points, read(table, where)
                beside = near.behind * end[:, self.row[at]]
                rest[:, at] = near.clear + once * (beside + near.deep * once * rest[:, at])
            light *= rest
        self.sums.add(out, light)


def _thrown(ways: ThrownWays) -> _Thrown:
    """Make thrown light ready for lookups, points that cross most neighbours first."""
    depth = np.zeros(len(ways.row), dtype=np.int64)
    crossing = np.zeros(len(ways.row), dtype=bool)
    for points, _ in ways.between:
        depth[points] += 1
    for points in (*(found[0] for found in ways.between), *(found.points for found in ways.beyond)):
        crossing[points] = True
    order = np.argsort(-depth, kind="stable")
    order = order[crossing[order]]
    number = np.zeros(len(ways.row), dtype=np.int64)
    number[order] = np.arange(len(order))
    between = []
    for points, cosine in ways.between:
        between.append((len(points), place(cosine[np.argsort(number[points])])))
    return _Thrown(
        pairs(ways.row, ways.mirror, ways.entry, np.where(crossing, 0.0, ways.weight)),
        pairs(ways.row, ways.mirror, ways.entry, ways.gable),
        row_sums(ways.row[order], ways.weight[order]),
        place(ways.mirror[order]),
        place(ways.entry[order]),
        tuple(between),
        tuple((replace(near, points=number[near.points]), place(near.cosine)) for near in ways.beyond),
        ways.row[order],
    )


@dataclass(frozen=True)
class ArchLight:
    """Geometry of an arched house for M directions, ready to be given coverings."""

    wall: Place
    gable: Place
    open_wall: Floats
    open_gable: Floats
    straight: _Kind
    far_wall: _Kind
    far_gable: _Kind
    inner_rows: Ints
    inner: InnerWays
    inner_chain: _Chain
    outer: _Thrown  # mirrored by the outside facing away
    outer_front: _Thrown  # mirrored by the outside facing the sun
    through: _Thrown  # mirrored by the inside, out again through the same arc
    lit: Floats  # (M, nodes) sunlight on the arc from outside
    shaded: Floats  # (M,) share of it that comes through a neighbour
    lit_wall: Floats
    lit_gable: Floats
    sunny: Floats
    down: Floats

    def give(self, sheets: Sheets) -> Passed:
        """Return what one covering state passes and absorbs."""
        read = SheetTable.read
        wall = read(sheets.wall.total, self.wall) * self.open_wall
        gable = read(sheets.gable.total, self.gable) * self.open_gable
        if sheets.hazy:  # all light and unscattered light in one go
            bands = len(wall)
            light, mirrored = self.straight.give(
                np.vstack([sheets.roof.total, sheets.roof.beam]),
                np.vstack([wall, read(sheets.wall.beam, self.wall) * self.open_wall]),
                np.vstack([gable, read(sheets.gable.beam, self.gable) * self.open_gable]),
                self.far_gable,
            )
            straight, beam, on_gable = light[:bands], light[bands:], mirrored[:bands]
        else:
            straight, on_gable = self.straight.give(sheets.roof.total, wall, gable, self.far_gable)
            beam = straight
        on_wall, _ = self.far_wall.give(sheets.roof.total, wall, gable)
        bounce = on_wall * read(sheets.wall.reflect, self.wall)
        bounce += on_gable * read(sheets.gable.reflect, self.gable)
        self._roof_bounce(bounce, sheets, gable)
        return Passed(beam, straight, bounce, self._absorbed(sheets, on_wall, on_gable))

    def _roof_bounce(self, bounce: Floats, sheets: Sheets, gable: Floats) -> None:
        """Add what the arcs mirror down, inside and across the valley."""
        roof = sheets.roof
        both = roof.reflect * roof.total
        rows = self.inner_rows
        if len(rows):
            bounce[:, rows] += at_nodes(both, SINGLE) @ self.inner.nodes.T
            bounce[:, rows] += (at_nodes(roof.reflect, SINGLE) @ self.inner.gable.T) * gable[:, rows]
            self.inner_chain.give(bounce, both, roof.total, gable)
        self.outer.give(bounce, roof.specular, roof.total, gable)
        self.outer_front.give(bounce, roof.specular, roof.total, gable)
        self.through.give(bounce, both * roof.total, roof.total, gable, both)

    def _absorbed(self, sheets: Sheets, on_wall: Floats, on_gable: Floats) -> Floats:
        """Return what each layer keeps; a neighbour's arc weakens light as at its mean incidence."""
        roof, read = sheets.roof, SheetTable.read
        bands = len(roof.total)
        layers = len(roof.absorbed) // bands
        outside = (at_nodes(roof.absorbed, SINGLE) @ self.lit.T).reshape(layers, bands, -1)
        total_light = np.maximum(self.lit.sum(axis=1), 1e-12)
        mean = (at_nodes(roof.total, SINGLE) @ self.lit.T) / total_light
        kept = outside * (1.0 - self.shaded + self.shaded * mean**2)
        through = np.tile(roof.total, (layers, 1)) * roof.absorbed
        rows = self.inner_rows
        if len(rows):
            kept[:, :, rows] += (at_nodes(through, SINGLE) @ self.inner.back.T).reshape(layers, bands, -1)
        on_wall, on_gable = on_wall + self.lit_wall, on_gable + self.lit_gable
        kept += read(sheets.wall.absorbed, self.wall).reshape(layers, bands, -1) * on_wall
        kept += read(sheets.gable.absorbed, self.gable).reshape(layers, bands, -1) * on_gable
        return np.asarray(kept)


def arch_light(house: House, rays: Rays) -> ArchLight:
    """Trace an arched house for M directions and make it ready for coverings."""
    arc = arc_of(house)
    straight, far_wall, far_gable = trace_straight(arc, house, rays)
    inside = inner(arc, house, rays)
    rows = np.flatnonzero(inside.back.any(axis=1))
    chain = _chain(inside.passes)
    inside = InnerWays(inside.nodes[rows], inside.gable[rows], inside.passes, inside.back[rows])
    open_wall = bars_open(house, rays.across, rays.along)
    open_gable = bars_open(house, rays.along, rays.across)
    kind = _kind(straight, mirrored=True)
    sunny = kind.give(np.ones((1, STEPS + 1)), open_wall[None], open_gable[None])[0][0]
    lit, shaded = _lit(arc, rays)
    return ArchLight(
        wall=place(rays.across),
        gable=place(rays.along),
        open_wall=open_wall,
        open_gable=open_gable,
        straight=kind,
        far_wall=_kind(far_wall),
        far_gable=_Kind(far_gable.single, kind.chain, far_gable.wall, far_gable.gable),
        inner_rows=rows,
        inner=inside,
        inner_chain=chain,
        outer=_thrown(outer(arc, house, rays)),
        outer_front=_thrown(outer_front(arc, house, rays)),
        through=_thrown(through(arc, house, rays)),
        lit=lit,
        shaded=shaded,
        lit_wall=rays.across / rays.up * house.gutter_height / house.width,
        lit_gable=rays.along / rays.up * 0.5 * house.gable_area / house.floor_area,
        sunny=sunny,
        down=_mirrored_down(arc, rays, straight),
    )


LIT_POINTS = 12


def _lit(arc: Arc, rays: Rays) -> tuple[Floats, Floats]:
    """Return sunlight on the outside of the arc by incidence (M, nodes), and the share behind a neighbour."""
    rows, height = len(rays.up), section_height(rays)
    begin = -np.minimum(height, arc.edge)
    step = (arc.edge - begin) / LIT_POINTS
    turn = begin[:, None] + step[:, None] * (np.arange(LIT_POINTS) + 0.5)
    facing = np.maximum(np.sin(turn + height[:, None]), 0.0)
    across = np.hypot(rays.across, rays.up)
    flux = across[:, None] * facing * arc.radius * step[:, None] / (rays.up * arc.width)[:, None]
    row = np.repeat(np.arange(rows), LIT_POINTS)
    x = 0.5 * arc.width + arc.radius * np.sin(turn)
    x = x - (arc.radius * np.cos(turn) - arc.sunk) / rays.slope[:, None]
    behind = np.maximum(x - arc.tangent(height)[:, None], 0.0) // arc.width > 0.0
    shaded = (flux * behind).sum(axis=1) / np.maximum(flux.sum(axis=1), 1e-12) * (arc.spans - 1) / arc.spans
    return spread(row, (across[:, None] * facing).ravel(), flux.ravel(), rows), shaded


def _mirrored_down(arc: Arc, rays: Rays, ways: Ways) -> Floats:
    """Return the share of light going up along each direction that its first arc would mirror downwards.

    At turn t from upright, 2 cos(incidence) cos(t) > up, evaluated at evenly spread lines.
    """
    height = section_height(rays)
    x = arc.width * (np.arange(LIT_POINTS) + 0.5) / LIT_POINTS
    offset = arc.offset(x[None, :], height[:, None])
    turn, _ = arc.leaves(offset, height[:, None])
    cosine = np.hypot(rays.across, rays.up)[:, None] * np.sqrt(1.0 - offset**2)
    share = (2.0 * cosine * np.cos(turn) > rays.up[:, None]).mean(axis=1)
    passes = ways.passes
    on_roof = ways.single.sum(axis=1)
    for point, free, behind in zip(passes.point, passes.free, passes.behind, strict=True):
        on_roof += np.bincount(passes.row[point], weights=free + behind, minlength=len(on_roof))
    return np.asarray(share * on_roof)
