"""Reader for a station's or climate computer's own record: CSV or Parquet with named or mapped columns."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any, Final

import numpy as np

from weather import psychro
from weather.clock import civil_to_standard
from weather.errors import UserError, nearest
from weather.raw import RawWeather
from weather.record import Finding, Floats
from weather.stamps import Stamps, read_stamps
from weather.textfile import MAX_ROWS, joined_years, lost_rows, regular_step, table
from weather.units import MAPPABLE, NAMES, allowed_units, plain_name, to_si

if TYPE_CHECKING:
    import pandas as pd

SEPARATORS: Final = (",", ";", "\t")
MISSING: Final = (-9999.0, -999.0, -99.9, 9999.0, 99999.0, -6999.0, -7999.0)


@dataclass(frozen=True)
class Choice:
    """Which column holds a quantity, and in what unit."""

    quantity: str
    header: str
    unit: str


def choose(
    headers: list[str], columns: Mapping[str, str] | None, units: Mapping[str, str] | None, where: str
) -> list[Choice]:
    """Match columns to quantities: the mapping first, then well-known names. UserError when it fails."""
    for given in (columns or {}, units or {}):
        for key in given:
            if key not in MAPPABLE:
                raise UserError(
                    f'weather -> columns: "{key}" is no quantity, allowed {", ".join(MAPPABLE)}'
                    f"{nearest(key, MAPPABLE)}"
                )
    plain = {header: plain_name(header) for header in headers}
    result: list[Choice] = []
    taken: set[str] = set()
    for quantity in MAPPABLE:
        header = (columns or {}).get(quantity)
        if header is not None:
            if header not in headers:
                near = nearest(header, headers)
                raise UserError(f'weather -> columns -> {quantity}: {where} has no column "{header}"{near}')
        else:
            hits = [h for h in headers if plain[h][0] in NAMES[quantity] and h not in taken]
            if not hits:
                continue
            if len(hits) > 1 and quantity != "time":
                raise UserError(
                    f'{where}: the columns "{hits[0]}" and "{hits[1]}" both read as {quantity}; '
                    f"name one under weather -> columns"
                )
            header = hits[0]
        taken.add(header)
        unit = (units or {}).get(quantity) or plain[header][1]
        if quantity in ("time", "pressure", "relative_humidity"):
            result.append(Choice(quantity, header, unit or ""))  # without a unit these tell it by their size
        else:
            result.append(Choice(quantity, header, unit or allowed_units(quantity)[0]))
    found = [choice.quantity for choice in result]
    for needed in ("time", "temp_air"):
        if needed not in found:
            raise UserError(
                f"{where}: no column reads as {needed} (columns: {', '.join(headers)[:120]}); "
                f"name it under weather -> columns"
            )
    return result


def unit_by_size(quantity: str, numbers: Floats) -> str:
    """Tell Pa, hPa and kPa, or percent and fraction, by the size of the values."""
    known = numbers[np.isfinite(numbers)]
    if quantity == "pressure":
        middle = float(np.median(known)) if len(known) else 1e5
        return "pa" if middle > 2e3 else "hpa" if middle > 200.0 else "kpa"
    return "fraction" if len(known) and float(known.max()) <= 1.01 else "%"


def join_time(
    headers: list[str], body: list[str], separator: str, columns: Mapping[str, str] | None
) -> tuple[list[str], list[str]]:
    """Put a "stamp" column in front where date and time, or year, month, day and hour, stand apart."""
    plain = [plain_name(header)[0] for header in headers]
    if "time" in (columns or {}):
        return headers, body
    if "date" in plain and "time" in plain:
        places, form = [plain.index("date"), plain.index("time")], "{} {}"
    elif not any(name in NAMES["time"] for name in plain) and {"year", "month", "day", "hour"} <= set(plain):
        names = ["year", "month", "day", "hour", *(["minute"] if "minute" in plain else [])]
        places = [plain.index(name) for name in names]
        form = "{}-{}-{} {}:{}" if len(places) == 5 else "{}-{}-{} {}:00"
    else:
        return headers, body
    fresh = "stamp"
    while fresh in headers:
        fresh += "_"
    joined = []
    for line in body:
        parts = [part.strip().strip('"') for part in line.split(separator)]
        if not line.strip():
            joined.append("")
            continue
        stamp = form.format(*(parts[k] for k in places)) if len(parts) == len(headers) else ""
        if form.count(":") and len(places) == 5:
            head, _, minute = stamp.rpartition(":")
            stamp = f"{head}:{minute.zfill(2)}"
        joined.append(f"{stamp}{separator}{line}")
    apart = [f"part of {name}" if k in places else name for k, name in enumerate(headers)]
    return [fresh, *apart], joined


def read_logger_csv(
    lines: list[str],
    where: str,
    columns: Mapping[str, str] | None = None,
    units: Mapping[str, str] | None = None,
    timezone: str | None = None,
) -> RawWeather:
    """Delimited text: comments (#), one line of column names, then rows; comma, semicolon or tab.

    With semicolons or tabs a comma inside a number is a decimal comma. Rows of another shape or without a
    readable time are counted and left out.
    """
    first = next((k for k, line in enumerate(lines[:50]) if line.strip() and not line.startswith("#")), None)
    if first is None:
        raise UserError(f"{where}: no line of column names")
    separator = max(SEPARATORS, key=lines[first].count)
    headers = [name.strip().strip('"').strip() for name in lines[first].split(separator)]
    if len(headers) < 2:
        raise UserError(f'{where}, line {first + 1}: "{lines[first][:40]}" names no columns')
    named = [name for name in headers if name]
    for name in named:
        if named.count(name) > 1:
            raise UserError(f'{where}, line {first + 1}: the column "{name}" is there twice')
    body = lines[first + 1 :]
    headers, body = join_time(headers, body, separator, columns)
    chosen = choose(headers, columns, units, where)
    rows = table(body, headers, [choice.header for choice in chosen], first + 2, separator)
    if not len(rows.lines):
        raise UserError(f"{where}: no row could be read ({rows.rows_lost} rows of another shape)")
    texts = rows.frame[chosen[0].header].astype(str).tolist()
    stamps = read_stamps(texts, where)
    rows = rows.keep(stamps.good)
    values: dict[str, Floats] = {}
    for choice in chosen[1:]:
        if separator != ",":
            rows.frame[choice.header] = rows.frame[choice.header].str.replace(",", ".", regex=False)
        values[choice.header] = rows.numbers(choice.header)
    return _record(where, chosen, values, stamps, timezone, rows.rows_lost, rows.findings())


def read_logger_parquet(
    data: bytes,
    where: str,
    columns: Mapping[str, str] | None = None,
    units: Mapping[str, str] | None = None,
    timezone: str | None = None,
) -> RawWeather:
    """Parquet with one column of times (timestamps or text) and numbers in the others. Needs pyarrow."""
    try:
        import pyarrow as pa
        import pyarrow.parquet as pq
    except ImportError:
        raise UserError(f"{where}: reading Parquet needs the package pyarrow") from None
    try:
        file: Any = pq.ParquetFile(pa.BufferReader(data))
        count = int(file.metadata.num_rows)
        headers = [str(name) for name in file.schema_arrow.names]
    except Exception as error:  # damaged files raise many kinds
        raise UserError(f"{where}: not a readable Parquet file ({error.__class__.__name__})") from None
    if not 0 < count <= MAX_ROWS:
        raise UserError(f"{where}: {count} rows, allowed 1 to {MAX_ROWS}")
    chosen = choose(headers, columns, units, where)
    try:
        frame: pd.DataFrame = file.read(columns=[choice.header for choice in chosen]).to_pandas()
        frame = frame.reset_index()
    except Exception as error:
        raise UserError(f"{where}: the Parquet columns cannot be read ({error.__class__.__name__})") from None
    if len(frame) != count:
        raise UserError(f"{where}: {len(frame)} of {count} rows can be read")
    stamps = _parquet_times(frame, chosen[0].header, where)
    import pandas as pd

    values: dict[str, Floats] = {}
    for choice in chosen[1:]:
        numbers = np.array(pd.to_numeric(frame[choice.header], errors="coerce"), dtype=float)
        numbers[~np.isfinite(numbers)] = np.nan
        values[choice.header] = numbers[stamps.good]
    lost = int((~stamps.good).sum())
    first = int(np.flatnonzero(~stamps.good)[0]) + 1 if lost else 0
    return _record(where, chosen, values, stamps, timezone, lost, lost_rows(lost, first))


def _parquet_times(frame: pd.DataFrame, name: str, where: str) -> Stamps:
    import pandas as pd

    series = frame[name]
    if isinstance(series.dtype, pd.DatetimeTZDtype):
        times = series.dt.tz_convert("UTC").dt.tz_localize(None)
        utc = True
    elif pd.api.types.is_datetime64_any_dtype(series.dtype):
        times, utc = series, False
    else:
        return read_stamps([str(text) for text in series.tolist()], where)
    good = np.asarray(times.notna()) & np.asarray(times.dt.year.between(1800, 2200))
    if not good.any():
        raise UserError(f"{where}: the time column holds no time")
    seconds = np.array(times.where(good, pd.Timestamp("1970-01-01")), dtype="datetime64[s]")
    return Stamps(seconds, good, utc, "")


def _record(
    where: str,
    chosen: list[Choice],
    values: dict[str, Floats],
    stamps: Stamps,
    timezone: str | None,
    lost: int,
    findings: tuple[Finding, ...],
) -> RawWeather:
    stamp = stamps.time[stamps.good]
    if stamps.note:
        findings += (Finding("date-order", "note", stamps.note),)
    if timezone is not None and not stamps.utc:
        stamp, saving = civil_to_standard(stamp, timezone)
        findings += (saving,) if saving else ()
    step = regular_step(stamp, where)
    result: dict[str, Floats] = {}
    read: list[str] = []
    for choice in chosen[1:]:
        numbers = values[choice.header].copy()
        for code in MISSING:
            numbers[numbers == code] = np.nan
        spot = f'{where}, column "{choice.header}"'
        if not choice.unit:
            choice = replace(choice, unit=unit_by_size(choice.quantity, numbers))
        read.append(f'{choice.quantity} from "{choice.header}" in {choice.unit}')
        result[choice.quantity] = to_si(choice.quantity, numbers, choice.unit, step, spot)
        if choice.quantity == "ghi" and "umol" in choice.unit.lower().replace("µ", "u").replace("μ", "u"):
            text = "global radiation computed from photons (2.02 µmol of PAR per J of global radiation)"
            findings += (Finding("photons", "note", text),)
    vapour = result.pop("vapour_pressure", None)
    if vapour is not None and "temp_dew" not in result:
        result["temp_dew"] = psychro.dew_point(np.where(vapour > 0.0, vapour, np.nan), "water")
    said = ", ".join(read)
    findings += (Finding("columns", "note", f"columns: {said}"),)
    return RawWeather(
        title=where,
        source=f"{where}: a record of the user's own",
        format="logger",
        latitude=None,
        longitude=None,
        elevation=None,
        utc_offset_h=0.0 if stamps.utc else None,
        timezone=None,
        stamp=stamp,
        step_s=step,
        label="end",
        typical=joined_years(stamp),
        columns=result,
        rows_lost=lost,
        findings=findings,
    )
