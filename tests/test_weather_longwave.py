"""Long-wave from the sky: single formulas as printed, the model against measured records."""

from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.weather_opendata import pvlib_samples
from weather import psychro, sky
from weather.load import load_weather
from weather.record import Weather
from weather.request import WeatherRequest


@pytest.fixture(scope="module")
def samples(request: pytest.FixtureRequest) -> Path:
    return pvlib_samples(request.config.cache)


def test_published_emissivities_at_10_c_80_pct() -> None:
    # the formulas worked by hand at 10 degC, 80 %: e = 982.4 Pa, dew point 6.71 degC
    e = psychro.vapour_pressure(10.0, 80.0)
    temp = np.array(10.0)
    assert sky.brunt(e) == pytest.approx(0.7237, abs=1e-3)
    assert sky.brutsaert(e, temp) == pytest.approx(0.7672, abs=1e-3)
    assert sky.idso(e, temp) == pytest.approx(0.8168, abs=1e-3)
    assert sky.berdahl_martin(psychro.dew_point(e)) == pytest.approx(0.7519, abs=1e-3)
    assert sky.swinbank(temp) == pytest.approx(0.7508, abs=1e-3)
    assert sky.prata(e, temp) == pytest.approx(0.7762, abs=1e-3)


@settings(deadline=None)
@given(st.floats(0, 1), st.floats(0.4, 1))
def test_crawford_duchon_lies_between_clear_and_black(clearness: float, clear: float) -> None:
    value = float(sky.crawford_duchon(np.array(clear), np.array(clearness)))
    assert clear - 1e-12 <= value <= 1.0 + 1e-12


def measured(frame: pd.DataFrame, path: Path, zone: str, **site: float) -> tuple[Weather, np.ndarray]:
    """Write a station's minutes as a plain record, read it with our reader, add the measured hours."""
    frame.to_csv(path, index_label="time")
    request = WeatherRequest(file=path, timezone=zone, longwave="model", label="start", **site)
    weather = load_weather(request)
    hours = frame["longwave_down"].groupby(frame.index.floor("h")).mean()
    start = pd.DatetimeIndex(
        weather.time + np.timedelta64(round(-3600 * weather.utc_offset_h), "s"), tz="UTC"
    )
    return weather, hours.reindex(start).to_numpy()


@pytest.mark.registry
def test_model_on_payerne_june_2016(samples: Path, tmp_path: Path) -> None:
    # BSRN Payerne, June 2016, one-minute means (L. Vuilleumier, MeteoSwiss)
    data, _ = pvlib.iotools.read_bsrn(samples / "bsrn-pay0616.dat.gz")
    columns = ["ghi", "dni", "dhi", "temp_air", "relative_humidity"]
    frame = data[columns].assign(pressure=data["pressure"] * 100.0, longwave_down=data["lwd"])
    weather, measured_hours = measured(
        frame, tmp_path / "payerne.csv", "Europe/Zurich", latitude=46.815, longitude=6.944, elevation=491.0
    )
    error = weather.longwave_down - measured_hours
    night = weather.zenith > 90.0
    assert len(weather) == 720
    assert np.sqrt(np.nanmean(error**2)) <= 15.0
    assert np.sqrt(np.nanmean(error[night] ** 2)) <= 18.0
    assert abs(np.nanmean(error)) < 5.0
    assert abs(np.nanmean(error[night])) < 5.0
    # averaged to hours, the record keeps its energy (pandas' own means)
    means = frame["ghi"].clip(lower=0.0).groupby(frame.index.floor("h")).mean().sum()
    assert weather.ghi.sum() == pytest.approx(means, rel=2e-3)


