"""Which reader a weather file needs, told from its first lines."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from weather.errors import UserError
from weather.nrel import read_tmy3
from weather.raw import RawWeather
from weather.textfile import read_bytes, text_lines


def read_file(
    path: Path,
    columns: Mapping[str, str] | None = None,
    units: Mapping[str, str] | None = None,
) -> RawWeather:
    """Return a file's rows in SI units. UserError for anything that cannot be read."""
    data = read_bytes(path)
    lines = text_lines(data, path.name)
    second = lines[1] if len(lines) > 1 else ""
    if second.startswith("Date (MM/DD/YYYY)"):
        return read_tmy3(lines, path.name)
    raise UserError(f"weather -> file: {path.name} is none of the formats this program reads")
