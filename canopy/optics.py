"""What a covering, a screen, a leaf and a ground are to light and to long-wave: plain records.

Axes: L layers (outermost first), B solar bands (`bands.SOLAR`), A incidence angles, T thermal bands.
"outside" is the sky side, "inside" the crop side. All values are fractions of what falls on the sheet,
per m2 of sheet. Nothing here computes; `layers` and `library` make these records.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Provenance = Literal["computed", "published", "common practice", "from memory"]


@dataclass(frozen=True)
class SolarOptics:
    """Solar-band optics of a whole covering (or screen) in one state, dry or wet.

    Laws: beam_beam + beam_diffuse + beam_reflect + beam_absorbed.sum(0) == 1 and the same for the diffuse
    sets, to 1e-12; diffuse_out == diffuse_in for a reciprocal, equal-medium stack.
    """

    angles: Floats  # (A,) radians from the normal, 0 ... pi/2, rising
    beam_beam: Floats  # (B, A) beam from outside that stays beam
    beam_diffuse: Floats  # (B, A) beam from outside that arrives inside as diffuse (haze)
    beam_reflect: Floats  # (B, A) beam from outside sent back (specular and scattered)
    beam_specular: Floats  # (B, A) the specular part of beam_reflect
    beam_absorbed: Floats  # (L, B, A) of a beam from outside
    diffuse_in: Floats  # (B,) isotropic light, outside to inside
    diffuse_out: Floats  # (B,) isotropic light, inside to outside
    reflect_outside: Floats  # (B,) isotropic light from outside, sent back
    reflect_inside: Floats  # (B,) isotropic light from inside, sent back
    absorbed_from_outside: Floats  # (L, B) isotropic light from outside, absorbed per layer
    absorbed_from_inside: Floats  # (L, B) isotropic light from inside, absorbed per layer


@dataclass(frozen=True)
class ThermalOptics:
    """Hemispherical long-wave properties per layer and thermal band; emissivity = 1 - t - r of that face."""

    transmit: Floats  # (L, T)
    reflect_outside: Floats  # (L, T) reflectance of the layer's outer face
    reflect_inside: Floats  # (L, T) reflectance of the layer's inner face


@dataclass(frozen=True)
class Gap:
    """What lies between two layers: still gas, or air with webs or inflation."""

    thickness_m: float
    gas: Literal["air", "argon"] = "air"
    web_conductance: float = 0.0  # W m-2 K-1 through webs and seams, beside gas and radiation


@dataclass(frozen=True)
class Covering:
    """One covering: everything between crop and sky that stays up. `source` is mandatory."""

    name: str
    title: str
    kind: Literal["glass", "rigid plastic", "film"]
    provenance: Provenance
    source: str
    haze: float  # share of the transmitted PAR beam at normal incidence that is scattered
    solar_dry: SolarOptics
    solar_wet: SolarOptics  # inner face carries condensation
    thermal_dry: ThermalOptics
    thermal_wet: ThermalOptics
    heat_capacity: tuple[float, ...]  # (L,) J m-2 K-1 per m2 of sheet
    resistance: tuple[float, ...]  # (L,) m2 K/W through the solid of each layer
    gaps: tuple[Gap, ...]  # (L-1,)
    layer_titles: tuple[str, ...]  # (L,)

    @property
    def layers(self) -> int:
        """Number of layers that carry a temperature of their own."""
        return len(self.heat_capacity)


@dataclass(frozen=True)
class Screen:
    """One screen: a single layer that is drawn and stowed, with its share of open holes."""

    name: str
    title: str
    kind: Literal["energy", "shade", "blackout"]
    provenance: Provenance
    source: str
    solar: SolarOptics  # the drawn fabric as a whole, holes included, L = 1
    thermal: ThermalOptics  # the same, L = 1
    openness: float  # share of area that is hole: passes air and vapour
    air_permeability: float  # air exchange through the drawn fabric, m3 m-2 h-1 per K^0.66 (see `exchange`)
    vapour_open: bool  # lets vapour through the fabric (woven) or not (film)
    heat_capacity: float  # J m-2 K-1
    parked_shade: float  # share of the floor that the stowed bundle shades


@dataclass(frozen=True)
class Leaf:
    """Leaf optics per solar band, thermal emissivity per thermal band. `source` is mandatory."""

    name: str
    title: str
    provenance: Provenance
    source: str
    reflect: Floats  # (B,)
    transmit: Floats  # (B,)
    emissivity: Floats  # (T,)


@dataclass(frozen=True)
class Ground:
    """What lies under the crop: reflectance per solar band, emissivity per thermal band, soil below."""

    name: str
    title: str
    provenance: Provenance
    source: str
    reflect: Floats  # (B,)
    emissivity: Floats  # (T,)
    conductivity: float  # W m-1 K-1 of the column below
    volumetric_heat: float  # J m-3 K-1
    surface_resistance: float  # m2 K/W between surface and column (mulch, bench, gutter)
    wetness: float  # 0 dry or sealed ... 1 free water: share of potential evaporation
