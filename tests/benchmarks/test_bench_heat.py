"""Heat of one candidate-year against the yardstick, in the same process, interleaved; prints ratios.

Cold is a first solve, warm one that starts from a like case under another covering. What the stores cost, had
by dividing their capacities by a million: single glass 147 ms (9 passes) instead of 233 (10), double film 335
(14) instead of 310 (11), so nothing to a third; they are worth 1.5 % of annual heat and 2-15 % of the peak.
"""

from __future__ import annotations

from collections.abc import Callable
from statistics import median
from time import perf_counter

import pandas as pd
import pvlib
import pytest

from canopy.balance import solve
from canopy.heatcase import HeatCase, HeatResult
from tests.heatcases import DOUBLE_FILM, FILM, GLASS, TWIN_WALL, case, cloth, house

CASES: dict[str, tuple[Callable[[], HeatCase], Callable[[], HeatCase]]] = {
    "glass": (
        lambda: case(cover=GLASS, periodic=True),
        lambda: case(cover=FILM, periodic=True),
    ),
    "glass, humidity 88 %": (
        lambda: case(cover=GLASS, periodic=True, humidity=88.0),
        lambda: case(cover=FILM, periodic=True, humidity=88.0),
    ),
    "double film": (
        lambda: case(cover=DOUBLE_FILM, shell=house("arch"), periodic=True),
        lambda: case(cover=TWIN_WALL, shell=house("arch"), periodic=True),
    ),
    "glass, night screen": (
        lambda: case(cover=GLASS, periodic=True, screens=(cloth(0.3, 0.3),), gap=0.05),
        lambda: case(cover=FILM, periodic=True, screens=(cloth(0.3, 0.3),), gap=0.05),
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_heat_of_a_year(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    made, like = (build() for build in CASES[name])
    times = pd.date_range("1990-01-01", periods=8760, freq="h", tz="UTC")
    neighbour = solve(like)
    yard, cold, warm = [], [], []
    result: HeatResult | None = None
    for _ in range(9):
        start = perf_counter()
        pvlib.solarposition.get_solarposition(times, 36.1, -79.95, method="nrel_numpy")
        yard.append(perf_counter() - start)
        start = perf_counter()
        result = solve(made)
        cold.append(perf_counter() - start)
        start = perf_counter()
        again = solve(made, neighbour)
        warm.append(perf_counter() - start)
    assert result is not None
    with capsys.disabled():
        print(
            f"\n{name}: cold {median(cold) / median(yard):.2f} yardsticks ({1e3 * median(cold):.0f} ms, "
            f"{result.iterations} passes, {result.retried_hours} hours by the other route), warm "
            f"{median(warm) / median(yard):.2f} ({again.iterations} passes); "
            f"yardstick {1e3 * median(yard):.0f} ms"
        )
    assert abs(result.closure).max() < 0.1
    assert again.heat_delivered.sum() == pytest.approx(result.heat_delivered.sum(), rel=1e-4)
