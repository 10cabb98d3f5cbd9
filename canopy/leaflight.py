"""Light on leaves: sunlit and shaded classes hour by hour, and the profile down the canopy for one hour."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from canopy.bands import NIR_BANDS, SOLAR
from canopy.leafangle import GRAZING_DEG, extinction
from canopy.light import Light, StandResponse
from canopy.optics import Ground, Leaf
from canopy.ordinates import beam_field, diffuse_field, make_modes
from canopy.rows import row_sight
from canopy.stand import Stand, respond

Floats = NDArray[np.float64]

LEAST_LEAF = 1e-6  # m2/m2: a class with less leaf than this is empty


@dataclass(frozen=True)
class LeafLight:
    """Light that leaves of both classes absorb, (N,) each. W/m2 of floor unless "leaf" is said."""

    sunlit_share: Floats  # of leaf area
    ppfd_sunlit: Floats  # µmol m-2 s-1 per m2 of sunlit leaf; 0 without such leaves
    ppfd_shaded: Floats  # per m2 of shaded leaf
    ppfd_leaf: Floats  # per m2 of leaf, all leaves
    crop_par_umol: Floats  # µmol m-2 s-1 per m2 of floor
    crop_par: Floats  # W/m2
    crop_nir: Floats
    crop_leaf: Floats  # all bands, W per m2 of leaf
    ground: Floats  # all bands
    up: Floats  # all bands, upwards at the top of the crop
    par_use: Floats  # share of outside PAR that leaves absorb; 0 in the dark


def leaf_light(light: Light, lai: Floats, umol_per_j: Floats) -> LeafLight:
    """Return light by leaf class.

    lai: (N,) m2 leaf per m2 floor; umol_per_j: (N,) photons per joule of PAR.
    """
    par, nir = SOLAR.index("par"), [SOLAR.index(name) for name in NIR_BANDS]
    photons = light.crop[par] * umol_per_j
    sunlit = light.crop_sunlit[par] * umol_per_j
    outside = light.outside_beam[par] + light.outside_diffuse[par]
    return LeafLight(
        sunlit_share=_per(light.sunlit_lai, lai),
        ppfd_sunlit=_per(sunlit, light.sunlit_lai),
        ppfd_shaded=_per(np.maximum(photons - sunlit, 0.0), np.maximum(lai - light.sunlit_lai, 0.0)),
        ppfd_leaf=_per(photons, lai),
        crop_par_umol=photons,
        crop_par=light.crop[par],
        crop_nir=light.crop[nir].sum(0),
        crop_leaf=_per(light.crop.sum(0), lai),
        ground=light.ground.sum(0),
        up=light.crop_up.sum(0),
        par_use=_per(light.crop[par], outside),
    )


def _per(amount: Floats, base: Floats) -> Floats:
    some = base > LEAST_LEAF
    return np.where(some, amount / np.where(some, base, 1.0), 0.0)


@dataclass(frozen=True)
class Profile:
    """Light down the planted part of a stand in one hour: K layers of equal leaf area, values at middles.

    In rows, what the beam does is exact; scattered and diffuse light has the course of the even stand that
    scatters alike and the rows' own total.
    """

    depth: Floats  # (K,) leaf area above, m2/m2 of planted floor
    layer_lai: float  # leaf area of one layer
    sunlit_share: Floats  # (K,)
    sunlit: Floats  # (B, K) absorbed, W per m2 of sunlit leaf
    shaded: Floats  # (B, K) absorbed, W per m2 of shaded leaf
    beam: Floats  # (B, K) unscattered beam, W/m2 of planted floor
    down: Floats  # (B, K) diffuse and scattered, downwards
    up: Floats  # (B, K) upwards

    @property
    def layer_absorbed(self) -> Floats:
        """Light that each layer absorbs, W/m2 of planted floor, (B, K)."""
        mean = self.sunlit_share * self.sunlit + (1.0 - self.sunlit_share) * self.shaded
        return np.asarray(mean * self.layer_lai)


def profile(
    stand: Stand,
    leaf: Leaf,
    ground: Ground,
    beam: Floats,
    diffuse: Floats,
    zenith_deg: float,
    azimuth_deg: float,
    layers: int = 24,
) -> Profile:
    """Return the profile for one hour.

    stand: with lai of one element, above 0; beam, diffuse: (B,) W/m2 of floor on the top of the crop.
    """
    lai = float(np.ravel(stand.lai)[0]) / stand.ground_cover
    if lai <= 0.0:
        raise ValueError("a profile needs leaves: lai is 0")
    planted = replace(stand, lai=np.array([lai]), ground_cover=1.0)
    answer = respond(planted, leaf, ground, np.array([zenith_deg]), np.array([azimuth_deg]))
    above = np.cos(np.radians(zenith_deg)) > 1e-9
    if not above:
        beam, diffuse = np.zeros_like(beam), beam + diffuse
    zenith = np.radians(np.array([min(zenith_deg, GRAZING_DEG) if above else 0.0]))
    edges = np.linspace(0.0, 1.0, layers + 1)
    middle = 0.5 * (edges[1:] + edges[:-1])
    kb = float(extinction(stand.chi, zenith)[0])
    through = _through(planted, kb, zenith[0], azimuth_deg, np.concatenate([edges, middle]), lai)
    share = -np.diff(through[: layers + 1]) / (kb * lai / layers) * above
    met, down, up = _diffuse_course(planted, leaf, ground, answer, beam, diffuse, zenith, middle)
    keep = 1.0 - leaf.reflect - leaf.transmit
    direct = keep * kb * beam
    taken = answer.beam_crop[:, 0] * beam + answer.diffuse_crop[:, 0] * diffuse
    rest = taken - direct * (share.mean() * lai)
    shaded = keep[:, None] * met
    amount = shaded.mean(1) * lai
    shaded = shaded * (rest / np.where(amount > 0.0, amount, 1.0))[:, None]
    return Profile(
        depth=middle * lai,
        layer_lai=lai / layers,
        sunlit_share=share,
        sunlit=shaded + direct[:, None],
        shaded=shaded,
        beam=beam[:, None] * through[layers + 1 :],
        down=down,
        up=up,
    )


def _through(stand: Stand, kb: float, zenith: float, azimuth_deg: float, part: Floats, lai: float) -> Floats:
    """Return the share of the beam left below parts (K,) of the stand's height."""
    if stand.rows is None:
        return np.asarray(np.exp(-kb * lai * part))
    across = np.radians(np.full(part.shape, azimuth_deg - stand.rows.azimuth))
    sweep = stand.rows.sweep(np.full(part.shape, zenith), across) * part
    return stand.rows.gap(kb * lai * part, np.maximum(sweep, 1e-9))


