"""The workbook in LibreOffice: opens without repair, recalculates, and agrees with the CSV tables."""

from __future__ import annotations

import csv
import shutil
import subprocess
import warnings
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import openpyxl
import pytest

from canopy.columns import DAILY
from canopy.energy import Supply, energy
from canopy.energykeys import HeatPumpKeys, TariffKeys
from canopy.run import Run
from canopy.sizing import size
from reports.csvtables import DAILY_DIGITS, OTHER_DIGITS, daily_units, write_daily, write_monthly
from reports.us_units import shown
from reports.workbook import write_workbook
from reports.workbook_base import FIRST_ROW, TOTALS_ROW
from reports.workbook_days import COMPARED, PLACE
from tests.reportcase import fakes, make_run

pytestmark = pytest.mark.office

ALWAYS_RECALCULATE = """<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop oor:name="OOXMLRecalcMode" oor:op="fuse">
<value>0</value></prop></item></oor:items>
"""
NASTY = '=HYPERLINK("http://x.test","pay") & <b>bold</b>'


def recalculated(path: Path, work: Path) -> Any:
    """Open a workbook in LibreOffice, recalculate every formula, save it, and read the values back."""
    office = shutil.which("soffice")
    assert office is not None, "LibreOffice Calc is needed: apt-get install libreoffice-calc"
    profile = work / "profile"
    (profile / "user").mkdir(parents=True)
    (profile / "user" / "registrymodifications.xcu").write_text(ALWAYS_RECALCULATE, encoding="utf-8")
    out = work / "out"
    command = [office, "--headless", f"-env:UserInstallation={profile.as_uri()}", "--convert-to", "xlsx"]
    done = subprocess.run(
        [*command, "--outdir", str(out), str(path)], capture_output=True, timeout=180, check=False
    )
    assert done.returncode == 0, done.stderr
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", "Unable to read chart")  # openpyxl on charts that the office saved
        return openpyxl.load_workbook(out / path.name, data_only=True)


def zero_cached(monkeypatch: pytest.MonkeyPatch) -> None:
    """Write every formula with a wrong stored value: only a real calculation gives the right one."""
    import xlsxwriter.worksheet as sheet

    real = sheet.Worksheet.write_formula

    def wrong(self: Any, row: int, col: int, formula: str, look: Any = None, value: Any = 0) -> Any:
        del value
        return real(self, row, col, formula, look, -12345)

    monkeypatch.setattr(sheet.Worksheet, "write_formula", wrong)


@pytest.fixture(scope="module")
def run() -> Run:
    made = make_run(fakes(3), title=NASTY, months=(1, 2, 12))
    one = made.candidates[1]
    prices = TariffKeys(
        price_per_kwh=0.30, night_price_per_kwh=0.20, capacity_charge_per_kw_year=60.0, contract_kw=200.0,
        over_contract_per_kw_year=90.0, standing_per_year=500.0, currency="=EUR",
    )  # fmt: skip
    pump = HeatPumpKeys(source="air", capacity_w_m2=60.0, flow_max_c=55.0)
    supply = Supply("fuel-oil", None, 0.09, heat_pump=pump, heat_pump_tariff=prices)
    heat, air = one.heat, made.weather
    flow = np.minimum(heat.temp_pipe, 54.0)
    clock = np.arange(8760) % 24.0
    used = energy(heat.heat_delivered, flow, air.temp_air, air.relative_humidity, clock, 4800.0, supply)
    turned = replace(one, sizing=replace(one.sizing, energy=used))
    idle = size(np.zeros(8760), air.time, air.temp_air, 4800.0, None, 15.0, air.typical)
    unheated = replace(made.candidates[2], sizing=idle, design=None)
    return replace(made, candidates=(made.candidates[0], turned, unheated))


@pytest.fixture(scope="module")
def books(run: Run, tmp_path_factory: pytest.TempPathFactory) -> dict[str, Any]:
    done = {}
    with pytest.MonkeyPatch.context() as patch:
        zero_cached(patch)
        for units in ("si", "us"):
            work = tmp_path_factory.mktemp(units)
            write_workbook(run, work / "workbook.xlsx", units)  # type: ignore[arg-type]
            done[units] = recalculated(work / "workbook.xlsx", work)
    return done


def test_sheets(books: dict[str, Any]) -> None:
    for book in books.values():
        names = ["Read me", "Comparison", "Day 1", "Day 2", "Day 3", "Monthly", "Sizing", "Inputs", "Sources"]
        assert book.sheetnames == names
        for sheet in book.worksheets:
            for row in sheet.iter_rows(values_only=True):
                for value in row:
                    assert not (isinstance(value, str) and value.startswith(("#", "Err:"))), (
                        sheet.title,
                        row,
                    )
                    assert value != -12345, (sheet.title, row)


