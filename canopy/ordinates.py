"""Discrete ordinates for a homogeneous leaf canopy over a black ground: all bands, depths and suns at once.

Radiance along n cosines down and n up (double Gauss), the sun's beam as an ordinate of its own, leaves that
scatter by the two Lambert laws. The layer is symmetric, so sum and difference of the two hemispheres uncouple
into one eigenproblem of size n per band (Stamnes & Swanson 1981, J. Atmos. Sci. 38:387; leaves: Ross 1981).
Radiance is in units of flux / pi: isotropic light of unit flux has radiance 1. Axes: B bands, D canopies of
different leaf area, Z sun heights, n streams, k modes. Depth is leaf area per m2 ground from the top.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.leafangle import LeafFaces, extinction, leaf_faces, phase, projection

Floats = NDArray[np.float64]

STREAMS: Final = 8
LEAST_ABSORPTION: Final = 1e-9  # leaves that absorb nothing are taken as absorbing this share


@dataclass(frozen=True)
class Modes:
    """What one kind of leaf at one leaf-angle distribution does, whatever its amount."""

    mu: Floats  # (n,)
    weight: Floats  # (n,) they add up to 1
    meet: Floats  # (n,) mean projection of leaf area across a ray
    reflect: Floats  # (B,)
    transmit: Floats  # (B,) of leaves
    faces: LeafFaces
    chi: float
    rate: Floats  # (B, k) eigenvalues, per leaf area
    sum_vector: Floats  # (B, n, k) down + up
    difference_vector: Floats  # (B, n, k) down - up, of the growing mode
    to_modes: Floats  # (B, k, n) inverse of sum_vector
    minus: Floats  # (B, n, n) X - Y
    plus: Floats  # (B, n, n) X + Y

    @property
    def scatter(self) -> Floats:
        """Scattered share of what leaves intercept, (B,)."""
        return self.reflect + self.transmit


def make_modes(reflect: Floats, transmit: Floats, chi: float, streams: int = STREAMS) -> Modes:
    """Solve the eigenproblem of every band.

    reflect, transmit: (B,) of leaves; chi: ellipsoid parameter.
    """
    over = np.maximum(reflect + transmit, 1e-300)
    keep = np.minimum(1.0, (1.0 - LEAST_ABSORPTION) / over)
    reflect, transmit = reflect * keep, transmit * keep
    points, weights = np.polynomial.legendre.leggauss(streams)
    mu, weight = 0.5 * (points + 1.0), 0.5 * weights
    faces = leaf_faces(chi)
    meet = projection(chi, mu)
    same, opposite = _normalised(*phase(faces, mu, mu), meet, weight)
    t, r = transmit[:, None, None], reflect[:, None, None]
    onward, back = t * same + r * opposite, t * opposite + r * same
    # radiance scaled by sqrt(weight mu) makes both matrices symmetric
    scale = np.sqrt(weight * mu)
    root = np.sqrt(weight / mu)
    lost = np.diag(meet / mu)
    p = lost - 2.0 * root[:, None] * (onward - back) * root
    q = lost - 2.0 * root[:, None] * (onward + back) * root
    lower = np.linalg.cholesky(q)
    upper = lower.transpose(0, 2, 1)
    square, turned = np.linalg.eigh(upper @ p @ lower)
    rate = np.sqrt(np.maximum(square, 1e-24))
    # s'' = P Q s; s = Q^-1 t' and with t' = -Q s: eigenvectors of P Q are C^-T w
    vector = np.linalg.solve(upper, turned)
    difference = -np.linalg.solve(p, vector) * rate[:, None, :]
    return Modes(
        mu=mu,
        weight=weight,
        meet=meet,
        reflect=reflect,
        transmit=transmit,
        faces=faces,
        chi=chi,
        rate=rate,
        sum_vector=vector / scale[:, None],
        difference_vector=difference / scale[:, None],
        to_modes=(turned.transpose(0, 2, 1) @ upper) * scale,
        minus=-p * scale / scale[:, None],
        plus=-q * scale / scale[:, None],
    )


def _normalised(same: Floats, opposite: Floats, meet: Floats, weight: Floats) -> tuple[Floats, Floats]:
    """Scale a symmetric phase pair so that every stream scatters exactly what it meets."""
    for _ in range(30):
        gain = meet / (2.0 * (same + opposite) @ weight)
        root = np.sqrt(gain)
        same, opposite = root[:, None] * same * root, root[:, None] * opposite * root
    return same, opposite


@dataclass(frozen=True)
class Field:
    """Radiance in D canopies of leaf area `lai`: amplitudes of modes that decay from the top and from below.

    `beam` (B, 2, n, Z) is the part that follows the beam, sum and difference; absent for diffuse light.
    Amplitudes: (B, D, k, Z).
    """

    modes: Modes
    lai: Floats  # (D,)
    from_top: Floats
    from_below: Floats
    kb: Floats | None = None  # (Z,)
    beam: Floats | None = None

    def fluxes(self) -> tuple[Floats, Floats]:
        """Return what leaves below and what leaves at the top, scattered or diffuse, (B, D, Z) each."""
        top, bottom = self._at(np.zeros_like(self.lai)), self._at(self.lai)
        flux = self.modes.weight * self.modes.mu  # 2 w mu, halved for (s +- t) / 2
        down = np.einsum("n,bdnz->bdz", flux, bottom[0] + bottom[1])
        up = np.einsum("n,bdnz->bdz", flux, top[0] - top[1])
        return down, up

    def _at(self, depth: Floats) -> tuple[Floats, Floats]:
        """Return down + up and down - up at one depth in every canopy, (B, D, n, Z) each."""
        m = self.modes
        a = np.exp(-m.rate[:, None, :] * depth[:, None])[..., None] * self.from_top
        b = np.exp(-m.rate[:, None, :] * (self.lai - depth)[:, None])[..., None] * self.from_below
        s = m.sum_vector[:, None] @ (a + b)
        t = m.difference_vector[:, None] @ (b - a)
        if self.beam is not None and self.kb is not None:
            decay = np.exp(-self.kb * depth[:, None])[None, :, None, :]
            s = s + self.beam[:, None, 0] * decay
            t = t + self.beam[:, None, 1] * decay
        return s, t

    def meeting(self, depth: Floats) -> Floats:
        """Return diffuse light that leaves meet at one depth per canopy, per leaf area, (B, D, Z)."""
        weight = 2.0 * self.modes.weight * self.modes.meet
        return np.asarray(np.einsum("n,bdnz->bdz", weight, self._at(depth)[0]))

    def streams(self, depth: Floats) -> tuple[Floats, Floats]:
        """Return diffuse flux downwards and upwards at one depth per canopy, (B, D, Z) each."""
        s, t = self._at(depth)
        flux = self.modes.weight * self.modes.mu
        return np.einsum("n,bdnz->bdz", flux, s + t), np.einsum("n,bdnz->bdz", flux, s - t)

    def met_in_sun(self, kb: Floats) -> Floats:
        """Return diffuse light that sunlit leaves meet: integral of exp(-kb depth) meeting, (B, D, Z).

        kb (Z,): extinction of the sun's beam; for a field without beam the amplitudes' Z is 1.
        """
        m = self.modes
        weight = np.einsum("n,bnk->bk", 2.0 * m.weight * m.meet, m.sum_vector)[:, None, :, None]
        rate, lai = m.rate[:, None, :, None], self.lai[:, None, None]
        falling = _integral(rate + kb, lai)
        rising = _mixed_integral(kb, rate, lai)
        met = (weight * (falling * self.from_top + rising * self.from_below)).sum(2)
        if self.beam is not None and self.kb is not None:
            source = np.einsum("n,bnz->bz", 2.0 * m.weight * m.meet, self.beam[:, 0])
            met = met + source[:, None, :] * _integral(self.kb + kb, self.lai[:, None])
        return np.asarray(met)


def _integral(rate: Floats, lai: Floats) -> Floats:
    """Return the integral of exp(-rate x) over 0..lai."""
    return np.asarray(-np.expm1(-rate * lai) / rate)


def _mixed_integral(a: Floats, b: Floats, lai: Floats) -> Floats:
    """Return the integral of exp(-a x - b (lai - x)) over 0..lai; symmetric, finite where a = b."""
    gap = np.abs(a - b)
    slow = np.minimum(a, b)
    width = gap * lai
    mean = np.where(width > 1e-8, -np.expm1(-width) / np.where(width > 1e-8, width, 1.0), 1.0)
    return np.asarray(np.exp(-slow * lai) * lai * mean)


def diffuse_field(modes: Modes, lai: Floats, from_below: bool = False) -> Field:
    """Return the field of isotropic light of unit flux on top (or from below), Z = 1."""
    size, depth = len(modes.mu), len(lai)
    into = np.zeros((len(modes.rate), depth, size, 1))
    enter = into + 1.0
    return _bounded(modes, lai, into, enter) if from_below else _bounded(modes, lai, enter, into)


def beam_field(modes: Modes, lai: Floats, zenith_rad: Floats) -> Field:
    """Return the field that leaves scatter out of a beam of unit flux on the horizontal, (Z,) sun heights."""
    kb = extinction(modes.chi, zenith_rad)
    mu = np.cos(zenith_rad)
    for rate in modes.rate.ravel():  # resonance: the source has the rate of a mode; step aside
        kb = np.where(np.abs(kb - rate) < 3e-6 * rate, rate * (1.0 + 3e-6), kb)
    same, opposite = phase(modes.faces, mu, modes.mu)  # (Z, n)
    gain = extinction(modes.chi, zenith_rad) / (2.0 * (same + opposite) @ modes.weight)
    r, t = modes.reflect[:, None, None], modes.transmit[:, None, None]
    onward = (gain[:, None] * (t * same + r * opposite)).transpose(0, 2, 1)  # (B, n, Z)
    back = (gain[:, None] * (t * opposite + r * same)).transpose(0, 2, 1)
    unlike, like = (onward - back) / modes.mu[:, None], (onward + back) / modes.mu[:, None]
    # -kb s = (X-Y) t + unlike; -kb t = (X+Y) s + like
    right = modes.to_modes @ (modes.minus @ like - kb * unlike)
    s = modes.sum_vector @ (right / (kb**2 - modes.rate[:, :, None] ** 2))
    t_part = -(modes.plus @ s + like) / kb
    beam = np.stack([s, t_part], axis=1)  # (B, 2, n, Z)
    decay = np.exp(-kb * lai[:, None])[None, :, None, :]
    top = -0.5 * (s + t_part)[:, None] * np.ones_like(decay)
    bottom = -0.5 * (s - t_part)[:, None] * decay
    field = _bounded(modes, lai, top, bottom)
    return Field(modes, lai, field.from_top, field.from_below, kb, beam)


def _bounded(modes: Modes, lai: Floats, down_at_top: Floats, up_at_bottom: Floats) -> Field:
    """Fit amplitudes to the light that enters at top and bottom, (B, D, n, Z) each.

    The layer is symmetric: the sum and the difference of both amplitudes solve systems of size n.
    """
    decay = np.exp(-modes.rate[:, None, :] * lai[:, None])[:, :, None, :]
    near = 0.5 * (modes.sum_vector - modes.difference_vector)[:, None]
    far = 0.5 * (modes.sum_vector + modes.difference_vector)[:, None] * decay
    even = np.linalg.solve(near + far, down_at_top + up_at_bottom)
    odd = np.linalg.solve(near - far, down_at_top - up_at_bottom)
    return Field(modes, lai, 0.5 * (even + odd), 0.5 * (even - odd))
