"""Read a laboratory's spectrum: wavelength, transmittance, reflectance (front, back), at normal incidence."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError

Floats = NDArray[np.float64]

MAX_BYTES = 8_000_000
MAX_ROWS = 100_000
SLACK = 0.02  # how far noise may carry a value out of 0..1, and T + R above 1

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


def read_lab_csv(path: Path) -> LabSpectrum:
    """Return the spectrum in a CSV file.

    Separator comma, semicolon or tab (decimal comma with the last two); lines that begin with # are skipped;
    the first other line names the columns. Raises UserError with file and row for whatever cannot be read.
    """
    lines = _lines(path)
    _, header = lines[0]
    separator = max(";\t,", key=header.count)
    columns, percent = _columns(path, header.split(separator))
    rows = [_numbers(path, number, text, separator, len(columns)) for number, text in lines[1:]]
    if len(rows) < 8:
        raise UserError(f"{path.name}: {len(rows)} rows of numbers; a spectrum needs at least 8")
    data = dict(zip(columns, np.array(rows).T, strict=True))
    wavelength, notes = _wavelength(path, data)
    order = np.argsort(wavelength, kind="stable")
    wavelength = wavelength[order]
    if (np.diff(wavelength) <= 0.0).any():
        at = wavelength[int(np.argmin(np.diff(wavelength)))]
        raise UserError(f"{path.name}: wavelength {at:g} µm stands twice; write each wavelength once")
    values: dict[str, Floats] = {
        key: _fraction(path, key, data[key][order], wavelength, percent, notes)
        for key in ("transmit", "front", "back", "scattered")
        if key in data
    }
    _check_sum(path, wavelength, values)
    return LabSpectrum(
        wavelength,
        values["transmit"],
        values.get("front"),
        values.get("back"),
        values.get("scattered"),
        tuple(notes),
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


def _wavelength(path: Path, data: dict[str, Floats]) -> tuple[Floats, list[str]]:
    notes: list[str] = []
    if "wavelength_um" in data:
        wave = data["wavelength_um"]
    elif "wavelength_nm" in data:
        wave = data["wavelength_nm"] / 1000.0
    else:
        raw = data["wavelength"]
        in_nm = float(np.median(raw)) > 120.0
        wave = raw / 1000.0 if in_nm else raw
        notes.append(f"wavelength without unit: read as {'nm' if in_nm else 'µm'}")
    if wave.min() < 0.15 or wave.max() > 120.0:
        raise UserError(
            f"{path.name}: wavelengths {wave.min():g}-{wave.max():g} µm; "
            "they lie in .15-120 µm (check nm and µm)"
        )
    return wave, notes


def _fraction(
    path: Path, key: str, values: Floats, wavelength: Floats, percent: set[str], notes: list[str]
) -> Floats:
    title = {"transmit": "transmittance", "front": "reflectance_front", "back": "reflectance_back"}.get(
        key, "transmittance_diffuse"
    )
    if key in percent or values.max() > 1.0 + SLACK:
        values = values / 100.0
        notes.append(f"{title} read as percent")
    bad = (values < -SLACK) | (values > 1.0 + SLACK)
    if bad.any():
        at = int(np.argmax(bad))
        raise UserError(
            f"{path.name}: {title} {values[at]:g} at {wavelength[at]:g} µm; it lies in 0-1 (or 0-100 %)"
        )
    return np.clip(values, 0.0, 1.0)


def _check_sum(path: Path, wavelength: Floats, values: dict[str, Floats]) -> None:
    for key in ("front", "back"):
        if key not in values:
            continue
        total = values["transmit"] + values[key]
        if (total > 1.0 + SLACK).any():
            at = int(np.argmax(total))
            raise UserError(
                f"{path.name}: transmittance + reflectance is {total[at]:.3f} at {wavelength[at]:g} µm; "
                "it cannot exceed 1"
            )
    if "scattered" in values and (values["scattered"] > values["transmit"] + SLACK).any():
        at = int(np.argmax(values["scattered"] - values["transmit"]))
        raise UserError(
            f"{path.name}: transmittance_diffuse exceeds transmittance at {wavelength[at]:g} µm; "
            "it is a part of it"
        )
