"""Design conditions and degree days of a real record against published climate figures."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from canopy.degreedays import degree_days
from canopy.designoutside import design_outside
from weather.load import WeatherRequest, load_weather
from weather.record import DesignConditions, Weather


@pytest.fixture(scope="module")
def greensboro() -> Weather:
    return load_weather(WeatherRequest(shipped="greensboro"))


def test_degree_days_of_greensboro(greensboro: Weather) -> None:
    # NOAA climate normals: about 3800 °F d below 65 °F from daily means (from memory)
    found = degree_days(greensboro.time, greensboro.temp_air, 3600.0, ((65.0 - 32.0) / 1.8,))
    assert 1.8 * found.daily_mean[0] == pytest.approx(3800.0, rel=0.08)


def test_design_conditions_of_greensboro(greensboro: Weather) -> None:
    # ASHRAE climatic design conditions: 99.6 % about -9.4 degC (from memory); one year scatters
    found = design_outside(greensboro)
    assert found.temp_c == pytest.approx(-9.4, abs=2.5)
    assert np.count_nonzero(greensboro.temp_air < found.temp_c) <= 35
    assert "no design conditions in the file" in found.temp_source
    assert found.wind_m_s == 4.0  # the coldest hours are calm: raised to 4 m/s
    assert "raised to 4 m/s" in found.wind_source
    # a clear sky at -11 degC and 200 Pa: Prata 1996 gives an emissivity of .70-.72
    black = 5.670374e-8 * (found.temp_c + 273.15) ** 4
    assert found.sky_w_m2 / black == pytest.approx(0.71, abs=0.02)
    assert found.sky_bands.sum() == pytest.approx(found.sky_w_m2)
    assert len(found.coldest) == 88


def test_further_years_count(greensboro: Weather) -> None:
    colder = replace(greensboro, temp_air=greensboro.temp_air - 4.0)
    both = design_outside(greensboro, (colder,))
    every = np.concatenate([greensboro.temp_air, colder.temp_air])
    assert np.count_nonzero(every < both.temp_c) <= 70  # twice 35 h in two years
    assert both.temp_c < design_outside(greensboro).temp_c - 1.0
    assert "2 records' 17520 hours" in both.temp_source


def test_header_design_conditions_come_first(greensboro: Weather) -> None:
    given = replace(greensboro, design=DesignConditions(-8.1, -5.6, "header of the file"))
    found = design_outside(given)
    assert found.temp_c == -8.1
    assert found.temp_data_c < -8.1
    assert "header of the file" in found.temp_source


def test_windy_record_keeps_its_wind(greensboro: Weather) -> None:
    windy = replace(greensboro, wind_speed=greensboro.wind_speed + 5.0)
    found = design_outside(windy)
    rows = np.argsort(windy.temp_air, kind="stable")[:88]
    assert found.wind_m_s == pytest.approx(windy.wind_speed[rows].mean())
    assert "raised" not in found.wind_source
