"""Every reader against pvlib's own reader of the same file, and what a label or clock fault does."""

from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest

from tests.weather_opendata import pvlib_samples
from weather.assemble import settle_place
from weather.errors import UserError
from weather.files import read_file
from weather.labels import scan_labels, settle
from weather.load import load_many, load_weather
from weather.raw import RawWeather
from weather.record import Weather
from weather.request import WeatherRequest
from weather.typical import shipped_path, shipped_year

PVLIB_DATA = Path(pvlib.__file__).parent / "data"


@pytest.fixture(scope="module")
def samples(request: pytest.FixtureRequest) -> Path:
    return pvlib_samples(request.config.cache)


def same(
    raw: RawWeather, name: str, other: pd.Series, factor: float = 1.0, gaps: float | None = None
) -> None:
    values = other.to_numpy(dtype=float)
    if gaps is not None:
        values = np.where(values == gaps, np.nan, values)
    np.testing.assert_allclose(raw.columns[name], values * factor, atol=1e-9, err_msg=name)


def finding(weather: Weather, check: str) -> str:
    return "; ".join(item.text for item in weather.findings if item.check == check)


@pytest.mark.parametrize("name", ["723170TYA.CSV", "703165TY.csv"])
def test_tmy3_like_pvlib(name: str) -> None:
    raw = read_file(PVLIB_DATA / name)
    data, meta = pvlib.iotools.read_tmy3(PVLIB_DATA / name, map_variables=True)
    for column in ("ghi", "dni", "dhi", "temp_air", "temp_dew", "relative_humidity", "wind_speed"):
        same(raw, column, data[column])
    same(raw, "pressure", data["pressure"], 100.0)
    assert (raw.latitude, raw.longitude) == (meta["latitude"], meta["longitude"])
    assert (raw.elevation, raw.utc_offset_h) == (meta["altitude"], meta["TZ"])
    assert raw.typical
    assert raw.rows_lost == 0


def test_tmy2_like_pvlib() -> None:
    raw = read_file(PVLIB_DATA / "12839.tm2")
    data, meta = pvlib.iotools.read_tmy2(PVLIB_DATA / "12839.tm2")
    for column, theirs, factor in (
        ("ghi", "GHI", 1.0),
        ("dni", "DNI", 1.0),
        ("dhi", "DHI", 1.0),
        ("temp_air", "DryBulb", 0.1),
        ("temp_dew", "DewPoint", 0.1),
        ("relative_humidity", "RHum", 1.0),
        ("pressure", "Pressure", 100.0),
        ("wind_speed", "Wspd", 0.1),
        ("precipitable_water", "Pwat", 0.1),
    ):
        same(raw, column, data[theirs], factor)
    assert raw.latitude == pytest.approx(meta["latitude"])
    assert raw.longitude == pytest.approx(meta["longitude"])


@pytest.mark.registry
@pytest.mark.parametrize("name", ["tmy_45.000_8.000_2005_2023.epw", "NLD_Amsterdam062400_IWEC.epw"])
def test_epw_like_pvlib(samples: Path, name: str) -> None:
    raw = read_file(samples / name)
    data, meta = pvlib.iotools.read_epw(samples / name)
    for column in ("ghi", "dni", "dhi", "temp_air", "temp_dew", "relative_humidity", "wind_speed"):
        same(raw, column, data[column])
    same(raw, "pressure", data["atmospheric_pressure"])
    same(raw, "longwave_down", data["ghi_infrared"])
    assert (raw.latitude, raw.longitude) == (meta["latitude"], meta["longitude"])
    assert raw.typical


@pytest.mark.registry
@pytest.mark.parametrize("suffix", ["csv", "json"])
def test_pvgis_like_pvlib(samples: Path, suffix: str) -> None:
    path = samples / f"tmy_45.000_8.000_2005_2023.{suffix}"
    raw = read_file(path)
    data, _ = pvlib.iotools.read_pvgis_tmy(path, map_variables=True)
    for column in ("ghi", "dni", "dhi", "temp_air", "relative_humidity", "wind_speed", "pressure"):
        same(raw, column, data[column])
    same(raw, "longwave_down", data["IR(h)"])
    assert raw.sun_offset_s == pytest.approx(0.1761 * 3600.0)


@pytest.mark.registry
@pytest.mark.parametrize("name", ["test_read_psm3.csv", "test_read_psm4.csv"])
def test_nsrdb_like_pvlib(samples: Path, name: str) -> None:
    raw = read_file(samples / name)
    data, meta = pvlib.iotools.read_nsrdb_psm4(samples / name, map_variables=True)
    for column in ("ghi", "dni", "dhi", "temp_air", "temp_dew", "wind_speed", "albedo"):
        same(raw, column, data[column])
    same(raw, "pressure", data["pressure"], 100.0)
    assert raw.step_s == 1800.0
    assert (raw.latitude, raw.longitude) == (meta["latitude"], meta["longitude"])


@pytest.mark.parametrize("name", ["greensboro", "sand-point", "miami"])
def test_label_scan_finds_half_an_hour_for_tmy(name: str) -> None:
    raw = read_file(shipped_path(shipped_year(name)))
    assert raw.latitude is not None
    assert raw.longitude is not None
    assert raw.utc_offset_h is not None
    scan = scan_labels(raw, raw.latitude, raw.longitude, raw.utc_offset_h)
    assert scan is not None
    assert scan.best_min == pytest.approx(-30.0, abs=2.0)


