"""Optics of one covering beside a yardstick in the same run; no timed assertion.

Run: pytest tests/benchmarks/test_bench_optics.py -s
The yardstick is one pvlib `nrel_numpy` call for the 8760 hours of 1990, interleaved, medians of 9.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable

import pandas as pd
import pvlib
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from canopy.layers import PLASTIC_DROPS, Webs, build_solar, build_thermal
from canopy.sheets import MaterialSheet, SpectralLayer

WALL = MaterialSheet("polycarbonate", 0.00045)
CASES: dict[str, tuple[list[SpectralLayer], list[Webs | None] | None]] = {
    "float glass": ([MaterialSheet("soda-lime-clear", 0.004)], None),
    "double hazy film": ([MaterialSheet("polyethylene", 0.00018, haze=0.2)] * 2, None),
    "twin-wall": ([WALL, WALL], [Webs(0.0105, 0.0004, 0.0071, "polycarbonate")]),
}


def yardstick() -> None:
    """One year of sun positions."""
    hours = pd.date_range("1990-01-01", periods=8760, freq="h", tz="UTC")
    pvlib.solarposition.get_solarposition(hours, 36.1, -79.95, method="nrel_numpy")


def whole(layers: list[SpectralLayer], webs: list[Webs | None] | None) -> None:
    """All bands, 0-90 degrees and diffuse, solar and thermal, dry and wet with drops."""
    build_solar(layers, webs=webs)
    build_solar(layers, webs=webs, wetness="drops", drops=PLASTIC_DROPS)
    build_thermal(layers)
    build_thermal(layers, wetness="drops", drops=PLASTIC_DROPS)


def seconds(call: Callable[[], None]) -> float:
    """Return the wall time of one call."""
    start = time.perf_counter()
    call()
    return time.perf_counter() - start


@pytest.mark.parametrize("name", CASES)
def test_full_optics_of_a_covering(benchmark: BenchmarkFixture, name: str) -> None:
    layers, webs = CASES[name]
    yardstick()
    benchmark.pedantic(whole, args=(layers, webs), rounds=3, warmup_rounds=1)
    pairs = [(seconds(lambda: whole(layers, webs)), seconds(yardstick)) for _ in range(9)]
    mine, other = (statistics.median(p[i] for p in pairs) for i in (0, 1))
    print(f"\n{name}: {1e3 * mine:.1f} ms, yardstick {1e3 * other:.1f} ms, ratio {mine / other:.2f}")
