"""A result with an open budget is no result."""

from __future__ import annotations

import math

import pytest

from canopy.run import Closure
from canopy.simulate import must_close
from weather.errors import OpenHourError


@pytest.mark.parametrize("gap", [0.11, 65.0, math.inf, math.nan])
def test_an_open_budget_ends_the_run(gap: float) -> None:
    fine = Closure("light", 0.1, "1990-01-01T00:00:00")
    must_close("a", (fine, fine))
    with pytest.raises(OpenHourError, match=r'candidate "a", 1990-01-02.* stay open in the budget "heat"'):
        must_close("a", (fine, Closure("heat", gap, "1990-01-02T00:00:00")))
