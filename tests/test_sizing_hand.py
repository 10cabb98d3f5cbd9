"""The paper calculation against arithmetic that fits on a page."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from canopy.handcheck import band_mean, hand_check
from tests.sizingcase import glass, shell, twin_film
from weather.constants import STEFAN_BOLTZMANN


def test_nominal_u_is_the_default() -> None:
    # EN 673: 4 mm float, e .837, conductivity 1 W/mK, he 25, hi 7.7: 1/(.04 + .004 + .13) = 5.75
    found = hand_check(glass(), shell(), 20.0, -10.0, STEFAN_BOLTZMANN * 263.15**4)
    assert found.u_value == pytest.approx(5.75, abs=0.03)
    # infrared double film 2.8-3.4, plain double film 4.0 (ASABE EP406, from memory), within a fifth
    assert 2.2 < hand_check(twin_film(), shell(), 20.0, -10.0, 200.0).u_value < 4.8


def test_band_mean_weights_by_planck() -> None:
    # share of 8-14 µm at 283.15 K is .36107 (blackbody tables)
    assert band_mean(np.array([0.0, 1.0, 0.0])) == pytest.approx(0.36107, abs=1e-5)
    assert band_mean(np.ones(3)) == pytest.approx(1.0, abs=1e-12)


def test_load_by_arithmetic() -> None:
    # 1000 m2 floor, 1250 m2 cover, U 6, 30 K, 4500 m3, 1/h: 225 + 45 = 270 W per m2 of floor
    house = replace(
        shell(), floor_area_m2=1000.0, roof_ratio=1.0, wall_ratio=0.25, mean_height_m=4.5,
        leakage_per_hour=1.0, perimeter_loss=0.8, perimeter_per_floor=0.13,
    )  # fmt: skip
    black = STEFAN_BOLTZMANN * 263.15**4
    found = hand_check(glass(), house, 20.0, -10.0, black, u_value=6.0)
    assert found.covering_w_m2 == pytest.approx(225.0)
    assert found.leakage_w_m2 == pytest.approx(45.0)
    assert found.perimeter_w_m2 == pytest.approx(0.8 * 0.13 * 30.0)
    assert found.sky_extra_w_m2 == 0.0
    assert found.total_w_m2 == pytest.approx(270.0 + 3.12)
    # a clear sky 70 W/m2 below black: e dR U / he over what sees the sky (sol-air, ASHRAE Fundamentals)
    clear = hand_check(glass(), house, 20.0, -10.0, black - 70.0, u_value=6.0)
    assert clear.sky_extra_w_m2 == pytest.approx((0.92 + 0.25 * 0.45) * 70.0 * 0.837 * 6.0 / 25.0)
    assert "x 30.0 K = 225" in clear.text
