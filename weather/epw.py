"""Reader for EPW files (the format of building energy programs), with the header's design conditions."""

from __future__ import annotations

import re
from typing import Final

import numpy as np

from weather.errors import UserError
from weather.nrel import clean_fraction, header_float, no_rows
from weather.raw import RawWeather, column
from weather.record import DesignConditions, Finding, Floats
from weather.textfile import Table, joined_years, make_times, table

FIELDS: Final = (
    ("temp_air", 6, (99.9,), 1.0),
    ("temp_dew", 7, (99.9,), 1.0),
    ("relative_humidity", 8, (999.0,), 1.0),
    ("pressure", 9, (999999.0,), 1.0),
    ("longwave_down", 12, (9999.0,), 1.0),
    ("ghi", 13, (9999.0,), 1.0),
    ("dni", 14, (9999.0,), 1.0),
    ("dhi", 15, (9999.0,), 1.0),
    ("wind_speed", 21, (999.0,), 1.0),
    ("cloud_cover", 22, (99.0,), 0.1),
    ("precipitable_water", 28, (999.0,), 0.1),  # mm
    ("albedo", 32, (999.0, 99.0), 1.0),
)
"""Quantity, place in the row, missing codes, factor to SI (EPW data dictionary, US DOE)."""

MOST_FIELDS: Final = 35
LEAST_FIELDS: Final = 29
TYPICAL_WORDS: Final = re.compile(
    r"\b(TMY\w*|TRY\w*|IWEC\w*|CWEC\w*|CTYW|CZ\d*|TDY|typical|IGDG|RMY)\b", re.I
)
SUN_OFFSET: Final = re.compile(r"Irradiance Time Offset \(h\):\s*(-?\d+\.?\d*)")


def read_epw(lines: list[str], where: str) -> RawWeather:
    """EPW: values of the hour BEFORE the stamp, hours 1..24 of local standard time, header of eight lines.

    UserError for a header without a place. Rows of another shape or without a date are counted and left out.
    """
    head = [part.strip() for part in lines[0].split(",")]
    if len(head) < 10:
        raise UserError(f"{where}, line 1: {len(head)} fields, a LOCATION line has 10")
    first = next((k for k, line in enumerate(lines[:40]) if line.upper().startswith("DATA PERIODS")), None)
    if first is None:
        raise UserError(f"{where}: no DATA PERIODS line in the first 40 lines")
    step_s, findings = _step(lines[first], where)
    rows = _rows(lines[first + 1 :], first + 2, where)
    year, month, day, hour, minute = (rows.numbers(name) for name in ("0", "1", "2", "3", "4"))
    seconds = hour * 3600.0 if step_s == 3600.0 else (hour - 1.0) * 3600.0 + minute * 60.0
    if not ((year >= 1800) & (year <= 2200)).any():
        year = np.full(len(year), 1990.0)  # some producers write no year: the nominal one takes them
    stamp, good = make_times(year, month, day, np.where(hour >= 1.0, seconds, np.nan))
    if not good.any():
        raise UserError(f"{where}, line {rows.lines[0]}: no date of the form year,month,day,hour")
    rows, stamp = rows.keep(good), stamp[good]
    columns = {name: column(rows.numbers(str(k)), codes, factor) for name, k, codes, factor in FIELDS}
    _clean(columns)
    comments = " ".join(line for line in lines[:first] if line.upper().startswith("COMMENTS"))
    offset = SUN_OFFSET.search(comments)
    years = stamp - np.timedelta64(round(step_s), "s")
    typical = joined_years(years) or _says_typical(head, comments, years.astype("datetime64[Y]"))
    return RawWeather(
        title=f"{head[1].title() if head[1] else 'Unnamed place'} (EPW{', ' + head[4] if head[4] else ''})",
        source=f"{where}: EPW, {head[4] or 'source not named'}, station {head[5] or 'not named'}",
        format="EPW",
        latitude=header_float(head[6], "latitude", where),
        longitude=header_float(head[7], "longitude", where),
        elevation=header_float(head[9], "elevation", where),
        utc_offset_h=header_float(head[8], "time zone", where),
        timezone=None,
        stamp=stamp,
        step_s=step_s,
        label="end",
        typical=typical,
        columns=columns,
        rows_lost=rows.rows_lost,
        findings=(*findings, *rows.findings()),
        design=_design(lines[: first + 1]),
        sun_offset_s=3600.0 * float(offset[1]) if offset else None,
    )


def _step(line: str, where: str) -> tuple[float, list[Finding]]:
    """Return the step in s from "DATA PERIODS,number,records per hour,..."."""
    parts = line.split(",")
    try:
        per_hour = int(parts[2])
    except (IndexError, ValueError):
        raise UserError(f"{where}: the DATA PERIODS line does not tell the records per hour") from None
    if per_hour not in (1, 2, 3, 4, 5, 6, 10, 12, 15, 20, 30, 60):
        raise UserError(f"{where}: {per_hour} records per hour, allowed divisors of 60")
    return 3600.0 / per_hour, []


def _rows(lines: list[str], first_line: int, where: str) -> Table:
    """Cut the rows; some producers leave the last fields away, all rows of a file alike."""
    counts = [line.count(",") + 1 for line in lines[:200] if line.strip()]
    if not counts:
        raise UserError(f"{where}: no rows after the header")
    fields = max(set(counts), key=counts.count)
    if not LEAST_FIELDS <= fields <= MOST_FIELDS + 5:
        raise UserError(f"{where}, line {first_line}: {fields} fields, an EPW row has {MOST_FIELDS}")
    wanted = [str(k) for k in (0, 1, 2, 3, 4, *(k for _, k, _, _ in FIELDS))]
    names = [str(k) for k in range(max(fields, 33))]
    if fields < 33:
        lines = [line + "," * (33 - fields) if line.count(",") == fields - 1 else line for line in lines]
    found = table(lines, names, wanted, first_line)
    if not len(found.lines):
        raise no_rows(found, where)
    return found


def _clean(columns: dict[str, Floats]) -> None:
    """Turn what stands for 'not known' without a code of its own into gaps, in place."""
    for name in ("albedo", "cloud_cover"):
        columns[name] = clean_fraction(columns[name])
    for name, least in (("albedo", 1e-6), ("precipitable_water", 1e-6), ("longwave_down", 30.0)):
        columns[name][columns[name] < least] = np.nan
    columns["precipitable_water"][columns["precipitable_water"] > 12.0] = np.nan
    columns["pressure"][columns["pressure"] < 1000.0] = np.nan


def _says_typical(
    head: list[str], comments: str, years: np.ndarray[tuple[int, ...], np.dtype[np.datetime64]]
) -> bool:
    """One calendar year is a typical year when source or comments say so."""
    if len(np.unique(years)) > 2:
        return False
    return bool(TYPICAL_WORDS.search(f"{head[4]} {comments}"))


def _design(header: list[str]) -> DesignConditions | None:
    """Return the heating design temperatures (99.6 and 99 %) of the DESIGN CONDITIONS line, if any."""
    for line in header:
        parts = [part.strip() for part in line.split(",")]
        if parts[0].upper() != "DESIGN CONDITIONS" or "Heating" not in parts:
            continue
        k = parts.index("Heating")
        try:
            values = float(parts[k + 2]), float(parts[k + 3])
        except (IndexError, ValueError):
            return None
        if all(-80.0 < value < 40.0 for value in values) and values[0] <= values[1]:
            return DesignConditions(*values, source=parts[2] or "header of the EPW file")
    return None
