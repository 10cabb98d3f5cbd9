"""Move a covering's figures without breaking its laws: light, haze, long-wave and U set to given values.

Each function takes records and returns records; conservation and reciprocity hold by construction.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.coveringfigures import thermal_weights, whole_thermal
from canopy.optics import Covering, Gap, SolarOptics, ThermalOptics

Floats = NDArray[np.float64]

PAR = SOLAR.index("par")
_TINY = 1e-15


def light_factor(
    optics: SolarOptics, normal: float | None, hemispherical: float | None
) -> tuple[float, float]:
    """Return (a, b) of the factor a + b (1 - cos theta) that gives PAR its target values."""
    at_normal = float(optics.beam_beam[PAR, 0] + optics.beam_diffuse[PAR, 0])
    diffuse = float(optics.diffuse_in[PAR])
    if normal is None:
        return (1.0, 0.0) if hemispherical is None else (hemispherical / diffuse, 0.0)
    a = normal / at_normal
    if hemispherical is None:
        return a, 0.0
    return a, (hemispherical / diffuse - a) / _oblique(optics)[PAR]


def _oblique(optics: SolarOptics) -> Floats:
    """Return the mean of 1 - cos theta over isotropic light that comes through, per band (B,)."""
    through = optics.beam_beam + optics.beam_diffuse
    weight = np.sin(2.0 * optics.angles)
    tilt = 1.0 - np.cos(optics.angles)
    total = np.trapezoid(through * weight, optics.angles, axis=1)
    return np.asarray(np.trapezoid(through * weight * tilt, optics.angles, axis=1) / np.maximum(total, _TINY))


def _taken(factor: Floats, through: Floats, absorbed: Floats, back: Floats) -> tuple[Floats, Floats, Floats]:
    """Return new (through, absorbed (L, ...), back).

    Lost light is absorbed in the outermost layer; gained light comes out of absorption and reflection in
    proportion, and at most nine tenths of both.
    """
    rest = absorbed.sum(axis=0) + back
    new = np.minimum(through * np.maximum(factor, 0.0), through + 0.9 * rest)
    gained = np.maximum(new - through, 0.0)
    keep = 1.0 - gained / np.maximum(rest, _TINY)
    absorbed = absorbed * keep
    absorbed[0] += np.maximum(through - new, 0.0)
    return new, absorbed, back * keep


def scale_light(optics: SolarOptics, a: float, b: float) -> SolarOptics:
    """Return optics whose transmission is multiplied by a + b (1 - cos theta) at every angle and band."""
    by_angle = np.broadcast_to(a + b * (1.0 - np.cos(optics.angles)), optics.beam_beam.shape)
    isotropic = a + b * _oblique(optics)
    through = optics.beam_beam + optics.beam_diffuse
    new, absorbed, back = _taken(by_angle, through, optics.beam_absorbed.copy(), optics.beam_reflect)
    ratio = new / np.maximum(through, _TINY)
    mirror = optics.beam_specular * back / np.maximum(optics.beam_reflect, _TINY)
    down, from_out, up = _taken(
        isotropic, optics.diffuse_in, optics.absorbed_from_outside.copy(), optics.reflect_outside
    )
    return SolarOptics(
        angles=optics.angles,
        beam_beam=optics.beam_beam * ratio,
        beam_diffuse=optics.beam_diffuse * ratio,
        beam_reflect=back,
        beam_specular=mirror,
        beam_absorbed=absorbed,
        diffuse_in=down,
        diffuse_out=down * optics.diffuse_out / np.maximum(optics.diffuse_in, _TINY),
        reflect_outside=up,
        absorbed_from_outside=from_out,
        **_from_inside(optics, down),
    )


def _from_inside(optics: SolarOptics, down: Floats) -> dict[str, Floats]:
    """Shares of light from inside, its transmission changed in the same ratio as that from outside."""
    out = down * optics.diffuse_out / np.maximum(optics.diffuse_in, _TINY)
    factor = out / np.maximum(optics.diffuse_out, _TINY)
    new, absorbed, back = _taken(
        factor, optics.diffuse_out, optics.absorbed_from_inside.copy(), optics.reflect_inside
    )
    absorbed[-1] += new - out  # only where the limit of the inside bites
    return {"absorbed_from_inside": absorbed, "reflect_inside": back}


def haze_of(optics: SolarOptics) -> float:
    """Return the scattered share of what PAR sends through at normal incidence."""
    straight, scattered = float(optics.beam_beam[PAR, 0]), float(optics.beam_diffuse[PAR, 0])
    return scattered / max(straight + scattered, _TINY)


def set_haze(optics: SolarOptics, haze: float) -> SolarOptics:
    """Return optics that scatter `haze` of what PAR sends through at normal; other angles and bands follow.

    The share that stays straight is multiplied by one factor per ... band and angle, or, from a clear sheet,
    haze is equal at all angles and bands.
    """
    through = optics.beam_beam + optics.beam_diffuse
    straight = optics.beam_beam / np.maximum(through, _TINY)
    keep = (1.0 - haze) / max(straight[PAR, 0], _TINY)
    if keep <= 1.0:
        straight = straight * keep
    else:
        spread = haze / max(1.0 - straight[PAR, 0], _TINY)
        straight = 1.0 - (1.0 - straight) * spread
    return replace(optics, beam_beam=through * straight, beam_diffuse=through * (1.0 - straight))


def thicken(optics: ThermalOptics, power: float) -> ThermalOptics:
    """Return long-wave optics with internal transmission raised to a power; faces reflect as before."""
    face = np.maximum(optics.reflect_outside, optics.reflect_inside)
    inside = optics.transmit / np.maximum(1.0 - face, _TINY)
    return replace(optics, transmit=(1.0 - face) * np.clip(inside, 0.0, 1.0) ** power)


def transmitted(optics: ThermalOptics) -> float:
    """Return long-wave transmittance of all layers, weighted by the rating blackbody."""
    return float(whole_thermal(optics).transmit @ thermal_weights())


def shine(optics: ThermalOptics, share: float) -> ThermalOptics:
    """Return optics whose faces towards gaps emit `share` of what they did; the rest is reflected."""
    outside, inside = optics.reflect_outside.copy(), optics.reflect_inside.copy()
    for layer in range(len(optics.transmit)):
        if layer > 0:
            outside[layer] += (1.0 - share) * (1.0 - optics.transmit[layer] - outside[layer])
        if layer < len(optics.transmit) - 1:
            inside[layer] += (1.0 - share) * (1.0 - optics.transmit[layer] - inside[layer])
    return replace(optics, reflect_outside=outside, reflect_inside=inside)


def with_thermal(covering: Covering, change: Callable[[ThermalOptics], ThermalOptics]) -> Covering:
    """Return the covering with dry and wet long-wave optics changed alike."""
    return replace(
        covering, thermal_dry=change(covering.thermal_dry), thermal_wet=change(covering.thermal_wet)
    )


def with_webs(covering: Covering, add: float) -> Covering:
    """Return the covering with this much more (or less) conductance through webs and seams of each gap."""
    gaps = tuple(Gap(gap.thickness_m, gap.gas, max(0.0, gap.web_conductance + add)) for gap in covering.gaps)
    return replace(covering, gaps=gaps)


def with_resistance(covering: Covering, add: float) -> Covering:
    """Return the covering with this much more resistance through its first layer, m2 K/W."""
    return replace(covering, resistance=(covering.resistance[0] + add, *covering.resistance[1:]))
