"""Sizing tables, heat stores and the workbook beside a yardstick in the same run; no timed assertion.

Run: pytest tests/benchmarks/test_bench_sizing.py -s
The yardstick is one pvlib `nrel_numpy` call for the 8760 hours of 1990, interleaved, medians of 9.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable
from pathlib import Path

import pandas as pd
import pvlib

from canopy.heatstore import store_sizes
from canopy.sizing import size
from reports.workbook import write_workbook
from tests.reportcase import fakes, make_run


def yardstick() -> None:
    """One year of sun positions."""
    hours = pd.date_range("1990-01-01", periods=8760, freq="h", tz="UTC")
    pvlib.solarposition.get_solarposition(hours, 36.1, -79.95, method="nrel_numpy")


def seconds(call: Callable[[], object]) -> float:
    """Return the wall time of one call."""
    start = time.perf_counter()
    call()
    return time.perf_counter() - start


def test_sizing_and_workbook(tmp_path: Path) -> None:
    run = make_run(fakes(5))
    load, weather = run.candidates[0].heat.heat_delivered, run.weather
    calls: dict[str, Callable[[], object]] = {
        "six heat stores, exact": lambda: store_sizes(load),
        "sizing of one candidate": lambda: size(
            load, weather.time, weather.temp_air, 4800.0, None, 15.0, True
        ),
        "workbook of five candidates": lambda: write_workbook(run, tmp_path / "workbook.xlsx"),
    }
    yardstick()
    for name, call in calls.items():
        call()
        pairs = [(seconds(call), seconds(yardstick)) for _ in range(9)]
        mine, other = (statistics.median(p[i] for p in pairs) for i in (0, 1))
        print(f"\n{name}: {1e3 * mine:.1f} ms, yardstick {1e3 * other:.1f} ms, ratio {mine / other:.2f}")
