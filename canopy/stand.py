"""Light in a leaf canopy over its ground, hour by hour: what leaves and ground take, what goes up again.

The stand over a black ground comes from `standtable`; leaves and ground then pass light to and fro without
end, which sums in closed form (adding method). Rows meet light as their exact gaps say, hour by hour; what
they meet is scattered as in the even stand with the same recollision probability. Part of the floor may be
bare (`ground_cover`).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.leafangle import GRAZING_DEG, extinction
from canopy.light import StandResponse
from canopy.optics import Ground, Leaf
from canopy.rows import Rows, row_sight
from canopy.standtable import StandTable, stand_table

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True)
class Stand:
    """A leaf canopy.

    lai: (N,) m2 of leaf, one side, per m2 of FLOOR (alleys and bare floor included); 0 is an empty house.
    chi: ellipsoid parameter of leaf angles, below 1 upright, 1 spherical, above 1 flat.
    rows: shape of the rows, or None for leaves that are spread evenly.
    ground_cover: share of the floor that is planted (evenly or in rows); the rest is bare.
    """

    lai: Floats
    chi: float = 1.0
    rows: Rows | None = None
    ground_cover: float = 1.0


@dataclass(frozen=True)
class _Met:
    """How leaves meet light, rows or not: (N,) each. `like` is the even stand that scatters alike."""

    lai: Floats
    like: Floats
    beam: Floats  # share of the beam that leaves meet
    diffuse: Floats  # of isotropic light
    beam_patch: Floats  # of light sent up from where the beam reached the floor
    diffuse_patch: Floats  # of light sent up from where isotropic light reached the floor
    kb: Floats  # extinction coefficient of the beam
    sun: Floats  # zenith, radians
    like_sun: Floats  # zenith at which the even stand is met at the same mean depth

    @property
    def lit_share(self) -> Floats:
        """Sunlit share of leaf area over that of the even stand that scatters alike."""
        like = -np.expm1(-self.kb * self.like) / np.maximum(self.like, 1e-30)
        return np.asarray(self.beam / np.maximum(self.lai * like, 1e-30))

    def at(self, hours: Bools) -> _Met:
        """Return some hours only."""
        return _Met(
            self.lai[hours],
            self.like[hours],
            self.beam[hours],
            self.diffuse[hours],
            self.beam_patch[hours],
            self.diffuse_patch[hours],
            self.kb[hours],
            self.sun[hours],
            self.like_sun[hours],
        )


@dataclass(frozen=True)
class _Answer:
    """Leaves, ground, up, and leaves in the sun: (B, N) each, per unit of light from above."""

    crop: Floats
    ground: Floats
    up: Floats
    sunlit: Floats

    def beside_bare(self, planted: float, reflect: Floats) -> _Answer:
        """Return planted and bare floor side by side."""
        bare = 1.0 - planted
        return _Answer(
            crop=planted * self.crop,
            ground=planted * self.ground + bare * (1.0 - reflect),
            up=planted * self.up + bare * reflect,
            sunlit=planted * self.sunlit,
        )


def respond(
    stand: Stand, leaf: Leaf, ground: Ground, zenith_deg: Floats, azimuth_deg: Floats
) -> StandResponse:
    """Return what a stand does with beam and with isotropic light.

    zenith_deg, azimuth_deg: (N,) of the sun. With the sun at or below the horizon the beam answers are those
    for diffuse light, and no leaf is sunlit. Angles above 89.5 degrees count as 89.5.
    """
    zenith = np.radians(np.asarray(zenith_deg, float))
    planted = stand.ground_cover
    lai = np.broadcast_to(np.asarray(stand.lai, float), zenith.shape) / planted
    up = np.cos(zenith) > 1e-9
    sun = np.where(up, np.minimum(zenith, np.radians(GRAZING_DEG)), 0.0)
    table = stand_table(leaf.reflect, leaf.transmit, stand.chi)
    reflect = ground.reflect[:, None]
    met = _even(stand, table, lai, sun) if stand.rows is None else _in_rows(stand, lai, sun, azimuth_deg, up)

    diffuse = _diffuse(table, met, reflect)
    beam = _Answer(diffuse.crop.copy(), diffuse.ground.copy(), diffuse.up.copy(), np.zeros_like(diffuse.up))
    if up.any():
        by_day = _beam(table, met.at(up), reflect)
        for whole, part in zip(_parts(beam), _parts(by_day.beam), strict=True):
            whole[:, up] = part
        diffuse.sunlit[:, up] = by_day.diffuse_sunlit
    beam, diffuse = beam.beside_bare(planted, reflect), diffuse.beside_bare(planted, reflect)
    return StandResponse(
        beam_crop=beam.crop,
        beam_ground=beam.ground,
        beam_up=beam.up,
        diffuse_crop=diffuse.crop,
        diffuse_ground=diffuse.ground,
        diffuse_up=diffuse.up,
        sunlit_lai=planted * np.where(up, met.beam / met.kb, 0.0),
        beam_crop_sunlit=beam.sunlit,
        diffuse_crop_sunlit=diffuse.sunlit,
        beam_gap=1.0 - planted * np.where(up, met.beam, met.diffuse),
        diffuse_gap=1.0 - planted * met.diffuse,
    )


def _parts(answer: _Answer) -> tuple[Floats, Floats, Floats, Floats]:
    return answer.crop, answer.ground, answer.up, answer.sunlit


def _even(stand: Stand, table: StandTable, lai: Floats, sun: Floats) -> _Met:
    """Leaves spread evenly: the floor is lit evenly."""
    kb = extinction(stand.chi, sun)
    diffuse = table.interception(lai)
    return _Met(lai, lai, -np.expm1(-kb * lai), diffuse, diffuse, diffuse, kb, sun, sun)


def _in_rows(stand: Stand, lai: Floats, sun: Floats, azimuth_deg: Floats, up: Bools) -> _Met:
    """Rows: exact gaps, and floor that is lit where it also sees the sky."""
    rows = stand.rows
    assert rows is not None
    sight = row_sight(rows, stand.chi)
    kb = extinction(stand.chi, sun)
    diffuse = sight.interception(lai)
    sky = sight.floor_sky(lai)
    diffuse_patch = 1.0 - (sky**2).mean(1) / sky.mean(1)
    beam, beam_patch = diffuse.copy(), diffuse_patch.copy()
    across = np.radians(np.asarray(azimuth_deg, float)[up] - rows.azimuth)
    thick, sweep = (kb * lai)[up], rows.sweep(sun[up], across)
    beam[up] = 1.0 - rows.gap(thick, sweep)
    lit = rows.reaching(thick, sweep)
    beam_patch[up] = 1.0 - (lit * sky[up].T).mean(0) / np.maximum(lit.mean(0), 1e-30)
    like, like_sun = sight.like_lai(lai), sun.copy()
    like_sun[up] = rows.like_zenith(thick, sweep, stand.chi, like[up])
    return _Met(lai, like, beam, diffuse, beam_patch, diffuse_patch, kb, sun, like_sun)


def _diffuse(table: StandTable, met: _Met, reflect: Floats) -> _Answer:
    """Return the answer to isotropic light, sunlit leaves left at nil."""
    down, back = table.diffuse_shares(met.like)
    return _bounced(met.diffuse, down, back, met.diffuse_patch, met.diffuse, down, back, reflect)[0]


@dataclass(frozen=True)
class _Day:
    beam: _Answer
    diffuse_sunlit: Floats  # (B, N)


def _beam(table: StandTable, met: _Met, reflect: Floats) -> _Day:
    """Return the answer to the beam, and what sunlit leaves take of isotropic light."""
    shares = table.beam_shares(met.like, met.like_sun)
    even = np.array_equal(met.like_sun, met.sun)
    light = shares if even else table.beam_shares(met.like, met.sun)  # what the sun sees
    lit = 1.0 if even else met.lit_share
    down, back = table.diffuse_shares(met.like)
    keep = 1.0 - table.scatter[:, None]
    answer, from_below = _bounced(
        met.beam, shares.beam_down, shares.beam_up, met.beam_patch, met.diffuse, down, back, reflect
    )
    sunlit = keep * (
        met.beam * (1.0 + lit * light.beam_met_sunlit) + lit * from_below * light.below_met_sunlit
    )
    isotropic, from_below = _bounced(
        met.diffuse, down, back, met.diffuse_patch, met.diffuse, down, back, reflect
    )
    diffuse_sunlit = keep * (
        np.minimum(lit, 1.0) * met.diffuse * light.top_met_sunlit + lit * from_below * light.below_met_sunlit
    )
    sunlit = np.minimum(sunlit, answer.crop)
    diffuse_sunlit = np.minimum(diffuse_sunlit, isotropic.crop)
    return _Day(_Answer(answer.crop, answer.ground, answer.up, sunlit), diffuse_sunlit)


def _bounced(
    met: Floats,
    down: Floats,
    up: Floats,
    patch: Floats,
    met_below: Floats,
    onward: Floats,
    back: Floats,
    reflect: Floats,
) -> tuple[_Answer, Floats]:
    """Sum the light that leaves and ground pass to and fro.

    met: share that leaves meet on the way down, of which `down` and `up` leave scattered; patch, met_below:
    share met of light sent up from where unscattered light landed, and from the floor at large, of which
    `onward` leaves at the top and `back` below. Returns the answer and what leaves meet of light from below.
    """
    first = reflect * (1.0 - met)
    rest = (met * down + first * patch * back) / (1.0 - reflect * met_below * back)
    sent = reflect * rest
    from_below = first * patch + sent * met_below
    leaving = met * up + first + sent - from_below * (1.0 - onward)
    ground = (1.0 - reflect) * (1.0 - met + rest)
    crop = met * (1.0 - down - up) + from_below * (1.0 - onward - back)
    return _Answer(crop, ground, leaving, np.zeros_like(crop)), from_below
