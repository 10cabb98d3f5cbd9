"""Files from anywhere: written from pvlib's clear sky in other zones and hemispheres, read back right."""

from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest

from weather.load import load_weather
from weather.record import Weather
from weather.request import WeatherRequest

PLACES = [
    ("Australia/Adelaide", -34.9, 138.6, 9.5),
    ("Asia/Kolkata", 28.6, 77.2, 5.5),
    ("America/St_Johns", 47.6, -52.7, -3.5),
    ("Europe/Oslo", 69.6, 18.9, 1.0),
    ("America/Punta_Arenas", -53.2, -70.9, -3.0),
    ("Pacific/Auckland", -36.8, 174.8, 12.0),
]


def clear_hours(latitude: float, longitude: float, offset: float) -> pd.DataFrame:
    """Hourly means of pvlib's clear sky from 10-minute values, stamped at the start, local time."""
    fine = pd.date_range("2021-01-01 00:05", "2022-01-01", freq="10min", inclusive="left")
    utc = (fine - pd.Timedelta(hours=offset)).tz_localize("UTC")
    sun = pvlib.solarposition.get_solarposition(utc, latitude, longitude, method="nrel_numpy")
    zenith = sun["apparent_zenith"].to_numpy()
    airmass = np.nan_to_num(pvlib.atmosphere.get_relative_airmass(np.minimum(zenith, 89.9)), nan=40.0)
    sky = pvlib.clearsky.ineichen(np.minimum(zenith, 89.99), airmass, 3.0)
    up = zenith < 90.0
    frame = pd.DataFrame({key: np.where(up, sky[key], 0.0) for key in ("ghi", "dni", "dhi")}, index=fine)
    hours = frame.groupby(fine.floor("h")).mean()
    hours["temp_air"] = 10.0 + 5.0 * np.sin(2 * np.pi * (np.arange(len(hours)) % 24 - 9) / 24)
    return hours


def write_epw(hours: pd.DataFrame, path: Path, latitude: float, longitude: float, zone: float) -> None:
    head = [
        f"LOCATION,Somewhere,-,XXX,computed,000000,{latitude},{longitude},{zone},20.0",
        *("DESIGN CONDITIONS,0", "TYPICAL/EXTREME PERIODS,0", "GROUND TEMPERATURES,0"),
        *("HOLIDAYS/DAYLIGHT SAVINGS,No,0,0,0", "COMMENTS 1,measured", "COMMENTS 2,"),
        "DATA PERIODS,1,1,Data,Friday,1/1,12/31",
    ]
    rows = []
    for time, row in hours.iterrows():
        assert isinstance(time, pd.Timestamp)
        rows.append(
            f"{time.year},{time.month},{time.day},{time.hour + 1},60,flags,{row.temp_air:.2f},5.0,70,101300,"
            f"0,0,9999,{row.ghi:.1f},{row.dni:.1f},{row.dhi:.1f},0,0,0,0,180,3.0,5,5,20,9999,9,0,15,0.1,0,0,0.2,0,0"
        )
    path.write_text("\n".join([*head, *rows]) + "\n")


def told(weather: Weather, check: str) -> str:
    return "; ".join(item.text for item in weather.findings if item.check == check)


@pytest.mark.parametrize(("zone", "latitude", "longitude", "offset"), PLACES)
def test_epw_from_anywhere(
    zone: str, latitude: float, longitude: float, offset: float, tmp_path: Path
) -> None:
    hours = clear_hours(latitude, longitude, offset)
    write_epw(hours, tmp_path / "x.epw", latitude, longitude, offset)
    weather = load_weather(WeatherRequest(file=tmp_path / "x.epw", timezone=zone))
    assert len(weather) == 8760
    assert not weather.typical
    assert weather.utc_offset_h == offset
    assert weather.time[0] == np.datetime64("2021-01-01T00:00:00")
    np.testing.assert_allclose(weather.ghi, hours["ghi"], atol=0.06)
    assert "best -30 min" in told(weather, "label-shift") or "best -29 min" in told(weather, "label-shift")
    assert not weather.filled.any()
    # beam on the horizontal is the file's own, but for the half hours around sunrise and sunset
    beam = weather.dni * np.maximum(np.cos(np.radians(weather.zenith)), 0.0)
    assert beam.sum() == pytest.approx((hours["ghi"] - hours["dhi"]).sum(), rel=0.02)


@pytest.mark.parametrize(("zone", "latitude", "longitude", "offset"), PLACES[4:])
def test_a_plain_record_in_utc_is_told_by_its_noon(
    zone: str, latitude: float, longitude: float, offset: float, tmp_path: Path
) -> None:
    hours = clear_hours(latitude, longitude, offset)[["ghi", "temp_air"]]
    hours["rh"], hours["wind"] = 60.0, 3.0
    moved = hours.set_axis(hours.index - pd.Timedelta(hours=offset))
    moved.to_csv(tmp_path / "utc.csv", index_label="time")
    request = WeatherRequest(
        file=tmp_path / "utc.csv", latitude=latitude, longitude=longitude, elevation=20.0, timezone=zone
    )
    weather = load_weather(request)
    assert "written in UTC" in told(weather, "label-shift")
    np.testing.assert_allclose(weather.ghi, hours["ghi"], atol=1e-6)
    assert weather.time[0] == np.datetime64("2021-01-01T00:00:00")


def test_half_hour_label_of_a_plain_record(tmp_path: Path) -> None:
    hours = clear_hours(52.0, 5.0, 1.0)[["ghi", "dni", "dhi", "temp_air"]]
    for shift, word in ((0, "start"), (60, "end")):
        path = tmp_path / f"{word}.csv"
        hours.set_axis(hours.index + pd.Timedelta(minutes=shift)).to_csv(path, index_label="time")
        request = WeatherRequest(
            file=path, latitude=52.0, longitude=5.0, elevation=0.0, timezone="Etc/GMT-1", utc_offset=None
        )
        weather = load_weather(request)
        assert f"the {word} of their step" in told(weather, "label")
        np.testing.assert_allclose(weather.ghi, hours["ghi"], atol=1e-6)
        assert "+30 min" in told(weather, "label-shift") or "-30 min" in told(weather, "label-shift")
