"""Moist air against PsychroLib (ASHRAE's formulas coded independently) and printed values."""

import numpy as np
import psychrolib
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from weather import psychro

psychrolib.SetUnitSystem(psychrolib.SI)


@pytest.mark.parametrize(("temp", "pascal"), [(0, 611.15), (10, 1228.0), (20, 2338.8), (30, 4246.0)])
def test_saturation_pressure_printed(temp: float, pascal: float) -> None:
    # ASHRAE Fundamentals (2017) ch. 1 table 3
    assert psychro.saturation_pressure(temp) == pytest.approx(pascal, rel=1e-3)


def test_dew_point_and_wet_bulb_at_25_c_50_pct() -> None:
    e = psychro.vapour_pressure(25.0, 50.0)  # ASHRAE formulas via PsychroLib
    assert psychro.dew_point(e) == pytest.approx(13.86, abs=0.01)
    assert psychro.wet_bulb(25.0, e) == pytest.approx(17.89, abs=0.01)


@settings(deadline=None)
@given(st.floats(-40, 50), st.floats(3, 100), st.floats(60e3, 105e3))
def test_agrees_with_psychrolib(temp: float, rh: float, pressure: float) -> None:
    e = psychro.vapour_pressure(temp, rh)
    assert psychro.saturation_pressure(temp) == pytest.approx(psychrolib.GetSatVapPres(temp), rel=1e-9)
    assert psychro.dew_point(e) == pytest.approx(psychrolib.GetTDewPointFromRelHum(temp, rh / 100), abs=2e-3)
    ratio = psychrolib.GetHumRatioFromRelHum(temp, rh / 100, pressure)
    # PsychroLib rounds the ratio of molar masses to .621945
    assert psychro.humidity_ratio(e, pressure) == pytest.approx(max(ratio, 1e-7), rel=2e-5, abs=1e-7)
    density = psychrolib.GetMoistAirDensity(temp, ratio, pressure)
    assert psychro.air_density(temp, pressure, e) == pytest.approx(density, rel=1e-4)
    wet = psychrolib.GetTWetBulbFromRelHum(temp, rh / 100, pressure)
    assert psychro.wet_bulb(temp, e, pressure) == pytest.approx(wet, abs=3e-3)
    assert psychro.relative_humidity(temp, e) == pytest.approx(rh, rel=1e-12)
    enthalpy = psychrolib.GetMoistAirEnthalpy(temp, ratio)
    assert psychro.moist_air_enthalpy(temp, ratio) == pytest.approx(enthalpy, rel=1e-9, abs=1e-6)


@settings(deadline=None)
@given(st.floats(-80, 60))
def test_dew_point_inverts_both_forms(temp: float) -> None:
    for over in ("ashrae", "water"):
        e = psychro.saturation_pressure(temp, over)
        assert psychro.dew_point(e, over) == pytest.approx(temp, abs=1e-3 if abs(temp) < 0.5 else 1e-6)


def test_supercooled_water_printed() -> None:
    # Murphy & Koop (2005), table C1: liquid 240 K 37.667 Pa; ice 240 K 27.272 Pa
    assert psychro.saturation_pressure(240 - 273.15, "water") == pytest.approx(37.667, rel=1e-3)
    assert psychro.saturation_pressure(240 - 273.15) == pytest.approx(27.272, rel=1e-3)


@settings(deadline=None)
@given(st.floats(-60, 60))
def test_slope_is_the_derivative(temp: float) -> None:
    h = 1e-3
    if abs(temp - psychro.TRIPLE_POINT_C) < 2 * h:
        return
    diff = (psychro.saturation_pressure(temp + h) - psychro.saturation_pressure(temp - h)) / (2 * h)
    assert psychro.saturation_slope(temp) == pytest.approx(float(diff), rel=1e-5)


def test_standard_atmosphere_and_psychrometric_constant() -> None:
    # FAO-56 (Allen et al. 1998) example 2: 1800 m gives 81.8 kPa and .054 kPa/K
    pressure = psychro.standard_pressure(1800.0)
    assert pressure == pytest.approx(81.8e3, rel=0.01)
    assert psychro.psychrometric_constant(pressure) == pytest.approx(54.0, rel=0.015)
    assert psychro.standard_pressure(1500.0) == pytest.approx(
        psychrolib.GetStandardAtmPressure(1500.0), rel=1e-9
    )


def test_latent_heat_printed() -> None:
    # ASHRAE Fundamentals (2017) ch. 1 table 3: 2453.5 kJ/kg at 20 degC
    assert psychro.latent_heat(20.0) == pytest.approx(2453.5e3, rel=1e-3)


def test_arrays_keep_their_shape() -> None:
    temp = np.linspace(-20, 40, 12).reshape(3, 4)
    assert psychro.wet_bulb(temp, psychro.vapour_pressure(temp, 60.0)).shape == (3, 4)
