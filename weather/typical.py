"""Typical years that come along (pvlib's data files) and the computed clear-sky year."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np

from weather.errors import UserError, nearest


@dataclass(frozen=True)
class ShippedYear:
    """A typical year inside the pvlib package."""

    name: str
    file: str
    title: str
    source: str
    timezone: str


SHIPPED: Final = (
    ShippedYear(
        "greensboro",
        "723170TYA.CSV",
        "Greensboro, North Carolina (36.1 N), typical year TMY3",
        "NREL TMY3 723170 Greensboro Piedmont Triad Int (US public data), as shipped with pvlib",
        "America/New_York",
    ),
    ShippedYear(
        "sand-point",
        "703165TY.csv",
        "Sand Point, Alaska (55.3 N), typical year TMY3",
        "NREL TMY3 703165 Sand Point (US public data), as shipped with pvlib",
        "America/Anchorage",
    ),
    ShippedYear(
        "miami",
        "12839.tm2",
        "Miami, Florida (25.8 N), typical year TMY2",
        "NREL TMY2 12839 Miami (US public data), as shipped with pvlib",
        "America/New_York",
    ),
)


def shipped_names() -> tuple[str, ...]:
    """Return the names of the typical years that come along."""
    return tuple(year.name for year in SHIPPED)


def shipped_year(name: str) -> ShippedYear:
    """Return one of them; UserError with the nearest name when there is none."""
    for year in SHIPPED:
        if year.name == name:
            return year
    names = shipped_names()
    raise UserError(f'weather -> shipped: "{name}" is not among {", ".join(names)}{nearest(name, names)}')


def shipped_path(year: ShippedYear) -> Path:
    """Return where pvlib keeps the file (found without importing pvlib)."""
    from importlib.util import find_spec

    spec = find_spec("pvlib")
    if spec is None or spec.origin is None:
        raise UserError(
            "weather -> shipped: the package pvlib, which carries the typical years, is not installed"
        )
    path = Path(spec.origin).parent / "data" / year.file
    if not path.is_file():
        raise UserError(
            f"weather -> shipped: this pvlib does not carry {year.file} any more; give a weather file"
        )
    return path


def nominal_hours() -> np.ndarray[tuple[int, ...], np.dtype[np.datetime64]]:
    """Return the starts of the 8760 hours of the nominal year, datetime64[s]."""
    start = np.datetime64("1990-01-01T00:00:00", "s")
    return start + np.arange(8760) * np.timedelta64(3600, "s")
