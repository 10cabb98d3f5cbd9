"""A user's own record: columns, units, clocks, steps; gaps and faults in it."""

from datetime import datetime
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from weather import gaps, grid, units
from weather.clock import civil_to_standard
from weather.errors import UserError
from weather.files import read_file
from weather.load import load_weather, split_years
from weather.raw import RawWeather
from weather.record import Weather
from weather.request import WeatherRequest
from weather.stamps import read_stamps

SITE = {"latitude": 52.0, "longitude": 4.5, "elevation": 0.0, "timezone": "Europe/Amsterdam"}


def frame(step: str = "1h", days: int = 10, start: str = "2021-05-03") -> pd.DataFrame:
    """A clear spell at 52 N in UTC, plain enough to check by hand."""
    index = pd.date_range(start, periods=int(pd.Timedelta(days=days) / pd.Timedelta(step)), freq=step)
    middle = index + pd.Timedelta(step) / 2
    hour = middle.hour + middle.minute / 60 + middle.second / 3600
    ghi = np.maximum(0.0, 800.0 * np.sin(np.pi * (hour - 4.2) / 15.0)) * ((hour > 4.2) & (hour < 19.2))
    temp = 12.0 + 5.0 * np.sin(2 * np.pi * (hour - 9.0) / 24.0) + 0.01 * np.arange(len(index)) % 1.0
    wind = 3.0 + np.sin(np.arange(len(index)))
    return pd.DataFrame({"ghi": ghi, "temp_air": temp, "rh": 70.0 + 0.1 * hour, "wind": wind}, index=index)


def load(path: Path, **changes: object) -> Weather:
    return load_weather(WeatherRequest(file=path, **{"utc_offset": 0.0, "label": "start", **SITE, **changes}))  # type: ignore[arg-type]


def texts(weather: Weather, check: str) -> str:
    return "; ".join(item.text for item in weather.findings if item.check == check)


def write(data: pd.DataFrame, path: Path, **how: object) -> Path:
    data.to_csv(path, index_label="time", **how)  # type: ignore[call-overload]
    return path


@pytest.mark.parametrize(
    ("quantity", "value", "unit", "step", "si"),
    [
        ("ghi", 100.0, "J/cm2 per hour", 3600.0, 277.78),  # 1e6 J/m2 in an hour
        ("ghi", 100.0, "J/cm²", 600.0, 1666.67),  # of a ten-minute step
        ("ghi", 1.0, "MJ/m2", 3600.0, 277.78),
        ("ghi", 1010.0, "µmol m-2 s-1", 3600.0, 500.0),  # 2.02 µmol/J
        ("temp_air", 50.0, "°F", 3600.0, 10.0),
        ("temp_air", 283.15, "K", 3600.0, 10.0),
        ("pressure", 29.92, "inHg", 3600.0, 101320.0),
        ("wind_speed", 36.0, "km/h", 3600.0, 10.0),
        ("relative_humidity", 0.5, "fraction", 3600.0, 50.0),
        ("cloud_cover", 4.0, "oktas", 3600.0, 0.5),
    ],
)
def test_units(quantity: str, value: float, unit: str, step: float, si: float) -> None:
    # NIST SP 811 conversion factors; photons: CHECKS within 1.97-2.10 µmol/J
    found = units.to_si(quantity, np.array([value]), unit, step, "x")
    assert found[0] == pytest.approx(si, rel=1e-4)


def test_wrong_unit_names_what_is_allowed() -> None:
    with pytest.raises(UserError, match=r'temp_air in "degX", allowed degc, degf, k \(did you mean'):
        units.to_si("temp_air", np.zeros(1), "degX", 3600.0, "x")


def test_named_columns_with_units_in_brackets(tmp_path: Path) -> None:
    data = frame()
    told = pd.DataFrame(
        {
            "Solar radiation [J/cm2 per hour]": data["ghi"] * 0.36,
            "Air temperature (°F)": data["temp_air"] * 1.8 + 32.0,
            "Relative humidity [%]": data["rh"],
            "Wind speed [km/h]": data["wind"] * 3.6,
        }
    )
    path = tmp_path / "logger.csv"
    told.to_csv(path, index_label="Time", sep=";", decimal=",", encoding="latin-1")
    plain, other = load(path), load(write(data, tmp_path / "plain.csv"))
    np.testing.assert_allclose(plain.ghi, other.ghi, atol=1e-9)
    np.testing.assert_allclose(plain.temp_air, other.temp_air, atol=1e-9)
    np.testing.assert_allclose(plain.wind_speed, other.wind_speed, atol=1e-9)


