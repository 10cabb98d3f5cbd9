"""Heat store against boiler: the exact answer beside a linear programme (scipy, HiGHS), and laws."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import sparse
from scipy.optimize import linprog

from canopy.heatstore import capacity, smallest_boiler, store_sizes


def lp_boiler(load: np.ndarray, full: float, loss: float) -> float:
    """Return min b subject to s[t+1] = (1-loss) s[t] + p[t] - q[t], 0 <= s <= full, 0 <= p <= b, cyclic."""
    n = len(load)
    eye = sparse.identity(n, format="csr")
    shift = sparse.csr_matrix((np.full(n, 1.0 - loss), (np.arange(n), (np.arange(n) - 1) % n)), shape=(n, n))
    equal = sparse.hstack([eye - shift, -eye, sparse.csr_matrix((n, 1))], format="csr")
    below = sparse.hstack([sparse.csr_matrix((n, n)), eye, sparse.csr_matrix(-np.ones((n, 1)))], format="csr")
    bounds = [(0.0, full)] * n + [(0.0, None)] * (n + 1)
    cost = np.r_[np.zeros(2 * n), 1.0]
    result = linprog(
        cost, A_ub=below, b_ub=np.zeros(n), A_eq=equal, b_eq=-load, bounds=bounds, method="highs"
    )
    assert result.status == 0, result.message
    return float(result.fun)


def winter(days: int, seed: int) -> np.ndarray:
    """Return a load with nights, cold spells and idle hours, W/m2."""
    rng = np.random.default_rng(seed)
    hour = np.arange(days * 24)
    spell = np.repeat(np.convolve(rng.normal(size=days + 6), np.ones(7) / 7, "valid"), 24)
    load = 70.0 + 55.0 * np.cos(2 * np.pi * (hour - 4) / 24) + 90.0 * spell + rng.normal(0.0, 8.0, len(hour))
    return np.maximum(0.0, load * (0.55 + 0.45 * np.cos(2 * np.pi * hour / len(hour))))


@pytest.mark.parametrize("loss", [0.0, 0.0004, 0.01, 0.2])
@pytest.mark.parametrize("volume", [0.0, 10.0, 80.0, 400.0])
def test_store_and_boiler_pairs_match_a_linear_programme(loss: float, volume: float) -> None:
    load = winter(60, seed=7)
    full = float(capacity(volume, 40.0)) * 1000.0
    # the simplex stops within its own tolerance, some 3e-6 here
    assert smallest_boiler(load, full, loss) == pytest.approx(lp_boiler(load, full, loss), rel=1e-5)


def test_a_whole_year_matches_a_linear_programme() -> None:
    load = winter(365, seed=3)
    full = float(capacity(100.0, 40.0)) * 1000.0
    assert smallest_boiler(load, full, 0.0004) == pytest.approx(lp_boiler(load, full, 0.0004), rel=1e-6)


def test_half_hours_mean_the_same_as_hours() -> None:
    load = winter(40, seed=5)
    hourly = smallest_boiler(load, 2000.0, 0.0)
    halves = smallest_boiler(np.repeat(load, 2), 2000.0, 0.0, step_s=1800.0)
    assert halves == pytest.approx(hourly, rel=1e-9)


def test_by_hand_one_cold_night() -> None:
    # 8 h at 100, 16 h at 0: without losses the mean 100/3 is the least any store allows; a store of 400 Wh
    # leaves 800 - 400 = 400 Wh for 8 h of boiler = 50 W
    day = np.r_[np.full(8, 100.0), np.zeros(16)]
    assert smallest_boiler(day, 0.0, 0.0) == pytest.approx(100.0)
    assert smallest_boiler(day, 400.0, 0.0) == pytest.approx(50.0)
    assert smallest_boiler(day, 1e6, 0.0) == pytest.approx(100.0 / 3.0)


def test_capacity_by_hand() -> None:
    # 100 m3 x 983.2 kg/m3 x 4.186 kJ/kgK x 40 K = 16.46 GJ = 4573 kWh on 1000 m2
    assert float(capacity(100.0, 40.0)) == pytest.approx(4.573, abs=0.002)
    assert float(capacity(1000.0, 1.0)) == pytest.approx(1.143, abs=0.001)  # kWh per m3 and K


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.floats(0.0, 300.0), min_size=2, max_size=60),
    st.floats(0.0, 3000.0),
    st.floats(0.0, 0.3),
)
def test_laws(load: list[float], full: float, loss: float) -> None:
    """More store never needs more boiler; between the mean and the peak; the greedy plan really holds."""
    q = np.array(load)
    size = smallest_boiler(q, full, loss)
    assert q.mean() - 1e-6 <= size <= q.max() + 1e-6
    assert smallest_boiler(q, full + 100.0, loss) <= size + 1e-6
    content, lowest = full, 0.0
    for _ in range(2):
        for need in q:
            content = min(full, (1.0 - loss) * content + size - need)
            lowest = min(lowest, content)
    assert lowest >= -1e-5


def test_reserve_and_idle_house() -> None:
    sizes = store_sizes(winter(30, seed=1))
    assert np.all(np.diff(sizes.boiler_w_m2) <= 1e-9)
    assert sizes.with_reserve_w_m2 == pytest.approx(sizes.boiler_w_m2 * (1.0 + sizes.reserve_pct / 100.0))
    assert np.all(store_sizes(np.zeros(48)).boiler_w_m2 == 0.0)
