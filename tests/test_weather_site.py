"""Places, clocks and suns: half-hour zones, both hemispheres, polar night, seasons, the clear-sky year."""

import re
import zoneinfo
from datetime import UTC, datetime
from importlib import resources

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from weather import site as place
from weather import sun
from weather.errors import UserError
from weather.load import load_weather, split_years
from weather.record import Weather
from weather.request import WeatherRequest
from weather.season import season
from weather.typical import shipped_names


def zone_places() -> list[tuple[str, float, float]]:
    """Return the principal place of every zone in the IANA table (ISO 6709 degrees, minutes, seconds)."""
    text = resources.files("tzdata").joinpath("zoneinfo/zone1970.tab").read_text(encoding="utf-8")
    found = []
    for line in text.splitlines():
        if line.startswith("#") or not line.strip():
            continue
        _, where, name = line.split("\t")[:3]
        match = re.fullmatch(r"([+-])(\d{2})(\d{2})(\d{2})?([+-])(\d{3})(\d{2})(\d{2})?", where)
        assert match is not None
        sign_a, d_a, m_a, _, sign_b, d_b, m_b, _ = match.groups()
        latitude = float(d_a) + float(m_a) / 60
        longitude = float(d_b) + float(m_b) / 60
        found.append(
            (name, latitude * (1 if sign_a == "+" else -1), longitude * (1 if sign_b == "+" else -1))
        )
    return found


def test_every_zone_of_the_iana_table_fits_its_own_place() -> None:
    places = zone_places()
    assert len(places) > 300
    for name, latitude, longitude in places:
        place.check_coordinates(latitude, longitude, place.standard_offset_h(name))


@pytest.mark.parametrize(
    ("latitude", "longitude", "zone", "message"),
    [
        (4.9, 52.4, "Europe/Amsterdam", "swapped"),
        (-79.95, 36.1, "America/New_York", "swapped"),
        (36.1, 79.95, "America/New_York", "sign of the longitude"),
        (139.7, 35.7, "Asia/Tokyo", "latitude.*swapped"),
        (52.0, 200.0, "Europe/Amsterdam", "allowed -180 to 180"),
        (52.0, 4.0, "Europe/Amsterdm", "did you mean"),
        (52.0, 4.0, "../etc/passwd", "not an IANA zone"),
        (float("nan"), 4.0, "Europe/Amsterdam", "allowed -90 to 90"),
    ],
)
def test_bad_places_are_told(latitude: float, longitude: float, zone: str, message: str) -> None:
    with pytest.raises(UserError, match=message):
        place.make_site(latitude, longitude, 0.0, zone)


def test_elevation_is_looked_up() -> None:
    # Denver lies at 1609 m; pvlib's map is coarse
    assert place.make_site(39.74, -104.99, None, "America/Denver").elevation == pytest.approx(1609, abs=150)


@pytest.mark.parametrize("utc", ["2003-10-17T19:30:30"])
def test_nrel_example(utc: str) -> None:
    # NREL/TP-560-34302 (Reda & Andreas 2008) table A5.1: zenith 50.11162, azimuth 194.34024
    found = sun.sun_positions(
        np.array([utc], dtype="datetime64[s]"), 39.742476, -105.1786, 1830.14, 82000.0, 11.0, delta_t=67.0
    )
    assert found.apparent_zenith[0] == pytest.approx(50.11162, abs=1e-4)
    assert found.azimuth[0] == pytest.approx(194.34024, abs=1e-4)


def test_fao_examples() -> None:
    # FAO-56 (Allen et al. 1998) examples 8 and 9: 20 S, 3 September: Ra 32.2 MJ m-2 d-1, 11.7 h of daylight
    utc = np.array(["2001-09-03T12:00:00"], dtype="datetime64[s]")
    # FAO's declination (6.9 degrees) is .7 off the almanac's and its solar constant .4 % higher
    assert sun.extraterrestrial_daily(-20.0, utc)[0] / 1e6 == pytest.approx(32.2, rel=0.025)
    assert sun.day_length_h(-20.0, utc)[0] == pytest.approx(11.7, abs=0.1)
    # example 19: 16.22 N, 16.25 W, 1 October, 14-15 h local (UTC-1): 3.543 MJ m-2 h-1 at MID-hour
    middle = np.array(["2001-10-01T15:30:00"], dtype="datetime64[s]")
    cosz = np.cos(np.radians(sun.sun_positions(middle, 16.2167, -16.25, 8.0).zenith))
    assert (sun.extraterrestrial_normal(middle) * cosz * 3600 / 1e6)[0] == pytest.approx(3.543, rel=0.01)


@settings(deadline=None, max_examples=30)
@given(st.floats(-70, 70), st.integers(0, 364))
def test_daily_sum_is_the_integral_over_nrel_positions(latitude: float, day: int) -> None:
    midnight = np.datetime64("1990-01-01T00:00:00") + np.timedelta64(day, "D")
    utc = midnight + (np.arange(288) * 300 + 150) * np.timedelta64(1, "s")
    cosz = np.maximum(np.cos(np.radians(sun.sun_positions(utc, latitude, 0.0).zenith)), 0.0)
    integral = float((sun.extraterrestrial_normal(utc) * cosz).sum() * 300.0)
    daily = float(sun.extraterrestrial_daily(latitude, utc[143:144])[0])
    assert daily == pytest.approx(integral, rel=8e-3, abs=2e5)