def test_mapped_columns_and_units(tmp_path: Path) -> None:
    data = frame().rename(columns={"ghi": "Q", "temp_air": "T1", "rh": "U", "wind": "V"})
    path = write(data, tmp_path / "odd.csv")
    mapping = {"ghi": "Q", "temp_air": "T1", "relative_humidity": "U", "wind_speed": "V"}
    weather = load(path, columns=mapping, units={"wind_speed": "kn"})
    assert weather.wind_speed.mean() == pytest.approx(data["V"].mean() * 0.514444, rel=0.02)
    with pytest.raises(UserError, match=r'no column "QQ" \(did you mean "Q"\?\)'):
        load(path, columns={**mapping, "ghi": "QQ"})
    with pytest.raises(UserError, match=r'"gih" is no quantity'):
        load(path, columns={"gih": "Q"})


def test_parquet_and_csv_agree(tmp_path: Path) -> None:
    data = frame("10min")
    data.index.name = "time"
    data.reset_index().to_parquet(tmp_path / "a.parquet")
    a, b = load(tmp_path / "a.parquet"), load(write(data, tmp_path / "a.csv"))
    np.testing.assert_allclose(a.ghi, b.ghi, atol=1e-9)
    np.testing.assert_allclose(a.temp_air, b.temp_air, atol=1e-9)


@settings(deadline=None, max_examples=15)
@given(st.sampled_from(["1min", "5min", "7min", "10min", "15min", "25min", "30min", "40min", "1h"]))
def test_any_step_keeps_energy_and_hours_agree(tmp_path_factory: pytest.TempPathFactory, step: str) -> None:
    data = frame(step, days=4)
    path = write(data, tmp_path_factory.mktemp("step") / "x.csv")
    weather = load(path)
    energy = data["ghi"].sum() * pd.Timedelta(step).total_seconds()
    assert weather.ghi.sum() * 3600.0 == pytest.approx(energy, rel=2e-3)


@settings(deadline=None, max_examples=60)
@given(st.lists(st.floats(0, 1000), min_size=30, max_size=200), st.integers(60, 3600))
def test_average_keeps_the_integral_exactly(values: list[float], step: int) -> None:
    # law: hours times their mean equals steps times their value over the whole hours
    stamp = np.datetime64("2020-01-01T00:00:00") + np.arange(len(values)) * np.timedelta64(step, "s")
    numbers = np.array(values)
    raw = RawWeather("", "", "", 0, 0, 0, 0, None, stamp, float(step), "start", False, {"ghi": numbers}, 0)
    hours = grid.to_hours(raw, stamp)
    whole = ~hours.thin & np.isfinite(hours.columns["ghi"])
    edge = (hours.time - stamp[0]).astype("timedelta64[s]").astype(float)
    for begin, mean, good in zip(edge, hours.columns["ghi"], whole, strict=True):
        if good and step < 3600:
            starts = np.arange(len(values)) * float(step)
            share = np.clip(np.minimum(starts + step, begin + 3600) - np.maximum(starts, begin), 0, None)
            assert mean == pytest.approx(float((share * numbers).sum()) / 3600.0, rel=1e-9, abs=1e-9)


def test_missing_and_doubled_hours_are_counted_filled_and_marked(tmp_path: Path) -> None:
    data = frame()
    data = data.drop(data.index[[60, 61]])
    data = pd.concat([data, data.iloc[[100]]])
    weather = load(write(data, tmp_path / "gap.csv"))
    assert len(weather) == 240
    assert "2 of 240 hours" in texts(weather, "missing-hours")
    assert "1 rows repeat" in texts(weather, "duplicated")
    assert "stand before" in texts(weather, "order")
    assert np.flatnonzero(weather.filled).tolist() == [60, 61]
    full = load(write(frame(), tmp_path / "full.csv"))
    np.testing.assert_allclose(weather.temp_air[60:62], full.temp_air[60:62], atol=0.8)
    np.testing.assert_allclose(weather.ghi[60:62], full.ghi[60:62], rtol=0.05)


def test_long_gaps_are_refused_unless_allowed(tmp_path: Path) -> None:
    data = frame(days=14)
    data = data.drop(data.index[100:180])
    path = write(data, tmp_path / "long.csv")
    with pytest.raises(UserError, match=r"missing for 79 h from 2021-05-07 06:00.*allow_long_gaps"):
        load(path)
    weather = load(path, allow_long_gaps=True)
    assert weather.filled.sum() == 80
    assert "longest" in texts(weather, "filled")


