"""Tables of a run: the columns that readers rely on, printed digits, safe text, all files or none."""

from __future__ import annotations

import csv
import json
import os
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from xlsxwriter.exceptions import FileCreateError

from canopy.columns import COLUMNS, DAILY, GAINS, LOSSES, STORES
from canopy.run import Run
from reports import csvtables, tables
from reports.csvtables import DAILY_DIGITS, OTHER_DIGITS, daily_units, mean_dli, safe_text, zone_offset
from reports.tables import FILES, check_out, write_all
from tests.reportcase import Fake, make_run
from weather.errors import UserError

DAILY_CONTRACT = [
    "candidate",
    "date",
    "outside_global_kwh_m2",
    "outside_par_mol_m2",
    "inside_par_mol_m2",
    "crop_par_absorbed_mol_m2",
    "crop_par_absorbed_kwh_m2",
    "crop_nir_absorbed_kwh_m2",
    "ground_solar_kwh_m2",
    "covering_solar_kwh_m2",
    "sky_loss_kwh_m2",
    "through_loss_kwh_m2",
    "night_sky_loss_kwh_m2",
    "convection_loss_kwh_m2",
    "air_change_loss_kwh_m2",
    "heat_delivered_kwh_m2",
    "venting_kwh_m2",
    "transpiration_kg_m2",
    "condensation_kg_m2",
    "temp_air_min_c",
    "temp_air_mean_c",
    "temp_air_max_c",
    "leaf_min_c",
    "outside_temp_mean_c",
    "rh_max_pct",
    "vpd_mean_kpa",
    "wet_covering_h",
    "leaf_wet_h",
    "frost_h",
    "screen_drawn_h",
    "vent_open_h",
    "below_setpoint_h",
    "filled_weather_h",
]
SIZING_CONTRACT = [
    "candidate",
    "peak_w_m2",
    "peak_at",
    "load_exceeded_35_h_w_m2",
    "load_exceeded_88_h_w_m2",
    "design_night_w_m2",
    "design_outside_c",
    "annual_heat_kwh_m2",
    "full_load_hours",
    "design_heat_kw",
    "margin_pct",
    "boiler_kw",
]
RISKY = ("=1+1", "+x", "-x", "@sum(a1)", '=cmd|"/c calc"!a0', 'a, "quoted"', "plain")


@pytest.fixture(scope="module")
def run() -> Run:
    return make_run(tuple(Fake(name, 0.7 - 0.02 * k) for k, name in enumerate(RISKY[:3])), months=(1, 2, 12))


