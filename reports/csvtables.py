"""Tables as text: hourly.csv, daily.csv, monthly.csv, sizing.csv, and hourly.parquet. Always SI.

Digits are fixed by unit (`HOURLY_DIGITS`, `DAILY_DIGITS`) so that adding up a printed day lands within one
unit of the last printed digit of daily.csv. An empty cell means "no such value" (a set-point of an unheated
house).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from importlib.util import find_spec
from pathlib import Path
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.columns import COLUMNS, DAILY, day_unit
from canopy.ledger import groups
from canopy.run import CandidateRun, Run

Floats = NDArray[np.float64]

HOURLY_DIGITS: Final = {
    "W/m2": 3,
    "µmol m-2 s-1": 2,
    "kg m-2 h-1": 5,
    "1": 4,
    "°C": 3,
    "m2/m2": 3,
    "%": 2,
    "kPa": 4,
    "1/h": 3,
}
DAILY_DIGITS: Final = {
    "kWh/m2": 4,
    "mol/m2": 3,
    "kg m-2": 3,
    "h": 2,
    "°C": 2,
    "%": 1,
    "kPa": 3,
    "1/h": 2,
}
OTHER_DIGITS: Final = 3
CLOSURE_DIGITS: Final = 6  # the gap of a budget is far smaller than its parts
UNSAFE_FIRST: Final = "=+-@＝＋－＠"  # a spreadsheet would take the cell for a formula
ROWS_AT_ONCE: Final = 8192
DLI_COLUMNS: Final = ("outside_dli_mol_m2_d", "inside_dli_mol_m2_d")


def safe_text(text: str) -> str:
    """Return a text cell that no spreadsheet takes for a formula: an apostrophe goes before a risky start."""
    plain = "".join(c if c.isprintable() else " " for c in text)
    return f"'{plain}" if plain.lstrip()[:1] in UNSAFE_FIRST and plain.strip() else plain


def quoted(text: str) -> str:
    """Return a safe text cell, quoted where CSV asks for it (RFC 4180)."""
    cell = safe_text(text)
    return '"' + cell.replace('"', '""') + '"' if any(c in cell for c in ',"\r\n') else cell


def zone_offset(utc_offset_h: float) -> str:
    """Return "+05:30" for 5.5 h."""
    minutes = round(abs(utc_offset_h) * 60)
    return f"{'-' if utc_offset_h < 0 else '+'}{minutes // 60:02d}:{minutes % 60:02d}"


def rounded(values: Floats, digits: int) -> Floats:
    """Return values rounded to printed digits, without a negative zero."""
    return np.asarray(np.round(values, digits) + 0.0)


def hourly_digits(name: str, unit: str) -> int:
    """Return how many decimals an hourly column prints."""
    return CLOSURE_DIGITS if name == "closure_w_m2" else HOURLY_DIGITS.get(unit, OTHER_DIGITS)


def daily_units() -> dict[str, str]:
    """Return the unit of every daily column."""
    return {day: day_unit(column, how) for day, column, how in DAILY}


def hourly_numbers(run: Run) -> dict[str, Floats]:
    """Return every hourly column over all candidates, one below the other, rounded as printed."""
    return {
        c.name: rounded(
            np.concatenate([one.hourly[c.name] for one in run.candidates]), hourly_digits(c.name, c.unit)
        )
        for c in COLUMNS
    }


def hour_labels(run: Run) -> list[str]:
    """Return the start of each reported hour, ISO 8601 with the file's zone offset."""
    offset = zone_offset(run.weather.utc_offset_h)
    return [text + offset for text in np.datetime_as_string(run.time, unit="s").tolist()]


def write_hourly(run: Run, csv_path: Path, parquet_path: Path | None) -> None:
    """Write hourly.csv, and hourly.parquet when a path is given (needs pyarrow)."""
    numbers = hourly_numbers(run)
    names = [one.plan.name for one in run.candidates]
    if find_spec("pyarrow") is None:
        labels = hour_labels(run)
        texts = {
            "candidate": [quoted(name) for name in names for _ in labels],
            "time": labels * len(names),
        }
        write_rows(csv_path, texts, numbers)
        return
    _arrow_hourly(run, numbers, names, csv_path, parquet_path)


def _arrow_hourly(
    run: Run, numbers: Mapping[str, Floats], names: Sequence[str], csv_path: Path, parquet_path: Path | None
) -> None:
    import pyarrow as pa
    from pyarrow import csv as arrow_csv

    count = len(run.time)
    index = pa.array(np.repeat(np.arange(len(names), dtype=np.int32), count))
    labels = pa.array(hour_labels(run))
    columns = {name: pa.array(values, from_pandas=True) for name, values in numbers.items()}
    who = pa.DictionaryArray.from_arrays(index, pa.array([safe_text(name) for name in names]))
    table = pa.table(
        {
            "candidate": who.cast(pa.string()),
            "time": pa.concat_arrays([labels] * len(names)),
            **columns,
        }
    )
    with csv_path.open("wb") as file:
        file.write((",".join(table.column_names) + "\n").encode())
        options = arrow_csv.WriteOptions(include_header=False, quoting_style="needed")
        arrow_csv.write_csv(table, file, options)
    if parquet_path is not None:
        _write_parquet(run, names, parquet_path)


