"""Geometry of a house-year, each further covering, and light inside, beside a yardstick in the same run.

Run: pytest tests/benchmarks/test_bench_house.py -s
The yardstick is one pvlib `nrel_numpy` call for the 8760 hours of 1990, interleaved, medians of 9.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pandas as pd
import pvlib
import pytest

from canopy.houselight import inside
from canopy.lightpath import trace, transmit
from tests.housecase import PLAIN, glass, weather
from tests.test_house_light import fabric, stand, sunlight

HOURS = pd.date_range("1990-01-01", periods=8760, freq="h", tz="UTC")
BOXES = {
    "gutter_width": 0.2,
    "gutter_depth": 0.15,
    "ridge_width": 0.06,
    "ridge_depth": 0.08,
    "bar_spacing": 1.0,
}


def yardstick() -> pd.DataFrame:
    """One year of sun positions."""
    return pvlib.solarposition.get_solarposition(HOURS, 36.1, -79.95, method="nrel_numpy")


def seconds(work: Callable[[], object]) -> float:
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


@pytest.mark.parametrize("form", ["gable", "arch"])
@pytest.mark.parametrize("structure", ["bare", "gutters, ridges, bars"])
def test_year_of_a_ten_span_house(form: str, structure: str) -> None:
    house = replace(PLAIN, form=form, spans=10, length=60.0, gutter_height=4.5, rise=2.4)
    house = replace(house, **BOXES, bar_width=0.03, bar_depth=0.04) if structure != "bare" else house
    record, covering = weather(36.1, -79.95), glass(0.2)
    paths = trace(house, record.zenith, record.azimuth)
    found = transmit(paths, covering, record)
    screens, drawn, below = (fabric(0.1, 0.4, 0.4),), np.ones((1, 8760)), stand(0.7, 0.15)

    def geometry() -> None:
        trace(house, record.zenith, record.azimuth)

    def one_more() -> None:
        transmit(paths, covering, record)

    def within() -> None:
        inside(sunlight(record), found, record, screens, drawn, below)

    works = (yardstick, geometry, one_more, within)
    times = [[seconds(work) for work in works] for _ in range(9)]
    base, *mine = (statistics.median(column) for column in zip(*times, strict=True))
    ratios = [value / base for value in mine]
    print(
        f"\n{form}, {structure}: geometry {ratios[0]:.2f}, one more covering state (hazy) {ratios[1]:.3f}, "
        f"inside with a screen {ratios[2]:.3f} yardsticks of {base * 1e3:.0f} ms"
    )
    assert min(ratios) > 0.0
