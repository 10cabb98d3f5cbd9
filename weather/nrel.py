"""Readers for the US typical years TMY3 and TMY2 and for NSRDB PSM files.

The rows are cut by pandas and NumPy rather than by pvlib.iotools so that a damaged row is counted instead of
ending in a traceback or shifting its neighbours; tests compare every column with pvlib's readers.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from weather.errors import UserError
from weather.raw import RawWeather, column
from weather.record import Floats
from weather.textfile import Table, joined_years, make_times, table

HPA: Final = 100.0
TMY3_MISSING: Final = (-9900.0, -99.0, 9999.0)

TMY3_COLUMNS: Final = {
    "ghi": ("GHI (W/m^2)", 1.0),
    "dni": ("DNI (W/m^2)", 1.0),
    "dhi": ("DHI (W/m^2)", 1.0),
    "temp_air": ("Dry-bulb (C)", 1.0),
    "temp_dew": ("Dew-point (C)", 1.0),
    "relative_humidity": ("RHum (%)", 1.0),
    "pressure": ("Pressure (mbar)", HPA),
    "wind_speed": ("Wspd (m/s)", 1.0),
    "precipitable_water": ("Pwat (cm)", 1.0),
    "albedo": ("Alb (unitless)", 1.0),
    "cloud_cover": ("TotCld (tenths)", 0.1),
}


def header_float(text: str, what: str, where: str) -> float:
    """Return a header number; UserError naming the field when it is none."""
    try:
        value = float(text)
    except ValueError:
        value = float("nan")
    if not np.isfinite(value):
        raise UserError(f'{where}, header: {what} is "{text.strip()[:30]}", a number is needed')
    return value


def no_rows(found: Table, where: str) -> UserError:
    """Return the error for a file of which no row could be read."""
    return UserError(f"{where}: no row could be read ({found.rows_lost} rows of another shape)")


def clean_fraction(values: Floats) -> Floats:
    """Albedo or cloud cover: anything outside 0..1 is a gap, and so is an albedo column of zeros."""
    result = np.where((values >= 0.0) & (values <= 1.0), values, np.nan)
    return np.asarray(result)


def read_tmy3(lines: list[str], where: str) -> RawWeather:
    """TMY3 (Wilcox & Marion 2008, NREL/TP-581-43156): the hour BEFORE the stamp, local standard time."""
    head = lines[0].replace('"', "").split(",")
    if len(head) < 7:
        raise UserError(f"{where}, line 1: {len(head)} fields, a TMY3 header has 7")
    header = [name.strip() for name in lines[1].replace('"', "").split(",")] if len(lines) > 1 else []
    date, clock = "Date (MM/DD/YYYY)", "Time (HH:MM)"
    wanted = [date, clock, *(name for name, _ in TMY3_COLUMNS.values())]
    for name in (date, clock, "GHI (W/m^2)", "Dry-bulb (C)"):
        if name not in header:
            raise UserError(f'{where}, line 2: the column "{name}" is missing')
    rows = table(lines[2:], header, wanted, first_line=3)
    if not len(rows.lines):
        raise no_rows(rows, where)
    month, day, year = rows.parts(date, "/", 3)
    hour, minute = rows.parts(clock, ":", 2)
    stamp, good = make_times(year, month, day, hour * 3600.0 + minute * 60.0)
    if not good.any():
        raise UserError(f"{where}, line {rows.lines[0]}: no date of the form MM/DD/YYYY HH:MM")
    rows, stamp = rows.keep(good), stamp[good]
    columns = {
        key: column(rows.numbers(name), TMY3_MISSING, scale)
        for key, (name, scale) in TMY3_COLUMNS.items()
        if rows.has(name)
    }
    for key in ("albedo", "cloud_cover"):
        if key in columns:
            columns[key] = clean_fraction(columns[key])
    if "albedo" in columns:
        columns["albedo"][columns["albedo"] <= 0.0] = np.nan  # unknown is written as 0.000 with flag "?"
    return RawWeather(
        title=f"{head[1].strip().title()}, {head[2].strip()} (TMY3)",
        source=f"{where}: TMY3 station {head[0].strip()}",
        format="TMY3",
        latitude=header_float(head[4], "latitude", where),
        longitude=header_float(head[5], "longitude", where),
        elevation=header_float(head[6], "elevation", where),
        utc_offset_h=header_float(head[3], "time zone", where),
        timezone=None,
        stamp=stamp,
        step_s=3600.0,
        label="end",
        typical=joined_years(stamp),
        columns=columns,
        rows_lost=rows.rows_lost,
        findings=rows.findings(),
    )
