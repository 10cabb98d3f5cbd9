"""Several weather years: each one computed, then combined; the middle one is reported."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from canopy.years import middle_year, spread
from tests.reportcase import make_weather
from weather.record import Weather


@pytest.fixture(scope="module")
def records() -> list[Weather]:
    base = make_weather()
    found = []
    for k in range(11):
        shift = np.datetime64(f"{2001 + k}-01-01", "s") - base.time[0]
        temp = base.temp_air - 0.4 * ((7 * k) % 11)
        found.append(replace(base, typical=False, time=base.time + shift, temp_air=temp, title=f"year {k}"))
    return found


def heat_of(weather: Weather) -> list[np.ndarray]:
    """Two houses whose heat follows the outside air."""
    missing = np.maximum(0.0, 18.0 - weather.temp_air)
    return [8.0 * missing, 5.0 * missing]


def test_spread_per_candidate(records: list[Weather]) -> None:
    said: list[str] = []
    first, second = spread(records, heat_of, said.append)
    assert first is not None
    assert second is not None
    assert first.years == tuple(range(2001, 2012))
    coldest = [float(w.temp_air.min()) for w in records]
    assert first.peak_w_m2 == pytest.approx([8.0 * (18.0 - t) for t in coldest])
    assert first.annual_heat_kwh_m2 == pytest.approx(1.6 * second.annual_heat_kwh_m2)
    assert first.coldest_hour_c == pytest.approx(coldest)
    assert len(first.levels) == 3
    assert min(s.mean_c for s in first.spells) == pytest.approx(min(coldest))
    assert len(said) == 11


def test_typical_years_do_not_count(records: list[Weather]) -> None:
    typical = [replace(w, typical=True) for w in records]
    assert spread(typical, heat_of) == ()
    assert spread([*typical, records[0]], heat_of) == ()
    few = spread(records[:3], heat_of)[0]
    assert few is not None
    assert few.levels == ()
    assert "not computed" in few.note


def test_middle_year(records: list[Weather]) -> None:
    means = [float(w.temp_air.mean()) for w in records]
    assert means[middle_year(records)] == pytest.approx(float(np.median(means)))
    assert middle_year(records[:1]) == 0
