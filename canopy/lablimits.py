"""What a laboratory spectrum does not allow, in words: dark bands, gain, coats, fringes."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.labcsv import LabSpectrum
from canopy.slabinverse import Inverted

Floats = NDArray[np.float64]

SOLAR_FROM_UM: Final = 0.40  # what a file must cover at least
SOLAR_TO_UM: Final = 0.70
_GAIN_SLACK: Final = 0.003  # T + R may exceed what a clear sheet gives by this much before it is said
_HOLE: Final = 1.15  # widest step of wavelength, as a ratio, that counts as joined up
_LOW_INDEX: Final = 1.42  # below lies no glass and no common plastic but fluoropolymers
_PHASE_TO_UM: Final = 20.0  # reflectance must be known to here for the phase


def joined_up(wavelength: Floats) -> bool:
    """Say whether the file runs from light to 20 µm without a wide hole."""
    inside = wavelength[(wavelength > SOLAR_TO_UM) & (wavelength < _PHASE_TO_UM)]
    reaches = float(wavelength[-1]) >= _PHASE_TO_UM
    return reaches and bool((inside[1:] / inside[:-1] < _HOLE).all())


def say_limits(lab: LabSpectrum, found: Inverted, dark_known: bool, limits: list[str]) -> None:
    """Say where n and k cannot be had, and where the numbers cannot be a plane sheet."""
    dark = _spans(lab.wavelength_um, found.opaque)
    if dark and dark_known:
        limits.append(
            f"nothing comes through at {', '.join(dark)} µm: n and k there follow from the reflectance at "
            "all wavelengths (Kramers-Kronig), to about .01 of long-wave emissivity"
        )
    elif dark:
        limits.append(
            f"nothing comes through at {', '.join(dark)} µm: k cannot be had there, n is the real index that "
            "gives the reflectance (exact for emissivity at normal, up to .03 off for slanted long-wave "
            "where the sheet reflects strongly, as glass at 9-10 µm)"
        )
    face = np.asarray(((found.index_front - 1.0) / (found.index_front + 1.0)) ** 2)
    most = (1.0 - face) / (1.0 + face)
    over = _spans(lab.wavelength_um, (lab.transmit > most + _GAIN_SLACK) & (found.crossing >= 1.0))
    if over:
        limits.append(
            f"transmittance + reflectance exceeds 1 at {', '.join(over)} µm: "
            "taken as free of absorption there"
        )
    visible = (lab.wavelength_um > 0.45) & (lab.wavelength_um < SOLAR_TO_UM)
    index = float(np.median(found.index_front[visible]))
    if index < _LOW_INDEX:
        limits.append(
            f"reflectance in PAR belongs to an index of {index:.2f}: an anti-reflection coat (on which face "
            "cannot be told) or a fluoropolymer; a coat's angle dependence is carried as that of the low "
            "index, within about .02 at 60°"
        )
    if _fringes(lab):
        limits.append("the values wave with wavelength: interference of a thin film; bands take the mean")


def _spans(wavelength: Floats, where: NDArray[np.bool_]) -> list[str]:
    """Return the wavelength ranges (µm) where a mask holds; holes under 4 % are closed, specks left out."""
    spans: list[list[float]] = []
    for at in wavelength[where]:
        if spans and at <= 1.04 * spans[-1][1]:
            spans[-1][1] = float(at)
            spans[-1][2] += 1
        else:
            spans.append([float(at), float(at), 1])
    return [f"{a:.3g}-{b:.3g}" for a, b, count in spans if count > 2]


def _fringes(lab: LabSpectrum) -> bool:
    """Say whether transmittance swings regularly in wavenumber: one frequency holds half of the swing."""
    w = lab.wavelength_um
    inside = (w > 0.45) & (w < 1.6)
    if inside.sum() < 40:
        return False
    number = np.linspace(1.0 / w[inside][-1], 1.0 / w[inside][0], 256)
    t = np.interp(number, 1.0 / w[inside][::-1], lab.transmit[inside][::-1])
    x = np.linspace(-1.0, 1.0, 256)
    rest = (t - np.polyval(np.polyfit(x, t, 5), x)) * np.hanning(256)
    power = np.abs(np.fft.rfft(rest)) ** 2
    peak = int(np.argmax(power))
    near = power[max(0, peak - 2) : peak + 3].sum() / max(float(power.sum()), 1e-30)
    return peak >= 4 and float(near) > 0.5 and float(rest.std()) > 0.003
