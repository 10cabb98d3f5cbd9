"""Light through a stack of elements that may scatter: exact adding of powers, direction by direction.

Each element passes and reflects along its direction, (2, W, M) by polarisation, wavelength, direction; a
scattering element also turns light into a profile g over directions with a rank-one, reciprocal kernel
K(out, in) = c g(out) g(in) / S. Between elements light keeps its polarisation and direction, so fields of
every scattered profile are found by adding, and the amounts scattered by one small linear system per
wavelength. No truncation of the orders of reflection or scattering.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from canopy.sheet import Passage, join

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Element:
    """One element: straight passage, scattering, and which layers own what it absorbs.

    `straight` holds unscattered powers. Scattered shares of light on it: `through` x g both ways,
    `back_outside` x g of light from outside sent back, `back_inside` the same from inside.
    """

    straight: Passage
    owners: tuple[tuple[int, float], ...]  # (layer, share) of the absorbed power
    profile: Floats | None = None  # g (2, W, M)
    through: Floats | float = 0.0  # (W,)
    back_outside: Floats | float = 0.0
    back_inside: Floats | float = 0.0

    def absorbed(self, *, outside: bool) -> Floats:
        """Return the absorbed share (2, W, M) of light from one side."""
        p = self.straight
        out = p.absorbed_down if outside else p.absorbed_up
        if self.profile is not None:
            back = self.back_outside if outside else self.back_inside
            out = out - np.asarray(self.through + back).reshape(-1, 1) * self.profile
        return out


@dataclass(frozen=True)
class Fields:
    """Downward and upward power in the gaps above, between and below the elements, (E + 1) of (2, W, M)."""

    down: list[Floats]
    up: list[Floats]


@dataclass(frozen=True)
class Response:
    """What becomes of light along each direction: (2, W, M), scattered parts summed over directions."""

    straight: Floats  # transmitted along the direction
    scattered: Floats  # transmitted into other directions
    specular: Floats  # reflected along the mirror direction
    thrown_back: Floats  # reflected into other directions
    absorbed: Floats  # (L, 2, W, M)


class Stack:
    """Elements from outside to inside, with power weights of the directions (summing to 1 over M)."""

    def __init__(self, elements: list[Element], weights: Floats, layers: int) -> None:
        """Take elements, weights (M,) of isotropic light per direction (0 for directions only looked at)."""
        self.elements = elements
        self.weights = weights
        self.layers = layers
        tops = [elements[0].straight]
        for e in elements[1:]:
            tops.append(join(tops[-1], e.straight))
        bottoms = [elements[-1].straight]
        for e in elements[-2::-1]:
            bottoms.append(join(e.straight, bottoms[-1]))
        self.tops = tops  # tops[k]: elements 0 ... k
        self.bottoms = bottoms[::-1]  # bottoms[k]: elements k ... E-1
        self.scatterers = [i for i, e in enumerate(elements) if e.profile is not None]

    def response(self, *, outside: bool = True) -> Response:
        """Return what becomes of light that falls on the stack from outside (or from inside)."""
        first = self._from_outside() if outside else self._from_inside()
        count = len(self.elements)
        through = first.down[count] if outside else first.up[0]
        back = first.up[0] if outside else first.down[count]
        absorbed = self._absorbed(first)
        scattered, thrown = np.zeros_like(through), np.zeros_like(through)
        if self.scatterers:
            amounts = self._amounts(first)  # (2n, 2, W, M)
            low, high, inner = self._profile_responses()
            exits = (low, high) if outside else (high, low)
            scattered = np.einsum("nw,npwm->pwm", exits[0], amounts)
            thrown = np.einsum("nw,npwm->pwm", exits[1], amounts)
            absorbed = absorbed + np.einsum("lnw,npwm->lpwm", inner, amounts)
        return Response(through, scattered, back, thrown, absorbed)

    def _from_outside(self) -> Fields:
        """Return fields of unit light from outside in every direction, unscattered."""
        e = self.elements
        down = [np.ones_like(e[0].straight.down)]
        for k, element in enumerate(e):
            p = element.straight
            below = self.bottoms[k + 1].reflect_outside if k + 1 < len(e) else 0.0
            down.append(down[k] * p.down / np.maximum(1.0 - p.reflect_inside * below, 1e-300))
        up = [down[k] * self.bottoms[k].reflect_outside for k in range(len(e))]
        return Fields(down, [*up, np.zeros_like(down[0])])

    def _from_inside(self) -> Fields:
        """Return fields of unit light from inside in every direction, unscattered."""
        e = self.elements
        up = [np.ones_like(e[-1].straight.up)]
        for k in range(len(e) - 1, -1, -1):
            p = e[k].straight
            above = self.tops[k - 1].reflect_inside if k > 0 else 0.0
            up.insert(0, up[0] * p.up / np.maximum(1.0 - p.reflect_outside * above, 1e-300))
        down = [np.zeros_like(up[0])]
        down += [up[k] * self.tops[k - 1].reflect_inside for k in range(1, len(e) + 1)]
        return Fields(down, up)

    def _source(self, gap: int, *, downward: bool, profile: Floats) -> Fields:
        """Return fields of light that starts in a gap with this profile, unscattered."""
        count = len(self.elements)
        above = self.tops[gap - 1].reflect_inside if gap > 0 else np.zeros_like(profile)
        below = self.bottoms[gap].reflect_outside if gap < count else np.zeros_like(profile)
        room = np.maximum(1.0 - above * below, 1e-300)
        here_down = profile / room if downward else profile * above / room
        here_up = profile * below / room if downward else profile / room
        down, up = [here_down], [here_up]
        for k in range(gap, count):
            p = self.elements[k].straight
            beyond = self.bottoms[k + 1].reflect_outside if k + 1 < count else 0.0
            d = down[-1] * p.down / np.maximum(1.0 - p.reflect_inside * beyond, 1e-300)
            down.append(d)
            up.append(d * beyond)
        for k in range(gap - 1, -1, -1):
            p = self.elements[k].straight
            beyond = self.tops[k - 1].reflect_inside if k > 0 else 0.0
            u = up[0] * p.up / np.maximum(1.0 - p.reflect_outside * beyond, 1e-300)
            up.insert(0, u)
            down.insert(0, u * beyond)
        return Fields(down, up)

    def _absorbed(self, fields: Fields) -> Floats:
        """Return power absorbed per layer, (L, 2, W, M), from straight and scattering losses of elements."""
        out = np.zeros((self.layers, *fields.down[0].shape))
        for k, e in enumerate(self.elements):
            share = fields.down[k] * e.absorbed(outside=True) + fields.up[k + 1] * e.absorbed(outside=False)
            for layer, part in e.owners:
                out[layer] += part * share
        return out

    def _collect(self, fields: Fields) -> list[Floats]:
        """Return light on each scatterer weighed with its profile, from above and from below."""
        out = []
        for i in self.scatterers:
            g = np.asarray(self.elements[i].profile, dtype=np.float64)
            out += [fields.down[i] * g, fields.up[i + 1] * g]
        return out

    @cached_property
    def _fields(self) -> list[tuple[Fields, Fields]]:
        """Fields of each scatterer's normalised profile, sent up from its top and down from its foot."""
        half = 0.5 * self.weights
        out = []
        for i in self.scatterers:
            g = np.asarray(self.elements[i].profile) * half
            g = g / np.maximum(g.sum(axis=(0, 2), keepdims=True), 1e-300)
            out.append(
                (self._source(i, downward=False, profile=g), self._source(i + 1, downward=True, profile=g))
            )
        return out

    def _emissions(self, n: int) -> list[tuple[Floats, Floats]]:
        """Return (up, down) amounts that scatterer n sends out per unit collected from above and below."""
        e = self.elements[self.scatterers[n]]
        size = e.straight.down.shape[1]
        c, b_out, b_in = (np.broadcast_to(v, (size,)) for v in (e.through, e.back_outside, e.back_inside))
        return [(b_out, c), (c, b_in)]

    def _profile_responses(self) -> tuple[Floats, Floats, Floats]:
        """Return exits below and above (2n, W) and absorption (L, 2n, W) per unit collected."""
        low, high, inner = [], [], []
        count = len(self.elements)
        for n, (rising, falling) in enumerate(self._fields):
            a_up = self._absorbed(rising).sum(axis=(1, 3))
            a_down = self._absorbed(falling).sum(axis=(1, 3))
            for up, down in self._emissions(n):
                low.append(up * _total(rising.down[count]) + down * _total(falling.down[count]))
                high.append(up * _total(rising.up[0]) + down * _total(falling.up[0]))
                inner.append(up * a_up + down * a_down)
        return np.stack(low), np.stack(high), np.stack(inner, axis=1)

    def _amounts(self, first: Fields) -> Floats:
        """Return amounts collected by each scatterer from above and below, all orders, (2n, 2, W, M)."""
        start = np.stack(self._collect(first))
        size = start.shape[0]
        wavelengths = start.shape[2]
        gain = np.zeros((wavelengths, size, size))
        for n, (rising, falling) in enumerate(self._fields):
            seen_up = np.stack([_total(v) for v in self._collect(rising)])
            seen_down = np.stack([_total(v) for v in self._collect(falling)])
            for side, (up, down) in enumerate(self._emissions(n)):
                gain[:, :, 2 * n + side] = (up * seen_up + down * seen_down).T
        solve = np.linalg.inv(np.eye(size) - gain)
        return np.asarray(np.einsum("wij,jpwm->ipwm", solve, start))


def _total(values: Floats) -> Floats:
    """Return the sum over polarisation and direction, (W,)."""
    return np.asarray(values.sum(axis=(0, 2)))
