"""Reader for NSRDB PSM files (CSV): instants at the stamp, in the time zone that the header names."""

from __future__ import annotations

from typing import Final

from weather.errors import UserError
from weather.nrel import HPA, clean_fraction, header_float, no_rows
from weather.raw import RawWeather, column
from weather.textfile import joined_years, make_times, regular_step, table

COLUMNS: Final = {
    "ghi": ("GHI", 1.0),
    "dni": ("DNI", 1.0),
    "dhi": ("DHI", 1.0),
    "temp_air": ("Temperature", 1.0),
    "temp_dew": ("Dew Point", 1.0),
    "relative_humidity": ("Relative Humidity", 1.0),
    "pressure": ("Pressure", HPA),
    "wind_speed": ("Wind Speed", 1.0),
    "precipitable_water": ("Precipitable Water", 1.0),
    "albedo": ("Surface Albedo", 1.0),
}
UNITS: Final = {
    "GHI": ("w/m2",),
    "DNI": ("w/m2",),
    "DHI": ("w/m2",),
    "Temperature": ("c",),
    "Dew Point": ("c",),
    "Pressure": ("mbar", "millibar", "hpa"),
    "Wind Speed": ("m/s", "m s-1"),
    "Precipitable Water": ("cm",),
}
CLOCK: Final = ("Year", "Month", "Day", "Hour", "Minute")
MISSING: Final = (-9999.0, -999.0)


def read_psm(lines: list[str], where: str) -> RawWeather:
    """NSRDB PSM (Sengupta et al. 2018): two header lines, a column line, any step from 5 minutes to an hour.

    UserError for a header without a place, or units other than the usual. Odd rows are counted and left out.
    """
    if len(lines) < 4:
        raise UserError(f"{where}: {len(lines)} lines, an NSRDB file has two header lines, names and rows")
    head = dict(
        zip((k.strip() for k in lines[0].split(",")), (v.strip() for v in lines[1].split(",")), strict=False)
    )
    names = [name.strip() for name in lines[2].split(",")]
    for name in (*CLOCK, "GHI"):
        if name not in names:
            raise UserError(f'{where}, line 3: the column "{name}" is missing')
    for name, allowed in UNITS.items():
        unit = head.get(f"{name} Units", allowed[0]).lower()
        if unit not in allowed:
            raise UserError(f'{where}, line 2: {name} in "{unit}", allowed {allowed[0]}')
    rows = table(lines[3:], names, [*CLOCK, *(name for name, _ in COLUMNS.values())], first_line=4)
    if not len(rows.lines):
        raise no_rows(rows, where)
    year, month, day, hour, minute = (rows.numbers(name) for name in CLOCK)
    stamp, good = make_times(year, month, day, hour * 3600.0 + minute * 60.0)
    if not good.any():
        raise UserError(f"{where}, line {rows.lines[0]}: no date in Year,Month,Day,Hour,Minute")
    rows, stamp = rows.keep(good), stamp[good]
    columns = {
        key: column(rows.numbers(name), MISSING, factor)
        for key, (name, factor) in COLUMNS.items()
        if rows.has(name)
    }
    if "albedo" in columns:
        columns["albedo"] = clean_fraction(columns["albedo"])
    zone = header_float(head.get("Time Zone", ""), "time zone", where)
    return RawWeather(
        title=f"NSRDB {head.get('Location ID', '')} at {head.get('Latitude')}, {head.get('Longitude')}",
        source=f"{where}: NSRDB PSM {head.get('Version', '')}, location {head.get('Location ID', '')}",
        format="NSRDB PSM",
        latitude=header_float(head.get("Latitude", ""), "latitude", where),
        longitude=header_float(head.get("Longitude", ""), "longitude", where),
        elevation=header_float(head.get("Elevation", ""), "elevation", where),
        utc_offset_h=zone,
        timezone=None,
        stamp=stamp,
        step_s=regular_step(stamp, where),
        label="middle",
        typical=joined_years(stamp),
        columns=columns,
        rows_lost=rows.rows_lost,
        findings=rows.findings(),
        sun_offset_s=0.0,
    )
