"""All files of a run, together or not at all."""

from __future__ import annotations

import os
import shutil
import tempfile
import time
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager
from importlib.util import find_spec
from pathlib import Path
from typing import Final

from canopy.run import Run
from reports.csvtables import write_daily, write_hourly, write_mixed, write_monthly, zone_offset
from reports.runjson import write_run_json
from weather.errors import UserError

Progress = Callable[[str], None]

FILES: Final = (
    "report.html",
    "workbook.xlsx",
    "hourly.csv",
    "hourly.parquet",
    "daily.csv",
    "monthly.csv",
    "sizing.csv",
    "run.json",
)
"""Every file of a run, in the order in which they are moved into place: run.json last."""

WORKDIR_PREFIX: Final = ".canopy-budget-"


def check_out(out: Path) -> None:
    """See, before anything is computed, that a folder can be made and written; leaves nothing behind.

    Errors: UserError when it cannot, or when a folder has the name of one of the files.
    """
    made = _make_folder(out)
    try:
        with _workdir(out):
            pass
        _check_targets(out)
    finally:
        _remove_empty(made)


def _make_folder(out: Path) -> list[Path]:
    """Make a folder with its parents and return the ones that were not there, innermost first."""
    try:
        absent = [p for p in (out, *out.parents) if not p.exists()]
        out.mkdir(parents=True, exist_ok=True)
    except FileExistsError:
        raise UserError(f"--out {out}: is a file; name a folder") from None
    except OSError as error:
        raise UserError(f"--out {out}: cannot be made: {error.strerror}") from None
    return absent


def _remove_empty(folders: list[Path]) -> None:
    for folder in folders:
        try:
            folder.rmdir()
        except OSError:
            return


@contextmanager
def _workdir(out: Path) -> Iterator[Path]:
    """Give a temporary folder inside `out`, on the same disk, and clear it away whatever happens."""
    try:
        work = Path(tempfile.mkdtemp(prefix=WORKDIR_PREFIX, dir=out))
    except OSError as error:
        raise UserError(f"--out {out}: cannot be written: {error.strerror}") from None
    try:
        yield work
    finally:
        shutil.rmtree(work, ignore_errors=True)


def _check_targets(out: Path) -> None:
    for name in FILES:
        if (out / name).is_dir():
            raise UserError(f"--out {out}: {name} is a folder there; move it or choose another --out")


def write_all(run: Run, out: Path, progress: Progress | None = None) -> tuple[Path, ...]:
    """Write every file of a run into a folder: all of them, or none.

    They are written into a temporary folder inside `out` and moved into place at the end, run.json last.
    When anything fails, files of an earlier run stay as they were. Returns the paths written.
    Errors: UserError for a folder that cannot be written or a full disk.
    """
    made = _make_folder(out)
    try:
        _check_targets(out)
        with _workdir(out) as work:
            names = _write_files(run, work, progress or (lambda text: None))
            _move_in(work, out, names)
    except OSError as error:
        raise UserError(f"--out {out}: cannot be written: {error.strerror or error}") from error
    finally:
        _remove_empty(made)
    return tuple(out / name for name in names)


def _write_files(run: Run, work: Path, progress: Progress) -> list[str]:
    """Write all files into a folder; large tables and packing run beside the page and the workbook."""
    from xlsxwriter.exceptions import FileCreateError

    from reports.page import packed_plotly, write_page
    from reports.sizingview import sizing_row
    from reports.workbook import write_workbook

    start = time.perf_counter()
    parquet = work / "hourly.parquet" if find_spec("pyarrow") is not None else None
    with ThreadPoolExecutor(1) as beside:
        packing = beside.submit(packed_plotly)
        hourly = beside.submit(write_hourly, run, work / "hourly.csv", parquet)
        progress("workbook")
        try:
            write_workbook(run, work / "workbook.xlsx", run.study.keys.units)
        except FileCreateError as error:  # holds the OSError that xlsxwriter met
            raise OSError(f"workbook.xlsx: {error}") from error
        progress("tables")
        write_daily(run, work / "daily.csv")
        write_monthly(run, work / "monthly.csv")
        offset = zone_offset(run.weather.utc_offset_h)
        write_mixed(work / "sizing.csv", [sizing_row(one, offset) for one in run.candidates])
        progress("report")
        packing.result()
        write_page(run, work / "report.html")
        progress("hourly table")
        hourly.result()
    names = [name for name in FILES if (work / name).exists() or name == "run.json"]
    wall = {**run.wall_s, "files": time.perf_counter() - start}
    write_run_json(run, work / "run.json", names, wall)
    return names


def _move_in(work: Path, out: Path, names: list[str]) -> None:
    """Move finished files into place; put the earlier ones back when a move fails."""
    aside = work / "earlier"
    aside.mkdir()
    earlier = [name for name in reversed(FILES) if os.path.lexists(out / name)]
    placed: list[str] = []
    try:
        for name in earlier:  # run.json goes first: without it the folder claims no finished run
            os.replace(out / name, aside / name)
        for name in names:
            os.replace(work / name, out / name)
            placed.append(name)
    except BaseException:
        for name in placed:
            (out / name).unlink(missing_ok=True)
        for name in reversed(earlier):
            if os.path.lexists(aside / name):
                os.replace(aside / name, out / name)
        raise
