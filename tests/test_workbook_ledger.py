"""Days, months and season add up the hours, whatever the hours are."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy.columns import BY_NAME, COLUMNS, DAILY, GAINS, LOSSES, STORES, day_unit
from canopy.ledger import by_group, gather, groups, season


@pytest.fixture(scope="module")
def hourly() -> dict[str, np.ndarray]:
    rng = np.random.default_rng(2)
    return {c.name: rng.normal(50.0, 200.0, 24 * 90) for c in COLUMNS}


def test_days_and_months_equal_hours(hourly: dict[str, np.ndarray]) -> None:
    time = np.datetime64("2001-01-15T00:00:00", "s") + np.arange(24 * 90) * np.timedelta64(3600, "s")
    days, first_day = groups(time, "D")
    months, first_month = groups(time, "M")
    assert len(days) == 90
    assert [str(m) for m in months] == ["2001-01", "2001-02", "2001-03", "2001-04"]
    daily, monthly = by_group(hourly, first_day, 3600.0), by_group(hourly, first_month, 3600.0)
    whole = season(hourly, 3600.0)
    # W/m2 over an hour is Wh/m2; µmol m-2 s-1 over an hour is 3600 µmol/m2; a degree day is 24 kelvin hours
    factor = {"kwh": 1e-3, "mol": 3600e-6, "sum": 1.0, "hours": 1.0, "degree_days": 1.0 / 24.0}
    for name, column, how in DAILY:
        values = hourly[column.name]
        if how in factor:
            exact = float(np.sum(values.astype(np.longdouble))) * factor[how]
            for total in (daily[name].sum(), monthly[name].sum(), whole[name]):
                assert total == pytest.approx(exact, rel=1e-9, abs=1e-9)
        elif how == "mean":
            assert daily[name].mean() == pytest.approx(values.mean(), rel=1e-9)
        else:
            pick = np.min if how == "min" else np.max
            assert pick(daily[name]) == pick(monthly[name]) == whole[name] == pick(values)


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.floats(-1e4, 1e4), min_size=1, max_size=200),
    st.sampled_from(["kwh", "mol", "sum", "hours", "degree_days"]),
    st.sampled_from([600.0, 1800.0, 3600.0]),
)
def test_any_cut_into_groups_keeps_the_sum(values: list[float], how: str, step_s: float) -> None:
    array = np.array(values)
    first = np.unique(np.r_[0, np.arange(0, len(array), 7)])
    whole = gather(array, np.zeros(1, dtype=np.intp), how, step_s)[0]  # type: ignore[arg-type]
    parts = gather(array, first, how, step_s).sum()  # type: ignore[arg-type]
    assert parts == pytest.approx(whole, rel=1e-9, abs=1e-9)


def test_table_of_columns() -> None:
    assert len(BY_NAME) == len(COLUMNS)
    assert len({name for name, _, _ in DAILY}) == len(DAILY)
    # a day can be added up: every part of the balance has a daily column in kWh/m2
    daily = {column.name: day_unit(column, how) for _, column, how in DAILY}
    for name in (*GAINS, *LOSSES, *STORES):
        assert daily[name] == "kWh/m2"
