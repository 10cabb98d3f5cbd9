"""The figures that a covering is bought on, from its record: what tables, quotations and JSON show."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import NIR_BANDS, SOLAR, THERMAL
from canopy.glazing_u import covering_u_value
from canopy.optics import Covering, SolarOptics, ThermalOptics
from canopy.planck import band_share

Floats = NDArray[np.float64]

RATING_K: Final = 283.15  # temperature of the black radiation that weighs long-wave figures: EN 673's 283 K


@dataclass(frozen=True)
class CoveringFigures:
    """Rating figures of a covering, dry. Long-wave ones are hemispherical, weighted by a 283 K blackbody."""

    par_normal: float
    par_hemispherical: float
    nir_normal: float
    nir_hemispherical: float
    uv_hemispherical: float
    haze: float
    thermal_transmittance: float
    thermal_emissivity_sky_side: float
    thermal_emissivity_crop_side: float
    thermal_8_14_transmittance: float
    u_value_w_m2_cover_k: float


@dataclass(frozen=True)
class WholeThermal:
    """Long-wave of a whole covering at one temperature, per thermal band (T,)."""

    transmit: Floats
    reflect_outside: Floats
    reflect_inside: Floats

    @property
    def emissivity_outside(self) -> Floats:
        """What the sky side emits, of black."""
        return 1.0 - self.transmit - self.reflect_outside

    @property
    def emissivity_inside(self) -> Floats:
        """What the crop side emits, of black."""
        return 1.0 - self.transmit - self.reflect_inside


@cache
def solar_weights() -> Floats:
    """Return W/m2 of ASTM G173-03 global sunlight per solar band (B,)."""
    from canopy.materials import reference_sunlight

    wave, power = reference_sunlight()
    total = []
    for low, high in zip(SOLAR.lower, SOLAR.upper, strict=True):
        inside = wave[(wave > low) & (wave < high)]
        x = np.concatenate([[low], inside, [high]])
        total.append(float(np.trapezoid(np.interp(x, wave, power), x)))
    return np.array(total)


@cache
def thermal_weights(temp_k: float = RATING_K) -> Floats:
    """Return the blackbody share of each thermal band (T,); the outer bands reach to 0 and infinity."""
    edges = np.array([0.0, *THERMAL.edges[1:-1], np.inf])
    return np.asarray(band_share(edges[:-1], edges[1:], temp_k))


def nir_mean(values: Floats) -> float:
    """Return the sunlight-weighted mean of band values (B,) over .70-2.80 µm."""
    rows = [SOLAR.index(name) for name in NIR_BANDS]
    return float(np.average(values[rows], weights=solar_weights()[rows]))


def whole_thermal(optics: ThermalOptics) -> WholeThermal:
    """Return all layers as one, band by band (adding of diffuse layers from the outside inwards)."""
    t, ro, ri = optics.transmit[0], optics.reflect_outside[0], optics.reflect_inside[0]
    for layer in range(1, len(optics.transmit)):
        t2, ro2, ri2 = optics.transmit[layer], optics.reflect_outside[layer], optics.reflect_inside[layer]
        series = 1.0 - ri * ro2
        ro = ro + t * t * ro2 / series
        ri = ri2 + t2 * t2 * ri / series
        t = t * t2 / series
    return WholeThermal(t, ro, ri)


def at_normal(optics: SolarOptics) -> Floats:
    """Return total transmission at normal incidence per solar band (B,)."""
    return np.asarray(optics.beam_beam[:, 0] + optics.beam_diffuse[:, 0])


def figures(covering: Covering) -> CoveringFigures:
    """Return the rating figures of a dry covering."""
    light, heat = covering.solar_dry, whole_thermal(covering.thermal_dry)
    weights = thermal_weights()
    normal, par = at_normal(light), SOLAR.index("par")
    return CoveringFigures(
        par_normal=float(normal[par]),
        par_hemispherical=float(light.diffuse_in[par]),
        nir_normal=nir_mean(normal),
        nir_hemispherical=nir_mean(light.diffuse_in),
        uv_hemispherical=float(light.diffuse_in[SOLAR.index("uv")]),
        haze=float(light.beam_diffuse[par, 0] / max(normal[par], 1e-12)),
        thermal_transmittance=float(heat.transmit @ weights),
        thermal_emissivity_sky_side=float(heat.emissivity_outside @ weights),
        thermal_emissivity_crop_side=float(heat.emissivity_inside @ weights),
        thermal_8_14_transmittance=float(heat.transmit[THERMAL.names.index("8-14")]),
        u_value_w_m2_cover_k=covering_u_value(covering),
    )
