"""One plane sheet: Fresnel faces, absorption inside, all internal reflections added as powers (incoherent).

Arrays are (2, W, M): polarisation s then p, wavelength, direction. Directions are angles in air, radians.
Faces may carry a coherent coat (`thinfilm`). Powers through a face between complex indices follow the
transfer-matrix convention (Byrnes 2016, arXiv:1603.02720, section 2 and 4), which the general library `tmm`
uses too: T = |t|^2 Re(n2 cos2)/Re(n1 cos1) for s, with conjugates of the cosines for p.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


@dataclass(frozen=True)
class Passage:
    """What an element does to light along each direction, from outside (down) and from inside (up)."""

    down: Floats  # transmitted, from outside to inside
    up: Floats  # transmitted, from inside to outside
    reflect_outside: Floats  # of light from outside, sent back
    reflect_inside: Floats  # of light from inside, sent back

    @property
    def absorbed_down(self) -> Floats:
        """Share of light from outside that stays."""
        return np.asarray(1.0 - self.down - self.reflect_outside)

    @property
    def absorbed_up(self) -> Floats:
        """Share of light from inside that stays."""
        return np.asarray(1.0 - self.up - self.reflect_inside)


def cosine_inside(index: Complexes, sine: Floats) -> Complexes:
    """Return the complex cosine in a medium (W,) for sines in air (M,), (W, M): Snell's law."""
    ratio = sine[None, :] / index[:, None]
    return np.asarray(np.sqrt(1.0 - ratio * ratio))


def face(n1: Complexes, n2: Complexes, cos1: Complexes, cos2: Complexes) -> Passage:
    """Return the passage of one bare face between two media; indices (W,), cosines (W, M).

    Fresnel's equations, Born & Wolf, Principles of Optics, section 1.5.2.
    """
    a, b = n1[:, None] * cos1, n2[:, None] * cos2  # s admittances
    c, d = n2[:, None] * cos1, n1[:, None] * cos2
    r_s = (a - b) / (a + b)
    r_p = (c - d) / (c + d)
    t_s, t_p = 2.0 * a / (a + b), 2.0 * a / (c + d)
    u_s, u_p = 2.0 * b / (a + b), 2.0 * b / (c + d)
    p1 = (n1[:, None] * np.conj(cos1)).real
    p2 = (n2[:, None] * np.conj(cos2)).real
    back = np.stack([_power(r_s), _power(r_p)])
    with np.errstate(divide="ignore", invalid="ignore"):
        down = np.stack([_power(t_s) * b.real / a.real, _power(t_p) * p2 / p1])
        up = np.stack([_power(u_s) * a.real / b.real, _power(u_p) * p1 / p2])
    return Passage(down, up, back, back.copy())


def _power(amplitude: Complexes) -> Floats:
    return np.asarray(amplitude.real**2 + amplitude.imag**2)


def passing(index: Complexes, cosine: Complexes, thickness_um: float, wavelength_um: Floats) -> Floats:
    """Return the share that crosses once, (W, M): exp(-4 pi d Im(n cos) / lambda), Bouguer's law."""
    depth = 4.0 * np.pi * thickness_um * (index[:, None] * cosine).imag / wavelength_um[:, None]
    return np.asarray(np.exp(-np.minimum(depth, 700.0)))


def join(upper: Passage, lower: Passage, between: Floats | float = 1.0) -> Passage:
    """Return two elements as one; `between` is the share that crosses from one to the other, once.

    Sum of the geometric series of inter-reflections (Stokes 1862).
    """
    once = np.asarray(between, dtype=np.float64)
    twice = once * once
    room = 1.0 - upper.reflect_inside * lower.reflect_outside * twice
    safe = np.maximum(room, 1e-300)
    return Passage(
        upper.down * once * lower.down / safe,
        lower.up * once * upper.up / safe,
        upper.reflect_outside + upper.down * twice * lower.reflect_outside * upper.up / safe,
        lower.reflect_inside + lower.up * twice * upper.reflect_inside * lower.down / safe,
    )


def slab(
    index: Complexes,
    thickness_um: float,
    wavelength_um: Floats,
    theta: Floats,
    outer: Passage | None = None,
    inner: Passage | None = None,
) -> Passage:
    """Return a sheet in air, (2, W, M). `outer` and `inner` replace the bare faces (coats).

    Parameters: complex index (W,), thickness in µm, wavelengths (W,) in µm, angles in air (M,) in radians.
    """
    air = np.ones(wavelength_um.shape, dtype=np.complex128)
    sine = np.sin(theta)
    cos_air = np.broadcast_to(np.cos(theta).astype(np.complex128), (wavelength_um.size, theta.size))
    cos_in = cosine_inside(index, sine)
    bare = None
    if outer is None or inner is None:
        bare = face(air, index, cos_air, cos_in)
    top = outer if outer is not None else bare
    if inner is None:
        assert bare is not None
        bottom = Passage(bare.up, bare.down, bare.reflect_inside, bare.reflect_outside)
    else:
        bottom = inner
    assert top is not None
    return grazing(join(top, bottom, passing(index, cos_in, thickness_um, wavelength_um)), theta)


def grazing(element: Passage, theta: Floats) -> Passage:
    """Return the element with the limit at 90 degrees set exactly: all reflected."""
    edge = theta >= 0.5 * np.pi - 1e-9
    if not edge.any():
        return element
    zero, one = edge & True, edge
    return Passage(
        np.where(zero, 0.0, element.down),
        np.where(zero, 0.0, element.up),
        np.where(one, 1.0, element.reflect_outside),
        np.where(one, 1.0, element.reflect_inside),
    )
