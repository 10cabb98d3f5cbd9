"""The solver against a slow, independent reference over days of a real year."""

from __future__ import annotations

import numpy as np
import pytest

from canopy.balance import solve
from canopy.heatcase import HeatCase
from tests.heat_reference import Reference
from tests.heatcases import FILM, GLASS, case, house

MADE = {
    "winter glass": lambda: case(slice(480, 540), GLASS, heat=18.0, night=15.0),
    "film at its limit": lambda: case(slice(720, 768), FILM, shell=house("arch"), capacity=180.0),
    "spring glass": lambda: case(slice(2160, 2208), GLASS),
    "summer glass": lambda: case(slice(3960, 4008), GLASS),
}


@pytest.mark.parametrize("name", MADE)
def test_against_hour_by_hour_reference(name: str) -> None:
    given: HeatCase = MADE[name]()
    result = solve(given)
    slow = Reference(given).march()
    total = slow["heat"].sum()
    assert result.heat_delivered.sum() == pytest.approx(total, rel=0.005, abs=1.0)
    assert result.heat_delivered.max() == pytest.approx(slow["heat"].max(), rel=0.01, abs=0.5)
    pairs = {
        "air": result.temp_air, "leaf": result.temp_leaf, "floor": result.temp_floor,
        "cover": result.temp_covering[0], "pipe": result.temp_pipe,
    }  # fmt: skip
    for node, mine in pairs.items():
        assert np.sqrt(np.mean((mine - slow[node]) ** 2)) < 0.1, node
    assert np.sqrt(np.mean((result.vapour_pressure - slow["vapour"]) ** 2)) < 5.0
    assert result.sky_loss + result.surroundings_loss == pytest.approx(slow["out"], abs=0.5)
