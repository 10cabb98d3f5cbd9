"""Dirt and wash days: how much light is left."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from canopy.surfaces import Dirt, day_of_year

MONTHS = (0.08, 0.08, 0.07, 0.05, 0.04, 0.03, 0.03, 0.03, 0.04, 0.05, 0.06, 0.07)


def test_dirt_by_month_and_wash() -> None:
    """Mid-month levels are met; a wash takes nine tenths off, and 30 days later the level is back."""
    loss = Dirt(MONTHS).daily_loss()
    assert loss[[15, 196]] == pytest.approx([0.08, 0.03], abs=1e-3)
    washed = Dirt(MONTHS, wash_days=(250,)).daily_loss()
    assert washed[250] == pytest.approx(0.1 * loss[250])
    assert washed[280:] == pytest.approx(loss[280:])
    assert washed[:250] == pytest.approx(loss[:250])


@given(
    st.lists(st.floats(0.0, 0.5), min_size=12, max_size=12),
    st.lists(st.integers(0, 364), max_size=4),
)
def test_dirt_stays_between_nought_and_its_months(months: list[float], washes: list[int]) -> None:
    loss = Dirt(tuple(months), tuple(washes)).daily_loss()
    assert loss.shape == (365,)
    assert loss.min() >= 0.0
    assert loss.max() <= max(months) + 1e-12


def test_factor_by_hour() -> None:
    time = np.arange("2024-02-27", "2024-03-03", dtype="datetime64[h]").astype("datetime64[s]")
    assert day_of_year(time)[::24].tolist() == [57, 58, 58, 59, 60]
    assert Dirt(MONTHS).factor(time) == pytest.approx(1.0 - Dirt(MONTHS).daily_loss()[day_of_year(time)])
    assert day_of_year(np.array(["1990-12-31"], dtype="datetime64[s]")).tolist() == [364]
