"""Leaves by name or from a spectrum of one's own: reflectance and transmittance by band, emissivity.

Light on purpose: names need the standard library only, since `check` looks them up here.
"""

from __future__ import annotations

import csv
import math
import tomllib
from collections.abc import Mapping
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR, THERMAL
from canopy.optics import Leaf
from weather.errors import UserError, nearest

Floats = NDArray[np.float64]

MAX_BYTES: Final = 5_000_000
MAX_ROWS: Final = 20_000
COLUMNS: Final = ("wavelength", "reflectance", "transmittance")
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


def leaf_from_csv(path: Path, like: str = "generic") -> Leaf:
    """Return a leaf from a spectrum: a CSV with the columns wavelength, reflectance, transmittance.

    Wavelengths in nm or µm (above 100: nm), rising; values 0 to 1, or 0 to 100 if the header says "%".
    Bands are means weighted by ASTM G173 global sunlight; emissivity is that of the shipped leaf `like`.

    Errors: UserError with file, row and reason.
    """
    wave, reflect, transmit = read_spectrum(path)
    shipped = leaf(like)
    return Leaf(
        name=path.name,
        title=f"leaf spectrum {path.name}",
        provenance="published",
        source=f"spectrum {path.name}, {len(wave)} rows, {wave[0]:g}-{wave[-1]:g} µm, weighted by ASTM G173 "
        f'global sunlight, end values held beyond; emissivity as for "{shipped.name}"',
        reflect=_band_means(wave, reflect),
        transmit=_band_means(wave, transmit),
        emissivity=np.broadcast_to(shipped.emissivity, (len(THERMAL),)).copy(),
    )


def read_spectrum(path: Path) -> tuple[Floats, Floats, Floats]:
    """Return wavelength (µm), reflectance and transmittance of a CSV, (M,) each, after all checks."""
    where = f"leaf spectrum {path.name}"
    rows = list(enumerate(csv.reader(_text(path, where).splitlines()), start=1))
    rows = [(at, row) for at, row in rows if any(cell.strip() for cell in row) and not row[0].startswith("#")]
    if not rows:
        raise UserError(f"{where}: empty; a header and rows of {', '.join(COLUMNS)} are needed")
    places, percent = _header(where, rows[0][1])
    if len(rows) > MAX_ROWS:
        raise UserError(f"{where}: {len(rows)} rows; at most {MAX_ROWS}")
    found = np.array([_numbers(f"{where}, row {at}", row, places) for at, row in rows[1:]]).reshape(-1, 3)
    found[:, 1:] /= 100.0 if percent else 1.0
    if len(found) and found[:, 0].max() > 100.0:
        found[:, 0] /= 1000.0
    lines = [at for at, _ in rows[1:]]
    for at, step in zip(lines[1:], np.diff(found[:, 0]), strict=True):
        if step <= 0.0:
            raise UserError(f"{where}, row {at}: wavelengths must rise")
    for at, (wave, r, t) in zip(lines, found, strict=True):
        if not (0.0 <= r <= 1.0 and 0.0 <= t <= 1.0 and r + t <= 1.0):
            raise UserError(
                f"{where}, row {at}: reflectance {r:g}, transmittance {t:g} at {wave:g} µm; "
                'each 0 to 1 and together at most 1 (write "%" in the header for percent)'
            )
    if not len(found) or found[0, 0] > REACH_UM[0] or found[-1, 0] < REACH_UM[1]:
        span = f"{found[0, 0]:g}-{found[-1, 0]:g} µm" if len(found) else "no rows"
        raise UserError(f"{where}: {span}; it must cover {REACH_UM[0]:g}-{REACH_UM[1]:g} µm")
    return found[:, 0], found[:, 1], found[:, 2]


def _text(path: Path, where: str) -> str:
    if not path.is_file():
        raise UserError(f"{where}: no such file")
    if path.stat().st_size > MAX_BYTES:
        raise UserError(f"{where}: {path.stat().st_size} bytes; at most {MAX_BYTES}")
    try:
        return path.read_text(encoding="utf-8-sig")
    except (UnicodeDecodeError, OSError) as error:
        raise UserError(f"{where}: cannot be read as UTF-8 text ({type(error).__name__})") from None


def _header(where: str, row: list[str]) -> tuple[list[int], bool]:
    """Return where the three columns stand, and whether values are in percent."""
    names = [cell.strip().lower() for cell in row]
    places = []
    for column in COLUMNS:
        hits = [k for k, name in enumerate(names) if name.startswith(column)]
        if len(hits) != 1:
            raise UserError(f"{where}, row 1: {len(hits)} columns named {column}; write {', '.join(COLUMNS)}")
        places.append(hits[0])
    return places, any("%" in names[k] for k in places[1:])


def _numbers(where: str, row: list[str], places: list[int]) -> list[float]:
    values = []
    for name, place in zip(COLUMNS, places, strict=True):
        text = row[place].strip() if place < len(row) else ""
        try:
            value = float(text)
        except ValueError:
            value = math.nan
        if not math.isfinite(value):
            raise UserError(f'{where}: {name} is "{text[:20]}"; a number is needed')
        values.append(value)
    return values


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
