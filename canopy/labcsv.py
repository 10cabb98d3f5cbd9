"""Read a laboratory's spectrum: wavelength, transmittance, reflectance (front, back), at normal incidence."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from canopy.spectrumcheck import NEEDED_UM, check_spectrum
from weather.errors import UserError

Floats = NDArray[np.float64]

MAX_BYTES = 8_000_000
MAX_ROWS = 100_000
MIN_ROWS = 8
SURELY_PERCENT = 2.0  # no fraction, however noisy

_COLUMNS = {
    "wavelength": "wavelength",
    "wavelengthnm": "wavelength_nm",
    "wavelengthum": "wavelength_um",
    "wavelengthµm": "wavelength_um",
    "nm": "wavelength_nm",
    "um": "wavelength_um",
    "µm": "wavelength_um",
    "transmittance": "transmit",
    "t": "transmit",
    "transmittancediffuse": "scattered",
    "tdiffuse": "scattered",
    "reflectance": "front",
    "r": "front",
    "reflectancefront": "front",
    "rfront": "front",
    "reflectanceback": "back",
    "rback": "back",
}
_VALUES = ("transmit", "front", "back", "scattered")
_HELP = (
    "columns are wavelength_nm or wavelength_um, transmittance, reflectance_front, reflectance_back, "
    "and transmittance_diffuse if measured; fractions or percent"
)


@dataclass(frozen=True)
class LabSpectrum:
    """Normal-incidence values by wavelength (W,), rising. Absent columns are None."""

    wavelength_um: Floats
    transmit: Floats
    front: Floats | None
    back: Floats | None
    scattered: Floats | None  # the part of `transmit` that leaves the straight direction
    notes: tuple[str, ...]


def read_lab_csv(path: Path, *, needed_um: tuple[float, float] = NEEDED_UM) -> LabSpectrum:
    """Return the spectrum in a CSV file; it must cover `needed_um`.

    Separator comma, semicolon or tab (decimal comma with the last two); lines that begin with # are skipped;
    the first other line names the columns. Raises UserError with file and row for whatever cannot be read.
    """
    lines = _lines(path)
    _, header = lines[0]
    separator = max(";\t,", key=header.count)
    columns, percent = _columns(path, header.split(separator))
    table = [_numbers(path, number, text, separator, len(columns)) for number, text in lines[1:]]
    rows = [number for number, _ in lines[1:]]
    data = dict(zip(columns, np.array(table).reshape(-1, len(columns)).T, strict=True))
    wavelength, notes = _wavelength(data)
    values = _fractions({key: data[key] for key in _VALUES if key in data}, percent, notes)
    if (np.diff(wavelength) < 0.0).all():  # instruments scan down as often as up
        wavelength, rows = wavelength[::-1], rows[::-1]
        values = {key: column[::-1] for key, column in values.items()}
    transmit, *others = (values.get(key) for key in _VALUES)
    assert transmit is not None  # `_columns` asks for it
    checked = check_spectrum(
        path.name, wavelength, transmit, *others, needed_um=needed_um, rows=rows, min_rows=MIN_ROWS
    )
    return LabSpectrum(
        checked.wavelength_um,
        checked.transmit,
        checked.front,
        checked.back,
        checked.scattered,
        (*notes, *checked.notes),
    )


def _lines(path: Path) -> list[tuple[int, str]]:
    if not path.is_file():
        raise UserError(f"{path}: no such file; give the path of a CSV spectrum")
    if path.stat().st_size > MAX_BYTES:
        raise UserError(f"{path.name}: {path.stat().st_size / 1e6:.0f} MB; a spectrum has at most 8 MB")
    try:
        text = path.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError:
        raise UserError(f"{path.name}: not a text file in UTF-8; save it as CSV (UTF-8)") from None
    except OSError as problem:
        raise UserError(f"{path.name}: cannot be read ({problem.strerror})") from None
    lines = [
        (number, line)
        for number, line in enumerate(text.splitlines(), 1)
        if line.strip(" ,;\t") and not line.lstrip().startswith("#")
    ]
    if not lines:
        raise UserError(f"{path.name}: empty; {_HELP}")
    if len(lines) > MAX_ROWS:
        raise UserError(f"{path.name}: {len(lines)} rows; at most {MAX_ROWS}")
    return lines


def _columns(path: Path, cells: list[str]) -> tuple[list[str], set[str]]:
    """Return what each column holds, and which of them say that they are percent."""
    found, percent = [], set()
    for cell in cells:
        text = cell.strip().strip('"').lower()
        plain = re.sub(r"[\s_\-()\[\]%]|pct|percent", "", text)
        if plain not in _COLUMNS:
            raise UserError(f'{path.name}, header: column "{cell.strip()[:40]}" is not known; {_HELP}')
        found.append(_COLUMNS[plain])
        if re.search(r"%|pct|percent", text):
            percent.add(_COLUMNS[plain])
    repeated = {c for c in found if found.count(c) > 1}
    if repeated:
        raise UserError(f"{path.name}, header: two columns mean {sorted(repeated)[0]}; {_HELP}")
    if not any(c.startswith("wavelength") for c in found) or "transmit" not in found:
        raise UserError(f"{path.name}, header: wavelength and transmittance are needed; {_HELP}")
    return found, percent


def _numbers(path: Path, number: int, text: str, separator: str, count: int) -> list[float]:
    cells = [cell.strip().strip('"') for cell in text.rstrip("\r\n").split(separator)]
    while len(cells) > count and not cells[-1]:
        cells.pop()
    if len(cells) != count:
        raise UserError(f"{path.name}, row {number}: {len(cells)} cells; the header has {count}")
    values = []
    for cell in cells:
        clean = cell if separator == "," else cell.replace(",", ".")
        try:
            value = float(clean.rstrip("%"))
        except ValueError:
            raise UserError(f'{path.name}, row {number}: "{cell[:40]}" is not a number') from None
        if not np.isfinite(value):
            raise UserError(f'{path.name}, row {number}: "{cell[:40]}" is not a number')
        values.append(value)
    return values


def _wavelength(data: dict[str, Floats]) -> tuple[Floats, list[str]]:
    """Return wavelengths in µm; without a unit in the header, large ones are nm."""
    if "wavelength_um" in data:
        return data["wavelength_um"], []
    if "wavelength_nm" in data:
        return data["wavelength_nm"] / 1000.0, []
    raw = data["wavelength"]
    in_nm = raw.size > 0 and float(np.median(raw)) > 120.0
    note = f"wavelength without unit: read as {'nm' if in_nm else 'µm'}"
    return (raw / 1000.0 if in_nm else raw), [note]


def _fractions(values: dict[str, Floats], percent: set[str], notes: list[str]) -> dict[str, Floats]:
    """Return fractions: a file is in percent when a header says so or a value is too large for a fraction."""
    large = [key for key, column in values.items() if column.size and column.max() > SURELY_PERCENT]
    if not percent and not large:
        return values
    notes.append("values read as percent")
    return {key: column / 100.0 for key, column in values.items()}
