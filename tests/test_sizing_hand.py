"""The paper calculation against EN 673, and against arithmetic that fits on a page."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from canopy.handcheck import band_mean, gap_u, hand_check, nominal_u
from canopy.heatcase import CoveringHeat
from canopy.optics import Gap
from tests.sizingcase import glass, sheet, shell, twin_film
from weather.constants import STEFAN_BOLTZMANN


def test_single_glass_by_en_673() -> None:
    # EN 673: 4 mm float, e .837, conductivity 1 W/mK, he 25, hi 7.7: 1/(.04 + .004 + .13) = 5.75
    value, through = nominal_u(glass())
    assert value == pytest.approx(5.75, abs=0.03)
    assert through == 0.0


def test_double_glass_by_en_673() -> None:
    # EN 673: 4-12-4 air, upright: 2.85
    pane = sheet(0.0, 0.837, 2)
    double = CoveringHeat(pane, pane, (8400.0, 8400.0), (0.004, 0.004), (Gap(0.012),))
    assert nominal_u(double, upright=True)[0] == pytest.approx(2.85, abs=0.03)
    coated = replace(pane, reflect_outside=np.array([[0.163] * 3, [0.96] * 3]))
    low = CoveringHeat(coated, coated, (8400.0, 8400.0), (0.004, 0.004), (Gap(0.016, "argon"),))
    assert nominal_u(low, upright=True)[0] == pytest.approx(1.1, abs=0.1)  # common practice: 1.1 with e .04


def test_film_by_published_ranges() -> None:
    # ASABE EP406 (from memory): single PE 6.5-6.8, double PE 4.0 W m-2 K-1 of cover; a nominal U
    # without sky and drops stays within a fifth of them
    thin = sheet(0.7, 0.22)
    assert nominal_u(CoveringHeat(thin, thin, (350.0,), (0.0005,), ()))[0] == pytest.approx(6.6, rel=0.2)
    pair = sheet(0.7, 0.22, 2)
    plain = CoveringHeat(pair, pair, (350.0, 350.0), (0.0005, 0.0005), (Gap(0.05),))
    assert nominal_u(plain)[0] == pytest.approx(4.0, rel=0.2)
    assert nominal_u(twin_film())[0] == pytest.approx(3.1, rel=0.2)  # infrared double film 2.8-3.4


def test_band_mean_weights_by_planck() -> None:
    # share of 8-14 µm at 283.15 K is .36107 (blackbody tables)
    assert band_mean(np.array([0.0, 1.0, 0.0])) == pytest.approx(0.36107, abs=1e-5)
    assert band_mean(np.ones(3)) == pytest.approx(1.0, abs=1e-12)


def test_gap_web_and_still_gas() -> None:
    bare, webbed = Gap(0.002), Gap(0.002, web_conductance=1.5)
    assert gap_u(webbed, 0.9, 0.9) - gap_u(bare, 0.9, 0.9) == pytest.approx(1.5)
    # 2 mm of still air: .02496/.002 = 12.5, radiation 5.15 x .818 = 4.2 (EN 673 table 1)
    assert gap_u(bare, 0.9, 0.9) == pytest.approx(12.48 + 4.21, abs=0.05)


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