def test_names_stay_text(books: dict[str, Any]) -> None:
    assert books["si"]["Read me"]["A1"].value == NASTY
    assert books["si"]["Read me"]["A1"].hyperlink is None


def test_frozen_headings_and_units(books: dict[str, Any], run: Run, tmp_path: Path) -> None:
    book = books["si"]
    write_workbook(run, tmp_path / "own.xlsx")
    own = openpyxl.load_workbook(tmp_path / "own.xlsx")
    assert own["Day 1"].freeze_panes == "B6"
    assert own["Monthly"].freeze_panes == "C5"
    assert len(own["Comparison"]._charts) == 3
    assert len(own["Day 3"]._charts) == 1
    assert own["Day 1"].cell(TOTALS_ROW + 1, 2).value.startswith("=SUM(")
    assert own["Day 1"].cell(FIRST_ROW + 1, 2).number_format == "0.000"
    units = daily_units()
    for name, place in PLACE.items():
        assert book["Day 2"].cell(3, place + 1).value == name
        assert (book["Day 2"].cell(4, place + 1).value or "") == units[name]


def test_season_formulas_equal_daily_csv(books: dict[str, Any], run: Run, tmp_path: Path) -> None:
    write_daily(run, tmp_path / "daily.csv")
    with (tmp_path / "daily.csv").open(encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    units = daily_units()
    for at, one in enumerate(run.candidates):
        mine = [row for row in rows if row["candidate"] == one.plan.name]
        sheet = books["si"][f"Day {at + 1}"]
        assert [str(c.value)[:10] for c in sheet["A"][FIRST_ROW:]] == [row["date"] for row in mine]
        for name, _, how in DAILY:
            values = np.array([float(row[name]) for row in mine])
            total = {"min": values.min(), "max": values.max(), "mean": values.mean()}.get(how, values.sum())
            one_row = 0.5 * 10.0 ** -DAILY_DIGITS.get(units[name], OTHER_DIGITS)
            slack = one_row if how in ("min", "max", "mean") else one_row * len(values)
            found = sheet.cell(TOTALS_ROW + 1, PLACE[name] + 1).value
            assert found == pytest.approx(total, abs=1.01 * slack, rel=1e-12), name


def test_monthly_formulas_equal_monthly_csv(books: dict[str, Any], run: Run, tmp_path: Path) -> None:
    write_monthly(run, tmp_path / "monthly.csv")
    with (tmp_path / "monthly.csv").open(encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    sheet, units = books["si"]["Monthly"], daily_units()
    for at, row in enumerate(rows, start=5):
        assert sheet.cell(at, 1).value == row["candidate"]
        assert sheet.cell(at, 2).value == row["month"]
        for name, _, _ in DAILY:
            digits = DAILY_DIGITS.get(units[name], OTHER_DIGITS)
            shown_value = sheet.cell(at, PLACE[name] + 2).value
            assert shown_value == pytest.approx(float(row[name]), abs=0.51 * 10.0 ** -max(digits, 1)), name


def test_comparison(books: dict[str, Any], run: Run) -> None:
    sheet = books["si"]["Comparison"]
    for at, one in enumerate(run.candidates):
        heat = sheet.cell(4 + at, 3 + COMPARED.index("heat_delivered_kwh_m2")).value
        assert heat == pytest.approx(one.daily["heat_delivered_kwh_m2"].sum(), rel=1e-6)
        share = sheet.cell(4 + at, 3 + len(COMPARED)).value
        light = one.daily["inside_par_mol_m2"].sum() / one.daily["outside_par_mol_m2"].sum()
        assert share == pytest.approx(light, rel=1e-6)


def column_values(sheet: Any, label: str) -> list[Any]:
    """Return the row that begins with a label."""
    return next([c.value for c in row] for row in sheet.iter_rows() if row[0].value == label)


def test_sizing_and_design_night(books: dict[str, Any], run: Run) -> None:
    sheet = books["si"]["Sizing"]
    boilers = column_values(sheet, "boiler, heat output")[2:5]
    assert boilers == pytest.approx([one.sizing.boiler_kw for one in run.candidates], rel=1e-12)
    hours = column_values(sheet, "hours of the record")[2:5]
    assert hours == pytest.approx([8760.0] * 3)
    night = run.candidates[0].design.open
    totals = column_values(sheet, "heat needed")
    assert totals[1] == pytest.approx(sum(p.w_m2 for p in night.components), rel=1e-12)
    area = run.candidates[0].house.floor_area
    assert totals[2] == pytest.approx(totals[1] * area / 1000.0, rel=1e-12)


def test_house_without_heating(books: dict[str, Any]) -> None:
    sheet = books["si"]["Sizing"]
    rows = [[c.value for c in row] for row in sheet.iter_rows()]
    at = next(k for k, row in enumerate(rows) if str(row[0]).startswith("Design night step by step: twin"))
    assert rows[at + 1][0] == "not computed: no heating"
    assert column_values(sheet, "no heating")[4] == 8760.0
    assert column_values(sheet, "design night")[4] is None


def all_rows(sheet: Any, label: str) -> list[list[Any]]:
    """Return every row that begins with a label."""
    return [[c.value for c in row] for row in sheet.iter_rows() if row[0].value == label]


def test_supplies_and_costs(books: dict[str, Any], run: Run) -> None:
    si, us = books["si"]["Sizing"], books["us"]["Sizing"]
    bill = run.candidates[1].sizing.energy
    boiler, power = all_rows(si, "cost, together")
    assert boiler[3] == pytest.approx(bill.boiler_cost.total)
    assert power[3] == pytest.approx(bill.electricity_cost.total)
    assert power[2] is None
    assert all_rows(si, "currency")[1][3] == "=EUR"
    litres, gallons = all_rows(si, "bought")[0][3], all_rows(us, "bought")[0][3]
    assert litres == pytest.approx(bill.boiler.amount)
    assert gallons == pytest.approx(litres / 3.785412, rel=1e-6)
    # gas: m3 in SI, therms of gross heating value (100 000 Btu) in US units
    gas = run.candidates[0].sizing.energy.boiler
    assert all_rows(si, "bought")[0][2] == pytest.approx(gas.amount)
    assert all_rows(us, "bought")[0][2] == pytest.approx(gas.gross_kwh * 3412.142 / 1e5, rel=1e-6)
    assert all_rows(si, "seasonal performance")[0][3] == pytest.approx(bill.pump.seasonal)


def test_us_units(books: dict[str, Any], run: Run) -> None:
    # 1 kWh/m2 = 3412.142 Btu / 10.76391 ft2 = .316998 kBtu/ft2; °F = 1.8 °C + 32; 1 kW = 3.412142 kBtu/h
    si, us = books["si"], books["us"]
    heat, cold = PLACE["heat_delivered_kwh_m2"] + 1, PLACE["temp_air_min_c"] + 1
    assert us["Day 1"].cell(4, heat).value == "kBtu/ft2"
    assert us["Day 1"].cell(4, cold).value == "°F"
    for row in (TOTALS_ROW + 1, FIRST_ROW + 3):
        assert us["Day 1"].cell(row, heat).value == pytest.approx(
            0.316998 * si["Day 1"].cell(row, heat).value, rel=1e-5, abs=1e-6
        )
        assert us["Day 1"].cell(row, cold).value == pytest.approx(
            1.8 * si["Day 1"].cell(row, cold).value + 32, abs=2e-6
        )
    boiler = column_values(us["Sizing"], "boiler, heat output")
    assert boiler[1] == "kBtu/h"
    assert boiler[2] == pytest.approx(3.412142 * run.candidates[0].sizing.boiler_kw, rel=1e-6)
    totals = column_values(us["Sizing"], "heat needed")
    assert totals[2] == pytest.approx(3.412142 * run.candidates[0].design.open.total_kw, rel=1e-6)


def test_conversions() -> None:
    # definitions: therm 1e5 Btu = 29.3071 kWh, US gallon 3.785412 l, short ton 2000 lb = .907185 t;
    # 100 m3 per 1000 m2 = 26417 gal on 10764 ft2
    assert float(shown("kWh", "us").convert(29.3071)) == pytest.approx(1.0, rel=1e-5)
    assert float(shown("l", "us").convert(3.785412)) == pytest.approx(1.0, rel=1e-6)
    assert float(shown("t", "us").convert(0.907185)) == pytest.approx(1.0, rel=1e-6)
    assert float(shown("m3/1000 m2", "us").convert(100.0)) == pytest.approx(26417.2 / 10.76391, rel=1e-4)
    assert float(shown("kg m-2", "us").convert(1.0)) == pytest.approx(0.204816, rel=1e-5)
    assert float(shown("Wh/m2K", "us").convert(1.0)) == pytest.approx(0.176110, rel=1e-4)
    assert shown("mol/m2", "us") == shown("mol/m2", "si")
