"""Opening weather files ourselves: regular files only, size limits, rows of the wrong length counted."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError
from weather.record import Bools, Finding, Floats, Times

if TYPE_CHECKING:
    import pandas as pd

Ints = NDArray[np.int64]

MAX_BYTES: Final = 400_000_000  # a year of 1-minute rows with forty columns is 150 MB
MAX_ROWS: Final = 11_000_000  # twenty years of minutes


@dataclass(frozen=True)
class Table:
    """The wanted columns of a delimited text table whose rows all have as many fields as the header."""

    frame: pd.DataFrame  # (M, wanted) of text
    lines: Ints  # (M,) line number of each row in the file
    rows_lost: int  # rows with another number of fields
    first_lost: int  # line number of the first of them, 0 when none

    def has(self, name: str) -> bool:
        """Tell whether the table has a column."""
        return name in self.frame.columns

    def numbers(self, name: str) -> Floats:
        """Return a column as floats, unreadable, empty and endless numbers as NaN, (M,)."""
        import pandas as pd

        values = np.array(pd.to_numeric(self.frame[name], errors="coerce"), dtype=float)
        values[~np.isfinite(values)] = np.nan
        return values

    def parts(self, name: str, separator: str, count: int) -> list[Floats]:
        """Return the numbers in a text such as 12/31/1990 or 24:00, `count` arrays of (M,), NaN if bad."""
        import pandas as pd

        split = self.frame[name].str.split(separator, expand=True)
        empty = np.full(len(self.frame), np.nan)
        found = [
            np.array(pd.to_numeric(split[k], errors="coerce"), dtype=float) if k in split.columns else empty
            for k in range(count)
        ]
        if split.shape[1] > count:
            found[0] = np.where(split[count].isna(), found[0], np.nan)
        return found

    def keep(self, rows: Bools) -> Table:
        """Return the table without the other rows, which count as lost."""
        if rows.all():
            return self
        first = int(self.lines[~rows][0])
        first = min(first, self.first_lost) if self.first_lost else first
        return Table(self.frame[rows], self.lines[rows], self.rows_lost + int((~rows).sum()), first)

    def findings(self) -> tuple[Finding, ...]:
        """Return the finding that tells how many rows could not be read."""
        return lost_rows(self.rows_lost, self.first_lost)


def lost_rows(lost: int, first_line: int) -> tuple[Finding, ...]:
    """Return the finding that tells how many rows could not be read, and where the first of them stands."""
    if lost == 0:
        return ()
    rows = "1 row" if lost == 1 else f"{lost} rows"
    text = f"{rows} could not be read (first: line {first_line}) and left out"
    return (Finding("rows-lost", "warning", text, lost),)


def read_bytes(path: Path) -> bytes:
    """Return a regular file's bytes; UserError for anything else, for empty and for huge files."""
    try:
        if not path.exists():
            raise UserError(f"weather -> file: {path} does not exist")
        if not path.is_file():
            raise UserError(f"weather -> file: {path} is not a regular file")
        size = path.stat().st_size
        if size > MAX_BYTES:
            raise UserError(f"weather -> file: {path} has {size / 1e6:.0f} MB, allowed {MAX_BYTES / 1e6:.0f}")
        data = path.read_bytes()
    except (OSError, ValueError) as error:
        raise UserError(f"weather -> file: {path} cannot be read ({error.__class__.__name__})") from None
    if not data.strip():
        raise UserError(f"weather -> file: {path} is empty")
    return data


