"""Numbers in words: units against NIST SP 811, comparisons, periods, nights, who is beaten."""

from __future__ import annotations

import io
import re
from collections.abc import Callable
from dataclasses import fields, is_dataclass, replace
from typing import cast

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from canopy.columns import LOSSES, STORES
from canopy.energykeys import HeatPumpKeys
from canopy.ledger import by_group, groups, season
from canopy.optics import Screen
from canopy.run import Run
from canopy.studykeys import CoveringKeys
from reports import sentences as say
from reports.display import NONE, Display, number, percent, pretty
from reports.figures import (
    COLOURS,
    FAINT,
    INK,
    PAPER,
    QUIET,
    TO_BARS,
    TO_COVER,
    TO_CROP,
    TO_GROUND,
    TO_OUT,
    TO_SCREEN,
    candidate_marks,
    month_labels,
)
from reports.figures_climate import AIR_OUT, HUMID, INSIDE, MEAN
from reports.figures_crop import SHADED, SUNLIT
from reports.figures_heat import FLOWS
from reports.keywords import difference_words, value_words
from reports.nights import find_nights, night_pattern
from reports.page import sections_of
from reports.ranges import covering_ranges
from reports.savings import LOSS_PATHS, saving
from reports.season import in_order
from reports.sections_choice import covering_and_house
from reports.summary import beaten, house_differences, notes_of, peaks_as_screens_open, summaries
from reports.terminal import StageLine, plain, result_table
from tests.reportcase import Fake, fakes, make_run


@pytest.fixture(scope="module")
def run() -> Run:
    return make_run()


# NIST SP 811 (2008), appendix B.8: SI value of one US unit
@pytest.mark.parametrize(
    ("kind", "si", "per_us"),
    [
        ("W/m2", 3.154591, 1.0),  # Btu_IT/(ft2 h)
        ("W/m2/K", 5.678263, 1.0),  # Btu_IT/(h ft2 °F)
        ("kWh/m2", 11.35653e6 / 3.6e6, 1.0),  # 1000 Btu_IT/ft2 = 1.135653e7 J/m2
        ("kW", 0.2930711, 1.0),  # 1000 Btu_IT/h
        ("m/s", 0.44704, 1.0),  # mile per hour
        ("kg/m2", 4.882428, 1.0),  # lb/ft2
        ("m", 0.3048, 1.0),
        ("m2", 0.09290304, 1.0),
        ("degC", 37.0, 98.6),
        ("K", 5.0, 9.0),
    ],
)
def test_us_units_follow_nist(kind: str, si: float, per_us: float) -> None:
    assert float(Display("us").convert(si, kind)) == pytest.approx(per_us, rel=2e-6)
    assert float(Display("si").convert(si, kind)) == si


def test_numbers_are_written_for_readers() -> None:
    assert number(1234567.8) == "1\u202f234\u202f568"
    assert number(-0.04, 1) == "0.0"
    assert number(-3.26, 1) == "−3.3"
    assert number(float("nan")) == number(float("inf")) == "–"
    assert percent(0.123, 1) == "12.3\u202f%"


@given(st.floats(-1e9, 1e9), st.integers(0, 4))
def test_a_written_number_reads_back(value: float, digits: int) -> None:
    back = float(number(value, digits).replace("\u202f", "").replace("−", "-"))
    assert back == pytest.approx(value, abs=0.5001 * 10.0**-digits)


def test_changes_in_words() -> None:
    assert say.change(88.0, 100.0, "heat") == "12\u202f% less heat"
    assert say.change(103.1, 100.0, "light") == "3.1\u202f% more light"
    assert say.change(100.3, 100.0, "heat") == "the same heat"
    assert "cannot be compared" in say.change(3.0, 0.0, "heat")


def test_the_answer_names_least_heat_and_most_light(run: Run) -> None:
    rows = summaries(run)
    first, second = say.answer(run, rows, Display("si"))
    cool, bright = rows[-1], rows[0]
    assert cool.name in first
    assert f"{cool.heat_kwh:.0f}" in first
    assert bright.name in second
    assert f"{100 * bright.inside_mol / bright.outside_mol:.0f}\u202f%" in second


