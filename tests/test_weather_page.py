"""The weather command: text, page, escaping, nothing half-written, figures drawn without a console error."""

import re
import shutil
from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest
from playwright.sync_api import sync_playwright

from reports.weather_climate import climate, month_rows, sky_depression
from reports.weather_page import quality_text, weather_command, weather_page
from tests.conftest import Cli
from weather.errors import UserError
from weather.load import load_weather
from weather.record import Weather
from weather.request import WeatherRequest
from weather.typical import shipped_path, shipped_year

EVIL = "<img src=x onerror=window.hit=1>"


@pytest.fixture(scope="module")
def greensboro() -> Weather:
    return load_weather(WeatherRequest(shipped="greensboro"))


def test_monthly_climate_against_pandas(greensboro: Weather) -> None:
    data, _ = pvlib.iotools.read_tmy3(shipped_path(shipped_year("greensboro")), map_variables=True)
    month = np.arange(8760) // 24
    days = np.repeat(np.arange(1, 13), [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31])[month]
    by_month = pd.DataFrame({"ghi": data["ghi"].to_numpy(), "temp": data["temp_air"].to_numpy()}).groupby(
        days
    )
    found = climate(greensboro)
    np.testing.assert_allclose(found.global_kwh, by_month["ghi"].sum().to_numpy() / 1000.0, rtol=1e-9)
    np.testing.assert_allclose(found.temp_mean, by_month["temp"].mean().to_numpy(), rtol=1e-9)
    np.testing.assert_allclose(found.temp_min, by_month["temp"].min().to_numpy(), rtol=1e-9)
    assert [row[0] for row in month_rows(found)][0::11] == ["Jan", "Dec"]
    # common practice: the sky of temperate places stands 5 to 25 K below the air
    assert 5.0 < sky_depression(greensboro).mean() < 25.0


def test_text_says_what_was_found(greensboro: Weather) -> None:
    text = quality_text(greensboro)
    for part in ("-30 min", "no sizing year", "kWh/m2", "99.6 %", "lowest -16.7 degC", "Prata", "UTC-5 h"):
        assert part in text, part
    assert max(map(len, re.findall(r"^  \w{3}  .*$", text, re.M))) < 100


def test_command_reads_a_shipped_name_and_a_path(tmp_path: Path) -> None:
    named = weather_command(Path("sand-point"), None)
    read = weather_command(shipped_path(shipped_year("sand-point")), None)
    table = "Climate by month"
    assert named.split(table)[1] == read.split(table)[1]
    assert "schedules in America/Anchorage" in named
    assert "schedules in Etc/GMT+9" in read
    with pytest.raises(UserError, match="does not exist"):
        weather_command(tmp_path / "none.epw", tmp_path / "x.html")
    assert list(tmp_path.iterdir()) == []


def test_command_line(cli: Cli, tmp_path: Path) -> None:
    done = cli("weather", "greensboro", "--plot", tmp_path / "page.html")
    assert done.returncode == 0, done.stderr
    assert "Climate by month" in done.stdout
    assert (tmp_path / "page.html").stat().st_size < 4_000_000
    bad = cli("weather", tmp_path / "none.epw")
    assert bad.returncode == 2
    assert "does not exist" in bad.stderr
    assert "Traceback" not in bad.stderr


def test_page_that_cannot_be_written_leaves_nothing(tmp_path: Path, greensboro: Weather) -> None:
    with pytest.raises(UserError, match="is a folder"):
        weather_page(greensboro, tmp_path)
    with pytest.raises(UserError, match="cannot be written"):
        weather_page(greensboro, tmp_path / "no" / "page.html")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.browser
def test_page_in_chromium_is_quiet_and_whole(tmp_path: Path) -> None:
    data = pd.DataFrame(
        {
            f"T {EVIL}": 10.0 + np.sin(np.arange(120) / 4.0),
            "ghi": np.maximum(0.0, 500.0 * np.sin(2 * np.pi * (np.arange(120) % 24 - 6) / 24)),
        },
        index=pd.date_range("2021-06-01", periods=120, freq="1h"),
    )
    data.to_csv(tmp_path / "evil &b.csv", index_label="time")
    page_path = tmp_path / "page.html"
    weather_command(
        tmp_path / "evil &b.csv",
        page_path,
        latitude=45.0,
        longitude=9.0,
        timezone="Etc/GMT-1",
        columns={"temp_air": f"T {EVIL}", "ghi": "ghi"},
    )
    assert EVIL not in page_path.read_text()
    said: list[str] = []
    with sync_playwright() as play:
        browser = play.chromium.launch(
            executable_path=shutil.which("chromium"), args=["--headless", "--no-sandbox", "--disable-gpu"]
        )
        page = browser.new_page(viewport={"width": 1200, "height": 900})
        page.on("console", lambda message: said.append(message.text))
        page.on("pageerror", lambda error: said.append(str(error)))
        page.on(
            "request", lambda r: None if r.url.startswith(("file:", "data:", "blob:")) else said.append(r.url)
        )
        page.goto(page_path.as_uri())
        page.wait_for_selector("html[data-ready]")
        for top in range(0, page.evaluate("document.documentElement.scrollHeight"), 600):
            page.evaluate(f"window.scrollTo({{top: {top}, behavior: 'instant'}})")
            page.wait_for_timeout(40)
        page.wait_for_function("[...document.querySelectorAll('.plot')].every(p => p.dataset.drawn)")
        assert page.locator(".plot .main-svg").count() >= 6
        assert page.evaluate("window.hit") is None
        browser.close()
    assert said == []