def _diffuse_course(
    stand: Stand,
    leaf: Leaf,
    ground: Ground,
    answer: StandResponse,
    beam: Floats,
    diffuse: Floats,
    zenith: Floats,
    part: Floats,
) -> tuple[Floats, Floats, Floats]:
    """Return diffuse light met per leaf area, downwards, upwards, (B, K), of the even stand alike."""
    lai = np.asarray(stand.lai, float)
    like = lai if stand.rows is None else row_sight(stand.rows, stand.chi).like_lai(lai)
    modes = make_modes(leaf.reflect, leaf.transmit, stand.chi)
    whole, depth = np.full(part.shape, like[0]), part * like[0]
    reflect = ground.reflect
    on_ground = (answer.beam_ground[:, 0] * beam + answer.diffuse_ground[:, 0] * diffuse) / (1.0 - reflect)
    fields = (
        (beam_field(modes, whole, zenith), beam),
        (diffuse_field(modes, whole), diffuse),
        (diffuse_field(modes, whole, from_below=True), reflect * on_ground),
    )
    met, down, up = (np.zeros((len(beam), len(part))) for _ in range(3))
    for field, amount in fields:
        streams = field.streams(depth)
        met += amount[:, None] * field.meeting(depth)[:, :, 0]
        down += amount[:, None] * streams[0][:, :, 0]
        up += amount[:, None] * streams[1][:, :, 0]
    return met, down, up