def test_totals_are_those_of_the_days(run: Run) -> None:
    for row, one in zip(summaries(run), run.candidates, strict=True):
        assert row.heat_kwh == pytest.approx(one.daily["heat_delivered_kwh_m2"].sum())
        assert row.inside_mol == pytest.approx(one.daily["inside_par_mol_m2"].sum())
        assert row.peak_w == one.hourly["heat_delivered_w_m2"].max()


def test_who_is_beaten_on_all_counts() -> None:
    rows = summaries(make_run((Fake("good", 0.7, 4.0), Fake("bad", 0.6, 6.0), Fake("bright", 0.8, 6.5))))
    assert [(w.name, b.name) for w, b in beaten(rows)] == [("bad", "good")]
    assert any("bad gives less light than good" in line for line in say.verdicts(rows))


def test_house_differences_are_said_with_both_values(run: Run) -> None:
    found = house_differences(run, 1)
    arch = [("house.form", "gable", "arch"), ("house.bar_width", 0.03, 0.06), ("house.rise", None, 1.9)]
    assert difference_words(arch, "glass") == (
        "form arch instead of gable and gutters, ridges and bars of its own (see inputs) (against glass)"
    )
    assert [key for key, _, _ in found] == ["house.ridge_azimuth", "house.leakage_per_hour"]
    words = difference_words(found, "single glass")
    assert "direction of the ridge 90 instead of 0" in words
    assert "leakage per hour 0.7 instead of by kind of covering" in words
    assert house_differences(run, 2) == []


def test_periods_in_words(run: Run) -> None:
    assert say.period(run) == "a year"
    assert say.period(make_run(fakes(1), months=(4, 5))) == "from 1 April to 31 May"
    assert say.period(make_run(fakes(1), months=(1, 2, 11, 12))) == "from 1 November to 28 February"
    assert say.dark_words(run, short=True) == "Dec, Jan, Feb"


def test_months_of_several_years_carry_their_year() -> None:
    assert month_labels(("1990-01", "1990-02")) == ["Jan", "Feb"]
    assert month_labels(("1989-12", "1990-01")) == ["Dec", "Jan"]
    assert month_labels(("2019-12", "2020-01", "2020-12")) == ["Dec 19", "Jan 20", "Dec 20"]


def test_a_season_over_the_new_year_begins_in_autumn() -> None:
    file_order = make_run(fakes(2), months=(1, 2, 10, 11, 12))
    run = in_order(file_order)
    assert run.months == ("1989-10", "1989-11", "1989-12", "1990-01", "1990-02")
    assert (np.diff(run.days.astype(int)) == 1).all()
    assert (np.diff(run.time.astype(int)) == 3600).all()
    for old, new in zip(file_order.candidates, run.candidates, strict=True):
        for name, values in by_group(new.hourly, groups(run.time, "D")[1], 3600.0).items():
            np.testing.assert_array_equal(values, new.daily[name])
        assert season(new.hourly, 3600.0) == pytest.approx(season(old.hourly, 3600.0))
        assert new.monthly["heat_delivered_kwh_m2"][0] == old.monthly["heat_delivered_kwh_m2"][2]
    assert (run.weather.temp_air[run.hours] == run.candidates[0].hourly["outside_temp_c"]).all()
    assert say.period(run) == say.period(file_order) == "from 1 October to 28 February"


def test_other_seasons_stay_as_they_are(run: Run) -> None:
    assert in_order(run) is run
    spring = make_run(fakes(1), months=(4, 5))
    assert in_order(spring) is spring


def test_nights_are_parted_by_how_clear_they_are(run: Run) -> None:
    nights = find_nights(run)
    one = run.candidates[0]
    pattern = night_pattern(one, nights)
    assert pattern is not None
    assert pattern.labels == tuple(f"{h:02d}" for h in (*range(18, 24), *range(6)))
    assert not (nights.clear & nights.cloudy).any()
    assert (nights.clear | nights.cloudy | nights.dark == nights.dark).all()
    weather = run.weather
    black = 5.670374e-8 * (weather.temp_air + 273.15) ** 4 - weather.longwave_down
    assert black[nights.clear].mean() > black[nights.cloudy].mean()
    at = nights.clear & (nights.hour == 3)
    expected = one.hourly["through_loss_w_m2"][at].mean()
    assert pattern.clear_through[pattern.labels.index("03")] == pytest.approx(expected)


