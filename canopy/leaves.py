"""Leaves by name or from a spectrum of one's own: reflectance and transmittance by band, emissivity.

Light on purpose: names need the standard library only, since `check` looks them up here.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR, THERMAL
from canopy.optics import Leaf
from weather.errors import UserError, nearest

if TYPE_CHECKING:
    from canopy.labcsv import LabSpectrum

Floats = NDArray[np.float64]

REACH_UM: Final = (0.40, 2.30)  # a spectrum must cover this; beyond its ends the end values hold


@cache
def _rows() -> Mapping[str, Mapping[str, Any]]:
    text = files("canopy").joinpath("data", "leaves", "leaves.toml").read_text(encoding="utf-8")
    return {row["name"]: row for row in tomllib.loads(text)["leaf"]}


def leaf_names() -> tuple[str, ...]:
    """Return the names of the shipped leaves, in library order."""
    return tuple(_rows())


def leaf(name: str) -> Leaf:
    """Return a shipped leaf.

    Errors: UserError for an unknown name.
    """
    rows = _rows()
    if name not in rows:
        hint = nearest(name, leaf_names()) or f"; known: {', '.join(leaf_names())}"
        raise UserError(f'leaf "{name}": not in the library{hint}')
    row = rows[name]
    return Leaf(
        name=name,
        title=row["title"],
        provenance=row["provenance"],
        source=f"{row['source']} Emissivity: {row['emissivity_source']}.",
        reflect=np.array(row["reflect"]),
        transmit=np.array(row["transmit"]),
        emissivity=np.array(row["emissivity"]),
    )


def leaf_from_csv(path: Path, like: str = "generic") -> tuple[Leaf, tuple[str, ...]]:
    """Return a leaf from a spectrum, and in words what was read into the file or clipped as noise.

    Bands are means weighted by ASTM G173 global sunlight; emissivity is that of the shipped leaf `like`.

    Errors: UserError with file, row and reason.
    """
    lab = read_spectrum(path)
    shipped, wave = leaf(like), lab.wavelength_um
    assert lab.front is not None  # `read_spectrum` asks for it
    made = Leaf(
        name=path.name,
        title=f"leaf spectrum {path.name}",
        provenance="published",
        source=f"spectrum {path.name}, {len(wave)} rows, {wave[0]:g}-{wave[-1]:g} µm, weighted by ASTM G173 "
        f'global sunlight, end values held beyond; emissivity as for "{shipped.name}"',
        reflect=_band_means(wave, lab.front),
        transmit=_band_means(wave, lab.transmit),
        emissivity=np.broadcast_to(shipped.emissivity, (len(THERMAL),)).copy(),
    )
    return made, tuple(f"leaf spectrum {note}" for note in lab.notes)


def read_spectrum(path: Path) -> LabSpectrum:
    """Return a leaf's spectrum: wavelength, reflectance and transmittance from .40 to 2.30 µm.

    Read and checked like a laboratory's covering (`labcsv.read_lab_csv`).

    Errors: UserError with file, row and reason.
    """
    from canopy.labcsv import read_lab_csv

    try:
        lab = read_lab_csv(path, needed_um=REACH_UM)
    except UserError as error:
        raise UserError(f"leaf spectrum {error}") from None
    if lab.front is None:
        raise UserError(f"leaf spectrum {path.name}, header: a leaf needs reflectance beside transmittance")
    return lab


def _band_means(wave: Floats, values: Floats) -> Floats:
    """Return means over the solar bands weighted by the energy of ASTM G173 global sunlight, (B,)."""
    from pvlib.spectrum import get_reference_spectra

    sun = get_reference_spectra()["global"]
    nm, power = np.asarray(sun.index, float), sun.to_numpy(float)
    means = []
    for low, high in zip(SOLAR.lower, SOLAR.upper, strict=True):
        grid = np.linspace(low, high, 1 + round((high - low) * 2000.0))
        weight = np.interp(grid * 1000.0, nm, power)
        means.append(float(np.average(np.interp(grid, wave, values), weights=weight)))
    return np.array(means)
