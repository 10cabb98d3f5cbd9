"""Which reader a weather file needs, told from its first lines."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Final

from weather.epw import read_epw
from weather.errors import UserError
from weather.logger import read_logger_csv, read_logger_parquet
from weather.nrel import TMY2_HEAD, read_tmy2, read_tmy3
from weather.nsrdb import read_psm
from weather.pvgis import read_pvgis_csv, read_pvgis_json
from weather.raw import RawWeather
from weather.textfile import read_bytes, text_lines

FORMATS: Final = (
    "EPW, TMY3, TMY2, PVGIS typical year (CSV, JSON), NSRDB PSM, and CSV or Parquet with named columns"
)
SUFFIXES: Final = (".epw", ".csv", ".tm2", ".json", ".parquet", ".txt", ".dat")


def read_file(
    path: Path,
    columns: Mapping[str, str] | None = None,
    units: Mapping[str, str] | None = None,
    timezone: str | None = None,
) -> RawWeather:
    """Return a file's rows in SI units. UserError for anything that cannot be read.

    `columns`, `units` and `timezone` serve a logger's own record (weather.logger).
    """
    data = read_bytes(path)
    where = path.name
    try:
        return _read(data, where, columns, units, timezone)
    except (MemoryError, RecursionError) as error:
        raise UserError(f"weather -> file: {where} cannot be read ({error.__class__.__name__})") from None


def _read(
    data: bytes,
    where: str,
    columns: Mapping[str, str] | None,
    units: Mapping[str, str] | None,
    timezone: str | None,
) -> RawWeather:
    if data[:4] == b"PAR1":
        return read_logger_parquet(data, where, columns, units, timezone)
    lines = text_lines(data, where)
    first = lines[0].lstrip()
    if columns:
        return read_logger_csv(lines, where, columns, units, timezone)
    if first.startswith("{"):
        return read_pvgis_json("\n".join(lines), where)
    if first.upper().startswith("LOCATION,"):
        return read_epw(lines, where)
    if len(lines) > 1 and lines[1].lstrip('"').startswith("Date (MM/DD/YYYY)"):
        return read_tmy3(lines, where)
    if first.startswith("Source,Location ID"):
        return read_psm(lines, where)
    if any(line.startswith("time(UTC),T2m") for line in lines[:80]):
        return read_pvgis_csv(lines, where)
    if TMY2_HEAD.match(lines[0]) is not None:
        return read_tmy2(lines, where)
    try:
        return read_logger_csv(lines, where, columns, units, timezone)
    except UserError as error:
        raise UserError(f"{error} [read as a table, as {where} is none of: {FORMATS}]") from None
