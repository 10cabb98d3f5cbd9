"""Band values spread over finer bands: every part of a band takes the band's value."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from canopy.optics import Covering, SolarOptics, ThermalOptics

Rows = NDArray[np.intp]


def spread_solar(optics: SolarOptics, row: Rows) -> SolarOptics:
    """Return solar optics with the band axis read at `row`, (finer bands,)."""
    return SolarOptics(
        angles=optics.angles,
        beam_beam=optics.beam_beam[row],
        beam_diffuse=optics.beam_diffuse[row],
        beam_reflect=optics.beam_reflect[row],
        beam_specular=optics.beam_specular[row],
        beam_absorbed=optics.beam_absorbed[:, row],
        diffuse_in=optics.diffuse_in[row],
        diffuse_out=optics.diffuse_out[row],
        reflect_outside=optics.reflect_outside[row],
        reflect_inside=optics.reflect_inside[row],
        absorbed_from_outside=optics.absorbed_from_outside[:, row],
        absorbed_from_inside=optics.absorbed_from_inside[:, row],
    )


def spread_thermal(optics: ThermalOptics, row: Rows) -> ThermalOptics:
    """Return long-wave optics with the band axis read at `row`, (finer bands,)."""
    return ThermalOptics(
        optics.transmit[:, row], optics.reflect_outside[:, row], optics.reflect_inside[:, row]
    )


def spread_covering(covering: Covering, solar: Rows, thermal: Rows) -> Covering:
    """Return a covering with its band values spread, dry and wet."""
    return replace(
        covering,
        solar_dry=spread_solar(covering.solar_dry, solar),
        solar_wet=spread_solar(covering.solar_wet, solar),
        thermal_dry=spread_thermal(covering.thermal_dry, thermal),
        thermal_wet=spread_thermal(covering.thermal_wet, thermal),
    )
