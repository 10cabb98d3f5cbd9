"""Readers for PVGIS typical years, CSV and JSON: instants in UTC, so many minutes after the full hour."""

from __future__ import annotations

import json
import re
from typing import Any, Final

import numpy as np

from weather.errors import UserError
from weather.nrel import header_float, no_rows
from weather.raw import RawWeather, column
from weather.record import Finding, Floats, Times
from weather.textfile import joined_years, make_times, table

COLUMNS: Final = {
    "ghi": "G(h)",
    "dni": "Gb(n)",
    "dhi": "Gd(h)",
    "temp_air": "T2m",
    "relative_humidity": "RH",
    "pressure": "SP",
    "wind_speed": "WS10m",
    "longwave_down": "IR(h)",
}
NEEDED: Final = ("time(UTC)", "G(h)", "T2m")
STAMP: Final = re.compile(r"(\d{4})(\d{2})(\d{2}):(\d{2})(\d{2})")
MISSING: Final = (-9999.0, 9999.0, 999999.0)
BAD_ROW: Final = ("nan",) * 5


def read_pvgis_csv(lines: list[str], where: str) -> RawWeather:
    """PVGIS typical year as CSV. Rows of another shape are counted and left out, but the footer."""
    first = next((k for k, line in enumerate(lines[:80]) if line.startswith("time(UTC),")), None)
    if first is None:
        raise UserError(f'{where}: no column line that begins with "time(UTC)" in the first 80 lines')
    names = [name.strip() for name in lines[first].split(",")]
    _check_columns(names, where)
    head: dict[str, str] = {}
    for line in lines[:first]:
        key, colon, value = line.partition(":")
        if colon:
            head[key.strip()] = value.strip()
    body = lines[first + 1 :]
    last = next((k for k, line in enumerate(body) if k > 8000 and not line.strip()), len(body))
    rows = table(body[:last], names, ["time(UTC)", *COLUMNS.values()], first + 2)
    if not len(rows.lines):
        raise no_rows(rows, where)
    stamp, good = _stamps(rows.frame["time(UTC)"].tolist())
    if not good.any():
        raise UserError(f"{where}, line {rows.lines[0]}: no time of the form YYYYMMDD:HHMM")
    rows, stamp = rows.keep(good), stamp[good]
    columns = {key: column(rows.numbers(name), MISSING) for key, name in COLUMNS.items() if rows.has(name)}
    place = [
        header_float(head[key], key.split(" (")[0].lower(), where) if key in head else None
        for key in ("Latitude (decimal degrees)", "Longitude (decimal degrees)", "Elevation (m)")
    ]
    offset = header_float(head.get("Irradiance Time Offset (h)", "0"), "irradiance time offset", where)
    return _record(where, place, offset, stamp, columns, rows.rows_lost, rows.findings())


def read_pvgis_json(text: str, where: str) -> RawWeather:
    """PVGIS typical year as JSON."""
    try:
        data: Any = json.loads(text)
        location = data["inputs"]["location"]
        hourly = data["outputs"]["tmy_hourly"]
    except (ValueError, KeyError, TypeError, RecursionError) as error:
        raise UserError(
            f"{where}: not a PVGIS typical year in JSON ({error.__class__.__name__}: {str(error)[:60]})"
        ) from None
    if not isinstance(hourly, list) or not hourly or not isinstance(location, dict):
        raise UserError(f"{where}: outputs -> tmy_hourly holds no rows")
    rows = [row for row in hourly if isinstance(row, dict)]
    lost = len(hourly) - len(rows)
    _check_columns(list(rows[0]) if rows else [], where)
    stamp, good = _stamps([str(row.get("time(UTC)", "")) for row in rows])
    lost += int((~good).sum())
    if not good.any():
        raise UserError(f"{where}: no time of the form YYYYMMDD:HHMM")
    columns = {
        key: column(np.array([_number(row.get(name)) for row in rows])[good], MISSING)
        for key, name in COLUMNS.items()
    }
    place: list[float | None] = [
        header_float(str(location.get(key, "")), key, where) for key in ("latitude", "longitude", "elevation")
    ]
    offset = header_float(str(location.get("irradiance_time_offset", 0.0)), "irradiance_time_offset", where)
    findings: tuple[Finding, ...] = ()
    if lost:
        findings = (
            Finding("rows-lost", "warning", f"{lost} rows could not be read and were left out", lost),
        )
    return _record(where, place, offset, stamp[good], columns, lost, findings)


def _number(value: object) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        return float("nan")
    try:
        number = float(value)
    except OverflowError:
        return float("nan")
    return number if np.isfinite(number) else float("nan")


def _check_columns(names: list[str], where: str) -> None:
    for name in NEEDED:
        if name not in names:
            raise UserError(f'{where}: the column "{name}" is missing')


def _stamps(texts: list[str]) -> tuple[Times, np.ndarray[tuple[int, ...], np.dtype[np.bool_]]]:
    found = [
        match.groups() if (match := STAMP.fullmatch(text.strip())) is not None else BAD_ROW for text in texts
    ]
    parts = np.array(found, dtype=float).T
    return make_times(parts[0], parts[1], parts[2], parts[3] * 3600.0 + parts[4] * 60.0)


def _record(
    where: str,
    place: list[float | None],
    offset_h: float,
    stamp: Times,
    columns: dict[str, Floats],
    lost: int,
    findings: tuple[Finding, ...],
) -> RawWeather:
    latitude, longitude, elevation = place
    if abs(offset_h) > 1.0:
        raise UserError(f"{where}: irradiance time offset {offset_h:g} h, allowed -1 to 1")
    if "longwave_down" in columns:
        columns["longwave_down"][columns["longwave_down"] < 30.0] = np.nan
    return RawWeather(
        title="PVGIS typical year" + ("" if None in place else f" at {latitude:.2f}, {longitude:.2f}"),
        source=f"{where}: PVGIS typical year (European Union), satellite radiation and reanalysis",
        format="PVGIS",
        latitude=latitude,
        longitude=longitude,
        elevation=elevation,
        utc_offset_h=0.0,
        timezone=None,
        stamp=stamp,
        step_s=3600.0,
        label="start",
        typical=joined_years(stamp),
        columns=columns,
        rows_lost=lost,
        findings=findings,
        sun_offset_s=3600.0 * offset_h,
    )