@pytest.fixture(scope="module")
def out(run: Run, tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("run") / "new" / "folder"
    paths = write_all(run, folder)
    assert tuple(p.name for p in paths) == FILES
    return folder


def test_every_file_is_there_and_nothing_else(out: Path) -> None:
    assert {p.name for p in out.iterdir()} == set(FILES)
    assert all((out / name).stat().st_size > 100 for name in FILES)


def test_daily_and_sizing_have_the_columns_that_readers_rely_on(out: Path) -> None:
    daily = pd.read_csv(out / "daily.csv")
    assert set(DAILY_CONTRACT) <= set(daily.columns)
    assert list(daily.columns[:2]) == ["candidate", "date"]
    assert {name for name, _, _ in DAILY} <= set(daily.columns)
    assert list(pd.read_csv(out / "sizing.csv").columns) == SIZING_CONTRACT
    monthly = pd.read_csv(out / "monthly.csv")
    assert list(monthly["month"][:3]) == ["1990-01", "1990-02", "1990-12"]


def test_hours_start_with_their_zone_offset(out: Path, run: Run) -> None:
    hourly = pd.read_csv(out / "hourly.csv", dtype={"time": str})
    assert hourly["time"][0] == "1990-01-01T00:00:00-05:00"
    assert len(hourly) == len(run.time) * len(run.candidates)
    assert list(hourly.columns) == ["candidate", "time", *(c.name for c in COLUMNS)]


@pytest.mark.parametrize(
    ("hours", "text"), [(5.5, "+05:30"), (-3.5, "-03:30"), (0.0, "+00:00"), (12.75, "+12:45")]
)
def test_zone_offsets_of_half_hours(hours: float, text: str) -> None:
    assert zone_offset(hours) == text


def test_printed_hours_add_up_to_printed_days(out: Path) -> None:
    hourly, daily = pd.read_csv(out / "hourly.csv"), pd.read_csv(out / "daily.csv")
    hourly["date"] = hourly["time"].str[:10]
    scale = {"kwh": 1e-3, "mol": 3600e-6, "sum": 1.0, "hours": 1.0, "degree_days": 1 / 24}
    units = daily_units()
    for name, column, how in DAILY:
        grouped = hourly.groupby(["candidate", "date"], sort=False)[column.name]
        total = grouped.sum() * scale[how] if how in scale else grouped.agg(how)
        step = 10.0 ** -DAILY_DIGITS.get(units[name], OTHER_DIGITS)
        gap = np.abs(total.to_numpy() - daily[name].to_numpy())
        assert gap.max() <= step * 1.001, name


def test_printed_hours_of_the_heat_balance_add_up(out: Path) -> None:
    hourly = pd.read_csv(out / "hourly.csv")
    gap = hourly[list(GAINS)].sum(axis=1) - hourly[list(LOSSES + STORES)].sum(axis=1)
    parts = len(GAINS + LOSSES + STORES)
    assert np.abs(gap - hourly["closure_w_m2"]).max() <= parts * 0.0005 + 1e-6


def test_daily_light_is_a_mean_over_days_with_a_crop(run: Run, out: Path) -> None:
    half = np.where(np.arange(8760) < 24 * 14, 0.0, 3.0)  # planted on 15 January
    one = replace(run.candidates[0], lai=half)
    inside = one.daily["inside_par_mol_m2"]
    assert mean_dli(run, one)[1][0] == pytest.approx(inside[14:31].mean())
    assert mean_dli(run, one)[0][0] == pytest.approx(one.daily["outside_par_mol_m2"][:31].mean())
    empty = replace(run.candidates[0], lai=np.zeros(8760))
    assert np.isnan(mean_dli(run, empty)[1]).all()
    monthly = pd.read_csv(out / "monthly.csv")
    first = run.candidates[0].daily["inside_par_mol_m2"]
    assert monthly["inside_dli_mol_m2_d"][0] == pytest.approx(first[:31].mean(), abs=6e-4)


def test_no_text_cell_starts_like_a_formula(tmp_path: Path) -> None:
    run = make_run(tuple(Fake(name) for name in RISKY), months=(1,))
    csvtables.write_hourly(run, tmp_path / "hourly.csv", None)
    csvtables.write_daily(run, tmp_path / "daily.csv")
    for name in ("hourly.csv", "daily.csv"):
        with (tmp_path / name).open(newline="", encoding="utf-8") as file:
            rows = list(csv.DictReader(file))
        seen = list(dict.fromkeys(row["candidate"] for row in rows))
        assert len(seen) == len(RISKY)
        assert all(cell.lstrip()[0] not in "=+-@\t\r" for cell in seen)
        assert seen[-2:] == list(RISKY[-2:])


@given(st.text(min_size=1, max_size=30))
def test_safe_text_is_safe_for_any_text(text: str) -> None:
    cell = safe_text(text)
    assert cell.lstrip()[:1] not in ("=", "+", "-", "@")
    assert all(c.isprintable() for c in cell)
    assert (
        cell.lstrip("'").strip() == "".join(c if c.isprintable() else " " for c in text).lstrip("'").strip()
    )


def test_tables_are_the_same_without_pyarrow(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    csvtables.write_hourly(run, tmp_path / "with.csv", None)
    monkeypatch.setattr(csvtables, "find_spec", lambda name: None)
    csvtables.write_hourly(run, tmp_path / "without.csv", None)
    with_arrow, without = (pd.read_csv(tmp_path / name) for name in ("with.csv", "without.csv"))
    pd.testing.assert_frame_equal(with_arrow, without)


def test_parquet_keeps_every_digit_and_the_zone(run: Run, out: Path) -> None:
    frame = pd.read_parquet(out / "hourly.parquet")
    one = run.candidates[1]
    kept = frame[frame["candidate"] == one.plan.name]
    for column in COLUMNS:
        np.testing.assert_array_equal(kept[column.name].to_numpy(), one.hourly[column.name])
    assert kept["time"].iloc[0].isoformat() == "1990-01-01T00:00:00-05:00"


def test_an_unheated_house_has_empty_cells_for_its_set_point(run: Run, tmp_path: Path) -> None:
    one = run.candidates[0]
    bare = replace(one, hourly={**one.hourly, "heat_at_c": np.full(len(run.time), np.nan)})
    csvtables.write_hourly(replace(run, candidates=(bare,)), tmp_path / "hourly.csv", None)
    text = (tmp_path / "hourly.csv").read_text()
    assert "nan" not in text.lower()
    assert pd.read_csv(tmp_path / "hourly.csv")["heat_at_c"].isna().all()


def test_run_json_says_what_was_computed(run: Run, out: Path) -> None:
    record = json.loads((out / "run.json").read_text())
    assert record["study"]["sha256"] == run.study.sha256
    assert record["weather"]["sha256"] == run.weather_sha256
    assert record["files"] == list(FILES)
    assert [f["check"] for f in record["weather"]["findings"]] == ["label-shift", "missing"]
    budgets = [c["budget"] for c in record["candidates"][0]["closure"]]
    assert budgets == [c.budget for c in run.candidates[0].closures]
    assert record["closure_worst_w_m2"] < 1e-6
    assert set(record["wall_s"]) >= {"weather", "heat", "files"}


def _snapshot(folder: Path) -> dict[str, bytes]:
    return {p.name: p.read_bytes() for p in folder.iterdir()}


def test_a_failing_write_leaves_the_earlier_run_alone(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for name in FILES:
        (tmp_path / name).write_text(f"earlier {name}")
    before = _snapshot(tmp_path)

    def full_disk(run: Run, path: Path) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(tables, "write_monthly", full_disk)
    with pytest.raises(UserError, match="No space left on device"):
        write_all(run, tmp_path)
    assert _snapshot(tmp_path) == before


def test_a_workbook_that_cannot_be_closed_is_said_in_one_line(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def no_room(run: Run, path: Path, units: str) -> None:
        raise FileCreateError(OSError(28, "No space left on device"))

    monkeypatch.setattr("reports.workbook.write_workbook", no_room)
    with pytest.raises(UserError, match=r"workbook\.xlsx.*No space left"):
        write_all(run, tmp_path / "new")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("fails_at", [3, 8, 9, 12, 16])
def test_a_failing_move_puts_the_earlier_run_back(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, fails_at: int
) -> None:
    work = tmp_path / "work"
    out = tmp_path / "out"
    for folder, word in ((work, "new"), (out, "earlier")):
        folder.mkdir()
        for name in FILES:
            (folder / name).write_text(f"{word} {name}")
    before, real, calls = _snapshot(out), os.replace, 0

    def breaking(source: Path, target: Path) -> None:
        nonlocal calls
        calls += 1
        if calls == fails_at:
            raise OSError(5, "Input/output error")
        real(source, target)

    monkeypatch.setattr(os, "replace", breaking)
    with pytest.raises(OSError, match="Input/output"):
        tables._move_in(work, out, list(FILES))
    assert _snapshot(out) == before


def test_a_bug_while_writing_leaves_no_folder_behind(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(run: Run, path: Path) -> None:
        raise ValueError("a bug")

    monkeypatch.setattr(tables, "write_daily", broken)
    with pytest.raises(ValueError, match="a bug"):
        write_all(run, tmp_path / "a" / "b")
    assert list(tmp_path.iterdir()) == []


def test_an_earlier_parquet_does_not_outlive_a_run_without_it(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "hourly.parquet").write_text("earlier")
    (tmp_path / "mine.txt").write_text("not ours")
    for module in (tables, csvtables):
        monkeypatch.setattr(module, "find_spec", lambda name: None)
    names = {p.name for p in write_all(run, tmp_path)}
    assert "hourly.parquet" not in names
    assert {p.name for p in tmp_path.iterdir()} == names | {"mine.txt"}
    assert "hourly.parquet" not in json.loads((tmp_path / "run.json").read_text())["files"]


def test_a_folder_that_cannot_be_used_is_said_early(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("x")
    with pytest.raises(UserError, match="is a file; name a folder"):
        check_out(tmp_path / "file")
    with pytest.raises(UserError, match="cannot be made"):
        check_out(tmp_path / "file" / "below")
    (tmp_path / "taken" / "report.html").mkdir(parents=True)
    with pytest.raises(UserError, match=r"report\.html is a folder"):
        check_out(tmp_path / "taken")
    check_out(tmp_path / "new" / "deep")
    assert not (tmp_path / "new").exists()


def test_a_read_only_place_is_said_early() -> None:
    with pytest.raises(UserError, match="cannot be"):
        check_out(Path("/proc/canopy"))