def test_a_polar_day_has_no_nights(run: Run) -> None:
    one = run.candidates[0]
    bright = replace(one.case, outside=replace(one.case.outside, sun_up=np.ones(8760, bool)))
    polar = replace(run, candidates=(replace(one, case=bright),))
    nights = find_nights(polar)
    assert not nights.dark.any()
    assert night_pattern(polar.candidates[0], nights) is None


def _luminance(colour: str) -> float:
    parts = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    r, g, b = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
    return 0.2126 * r + 0.7152 * g + 0.0722 * b


def _contrast(a: str, b: str) -> float:
    high, low = sorted((_luminance(a), _luminance(b)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def test_colours_stand_out_from_the_paper() -> None:
    # WCAG 2.2: success criterion 1.4.11 asks 3:1 for graphics, 1.4.3 asks 4.5:1 for text
    marks = [mark for mark, _, _ in FLOWS]
    marks += [
        TO_CROP,
        TO_GROUND,
        TO_COVER,
        TO_SCREEN,
        TO_BARS,
        TO_OUT,
        INSIDE,
        MEAN,
        AIR_OUT,
        HUMID,
        SUNLIT,
        SHADED,
    ]
    weak = [c for c in (*COLOURS, *(m.colour for m in marks)) if _contrast(c, PAPER) < 3.0]
    assert weak == []
    assert _contrast(INK, PAPER) > 7
    assert _contrast(QUIET, PAPER) > 4.5
    assert _contrast(FAINT, PAPER) < 2  # grid lines stay in the background


def test_candidates_differ_in_more_than_colour() -> None:
    marks = candidate_marks([f"c{k}" for k in range(24)])
    assert len({(m.colour, m.dash, m.symbol) for m in marks}) == 24
    assert len({m.symbol for m in marks[:8]}) == 8
    paths = [(m.colour, m.pattern) for m, _, _ in FLOWS]
    assert len(set(paths)) == len(paths)


def test_the_terminal_table_fits_and_carries_no_control_characters(run: Run) -> None:
    odd = replace(run.candidates[0].plan, name="evil \x1b[31m red " + "x" * 80)
    text = result_table(replace(run, candidates=(replace(run.candidates[0], plan=odd), *run.candidates[1:])))
    assert "\x1b" not in text
    assert max(map(len, text.splitlines())) <= 120
    assert text.splitlines()[0].endswith("totals a year")
    assert plain("a" * 50, 10) == "a" * 9 + "…"


def test_the_terminal_names_the_kind_of_weather(run: Run) -> None:
    assert "typical weather year" in result_table(run)
    clear = replace(run, weather=replace(run.weather, clear_sky=True))
    assert "upper bound" in result_table(clear)
    measured = replace(run, weather=replace(run.weather, typical=False))
    assert "weather year" not in result_table(measured)


def test_progress_is_one_line_per_stage_in_a_pipe() -> None:
    stream = io.StringIO()
    stage = StageLine(stream)
    stage("weather")
    stage("single \x1b[31mglass (1 of 2)")
    stage.done()
    lines = stream.getvalue().splitlines()
    assert [line.split(" s  ")[1] for line in lines] == ["weather", "single ?[31mglass (1 of 2)"]


def test_progress_changes_in_place_on_a_terminal() -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    screen = Terminal()
    line = StageLine(screen)
    line("weather")
    line.done()
    assert "\n" not in screen.getvalue()
    assert screen.getvalue().startswith("\r")
    assert screen.getvalue().endswith("\x1b[2K")


def test_a_saving_is_accounted_for_path_by_path(run: Run) -> None:
    base = run.candidates[0]
    for one in run.candidates:
        found = saving(run, base, one)
        assert abs(found.open) < 1e-6
        expected = base.daily["heat_delivered_kwh_m2"].sum() - one.daily["heat_delivered_kwh_m2"].sum()
        assert found.heat == pytest.approx(expected, abs=1e-9)
    assert saving(run, base, base).paths == (0.0,) * len(LOSS_PATHS)


def _texts(value: object) -> list[str]:
    """Return every text of a section, however deep."""
    if isinstance(value, str):
        return [value]
    if isinstance(value, tuple | list):
        return [text for item in value for text in _texts(item)]
    if is_dataclass(value) and not isinstance(value, type):
        return [text for f in fields(value) for text in _texts(getattr(value, f.name))]
    return []


ALIKE = tuple(Fake(f"c{k}") for k in range(3))
ODD: dict[str, Callable[[], Run]] = {
    "all alike": lambda: make_run(ALIKE),
    "one candidate": lambda: make_run(fakes(1)),
    "24 candidates": lambda: make_run(fakes(24)),
    "one day": lambda: make_run(fakes(3), months=(2,), first_days=1),
    "one summer day": lambda: make_run(fakes(2), months=(7,), first_days=1),
    "no heat": lambda: make_run(fakes(3), heated=False),
    "no heat, one candidate": lambda: make_run(fakes(1), heated=False),
    "no light": lambda: make_run(fakes(3), months=(1, 2), dark=True),
    "no light, one candidate": lambda: make_run(fakes(1), months=(1,), dark=True),
    "a covering that passes nothing": lambda: make_run((Fake("open"), Fake("board", par=0.0))),
    "no crop": lambda: make_run(fakes(3), lai=0.0),
    "us, all alike": lambda: make_run(ALIKE, units="us"),
}


@pytest.mark.parametrize("case", ODD)
def test_odd_runs_are_told_in_whole_sentences(case: str) -> None:
    texts = [text for section in sections_of(ODD[case]()) for text in _texts(section.blocks)]
    assert len(texts) > 100
    for text in texts:
        words = re.findall(r"[A-Za-z]+", text)
        assert not {"nan", "inf", "None", "NoneType"} & set(words), text
        assert ", ." not in text
        assert "  " not in text
        if text.endswith("."):  # a sentence: no dash where a number should stand
            assert f"{NONE} of" not in text, text
            assert f"{NONE}." not in text, text


def test_equal_candidates_are_called_equal() -> None:
    run = make_run(ALIKE)
    rows, show = summaries(run), Display("si")
    assert all(line.startswith("All candidates") for line in say.answer(run, rows, show))
    assert say.trades(run, rows, show)[0].startswith(
        "c1 against c0: the same heat, and for the crop the same light"
    )
    assert len(say.verdicts(rows)) == 1
    texts = [text for section in sections_of(run) for text in _texts(section.blocks)]
    assert "All candidates take the same heat as c0." in texts
    assert say.listed([]) == "none"


def test_a_heated_house_beside_an_unheated_one_is_not_called_unheated() -> None:
    warm, cold = make_run(fakes(2)), make_run(fakes(2), heated=False)
    for first, second, part in (
        (warm, cold, "100\u202f% less heat"),
        (cold, warm, "of heat where single glass takes none"),
    ):
        run = replace(warm, candidates=(first.candidates[0], second.candidates[1]))
        rows = summaries(run)
        assert say.answer(run, rows, Display("si"))[0].startswith("Least heat: ")
        assert part in say.trades(run, rows, Display("si"))[0]


def test_saving_paths_take_every_loss_and_store_once() -> None:
    names = [name for _, columns in LOSS_PATHS for name in columns]
    assert sorted(names) == sorted(LOSSES + STORES)


def test_a_peak_at_the_opening_of_screens_is_named(run: Run) -> None:
    one = run.candidates[0]
    at = int(one.hourly["heat_delivered_w_m2"].argmax())
    drawn = np.where(np.arange(len(run.time)) < at, 1.0, 0.0)
    screen = cast(Screen, object())
    opened = replace(one, screens=(screen,), hourly={**one.hourly, "screen_drawn_share": drawn})
    assert peaks_as_screens_open(opened)
    shut = replace(opened, hourly={**one.hourly, "screen_drawn_share": np.ones(len(run.time))})
    assert not peaks_as_screens_open(shut)
    assert not peaks_as_screens_open(one)


def test_sentences_of_other_rooms_are_set_for_readers() -> None:
    assert pretty("1.4 m2/m2 x 5.8 W/m2K x (0.8 - -11.1) K") == "1.4 m²/m² × 5.8 W/m²K × (0.8 − −11.1) K"
    assert pretty("1990-12-25 07:00, 99-6") == "1990-12-25 07:00, 99-6"
    peak = "345 W/m² (1990-12-25 07:00)"
    assert say.dated(peak, nominal=True) == "345 W/m² (25 December, 07:00)"
    assert say.dated(peak, nominal=False) == "345 W/m² (25 December 1990, 07:00)"


def _dirty(run: Run) -> Run:
    """Return a run whose first candidate stands under a library glass, half of its light lost in June."""
    loss = [0.0] * 5 + [0.5] + [0.0] * 6
    own = CoveringKeys(name="in use", based_on="glass-clear-4", dirt_by_month=loss)
    plan = replace(run.candidates[0].plan, covering="in use")
    keys = run.study.keys.model_copy(update={"covering": [own]})
    first = replace(run.candidates[0], plan=plan, notes=("in use: dirt", "seen"))
    others = tuple(replace(one, notes=("seen",)) for one in run.candidates[1:])
    return replace(run, study=replace(run.study, keys=keys), candidates=(first, *others))


def test_dirt_is_named_where_it_counts(run: Run) -> None:
    dirty = _dirty(run)
    first, second, *_ = summaries(dirty)
    outside = run.candidates[0].hourly["outside_par_umol_m2_s"]
    month = run.time.astype("datetime64[M]").astype(int) % 12 + 1
    june = outside[month == 6].sum() / outside.sum()  # levels run straight from the middle of month to month
    assert 0.3 * june < first.dirt < june
    assert second.dirt == 0.0
    clean = summaries(run)[0]
    assert first.house_par == pytest.approx(clean.house_par * (1.0 - first.dirt))
    assert first.shape_share == pytest.approx(clean.shape_share)
    texts = _texts(covering_and_house(dirty, summaries(dirty), Display("si")))
    assert "of that, dirt takes" in texts
    assert percent(first.dirt, 1) in texts
    assert "of that, dirt takes" not in _texts(covering_and_house(run, summaries(run), Display("si")))


def test_notes_stand_once_with_all_they_hold_for(run: Run) -> None:
    notes = notes_of(_dirty(run))
    assert "single glass: in use: dirt" in notes
    assert "all candidates: seen" in notes


def test_a_library_covering_in_use_keeps_its_ranges(run: Run) -> None:
    assert covering_ranges(run) == {}
    assert list(covering_ranges(_dirty(run))) == ["glass-clear-4"]
    quoted = _dirty(run)
    keys = quoted.study.keys
    own = keys.covering[0].model_copy(update={"u_value": 5.0})
    study = replace(quoted.study, keys=keys.model_copy(update={"covering": [own]}))
    assert covering_ranges(replace(quoted, study=study)) == {}


def test_crumbs_of_the_solver_are_no_heat() -> None:
    run = make_run(fakes(2), heated=False)
    crumbs = tuple(
        replace(
            one,
            hourly={**one.hourly, "heat_delivered_w_m2": np.full(len(run.time), 1e-6 * (at + 1))},
            monthly={**one.monthly, "heat_delivered_kwh_m2": np.full(len(run.months), 1e-8)},
        )
        for at, one in enumerate(run.candidates)
    )
    run = replace(run, candidates=crumbs)
    rows = summaries(run)
    assert [(r.heat_kwh, r.peak_w) for r in rows] == [(0.0, 0.0)] * 2
    assert say.answer(run, rows, Display("si"))[0] == "No candidate takes heat: temperatures float."
    assert "takes the most heat" not in " ".join(_texts(sections_of(run)[2].blocks))


def test_values_of_tables_are_written_out() -> None:
    pump = HeatPumpKeys(source="air", capacity_w_m2=60.0)
    words = value_words(pump, "heating.heat_pump")
    assert words.startswith("source air, capacity_w_m2 60")
    assert "None" not in words
    assert value_words(None, "heating.capacity_w_m2") == "no limit"
    assert value_words(None, "heating.heat_pump") == value_words([], "house.paint") == "none"
    assert Display("si").say(1.44, "kWh/m2") == "1.4\u00a0kWh/m²"
    assert Display("si").say(14.4, "kWh/m2") == "14\u00a0kWh/m²"


def test_a_house_that_is_not_kept_warm_is_named(run: Run) -> None:
    rows = summaries(run)
    assert not any("cannot hold" in line for line in say.doubts(run, rows))
    cold = replace(rows[1], total={**rows[1].total, "below_setpoint_h": 272.0})
    line = say.doubts(run, (rows[0], cold))[0]
    assert line.startswith(f"With {cold.name} the heating cannot hold the set-point, in up to 272 hours")


def test_a_computed_year_is_not_called_typical(run: Run) -> None:
    clear = replace(run, weather=replace(run.weather, clear_sky=True))  # both marks stand on such a year
    words = " ".join(say.doubts(clear, summaries(clear)))
    assert "clear-sky record" in words
    assert "typical" not in words
