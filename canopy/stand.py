"""Light in a leaf canopy over its ground, hour by hour: what leaves and ground take, what goes up again.

The stand over a black ground comes from `standtable`; leaves and ground then pass light to and fro without
end, which sums in closed form (adding method). Part of the floor may be bare (`ground_cover`).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray

from canopy.leafangle import extinction
from canopy.light import StandResponse
from canopy.optics import Ground, Leaf
from canopy.standtable import StandTable, stand_table

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Stand:
    """A leaf canopy.

    lai: (N,) m2 of leaf, one side, per m2 of FLOOR (bare floor included); 0 is an empty house.
    chi: ellipsoid parameter of leaf angles, below 1 upright, 1 spherical, above 1 flat.
    ground_cover: share of the floor that is planted; the rest is bare.
    """

    lai: Floats
    chi: float = 1.0
    ground_cover: float = 1.0


@dataclass(frozen=True)
class _Layer:
    """A planted floor as light meets it: (N,) each."""

    lai: Floats
    kb: Floats
    met: Floats  # share of the beam that leaves meet
    met_diffuse: Floats


@dataclass(frozen=True)
class _Answer:
    """Leaves, ground, up, and leaves in the sun: (B, N) each, per unit of light from above."""

    crop: Floats
    ground: Floats
    up: Floats
    sunlit: Floats


def respond(
    stand: Stand, leaf: Leaf, ground: Ground, zenith_deg: Floats, azimuth_deg: Floats
) -> StandResponse:
    """Return what a stand does with beam and with isotropic light.

    zenith_deg, azimuth_deg: (N,) of the sun. With the sun at or below the horizon the beam answers are those
    for diffuse light, and no leaf is sunlit. Angles above 89.5 degrees count as 89.5.
    """
    zenith = np.radians(np.asarray(zenith_deg, float))
    lai = np.broadcast_to(np.asarray(stand.lai, float), zenith.shape)
    planted = lai / stand.ground_cover
    up = np.cos(zenith) > 1e-9
    table = stand_table(leaf.reflect, leaf.transmit, stand.chi)
    reflect = ground.reflect[:, None]

    kb = extinction(stand.chi, np.where(up, zenith, 0.0))
    met = -np.expm1(-kb * planted)
    met_diffuse = table.interception(planted)
    layer = _Layer(planted, kb, met, met_diffuse)
    day = _Layer(*(value[up] for value in (planted, kb, met, met_diffuse)))
    diffuse, beam = _light(table, layer, day, zenith[up], up, reflect)

    share = stand.ground_cover
    sunlit_lai = share * np.where(up, met / kb, 0.0)
    mixed = partial(_mixed, share=share, reflect=reflect)
    beam, diffuse = mixed(beam), mixed(diffuse)
    return StandResponse(
        beam_crop=beam.crop,
        beam_ground=beam.ground,
        beam_up=beam.up,
        diffuse_crop=diffuse.crop,
        diffuse_ground=diffuse.ground,
        diffuse_up=diffuse.up,
        sunlit_lai=sunlit_lai,
        beam_crop_sunlit=beam.sunlit,
        diffuse_crop_sunlit=diffuse.sunlit,
        beam_gap=1.0 - share * np.where(up, met, met_diffuse),
        diffuse_gap=1.0 - share * met_diffuse,
    )


def _mixed(planted: _Answer, share: float, reflect: Floats) -> _Answer:
    """Return planted and bare floor side by side."""
    bare = 1.0 - share
    return _Answer(
        crop=share * planted.crop,
        ground=share * planted.ground + bare * (1.0 - reflect),
        up=share * planted.up + bare * reflect,
        sunlit=share * planted.sunlit,
    )


def _light(
    table: StandTable, layer: _Layer, day: _Layer, zenith: Floats, up: NDArray[np.bool_], reflect: Floats
) -> tuple[_Answer, _Answer]:
    """Return the answers for diffuse light and for the beam."""
    down, back = table.diffuse_shares(layer.lai)
    through = 1.0 - layer.met_diffuse * (1.0 - down)  # of isotropic light, reaches the ground
    returned = layer.met_diffuse * back
    taken = layer.met_diffuse * (1.0 - down - back)
    bounce = 1.0 / (1.0 - reflect * returned)
    on_ground = through * bounce
    sent = reflect * on_ground  # upwards from the ground
    sunlit = np.zeros_like(taken)
    diffuse = _Answer(taken + sent * taken, on_ground - sent, returned + sent * through, sunlit)

    shares = table.beam_shares(day.lai, zenith)
    beam_on_ground = (1.0 - day.met * (1.0 - shares.beam_down)) * bounce[:, up]
    beam_sent = reflect * beam_on_ground
    keep = 1.0 - table.scatter[:, None]
    crop = day.met * (1.0 - shares.beam_down - shares.beam_up) + beam_sent * taken[:, up]
    back_up = day.met * shares.beam_up + beam_sent * through[:, up]
    below = day.met_diffuse * shares.below_met_sunlit
    lit = keep * (day.met * (1.0 + shares.beam_met_sunlit) + beam_sent * below)
    sunlit[:, up] = keep * (day.met_diffuse * shares.top_met_sunlit + sent[:, up] * below)

    beam = _Answer(diffuse.crop.copy(), diffuse.ground.copy(), diffuse.up.copy(), np.zeros_like(sunlit))
    beam.crop[:, up], beam.ground[:, up], beam.up[:, up] = crop, beam_on_ground - beam_sent, back_up
    beam.sunlit[:, up] = lit
    return diffuse, beam
