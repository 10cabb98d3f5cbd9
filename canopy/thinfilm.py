"""Coherent coats on a face: anti-reflection, low-emissivity. Characteristic matrices, both polarisations.

Macleod, Thin-Film Optical Filters, chapter 2; powers as in `sheet` (Byrnes 2016, arXiv:1603.02720).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from canopy.sheet import Passage, cosine_inside

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Film = tuple[Complexes, float]
"""Complex index (W,) and thickness in µm of one film of a coat."""


def coated_face(
    films: Sequence[Film],
    index: Complexes,
    wavelength_um: Floats,
    theta: Floats,
    *,
    inside: bool = False,
    beyond: Complexes | None = None,
) -> Passage:
    """Return the face between a medium (air, or `beyond`) and a sheet of index (W,) with a coat, (2, W, M).

    Films are listed from that medium to the sheet. With `inside` the sheet is above and the medium below
    (inner face of a covering), the same coat seen from the other side. `theta` is the angle in air.
    """
    first = np.ones(wavelength_um.shape, dtype=np.complex128) if beyond is None else beyond
    media = [first, *[f[0] for f in films], index]
    depth = [f[1] for f in films]
    sine = np.sin(theta)
    cosines = [cosine_inside(m, sine) for m in media]
    if beyond is None:
        cosines[0] = np.broadcast_to(np.cos(theta).astype(np.complex128), cosines[1].shape)
    down, back = _stack(media, cosines, depth, wavelength_um)
    up, inner = _stack(media[::-1], cosines[::-1], depth[::-1], wavelength_um)
    return Passage(up, down, inner, back) if inside else Passage(down, up, back, inner)


def _stack(
    media: list[Complexes], cosines: list[Complexes], depth: list[float], wavelength_um: Floats
) -> tuple[Floats, Floats]:
    """Return power transmitted and reflected of a coherent stack, light from the first medium."""
    out = []
    for pol in (0, 1):
        adm = [m[:, None] * c if pol == 0 else m[:, None] / c for m, c in zip(media, cosines, strict=True)]
        b, c = np.ones_like(adm[-1]), adm[-1]
        for m, cosine, y, d in zip(media[-2:0:-1], cosines[-2:0:-1], adm[-2:0:-1], depth[::-1], strict=True):
            phase = 2.0 * np.pi * d * m[:, None] * cosine / wavelength_um[:, None]
            cs, sn = np.cos(phase), -1j * np.sin(phase)
            b, c = cs * b + sn / y * c, y * sn * b + cs * c
        r = (adm[0] * b - c) / (adm[0] * b + c)
        t = 2.0 * adm[0] / (adm[0] * b + c)
        if pol == 1:  # from tangential to full amplitudes
            t = t * cosines[0] / cosines[-1]
        first, last = media[0][:, None], media[-1][:, None]
        if pol == 0:
            ratio = (last * cosines[-1]).real / (first * cosines[0]).real
        else:
            ratio = (last * np.conj(cosines[-1])).real / (first * np.conj(cosines[0])).real
        out.append((np.abs(t) ** 2 * ratio, np.abs(r) ** 2))
    return np.stack([o[0] for o in out]), np.stack([o[1] for o in out])
