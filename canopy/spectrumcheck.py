"""Bad optical input is refused with row and reason; instrument noise is clipped and said."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError

Floats = NDArray[np.float64]

NOISE_BELOW = -0.005  # lowest reading taken for noise
SUM_ABOVE = 1.02  # highest T + R taken for noise
SHORTEST_UM, LONGEST_UM = 0.1, 250.0
NEEDED_UM = (0.40, 0.70)
END_SLACK_UM = 0.005  # a range may fall short by a step of wavelength
MIN_ROWS = 4


@dataclass(frozen=True)
class CheckedSpectrum:
    """Fractions by wavelength (W,) inside 0 ... 1 with T + R <= 1, and in words what was clipped."""

    wavelength_um: Floats
    transmit: Floats
    front: Floats | None
    back: Floats | None
    notes: tuple[str, ...]
    scattered: Floats | None = None  # the part of `transmit` that leaves the straight direction


def check_spectrum(
    where: str,
    wavelength_um: Floats,
    transmit: Floats,
    front: Floats | None = None,
    back: Floats | None = None,
    scattered: Floats | None = None,
    *,
    needed_um: tuple[float, float] = NEEDED_UM,
    rows: Sequence[int] | None = None,
    min_rows: int = MIN_ROWS,
) -> CheckedSpectrum:
    """Return a laboratory spectrum after checks; `where` names the file, `rows` its row numbers.

    Raises
    ------
    UserError
        Row and reason: not a number, wavelengths unsorted or in nm, range too narrow, a fraction below -.005
        or above 1.02, T + R above 1.02, more scattered than comes through.
    """
    w = np.asarray(wavelength_um, dtype=np.float64)
    columns = {
        "transmittance": transmit,
        "reflectance": front,
        "back reflectance": back,
        "diffuse transmittance": scattered,
    }
    at = range(1, w.size + 1) if rows is None else rows
    given = {key: np.asarray(v, dtype=np.float64) for key, v in columns.items() if v is not None}
    for key, values in {"wavelength": w, **given}.items():
        if values.shape != w.shape:
            raise UserError(f"{where}: {values.size} values of {key} for {w.size} wavelengths")
        _refuse(where, ~np.isfinite(values), at, values, f"{key} is not a number")
    _check_wavelengths(where, w, needed_um, at, min_rows)
    notes: list[str] = []
    for key, values in given.items():
        _refuse(where, values < NOISE_BELOW, at, values, f"{key} below {NOISE_BELOW:g}; allowed is 0 to 1")
        _refuse(where, values > SUM_ABOVE, at, values, f"{key} above {SUM_ABOVE:g}; write fractions, 0 to 1")
        count = int(((values < 0.0) | (values > 1.0)).sum())
        if count:
            notes.append(f"{where}: {key} clipped to 0 ... 1 in {count} rows (noise)")
        given[key] = np.clip(values, 0.0, 1.0)
    t = given["transmittance"]
    for key in ("reflectance", "back reflectance"):
        if key in given:
            given[key] = _capped(where, t, given[key], key, at, notes)
    part = given.get("diffuse transmittance")
    if part is not None:
        more = part > t + SUM_ABOVE - 1.0
        _refuse(where, more, at, part, "diffuse transmittance above transmittance, of which it is a part")
        part = np.minimum(part, t)
    front, back = given.get("reflectance"), given.get("back reflectance")
    return CheckedSpectrum(w, t, front, back, tuple(notes), part)


def _capped(where: str, t: Floats, r: Floats, key: str, rows: Sequence[int], notes: list[str]) -> Floats:
    """Return reflectance with T + R <= 1; refuse sums beyond noise."""
    total = t + r
    _refuse(
        where,
        total > SUM_ABOVE,
        rows,
        total,
        f"transmittance + {key} above {SUM_ABOVE:g}; allowed is up to 1",
    )
    over = total > 1.0
    if over.any():
        notes.append(
            f"{where}: transmittance + {key} above 1 in {int(over.sum())} rows; {key} lowered (noise)"
        )
    return np.where(over, 1.0 - t, r)


def _check_wavelengths(
    where: str, w: Floats, needed_um: tuple[float, float], rows: Sequence[int], min_rows: int
) -> None:
    """Refuse too few rows, unsorted wavelengths, nm for µm, and a range that is too narrow."""
    if w.size < min_rows:
        raise UserError(f"{where}: {w.size} rows; a spectrum needs at least {min_rows}")
    if w.min() >= SHORTEST_UM * 1000.0 and w.max() > LONGEST_UM:
        raise UserError(
            f"{where}, row {rows[0]}: wavelength {w[0]:g} looks like nm; write µm ({w[0] / 1000.0:g})"
        )
    _refuse(
        where,
        (w < SHORTEST_UM) | (w > LONGEST_UM),
        rows,
        w,
        f"wavelength outside {SHORTEST_UM}-{LONGEST_UM:g} µm",
    )
    falls = np.concatenate([[False], np.diff(w) <= 0.0])
    _refuse(where, falls, rows, w, "wavelength does not rise; sort the rows, each wavelength once")
    if w[0] > needed_um[0] + END_SLACK_UM or w[-1] < needed_um[1] - END_SLACK_UM:
        raise UserError(
            f"{where}: wavelengths {w[0]:g}-{w[-1]:g} µm; {needed_um[0]:g}-{needed_um[1]:g} is needed"
        )


def _refuse(where: str, bad: NDArray[np.bool_], rows: Sequence[int], values: Floats, reason: str) -> None:
    """Raise for the first bad row."""
    if bad.any():
        first = int(np.argmax(bad))
        raise UserError(f"{where}, row {rows[first]}: found {values[first]:g}; {reason}")
