"""Readers for the US typical years TMY3 and TMY2.

The rows are cut by pandas and NumPy rather than by pvlib.iotools so that a damaged row is counted instead of
ending in a traceback or shifting its neighbours; tests compare every column with pvlib's readers.
"""

from __future__ import annotations

import re
from typing import Final

import numpy as np

from weather.errors import UserError
from weather.raw import RawWeather, column
from weather.record import Floats
from weather.textfile import Table, joined_years, lost_rows, make_times, table

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


TMY2_HEAD: Final = re.compile(
    r"\s*(\S+)\s+(.+?)\s+(\S\S)\s+(-?\d+)\s+([NS])\s*(\d+)\s+(\d+)\s+([EW])\s*(\d+)\s+(\d+)\s+(-?\d+)"
)
TMY2_COLUMNS: Final = (
    ("ghi", 17, 21, (9999.0,), 1.0),
    ("dni", 23, 27, (9999.0,), 1.0),
    ("dhi", 29, 33, (9999.0,), 1.0),
    ("cloud_cover", 59, 61, (99.0,), 0.1),
    ("temp_air", 67, 71, (9999.0,), 0.1),
    ("temp_dew", 73, 77, (9999.0,), 0.1),
    ("relative_humidity", 79, 82, (999.0,), 1.0),
    ("pressure", 84, 88, (9999.0,), HPA),
    ("wind_speed", 95, 98, (999.0,), 0.1),
    ("precipitable_water", 123, 126, (999.0,), 0.1),  # mm
)
"""Quantity, first and last place in the row, missing codes, factor (Marion & Urban 1995, table 3-2)."""
TMY2_WIDTH: Final = 142


def read_tmy2(lines: list[str], where: str) -> RawWeather:
    """TMY2 (Marion & Urban 1995, NREL): fixed places, the hour BEFORE the stamp, local standard time."""
    head = TMY2_HEAD.match(lines[0])
    if head is None:
        raise UserError(f"{where}, line 1: not a TMY2 header (station, place, zone, N 00 00 W 00 00, metres)")
    number, city, state, zone, ns, lat_deg, lat_min, ew, lon_deg, lon_min, elevation = head.groups()
    latitude = (float(lat_deg) + float(lat_min) / 60.0) * (1.0 if ns == "N" else -1.0)
    longitude = (float(lon_deg) + float(lon_min) / 60.0) * (1.0 if ew == "E" else -1.0)
    kept = [(k, line) for k, line in enumerate(lines[1:], start=2) if line.strip()]
    good_rows = [(k, line) for k, line in kept if len(line.rstrip()) == TMY2_WIDTH and line.isascii()]
    lost, first_lost = len(kept) - len(good_rows), 0
    if lost:
        widths = {k for k, _ in good_rows}
        first_lost = next(k for k, _ in kept if k not in widths)
    if not good_rows:
        raise UserError(f"{where}: no row has the {TMY2_WIDTH} characters of TMY2")
    text = np.array([line.rstrip() for _, line in good_rows], dtype=f"S{TMY2_WIDTH}")
    letters = text.view("S1").reshape(len(text), TMY2_WIDTH)
    numbers = np.array([k for k, _ in good_rows])
    year, month, day, hour = (_fixed(letters, a, a + 2) for a in (1, 3, 5, 7))
    stamp, good = make_times(1900.0 + year, month, day, np.where(hour >= 1.0, hour * 3600.0, np.nan))
    if not good.any():
        raise UserError(f"{where}, line 2: no date in the first nine characters")
    if not good.all():
        first_bad = int(numbers[~good][0])
        lost += int((~good).sum())
        first_lost = min(first_lost, first_bad) if first_lost else first_bad
    columns = {
        name: column(_fixed(letters, a, b)[good], codes, factor) for name, a, b, codes, factor in TMY2_COLUMNS
    }
    columns["cloud_cover"] = clean_fraction(columns["cloud_cover"])
    stamp = stamp[good]
    return RawWeather(
        title=f"{city.strip().title()}, {state} (TMY2)",
        source=f"{where}: TMY2 station {number}",
        format="TMY2",
        latitude=latitude,
        longitude=longitude,
        elevation=float(elevation),
        utc_offset_h=float(zone),
        timezone=None,
        stamp=stamp,
        step_s=3600.0,
        label="end",
        typical=joined_years(stamp - np.timedelta64(3600, "s")),
        columns=columns,
        rows_lost=lost,
        findings=lost_rows(lost, first_lost),
    )


def _fixed(letters: np.ndarray[tuple[int, ...], np.dtype[np.bytes_]], begin: int, end: int) -> Floats:
    """Return the integers in fixed places of all rows, NaN where anything but blanks, sign, digits is."""
    codes = letters[:, begin:end].copy().view(np.uint8).reshape(len(letters), end - begin)
    digit = (codes >= 48) & (codes <= 57)
    blank = codes == 32
    minus = codes == 45
    value = np.zeros(len(codes))
    for k in range(end - begin):
        value = np.where(digit[:, k], 10.0 * value + (codes[:, k] - 48.0), value)
    # blanks, then at most one sign, then digits to the end
    kind = np.where(digit, 2, np.where(minus, 1, np.where(blank, 0, 9)))
    good = (kind <= 2).all(axis=1) & (np.diff(kind, axis=1) >= 0).all(axis=1) & (minus.sum(axis=1) <= 1)
    good &= digit[:, -1]
    return np.where(good, np.where(minus.any(axis=1), -value, value), np.nan)
