"""Open optical constants of covering materials: small CSVs with source, licence and what was bridged."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError, nearest

Floats = NDArray[np.float64]

NAMES = (
    "soda-lime-clear",
    "soda-lime-low-iron",
    "pmma",
    "polycarbonate",
    "pet",
    "polyethylene",
    "water",
    "ice",
)


@dataclass(frozen=True)
class Material:
    """Complex refractive index n + i k by wavelength (µm in vacuum), with where it comes from.

    `bridged` says in words where the data have gaps, how these were closed and how far that can be off.
    """

    name: str
    title: str
    wavelength_um: Floats  # (W,), rising
    n: Floats  # (W,)
    k: Floats  # (W,)
    source: str
    licence: str
    bridged: str

    def index_at(self, wavelength_um: Floats) -> NDArray[np.complex128]:
        """Return n + i k on any wavelengths, linear between rows and held beyond the ends."""
        n = np.interp(wavelength_um, self.wavelength_um, self.n)
        k = np.interp(wavelength_um, self.wavelength_um, self.k)
        return np.asarray(n + 1j * k)


@dataclass(frozen=True)
class CsvTable:
    """Columns of a shipped table and the `# key: text` lines above them."""

    header: dict[str, str]
    columns: tuple[str, ...]
    values: Floats  # (rows, columns)


@cache
def read_table(name: str) -> CsvTable:
    """Read a shipped table of canopy/data/materials and check it against the checksum in its header.

    Raises ValueError when the rows do not match: a damaged installation.
    """
    text = files("canopy").joinpath("data", "materials", f"{name}.csv").read_text(encoding="utf-8")
    lines = text.splitlines(keepends=True)
    count = sum(line.startswith("#") for line in lines)
    pairs = (line[1:].split(":", 1) for line in lines[:count] if ":" in line)
    header = {key.strip(): value.strip() for key, value in pairs}
    rows = "".join(lines[count + 1 :])
    if hashlib.sha256(rows.encode()).hexdigest() != header["sha256 of the rows below the column line"]:
        raise ValueError(f"canopy/data/materials/{name}.csv: rows do not match the checksum in the header")
    columns = tuple(lines[count].strip().split(","))
    values = np.array(rows.replace("\n", ",").rstrip(",").split(","), dtype=np.float64)
    return CsvTable(header, columns, values.reshape(-1, len(columns)))


@cache
def material(name: str) -> Material:
    """Return a shipped material; UserError for an unknown name."""
    if name not in NAMES:
        raise UserError(f'material "{name}": not known; one of {", ".join(NAMES)}{nearest(name, NAMES)}')
    table = read_table(name)
    h, v = table.header, table.values
    return Material(
        name,
        h["title"],
        v[:, 0].copy(),
        v[:, 1].copy(),
        v[:, 2].copy(),
        h["source"],
        h["licence"],
        h["bridged"],
    )


@cache
def reference_sunlight() -> tuple[Floats, Floats]:
    """Return ASTM G173-03 global sunlight: wavelength (µm) and W m-2 µm-1, .28-4 µm."""
    v = read_table("sunlight-g173").values
    return v[:, 0].copy(), v[:, 1] * 1000.0
