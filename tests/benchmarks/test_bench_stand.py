"""A candidate-year of light in the stand beside a yardstick in the same run; no timed assertion.

Run: pytest tests/benchmarks/test_bench_stand.py -s
The yardstick is one pvlib `nrel_numpy` call for the 8760 hours of 1990, interleaved, medians of 9.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable

import numpy as np
import pandas as pd
import pvlib
import pytest

from canopy.leaves import leaf
from canopy.rows import Rows, row_sight
from canopy.stand import Stand, respond
from canopy.standtable import _build
from tests.standcase import floor

ROWS = Rows(1.0, 1.6, 2.5, 0.0)
HOURS = pd.date_range("1990-01-01", periods=8760, freq="h", tz="UTC")


def yardstick() -> pd.DataFrame:
    """One year of sun positions."""
    return pvlib.solarposition.get_solarposition(HOURS, 36.1, -79.95, method="nrel_numpy")


def seconds(work: Callable[[], object]) -> float:
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


@pytest.mark.parametrize(("name", "rows"), [("even", None), ("rows", ROWS)])
@pytest.mark.parametrize("tables", ["kept", "built anew"])
def test_year_of_the_stand(name: str, rows: Rows | None, tables: str) -> None:
    sun = yardstick()
    zenith, azimuth = sun["apparent_zenith"].to_numpy(), sun["azimuth"].to_numpy()
    stand = Stand(np.interp(np.arange(8760), [0, 4000, 8759], [0.5, 3.0, 3.0]), 1.0, rows)

    def year() -> None:
        if tables == "built anew":
            _build.cache_clear()
            row_sight.cache_clear()
        respond(stand, leaf("tomato"), floor(0.5, 5), zenith, azimuth)

    year()
    pairs = [(seconds(yardstick), seconds(year)) for _ in range(9)]
    base, mine = (statistics.median(column) for column in zip(*pairs, strict=True))
    print(f"\nstand, 5 bands, {name}, tables {tables}: {mine * 1e3:.1f} ms, {mine / base:.2f} yardsticks")
    assert mine > 0.0
