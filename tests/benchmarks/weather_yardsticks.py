"""Reading and checking one weather year, in yardsticks.

Run: python -m tests.benchmarks.weather_yardsticks [FILE ...]

The yardstick is one pvlib `nrel_numpy` call for the 8760 hours of 1990, measured in turn with the reading.
"""

from __future__ import annotations

import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pandas as pd
import pvlib

from weather.load import load_weather
from weather.request import WeatherRequest
from weather.typical import shipped_names

ROUNDS = 9


def yardstick() -> None:
    """One year of sun positions."""
    hours = pd.date_range("1990-01-01", periods=8760, freq="h", tz="UTC")
    pvlib.solarposition.get_solarposition(hours, 36.1, -79.95, method="nrel_numpy")


def seconds(call: Callable[[], object]) -> float:
    """Return the wall time of one call."""
    start = time.perf_counter()
    call()
    return time.perf_counter() - start


def ratio(call: Callable[[], object]) -> tuple[float, float]:
    """Return median seconds and the median ratio to the yardstick, interleaved."""
    call()
    pairs = [(seconds(call), seconds(yardstick)) for _ in range(ROUNDS)]
    return statistics.median(a for a, _ in pairs), statistics.median(a / b for a, b in pairs)


def main() -> None:
    """Print one line per source."""
    requests = {name: WeatherRequest(shipped=name) for name in shipped_names()}
    requests["clear sky"] = WeatherRequest(
        clear_sky=True, latitude=52.0, longitude=4.5, elevation=0.0, timezone="Europe/Amsterdam"
    )
    for text in sys.argv[1:]:
        requests[Path(text).name] = WeatherRequest(file=Path(text))
    for name, request in requests.items():
        took, times = ratio(lambda request=request: load_weather(request))
        print(f"{name:<40}{1000.0 * took:8.0f} ms{times:8.2f} yardsticks")


if __name__ == "__main__":
    main()