@pytest.mark.registry
@pytest.mark.filterwarnings("ignore:The inplace keyword")  # pvlib's SURFRAD reader on pandas 3.1
def test_model_on_alamosa(samples: Path, tmp_path: Path) -> None:
    # NOAA SURFRAD Alamosa (San Luis Valley), 1 January 2016, 2317 m: a clear, cold, strongly inverted night
    data, _ = pvlib.iotools.read_surfrad(samples / "surfrad-slv16001.dat")
    frame = data[["ghi", "dni", "dhi", "temp_air", "relative_humidity"]].assign(
        pressure=data["pressure"] * 100.0, longwave_down=data["dw_ir"], wind_speed=data["wind_speed"]
    )
    weather, measured_hours = measured(
        frame, tmp_path / "alamosa.csv", "America/Denver", latitude=37.70, longitude=-105.92, elevation=2317.0
    )
    error = weather.longwave_down - measured_hours
    assert np.sqrt(np.nanmean(error**2)) <= 16.0
    # the night is clear but for two hours of passing cloud, which no sun tells of: hence the median
    assert abs(np.median(error[weather.zenith > 90.0])) < 5.0


@pytest.mark.registry
def test_better_than_the_book_and_than_one_emissivity(samples: Path, tmp_path: Path) -> None:
    data, _ = pvlib.iotools.read_bsrn(samples / "bsrn-pay0616.dat.gz")
    frame = data[["ghi", "temp_air", "relative_humidity"]].assign(longwave_down=data["lwd"])
    weather, hours = measured(
        frame, tmp_path / "payerne.csv", "Europe/Zurich", latitude=46.815, longitude=6.944, elevation=491.0
    )
    black = 5.670374e-8 * (weather.temp_air + 273.15) ** 4
    cloud, _ = sky.cloudiness(weather.ghi, weather.ghi_clear, weather.zenith, 3600.0)
    book = sky.crawford_duchon(sky.prata(weather.vapour_pressure, weather.temp_air), 1.0 - cloud) * black
    constant = np.nanmean(hours) / black.mean() * black

    def rms(values: np.ndarray) -> float:
        return float(np.sqrt(np.nanmean((values - hours) ** 2)))

    assert rms(weather.longwave_down) < rms(book) < rms(constant)


def test_clear_nights_send_less_than_cloudy_ones() -> None:
    hours = np.arange(96)
    zenith = 90.0 - 45.0 * np.sin(2 * np.pi * (hours % 24 - 6) / 24)
    clear = np.maximum(0.0, 800 * np.cos(np.radians(zenith)))
    temp, e = np.full(96, 5.0), np.full(96, 600.0)
    low, _ = sky.cloudiness(clear, clear, zenith, 3600.0)
    high, _ = sky.cloudiness(0.2 * clear, clear, zenith, 3600.0)
    assert low.max() == 0.0
    np.testing.assert_allclose(high, 0.8, atol=1e-12)  # nights carry what dusk and dawn show
    gain = sky.sky_longwave(e, temp, high, hours % 24.0) - sky.sky_longwave(e, temp, low, hours % 24.0)
    assert 40.0 < gain.min() <= gain.max() < 90.0


def test_night_is_blended_between_dusk_and_dawn() -> None:
    zenith = np.concatenate([np.full(6, 60.0), np.full(11, 110.0), np.full(6, 60.0)])
    clear = np.where(zenith < 90, 400.0, 0.0)
    ghi = np.where(np.arange(23) < 6, clear, 0.25 * clear)
    cloud, polar = sky.cloudiness(ghi, clear, zenith, 3600.0)
    assert not polar.any()
    np.testing.assert_allclose(cloud[5:18], np.linspace(0.0, 0.75, 13), atol=1e-9)


def test_polar_night_uses_cloud_cover_or_says_so() -> None:
    zenith = np.concatenate([np.full(10, 70.0), np.full(60, 100.0), np.full(10, 70.0)])
    clear = np.where(zenith < 90, 300.0, 0.0)
    _, polar = sky.cloudiness(clear, clear, zenith, 3600.0)
    assert polar.sum() == 60
    cover = np.full(80, 1.0)
    cloud, _ = sky.cloudiness(clear, clear, zenith, 3600.0, cover)
    np.testing.assert_allclose(cloud[20:60], 0.75)  # Kasten & Czeplak (1980): 25 % of clear light is left