@pytest.mark.parametrize("hours", [1, -1, -5, 8])
def test_a_wrong_clock_is_found_and_put_right(hours: int) -> None:
    # the same year, its stamps moved: as if written in another zone than declared
    raw = read_file(shipped_path(shipped_year("greensboro")))
    moved = RawWeather(**{**vars(raw), "stamp": raw.stamp + np.timedelta64(3600 * hours, "s")})
    timing = settle(moved, 36.1, -79.95, -5.0, declared=False)
    assert timing.clock_s + timing.sun_offset_s == -3600.0 * hours - 1800.0
    # an hour early cannot be told from a label at the start of the hour; the radiation is the same
    assert timing.clock_s == (0.0 if hours == -1 else -3600.0 * hours)
    kept = settle(moved, 36.1, -79.95, -5.0, declared=True)
    assert kept.clock_s == 0.0
    assert kept.findings[0].level == "warning"


@pytest.mark.registry
def test_pvgis_epw_is_found_to_run_on_utc(samples: Path) -> None:
    weather = load_weather(WeatherRequest(file=samples / "tmy_45.000_8.000_2005_2023.epw"))
    assert "written in UTC: moved by +1 h" in finding(weather, "label-shift")
    # the same year from the CSV, which says that it is in UTC, read onto the same clock
    other = load_weather(
        WeatherRequest(file=samples / "tmy_45.000_8.000_2005_2023.csv", timezone="Europe/Rome")
    )
    assert weather.utc_offset_h == other.utc_offset_h == 1.0
    np.testing.assert_allclose(weather.ghi, other.ghi, atol=0.5)
    np.testing.assert_allclose(weather.zenith, other.zenith, atol=0.02)
    np.testing.assert_allclose(weather.temp_air, other.temp_air, atol=0.01)


@pytest.mark.registry
def test_design_conditions_of_the_header(samples: Path) -> None:
    weather = load_weather(
        WeatherRequest(file=samples / "NLD_Amsterdam062400_IWEC.epw", timezone="Europe/Amsterdam")
    )
    assert weather.design is not None
    assert (weather.design.heating_99_6_c, weather.design.heating_99_c) == (-7.3, -4.9)


@pytest.mark.registry
def test_half_hours_become_hours_with_their_energy(samples: Path) -> None:
    weather = load_weather(WeatherRequest(file=samples / "test_read_psm3.csv"))
    data, _ = pvlib.iotools.read_nsrdb_psm4(samples / "test_read_psm3.csv", map_variables=True)
    assert len(weather) == 8760
    assert weather.ghi.sum() == pytest.approx(0.5 * data["ghi"].sum(), rel=1e-3)


def test_place_far_from_the_files_is_said() -> None:
    path = shipped_path(shipped_year("greensboro"))
    request = WeatherRequest(
        file=path, latitude=35.0, longitude=-80.0, timezone="America/New_York", elevation=100.0
    )
    place = settle_place(request, read_file(path))
    assert place.latitude == 36.1
    assert place.site.latitude == 35.0
    assert "1.1 degrees" in place.findings[0].text


def test_swapped_header_is_refused(tmp_path: Path) -> None:
    text = shipped_path(shipped_year("greensboro")).read_text().replace("36.100,-79.950", "-79.950,36.100", 1)
    path = tmp_path / "swapped.csv"
    path.write_text(text)
    with pytest.raises(UserError, match="swapped"):
        load_weather(WeatherRequest(file=path))


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "is empty"),
        (b"\x00\x01\x02" * 3000, "binary"),
        (b"hello\nworld\n", "names no columns"),
        (b"LOCATION,x\n", "LOCATION line has 10"),
        (b"PAR1 nothing", "not a readable Parquet"),
        (b'{"inputs": 3}', "PVGIS"),
        (b"[" * 100000, "columns"),
        (b'{"a":' * 100000, "PVGIS"),
    ],
)
def test_junk_is_refused_in_one_message(tmp_path: Path, content: bytes, message: str) -> None:
    path = tmp_path / "junk.csv"
    path.write_bytes(content)
    with pytest.raises(UserError, match=message) as caught:
        load_weather(WeatherRequest(file=path))
    assert "\n" not in str(caught.value)


def test_no_file_and_no_regular_file(tmp_path: Path) -> None:
    with pytest.raises(UserError, match="does not exist"):
        load_weather(WeatherRequest(file=tmp_path / "none.epw"))
    with pytest.raises(UserError, match="not a regular file"):
        load_weather(WeatherRequest(file=tmp_path))
    with pytest.raises(UserError, match="exactly one"):
        load_weather(WeatherRequest())


def test_a_folder_gives_one_record_per_file(tmp_path: Path) -> None:
    text = shipped_path(shipped_year("greensboro")).read_text()
    for name in ("b.csv", "a.csv"):
        (tmp_path / name).write_text(text)
    (tmp_path / "readme.md").write_text("not weather")
    records = load_many(WeatherRequest(file=tmp_path))
    assert [item.source[:5] for item in records] == ["a.csv", "b.csv"]
    (tmp_path / "empty").mkdir()
    with pytest.raises(UserError, match="no weather files"):
        load_many(WeatherRequest(file=tmp_path / "empty"))


def test_rows_of_another_shape_are_counted(tmp_path: Path) -> None:
    lines = shipped_path(shipped_year("greensboro")).read_text().splitlines()
    lines[100] = lines[100][:50]
    lines[101] = lines[101].replace("/1988", "/19x8")
    path = tmp_path / "short.csv"
    path.write_text("\n".join(lines))
    weather = load_weather(WeatherRequest(file=path))
    assert "2 rows could not be read (first: line 101)" in finding(weather, "rows-lost")
    assert "2 of 8760 hours" in finding(weather, "missing-hours")
    assert weather.filled.sum() == 2
