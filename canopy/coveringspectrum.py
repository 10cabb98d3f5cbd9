"""A library covering by wavelength, .28 to 50 µm, at normal incidence: for figures, not for budgets."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import library_rows
from canopy.layers import WATER_FILM_UM
from canopy.library_build import LayerSpec, stack_of
from canopy.materials import reference_sunlight
from canopy.planck import blackbody_power
from canopy.sheet import join

Floats = NDArray[np.float64]

FROM_UM: Final = 0.28
TO_UM: Final = 50.0
POINTS: Final = 1200
BODY_K: Final = 283.0


@dataclass(frozen=True)
class Spectrum:
    """Normal-incidence values by wavelength (W,), with sunlight and a 283 K blackbody, each 1 at its peak."""

    wavelength_um: Floats
    transmit: Floats
    reflect: Floats
    transmit_wet: Floats  # under 50 µm of water on the inner face
    sunlight: Floats
    blackbody: Floats


def spectrum_of(name: str) -> Spectrum:
    """Return the spectrum of a library covering; webs of multi-wall sheets are left out.

    Raises UserError for an unknown name.
    """
    stack = stack_of(library_rows.table("covering", name))
    wave = np.geomspace(FROM_UM, TO_UM, POINTS)
    dry, wet = _through(stack.layers, wave, 0.0), _through(stack.layers, wave, WATER_FILM_UM)
    sun_wave, sun = reference_sunlight()
    light = np.interp(wave, sun_wave, sun, right=0.0)
    body = blackbody_power(wave, BODY_K)
    return Spectrum(wave, dry[0], dry[1], wet[0], light / light.max(), body / body.max())


def _through(layers: tuple[LayerSpec, ...], wave: Floats, water_um: float) -> tuple[Floats, Floats]:
    """Return transmittance and outer reflectance (W,) of all sheets, straight and scattered light as one."""
    straight = np.zeros(1)
    out = []
    for part in (wave < 2.9, wave >= 2.9):  # solar coats end at 2.9 µm
        whole = None
        for place, layer in enumerate(layers):
            water = water_um if place == len(layers) - 1 else 0.0
            sheet = layer.optics.passage(wave[part], straight, water)
            whole = sheet if whole is None else join(whole, sheet)
        assert whole is not None
        out.append((whole.down.mean(axis=0)[:, 0], whole.reflect_outside.mean(axis=0)[:, 0]))
    return np.concatenate([x[0] for x in out]), np.concatenate([x[1] for x in out])
