"""Sizing through the whole pipeline: several weather years, a house without heating, units and files."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import openpyxl
import pandas as pd
import pytest

from canopy.run import Run
from canopy.simulate import simulate
from canopy.studyfile import load_study
from reports.workbook import write_workbook
from weather.load import WeatherRequest, load_weather

STUDY = """
[site]
latitude = 36.1
longitude = -79.95
timezone = "America/New_York"
[weather]
files = ["y2001.csv", "y2002.csv"]
label = "start"
[house]
spans = 3
[heating]
pipe_m_per_m2 = 3.0
[[candidate]]
name = "glass"
covering = "glass-clear-4"
[[candidate]]
name = "cold tunnel"
covering = "glass-clear-4"
heating = { capacity_w_m2 = 0.0 }
"""


@pytest.fixture(scope="module")
def run(tmp_path_factory: pytest.TempPathFactory) -> Run:
    folder = tmp_path_factory.mktemp("years")
    year = load_weather(WeatherRequest(shipped="greensboro"))
    for name, colder in ((2001, 0.0), (2002, 4.0)):
        time = pd.date_range(f"{name}-01-01", periods=8760, freq="h", tz="Etc/GMT+5")
        table = {
            "time": time.strftime("%Y-%m-%dT%H:%M:%S%z"),
            "ghi": year.ghi,
            "dni": year.dni,
            "dhi": year.dhi,
            "temp_air": year.temp_air - colder,
            "relative_humidity": year.relative_humidity,
            "wind_speed": year.wind_speed,
            "pressure": year.pressure,
        }
        pd.DataFrame(table).to_csv(folder / f"y{name}.csv", index=False)
    (folder / "study.toml").write_text(STUDY, encoding="utf-8")
    return simulate(load_study(folder / "study.toml"))


def test_two_years_are_compared(run: Run) -> None:
    sizing = run.candidates[0].sizing
    assert sizing.many is not None
    assert sizing.many.years == (2001, 2002)
    assert sizing.many.levels == ()
    assert sizing.many.peak_w_m2[0] == pytest.approx(sizing.peak_w_m2)
    assert sizing.many.peak_w_m2[1] > sizing.peak_w_m2 + 10.0
    assert sizing.basis == "coldest of several years"
    assert sizing.design_w_m2 == sizing.many.peak_w_m2.max()
    assert "2 records'" in run.candidates[0].design.outside.temp_source
    assert sizing.finite.deficit_h == 0.0


def test_design_night_stands_beside_the_year(run: Run) -> None:
    one = run.candidates[0]
    assert sum(p.w_m2 for p in one.design.open.components) == pytest.approx(one.design.design_w_m2, abs=0.05)
    # a paper calculation and a simulated cold night of the same house are of one size
    assert one.design.hand.total_w_m2 == pytest.approx(one.design.open.total_w_m2, rel=0.2)
    assert one.sizing.load_exceeded_88_h_w_m2 < one.sizing.load_exceeded_35_h_w_m2 < one.sizing.peak_w_m2
    assert one.sizing.annual_heat_kwh_m2 == pytest.approx(one.daily["heat_delivered_kwh_m2"].sum(), rel=1e-6)


def test_no_heating_no_size(run: Run) -> None:
    one = run.candidates[1]
    assert one.design is None
    assert (one.sizing.boiler_kw, one.sizing.basis, one.sizing.full_load_hours) == (0.0, "none", 0.0)
    assert np.isnan(one.sizing.design_night_w_m2)


def test_workbook_of_the_run(run: Run, tmp_path: Path) -> None:
    write_workbook(run, tmp_path / "workbook.xlsx", "us")
    book = openpyxl.load_workbook(tmp_path / "workbook.xlsx", data_only=True)
    heat = [cell.value for cell in book["Comparison"][4] if isinstance(cell.value, float)]
    assert heat
    words = [row[0].value for row in book["Sizing"].iter_rows() if row[0].value]
    assert "not computed: no heating" in words
    assert any(str(w).startswith("glass: return level not computed: 2 years, 10 are needed") for w in words)
