"""From a request to a closed, gap-free record."""

import numpy as np
import pandas as pd
import pvlib
import pytest

from weather.errors import UserError
from weather.load import load_weather
from weather.record import Weather
from weather.request import WeatherRequest
from weather.typical import shipped_path, shipped_year


@pytest.fixture(scope="module")
def greensboro() -> Weather:
    return load_weather(WeatherRequest(shipped="greensboro"))


def law(weather: Weather) -> float:
    beam = weather.dni * np.maximum(np.cos(np.radians(weather.zenith)), 0.0)
    return float(np.abs(weather.ghi - weather.dhi - beam).max())


def test_global_is_the_file_and_the_law_holds(greensboro: Weather) -> None:
    data, _ = pvlib.iotools.read_tmy3(shipped_path(shipped_year("greensboro")), map_variables=True)
    assert len(greensboro) == 8760
    np.testing.assert_allclose(greensboro.ghi, data["ghi"].to_numpy(), atol=1e-12)
    np.testing.assert_allclose(greensboro.temp_air, data["temp_air"].to_numpy(), atol=1e-12)
    np.testing.assert_allclose(greensboro.pressure, data["pressure"].to_numpy() * 100.0, rtol=1e-12)
    assert law(greensboro) < 1e-9
    assert (greensboro.dni <= data["dni"].to_numpy() + 1e-9).all()
    # the file's own diffuse is kept on the whole: its closure error goes into single hours
    assert greensboro.dhi.mean() == pytest.approx(data["dhi"].mean(), rel=0.02)


def test_record_is_whole_and_in_range(greensboro: Weather) -> None:
    for name in ("ghi", "dni", "dhi", "longwave_down", "wind_speed", "pressure", "precipitable_water"):
        values = getattr(greensboro, name)
        assert np.isfinite(values).all(), name
        assert (values >= 0.0).all(), name
    night = greensboro.zenith > 104.0
    assert not greensboro.ghi[night].any()
    assert not greensboro.dni[night].any()
    assert (greensboro.temp_dew <= greensboro.temp_air).all()
    assert (greensboro.relative_humidity <= 100.0).all()


def test_sun_is_pvlibs_at_mid_hour(greensboro: Weather) -> None:
    middle = pd.DatetimeIndex(greensboro.time).tz_localize("Etc/GMT+5") + pd.Timedelta("30min")
    sun = pvlib.solarposition.get_solarposition(
        middle, 36.1, -79.95, altitude=273.0, pressure=98084.0, method="nrel_numpy"
    )
    np.testing.assert_allclose(greensboro.azimuth, sun["azimuth"], atol=2e-3)
    np.testing.assert_allclose(greensboro.zenith, sun["apparent_zenith"], atol=2e-3)


def test_unknown_shipped_year_names_the_nearest() -> None:
    with pytest.raises(UserError, match=r'did you mean "greensboro"'):
        load_weather(WeatherRequest(shipped="greensborro"))


def _at(latitude: float, longitude: float, zone: str) -> WeatherRequest:
    return WeatherRequest(shipped="greensboro", latitude=latitude, longitude=longitude, timezone=zone)


@pytest.mark.parametrize(
    ("latitude", "longitude", "zone"),
    [
        (52.0, 5.3, "Europe/Amsterdam"),
        (-36.1, -79.95, "America/New_York"),
        (38.2, -79.95, "America/New_York"),
        (36.1, -76.9, "America/New_York"),
    ],
)
def test_weather_from_elsewhere_is_refused(latitude: float, longitude: float, zone: str) -> None:
    with pytest.raises(UserError, match="degrees of latitude and 3 of longitude") as caught:
        load_weather(_at(latitude, longitude, zone))
    assert f"{latitude:g}, {longitude:g}" in str(caught.value)
    assert "36.1, -79.95" in str(caught.value)


def test_weather_from_nearby_is_warned_of() -> None:
    weather = load_weather(_at(37.5, -78.0, "America/New_York"))
    (found,) = [f for f in weather.findings if f.check == "site"]
    assert found.level == "warning"
    assert "(36.10, -79.95)" in found.text