@settings(deadline=None, max_examples=30)
@given(st.floats(-60, 70), st.floats(-179, 179), st.integers(0, 364))
def test_sun_stands_highest_at_true_noon(latitude: float, longitude: float, day: int) -> None:
    utc = (
        np.datetime64("1990-01-01T00:00:00")
        + np.timedelta64(day, "D")
        + np.arange(288) * np.timedelta64(300, "s")
    )
    hour = place.solar_time(utc, longitude)
    zenith = sun.sun_positions(utc, latitude, longitude).zenith
    at_top = hour[np.argmin(zenith)]
    assert abs(at_top - 12.0) < 0.15


def zero_weather(zone: str, latitude: float, longitude: float) -> Weather:
    return load_weather(
        WeatherRequest(clear_sky=True, latitude=latitude, longitude=longitude, elevation=0.0, timezone=zone)
    )


@pytest.mark.parametrize(
    ("zone", "latitude", "longitude"),
    [
        ("Asia/Kolkata", 28.6, 77.2),
        ("Australia/Adelaide", -34.9, 138.6),
        ("America/St_Johns", 47.6, -52.7),
        ("Asia/Kathmandu", 27.7, 85.3),
        ("Pacific/Auckland", -36.8, 174.8),
        ("America/Punta_Arenas", -53.2, -70.9),
        ("Europe/Oslo", 69.6, 18.9),
        ("Pacific/Kiritimati", 1.9, -157.4),
    ],
)
def test_clear_sky_years_anywhere(zone: str, latitude: float, longitude: float) -> None:
    weather = zero_weather(zone, latitude, longitude)
    assert len(weather) == 8760
    beam = weather.dni * np.maximum(np.cos(np.radians(weather.zenith)), 0.0)
    np.testing.assert_allclose(weather.ghi, weather.dhi + beam, atol=1e-9)
    for name in ("ghi", "dni", "dhi", "longwave_down", "temp_air", "precipitable_water"):
        assert np.isfinite(getattr(weather, name)).all(), name
    assert (weather.ghi >= 0).all()
    # civil hours against the standard library's own clock, in a year with today's rules and the same weekdays
    civil = place.civil_hours(weather)
    tz = zoneinfo.ZoneInfo(zone)
    shift = datetime(2018, 1, 1, tzinfo=UTC).timestamp() - datetime(1990, 1, 1, tzinfo=UTC).timestamp()
    for row in (0, 2000, 4400, 8000):
        second = float(place.mid_times_utc(weather)[row].astype(np.int64)) + shift
        local = datetime.fromtimestamp(second, tz)
        assert civil[row] == pytest.approx(local.hour + local.minute / 60)
    # the brightest hour of the day lies at solar noon
    midsummer = weather.ghi.reshape(365, 24)[171 if latitude > 0 else 354]
    noon = place.solar_hours(weather).reshape(365, 24)[0][int(midsummer.argmax())]
    assert abs(noon - 12.0) < 0.8
    assert any("UPPER BOUND" in item.text for item in weather.findings)
    assert weather.clear_sky


def test_clear_sky_bounds_a_real_month() -> None:
    bound = zero_weather("America/New_York", 36.1, -79.95)
    real = load_weather(WeatherRequest(shipped="greensboro"))
    month = real.time.astype("datetime64[M]").astype(int) % 12
    assert (np.bincount(month, bound.ghi) > np.bincount(month, real.ghi)).all()


def test_polar_night_is_dark_and_whole() -> None:
    weather = zero_weather("Europe/Oslo", 69.6, 18.9)
    december = slice(8760 - 744, 8760)
    assert weather.ghi[december].max() < 5.0
    assert any(item.check == "polar-night" for item in weather.findings)


def test_season_windows() -> None:
    year = np.datetime64("1990-01-01T00:00:00") + np.arange(8760) * np.timedelta64(3600, "s")
    assert season(year, None, None).all()
    assert season(year, "03-01", "03-31").sum() == 31 * 24
    wrapped = season(year, "10-15", "03-01")
    assert wrapped.sum() == (17 + 30 + 31 + 31 + 28 + 1) * 24
    assert wrapped[0]
    assert not wrapped[4000]
    for bad in ("13-01", "02-30", "June", "1", "10-15-20"):
        with pytest.raises(UserError, match="MM-DD"):
            season(year, bad, None)


def test_days_and_day_numbers() -> None:
    weather = load_weather(WeatherRequest(shipped="greensboro", first_day="11-01", last_day="02-28"))
    assert place.day_of_year(weather)[[0, 23, 24, -1]].tolist() == [1, 1, 2, 365]
    assert len(np.unique(place.local_days(weather))) == 365
    assert weather.in_season.sum() == (30 + 31 + 31 + 28) * 24
    assert split_years(weather) == (weather,)


def test_shipped_names_are_known_without_pvlib() -> None:
    import subprocess
    import sys

    code = (
        "import sys; from weather.typical import shipped_names; from weather.request import WeatherRequest; "
        "print(shipped_names()); print([m for m in ('pvlib', 'pandas', 'scipy') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert "[]" in done.stdout
    assert str(shipped_names()) in done.stdout