def test_impossible_values_become_gaps(tmp_path: Path) -> None:
    data = frame()
    data.iloc[36, 0] = 5000.0
    data.iloc[40, 1] = 99.0
    data.iloc[90, 1] += 25.0
    data.iloc[50, 3] = -999.0
    weather = load(write(data, tmp_path / "bad.csv"))
    assert "global radiation: 1 hours outside" in texts(weather, "limits")
    assert "air temperature: 1 hours outside" in texts(weather, "limits")
    assert "1 single hours more than 12 K" in texts(weather, "spikes")
    assert np.flatnonzero(weather.filled).tolist() == [36, 40, 50, 90]


def test_faults_of_sense_are_said(tmp_path: Path) -> None:
    data = frame()
    data["wind"] *= 3.6
    data.iloc[100:150, 1] = 12.0
    data["dew point"] = data["temp_air"] - 3.0
    data.iloc[10:14, 4] = 30.0
    data["pressure"] = 101325.0
    weather = load(write(data, tmp_path / "sense.csv"), elevation=800.0)
    assert "4 hours; taken as saturated" in texts(weather, "dew-point")
    assert "reduced to sea level" in texts(weather, "pressure")
    assert "disagree by" in texts(weather, "humidity-pair")
    # standard atmosphere at 800 m: 92.08 kPa (ASHRAE Fundamentals 2017, ch. 1 eq. 3)
    assert weather.pressure.mean() == pytest.approx(92.08e3, rel=2e-3)
    assert "air temperature stands still" in texts(weather, "frozen")
    data["wind"] *= 2.0
    assert "km/h" in texts(load(write(data, tmp_path / "fast.csv")), "wind")


def test_what_is_missing_is_computed_by_a_named_method(tmp_path: Path) -> None:
    weather = load(write(frame()[["ghi", "temp_air"]], tmp_path / "two.csv"))
    assert "Erbs-Driesse" in texts(weather, "decomposed")
    assert "FAO-56 eq. 48" in texts(weather, "humidity")
    assert "standard atmosphere" in texts(weather, "pressure")
    assert "FAO-56" in texts(weather, "wind")
    assert "Prata" in texts(weather, "longwave")
    assert weather.longwave_modelled.all()
    with pytest.raises(UserError, match="no long-wave radiation"):
        load(write(frame(), tmp_path / "x.csv"), longwave="file")
    with pytest.raises(UserError, match="temp_air"):
        load(write(frame()[["ghi", "rh"]], tmp_path / "cold.csv"))


def test_daylight_saving_clock_is_found_and_undone(tmp_path: Path) -> None:
    utc = frame(days=365, start="2020-12-31 23:00")
    utc["ghi"] *= 0.05  # dim enough for December
    civil = utc.copy()
    zone = utc.index.tz_localize("UTC").tz_convert("Europe/Amsterdam").tz_localize(None)
    civil.index = zone
    weather = load(write(civil, tmp_path / "civil.csv"), utc_offset=None)
    reference = load(write(utc, tmp_path / "utc.csv"))
    assert "1 hours skipped, 1 repeated" in texts(weather, "daylight-saving")
    assert len(weather) == len(reference) == 8760
    assert not weather.filled.any()
    np.testing.assert_allclose(weather.ghi, reference.ghi, atol=1e-6)
    np.testing.assert_allclose(weather.temp_air, reference.temp_air, atol=1e-6)


def test_standard_time_clock_is_left_alone() -> None:
    stamp = np.datetime64("2021-01-01T00:00:00") + np.arange(8760) * np.timedelta64(3600, "s")
    moved, found = civil_to_standard(stamp, "Europe/Amsterdam")
    assert found is None
    assert (moved == stamp).all()


@pytest.mark.parametrize(
    ("rows", "first"),
    [
        (["2021-03-04 05:00", "2021-03-04 06:00"], "2021-03-04T05:00:00"),
        (["2021-03-04T05:00:00+01:00", "2021-03-04T06:00:00+01:00"], "2021-03-04T04:00:00"),
        (["2021-03-04T05:00Z", "2021-03-04T06:00Z"], "2021-03-04T05:00:00"),
        (["13.03.2021 24:00", "14.03.2021 01:00"], "2021-03-14T00:00:00"),
        (["03/13/2021 05:00", "03/13/2021 06:00"], "2021-03-13T05:00:00"),
    ],
)
def test_times_in_text(rows: list[str], first: str) -> None:
    stamps = read_stamps(rows, "x")
    assert stamps.good.all()
    assert stamps.time[0] == np.datetime64(first)


