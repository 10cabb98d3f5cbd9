"""Saturation, stomata, transpiration and the water film."""

from __future__ import annotations

import numpy as np
import psychrolib
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy import vapour as vp

psychrolib.SetUnitSystem(psychrolib.SI)


@pytest.mark.parametrize("celsius", [-20.0, -5.0, 0.0, 10.0, 20.0, 30.0, 45.0])
def test_saturation_against_psychrolib(celsius: float) -> None:
    value, slope = vp.saturation(np.array([celsius]))
    assert value[0] == pytest.approx(psychrolib.GetSatVapPres(celsius), rel=2e-4)
    around = psychrolib.GetSatVapPres(celsius + 0.5) - psychrolib.GetSatVapPres(celsius - 0.5)
    if celsius != 0.0:
        assert slope[0] == pytest.approx(around, rel=2e-3)


def test_mixing_ratio_against_psychrolib() -> None:
    ratio, _ = vp.mixing_ratio(np.array([1500.0]), np.array([101325.0]))
    assert ratio[0] == pytest.approx(psychrolib.GetHumRatioFromVapPres(1500.0, 101325.0), rel=1e-3)


def test_light_and_temperature_open_the_stomata() -> None:
    # Stanghellini (1987): (I + 4.3)/(I + .54): 8.0 in the dark, 1.04 at 100 W/m2; 82 s/m at 24.5 degC
    assert vp.light_factor(np.array([0.0, 100.0])) == pytest.approx([7.96, 1.037], abs=0.01)
    best, _ = vp.stomata(np.array([24.5]), np.array([1.0]), np.array([1.0]))
    assert best[0] == pytest.approx(82.0)
    night, _ = vp.stomata(np.array([16.0]), np.array([7.96]), np.array([0.0]))
    assert night[0] == pytest.approx(82 * 7.96 * (1 + 0.005 * 17.6**2), rel=1e-3)


def test_transpiration_of_a_sunny_stand_is_of_the_measured_size() -> None:
    # LAI 3, 1 kPa, bright light: 150-350 W/m2 latent is what greenhouse tomato stands are measured at
    # (Stanghellini 1987; Katsoulas & Stanghellini 2019, Agronomy 9:392), from memory
    unit = np.array([2 * 3 * 1.2 * 0.622 * vp.LATENT_HEAT / 101325])
    value, *_ = vp.transpiration(np.array([1000.0]), np.array([1 / 200]), np.array([90.0]), unit)
    assert 150.0 < value[0] < 350.0


def test_transpiration_rises_with_the_deficit_and_turns_to_dew() -> None:
    deficit = np.linspace(-500.0, 3000.0, 200)
    value, slope, _, _ = vp.transpiration(
        deficit, np.full(200, 1 / 200), np.full(200, 300.0), np.full(200, 100.0)
    )
    assert (np.diff(value) > 0.0).all()
    assert (np.sign(value) == np.sign(deficit)).all()
    numeric = np.gradient(value, deficit)
    assert slope[30:] == pytest.approx(numeric[30:], rel=0.02)


@settings(max_examples=200, deadline=None, derandomize=True)
@given(st.floats(0.0, vp.FILM_MAX_KG_M2), st.floats(-0.5, 0.2))
def test_film_keeps_its_water(before: float, inflow: float) -> None:
    film, uptake, over, by_before, by_inflow = (
        x[0] for x in vp.film_step(np.array([before]), np.array([inflow]))
    )
    assert 0.0 <= film <= vp.FILM_MAX_KG_M2
    assert film == pytest.approx(before + uptake - over, abs=1e-15)
    assert over == 0.0 or film == vp.FILM_MAX_KG_M2
    assert 0.0 <= by_before <= 1.0
    assert 0.0 <= by_inflow <= 1.0
    if inflow >= 0.0:
        assert uptake == pytest.approx(inflow, abs=1e-15)
    else:
        assert inflow - 1e-15 <= uptake <= 1e-15


def test_film_dries_monotonically() -> None:
    film = np.array([0.03])
    for _ in range(30):
        after = vp.film_step(film, np.array([-0.004]))[0]
        assert after[0] < film[0]
        film = after
    assert film[0] < 1e-3
