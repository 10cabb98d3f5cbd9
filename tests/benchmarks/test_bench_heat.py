"""Heat of one candidate-year against the yardstick, in the same process, interleaved; prints ratios."""

from __future__ import annotations

from statistics import median
from time import perf_counter

import pandas as pd
import pvlib
import pytest

from canopy.balance import solve
from canopy.heatcase import HeatResult
from tests.heatcases import DOUBLE_FILM, FILM, case, cloth, house

CASES = {
    "single glass": lambda: case(periodic=True),
    "glass, humidity 90 %": lambda: case(periodic=True, humidity=90.0),
    "glass, energy screen": lambda: case(periodic=True, screens=(cloth(0.3, 0.3),), gap=0.05),
    "single film": lambda: case(cover=FILM, shell=house("arch"), periodic=True),
    "double film": lambda: case(cover=DOUBLE_FILM, shell=house("arch"), periodic=True),
}


@pytest.mark.parametrize("name", CASES)
def test_heat_of_a_year(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    made = CASES[name]()
    times = pd.date_range("1990-01-01", periods=8760, freq="h", tz="UTC")
    yard, cold, warm = [], [], []
    result: HeatResult | None = None
    for _ in range(5):
        start = perf_counter()
        pvlib.solarposition.get_solarposition(times, 36.1, -79.95, method="nrel_numpy")
        yard.append(perf_counter() - start)
        start = perf_counter()
        result = solve(made)
        cold.append(perf_counter() - start)
        start = perf_counter()
        again = solve(made, result)
        warm.append(perf_counter() - start)
    assert result is not None
    with capsys.disabled():
        print(
            f"\n{name}: {1e3 * median(cold):.0f} ms = {median(cold) / median(yard):.2f} yardsticks, "
            f"{result.iterations} passes, {result.retried_hours} hours by the other route; warm "
            f"{median(warm) / median(yard):.2f} ({again.iterations} passes); "
            f"yardstick {1e3 * median(yard):.0f} ms"
        )
    assert abs(result.closure).max() < 0.1