def test_day_and_month_that_cannot_be_told_apart_are_refused() -> None:
    with pytest.raises(UserError, match="cannot be told apart"):
        read_stamps(["01/02/2021 05:00", "01/02/2021 06:00"], "x")
    # over some days the day runs faster than the month
    rows = [f"{day:02d}/02/2021 00:00" for day in range(1, 10)]
    assert read_stamps(rows, "x").time[8] == np.datetime64("2021-02-09T00:00:00")


def test_leap_day_is_kept_in_a_real_record(tmp_path: Path) -> None:
    weather = load(write(frame(days=60, start="2020-02-01"), tmp_path / "leap.csv"))
    assert (weather.time.astype("datetime64[D]") == np.datetime64("2020-02-29")).sum() == 24


def test_years_in_a_row_are_one_record_or_one_each(tmp_path: Path) -> None:
    data = frame(days=731, start="2020-01-01")
    data["ghi"] *= 0.05
    path = write(data, tmp_path / "years.csv")
    weather = load(path, timezone="Etc/GMT", longitude=0.0)
    assert len(weather) == 731 * 24
    assert not weather.typical
    years = split_years(weather)
    assert [len(year) for year in years] == [8784, 8760]
    np.testing.assert_array_equal(np.concatenate([year.ghi for year in years]), weather.ghi)
    assert years[1].title.endswith("2021")


@settings(deadline=None)
@given(st.integers(0, 239), st.integers(1, 72), st.booleans())
def test_filling_touches_gaps_only(start: int, length: int, periodic: bool) -> None:
    hours = np.arange(240)
    values = 10.0 + 5.0 * np.sin(2 * np.pi * hours / 24.0)
    gap = values.copy()
    gap[start : start + length] = np.nan
    time = np.datetime64("2021-01-01T00:00:00") + hours * np.timedelta64(3600, "s")
    done = gaps.fill(gap, time, "air temperature", periodic, False)
    kept = np.isfinite(gap)
    assert (done.values[kept] == values[kept]).all()
    assert np.isfinite(done.values).all()
    assert (done.filled == ~kept).all()
    if (~kept).sum() > gaps.SHORT_H:  # the days around repeat exactly here, so the filling must
        np.testing.assert_allclose(done.values, values, atol=1e-9)


def test_a_year_and_place_by_columns(tmp_path: Path) -> None:
    data = frame()
    parts = pd.DataFrame(
        {"Year": data.index.year, "Month": data.index.month, "Day": data.index.day, "Hour": data.index.hour}
    )
    parts["GHI"], parts["Temperature"] = data["ghi"].to_numpy(), data["temp_air"].to_numpy()
    parts.to_csv(tmp_path / "parts.csv", index=False)
    raw = read_file(tmp_path / "parts.csv")
    assert raw.stamp[0] == np.datetime64("2021-05-03T00:00:00")
    np.testing.assert_allclose(raw.columns["ghi"], data["ghi"], rtol=1e-12)


@settings(deadline=None, max_examples=100)
@given(
    st.lists(st.datetimes(pd.Timestamp("1900-01-01"), pd.Timestamp("2100-01-01")), min_size=1, max_size=20),
    st.sampled_from(["%Y-%m-%d %H:%M", "%Y-%m-%dT%H:%M:%S", "%Y-%m-%d %H:%M:%S+01:00", "%Y-%m-%dT%H:%MZ"]),
    st.booleans(),
)
def test_quick_and_patient_reading_of_times_agree(times: list[datetime], form: str, odd: bool) -> None:
    rows = [time.strftime(form) for time in times]
    extra = ["rubbish"] if odd else []  # one odd row sends all through the patient way
    stamps = read_stamps(rows + extra, "x")
    expected = pd.to_datetime(pd.Series(rows), format="ISO8601", utc=True).dt.tz_localize(None)
    assert (stamps.time[: len(rows)] == expected.to_numpy().astype("datetime64[s]")).all()
    assert stamps.good.tolist() == [True] * len(rows) + [False] * len(extra)
    assert stamps.utc == (form[-1] in "Z0")
