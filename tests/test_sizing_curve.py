"""Load curve, degree days, return levels against independent computations."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats
from scipy.optimize import brentq

from canopy.degreedays import degree_days
from canopy.loadcurve import base_load, covered, exceeded, load_curve
from canopy.returns import coldest_spells, combine, gumbel_fit, many_years, return_levels, year_load

RNG = np.random.default_rng(11)
YEAR = np.arange("2021-01-01", "2022-01-01", dtype="datetime64[h]").astype("datetime64[s]")
LOAD = np.maximum(0.0, RNG.normal(40.0, 60.0, 8760))
LOAD[LOAD < 0.01] = 0.0  # less is taken for no heating


def test_35_and_88_hours_lie_above() -> None:
    # ASHRAE Fundamentals ch. 14: 99.6 % and 99 % are exceeded in 35 and 88 of 8760 hours
    for hours in (35.0, 88.0):
        assert np.count_nonzero(exceeded(LOAD, hours) < LOAD) == hours


def test_exceeded_scales_with_the_record() -> None:
    assert exceeded(np.tile(LOAD, 4), 35.0) == pytest.approx(exceeded(LOAD, 35.0), rel=0.01)
    assert exceeded(np.repeat(LOAD, 2), 35.0) == pytest.approx(exceeded(LOAD, 35.0), rel=0.01)
    series = pd.Series(LOAD)
    assert exceeded(LOAD, 87.6) == pytest.approx(series.quantile(0.99), rel=0.005)


def test_coverage_and_part_load() -> None:
    curve = load_curve(LOAD, 200.0)
    for share, heat in zip(curve.size_share, curve.heat_share, strict=True):
        assert heat == pytest.approx(sum(min(q, share * 200.0) for q in LOAD) / LOAD.sum(), rel=1e-12)
    assert curve.part_load.sum() + curve.idle_h == 8760
    bins = pd.cut(pd.Series(LOAD[LOAD > 0]), np.linspace(0.0, 200.0, 11)).value_counts(sort=False)
    assert list(curve.part_load[:-1]) == list(bins[:-1])
    assert curve.part_load[-1] == np.count_nonzero(LOAD > 180.0)
    assert curve.load[0] == LOAD.max()
    assert curve.hours[-1] == 8760


def test_base_load_by_root_finding() -> None:
    def short(size: float) -> float:
        return float(np.minimum(LOAD, size).sum() / size - 4000.0)

    assert base_load(LOAD, 3600.0) == pytest.approx(brentq(short, 1e-3, LOAD.max()), rel=1e-6)
    assert base_load(np.r_[np.zeros(8000), np.full(760, 50.0)], 3600.0) == 0.0
    assert base_load(np.full(8760, 50.0), 3600.0) == 50.0


@settings(max_examples=40, deadline=None)
@given(st.lists(st.floats(0.0, 400.0), min_size=3, max_size=80), st.floats(1.0, 400.0))
def test_curve_laws(load: list[float], size: float) -> None:
    q = np.round(np.array(load), 1)
    curve = load_curve(q, size)
    assert curve.part_load.sum() + curve.idle_h == len(q)
    assert np.all(np.diff(curve.heat_share) >= -1e-12)
    assert np.all(np.diff(curve.load) <= 0.0)
    assert 0.0 <= covered(q, size) <= 1.0 + 1e-12


def test_last_digits_are_no_heating() -> None:
    noisy = np.r_[np.full(8000, 1e-12), np.full(760, 50.0)]
    assert base_load(noisy, 3600.0) == 0.0
    assert load_curve(noisy, 50.0).idle_h == 8000


def test_unheated_house_has_empty_tables() -> None:
    curve = load_curve(np.zeros(48), 0.0)
    assert curve.idle_h == 48
    assert curve.base_load_w_m2 == 0.0
    assert not curve.part_load.any()


def test_degree_days_against_pandas() -> None:
    temp = 12.0 + 12.0 * np.cos(2 * np.pi * (np.arange(8760) - 200 * 24) / 8760) + RNG.normal(0, 4, 8760)
    ours = degree_days(YEAR, temp, 3600.0)
    series = pd.Series(temp, index=pd.DatetimeIndex(YEAR))
    for row, base in enumerate(ours.bases_c):
        hours = (base - series).clip(lower=0.0)
        assert ours.hourly[row] == pytest.approx(hours.sum() / 24.0, rel=1e-12)
        days = (base - series.resample("D").mean()).clip(lower=0.0)
        assert ours.daily_mean[row] == pytest.approx(days.sum(), rel=1e-12)
        assert ours.by_month[row] == pytest.approx(hours.resample("MS").sum().to_numpy() / 24.0, rel=1e-12)
    assert ours.months[0] == "2021-01"
    assert np.all(ours.daily_mean <= ours.hourly + 1e-9)


def test_gumbel_by_l_moments_against_scipy() -> None:
    # a long sample of a known law comes back; levels equal scipy's quantiles of the fitted law
    sample = stats.gumbel_r.rvs(loc=180.0, scale=15.0, size=200_000, random_state=5)
    assert gumbel_fit(sample) == pytest.approx((180.0, 15.0), rel=0.005)
    years = sample[:25]
    location, scale = gumbel_fit(years)
    for level in return_levels(years):
        assert level.level == pytest.approx(
            stats.gumbel_r.ppf(1 - 1 / level.years, location, scale), rel=1e-10
        )
        assert level.low < level.level < level.high


def test_l_moments_by_their_definition() -> None:
    # l2 is half the mean absolute difference of two values (Hosking 1990, eq. 2.3)
    x = np.array([3.0, 9.0, 4.0, 14.0, 7.0])
    pairs = [abs(a - b) for i, a in enumerate(x) for b in x[:i]]
    scale = np.mean(pairs) / 2.0 / np.log(2.0)
    assert gumbel_fit(x) == pytest.approx((x.mean() - 0.5772156649 * scale, scale), rel=1e-9)


def test_interval_covers_nine_times_in_ten() -> None:
    # 300 records of 12 years from a known law: the 20-year interval holds the truth in about 90 %
    truth = stats.gumbel_r.ppf(1 - 1 / 20, 180.0, 15.0)
    records = stats.gumbel_r.rvs(180.0, 15.0, size=(300, 12), random_state=9)
    hits = sum(low.low <= truth <= low.high for low in (return_levels(r, (20.0,))[0] for r in records))
    assert 0.85 <= hits / 300 <= 0.95


def test_many_years_and_not_computed() -> None:
    time = np.arange("2001-01-01", "2005-01-01", dtype="datetime64[h]").astype("datetime64[s]")
    temp = RNG.normal(5.0, 8.0, len(time))
    temp[9000:9100] = -30.0
    load = np.maximum(0.0, 18.0 - temp) * 6.0
    years = many_years(time, load, temp, 3600.0)
    assert years is not None
    assert years.levels == ()
    assert "not computed" in years.note
    frame = pd.DataFrame({"q": load, "t": temp}, index=pd.DatetimeIndex(time))
    by_year = frame.resample("YS")
    assert years.peak_w_m2 == pytest.approx(by_year["q"].max().to_numpy())
    assert years.annual_heat_kwh_m2 == pytest.approx(by_year["q"].sum().to_numpy() / 1000.0)
    parts = [time.astype("datetime64[Y]") == np.datetime64(str(y)) for y in years.years]
    one_by_one = combine([year_load(time[r], load[r], temp[r], 3600.0) for r in parts])
    assert one_by_one is not None
    assert one_by_one.years == (2001, 2002, 2003, 2004)
    assert one_by_one.peak_w_m2 == pytest.approx(years.peak_w_m2)
    rolling = frame["t"].rolling(24).mean()
    spell = next(s for s in coldest_spells(time, temp, 3600.0) if s.hours == 24)
    assert spell.mean_c == pytest.approx(rolling.min(), abs=1e-9)
    assert many_years(time[:9000], load[:9000], temp[:9000], 3600.0) is None