def _write_parquet(run: Run, names: Sequence[str], path: Path) -> None:
    """Write the hours with every digit; time with the file's zone offset, names as they are typed."""
    import pyarrow as pa
    from pyarrow import parquet

    exact = {
        c.name: pa.array(np.concatenate([one.hourly[c.name] for one in run.candidates]), from_pandas=True)
        for c in COLUMNS
    }
    offset_h = run.weather.utc_offset_h
    stamps = np.tile(run.time - np.timedelta64(round(offset_h * 3600), "s"), len(names))
    zone = pa.timestamp("s", tz=zone_offset(offset_h))
    index = pa.array(np.repeat(np.arange(len(names), dtype=np.int32), len(run.time)))
    who = pa.DictionaryArray.from_arrays(index, pa.array(list(names)))
    table = pa.table({"candidate": who, "time": pa.array(stamps).cast(pa.timestamp("s")).cast(zone), **exact})
    parquet.write_table(
        table,
        path,
        compression="zstd",
        use_dictionary=["candidate"],
        use_byte_stream_split=[c.name for c in COLUMNS],
    )


def write_rows(path: Path, texts: Mapping[str, Sequence[str]], numbers: Mapping[str, Floats]) -> None:
    """Write a CSV of ready text columns, then number columns (rounded already); NaN is an empty cell."""
    with path.open("w", encoding="utf-8", newline="") as file:
        file.write(",".join([*texts, *numbers]) + "\n")
        total = len(next(iter(texts.values())))
        for at in range(0, total, ROWS_AT_ONCE):
            part = slice(at, at + ROWS_AT_ONCE)
            cells = [list(column[part]) for column in texts.values()]
            cells += [_number_cells(values[part]) for values in numbers.values()]
            file.write("\n".join(map(",".join, zip(*cells, strict=True))) + "\n")


def _number_cells(values: Floats) -> list[str]:
    """Return the shortest text of each number: whole ones without ".0", NaN empty."""
    cells = [text[:-2] if text.endswith(".0") else text for text in map(repr, values.tolist())]
    return ["" if text == "nan" else text for text in cells] if np.isnan(values).any() else cells


def _by_label(
    run: Run, labels: Sequence[str], heading: str, tables: Sequence[Mapping[str, Floats]]
) -> tuple[dict[str, list[str]], dict[str, Floats]]:
    units = daily_units()
    texts = {
        "candidate": [quoted(one.plan.name) for one in run.candidates for _ in labels],
        heading: list(labels) * len(run.candidates),
    }
    numbers = {
        name: rounded(np.concatenate([table[name] for table in tables]), DAILY_DIGITS.get(unit, OTHER_DIGITS))
        for name, unit in units.items()
    }
    return texts, numbers


def write_daily(run: Run, path: Path) -> None:
    """Write daily.csv: one row per candidate and standard-time day."""
    labels = np.datetime_as_string(run.days, unit="D").tolist()
    write_rows(path, *_by_label(run, labels, "date", [one.daily for one in run.candidates]))


def mean_dli(run: Run, one: CandidateRun) -> tuple[Floats, Floats]:
    """Return mean daily light outside and at the top of the crop by month, mol m-2 d-1.

    Outside over all days; inside over days with a crop (NaN in a month without one).
    """
    months = run.days.astype("datetime64[M]").astype(str)
    crop = np.maximum.reduceat(one.lai[run.hours], groups(run.time, "D")[1]) > 0
    outside, inside = one.daily["outside_par_mol_m2"], one.daily["inside_par_mol_m2"]
    sets = [(months == month, (months == month) & crop) for month in run.months]
    return (
        np.array([outside[all_days].mean() for all_days, _ in sets]),
        np.array([inside[kept].mean() if kept.any() else np.nan for _, kept in sets]),
    )


def write_monthly(run: Run, path: Path) -> None:
    """Write monthly.csv: sums, means and extremes by month, and mean daily light (DLI)."""
    texts, numbers = _by_label(run, run.months, "month", [one.monthly for one in run.candidates])
    pairs = [mean_dli(run, one) for one in run.candidates]
    for at, name in enumerate(DLI_COLUMNS):
        numbers[name] = rounded(np.concatenate([pair[at] for pair in pairs]), 3)
    write_rows(path, texts, numbers)


def write_mixed(path: Path, rows: Sequence[Mapping[str, Any]]) -> None:
    """Write a small CSV of texts and numbers; None and NaN are empty cells."""
    with path.open("w", encoding="utf-8", newline="") as file:
        file.write(",".join(rows[0]) + "\n")
        for row in rows:
            file.write(",".join(_cell(value) for value in row.values()) + "\n")


def _cell(value: Any) -> str:
    if value is None:
        return ""
    if isinstance(value, str):
        return quoted(value)
    return "" if np.isnan(value) else _number_cells(np.array([float(value) + 0.0]))[0]