def text_lines(data: bytes, where: str) -> list[str]:
    """Return the lines of a text file (UTF-8, else Latin-1); a binary file is refused."""
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        try:
            text = data.decode("utf-16")
        except UnicodeDecodeError:
            raise UserError(f"weather -> file: {where} is not readable UTF-16 text") from None
    else:
        if data.count(b"\x00") > max(8, len(data) // 1000):
            raise UserError(
                f"weather -> file: {where} is a binary file, not a weather file this program reads"
            )
        try:
            text = data.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = data.decode("latin-1")
    # only line feeds and carriage returns end a row: str.splitlines would also cut at form feeds and the like
    return text.replace("\r\n", "\n").replace("\r", "\n").split("\n")


def table(
    lines: list[str], header: list[str], wanted: list[str], first_line: int, separator: str = ","
) -> Table:
    """Return the wanted columns of the rows that have exactly as many fields as the header names.

    `first_line` is the number of the first row in the file, for messages. Empty lines are skipped, wanted
    names that the header lacks are left out, and rows with another number of fields are counted.
    """
    import io

    import pandas as pd

    separators = len(header) - 1
    kept: list[str] = []
    numbers: list[int] = []
    lost = first_lost = 0
    for number, line in enumerate(lines, start=first_line):
        if not line.strip():
            continue
        if '"' in line:
            line = line.replace('"', "")
        if line.count(separator) == separators:
            kept.append(line)
            numbers.append(number)
        else:
            lost += 1
            first_lost = first_lost or number
    if len(kept) > MAX_ROWS:
        raise UserError(f"weather -> file: {len(kept)} rows, allowed {MAX_ROWS}")
    places = sorted({header.index(name): name for name in wanted if name in header}.items())
    if not kept or not places:
        frame = pd.DataFrame({name: pd.Series([], dtype=str) for _, name in places})
        return Table(frame, np.zeros(0, dtype=np.int64), lost, first_lost)
    frame = pd.read_csv(
        io.StringIO("\n".join(kept)),
        sep=separator,
        names=list(range(len(header))),
        usecols=[k for k, _ in places],
        header=None,
        dtype=str,
        quoting=3,
        keep_default_na=False,
        na_filter=False,
        engine="c",
        skip_blank_lines=False,
    )
    frame.columns = pd.Index([name for _, name in places])
    return Table(frame, np.array(numbers, dtype=np.int64), lost, first_lost)


def make_times(year: Floats, month: Floats, day: Floats, seconds: Floats) -> tuple[Times, Bools]:
    """Return datetime64[s], (M,), of calendar parts and seconds of the day, and which are real dates."""
    parts = np.stack([year, month, day, seconds])
    good = np.isfinite(parts).all(axis=0) & (parts[:3] == np.round(parts[:3])).all(axis=0)
    good &= (year >= 1800) & (year <= 2200) & (month >= 1) & (month <= 12) & (day >= 1) & (day <= 31)
    good &= (seconds >= 0) & (seconds <= 86400)
    y, m, d, s = (np.where(good, part, 1.0).astype(np.int64) for part in parts)
    months = ((np.where(good, y, 1970) - 1970) * 12 + m - 1).astype("datetime64[M]")
    days = months.astype("datetime64[D]") + (d - 1)
    good &= days.astype("datetime64[M]") == months
    return days.astype("datetime64[s]") + s.astype("timedelta64[s]"), good


def joined_years(stamp: Times) -> bool:
    """Tell whether calendar months of different years were joined: June 1994 after May 1988, say.

    Each run of one calendar month has its median year, so that a single odd row decides nothing.
    """
    months = stamp.astype("datetime64[M]").astype(np.int64)
    edges = np.flatnonzero(np.diff(months % 12) != 0) + 1
    blocks = [block for block in np.split(months, edges) if len(block) >= 24]
    middle = [int(np.median(block)) for block in blocks]
    return any(b % 12 == (a % 12 + 1) % 12 and b - a != 1 for a, b in pairwise(middle))


def regular_step(stamp: Times, where: str) -> float:
    """Return the step between most rows, s; UserError when there is none from 1 minute to 1 hour."""
    if len(stamp) < 2:
        raise UserError(f"{where}: one row makes no record")
    step = np.diff(np.sort(stamp)).astype("timedelta64[s]").astype(np.int64)
    values, counts = np.unique(step[step > 0], return_counts=True)
    if not len(values):
        raise UserError(f"{where}: all rows have one and the same time")
    usual = int(values[counts.argmax()])
    if counts.max() < 0.5 * len(step) or not 60 <= usual <= 3600:
        found = f"{usual / 60.0:g} min" if counts.max() >= 0.5 * len(step) else "no regular step"
        raise UserError(f"{where}: the step of the rows is {found}, allowed a regular step of 1 to 60 min")
    return float(usual)
