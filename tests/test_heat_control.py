"""Set-points with ramps and light, screens by rule."""

from __future__ import annotations

import numpy as np
import pytest

from canopy.control import ScreenRule, SetPoints, drawn, month_of, ramped, schedule, within

HOURS = np.arange(0.5, 24.0)
ONES = np.ones(24)


def points(**changes: object) -> SetPoints:
    return SetPoints(20.0 * ONES, 16.0 * ONES, 24.0 * ONES, 6.0, 18.0, **changes)  # type: ignore[arg-type]


def test_ramp_by_hand() -> None:
    heat = ramped(HOURS, points(ramp_k_per_h=2.0))
    assert heat[5] == 16.0
    assert heat[6] == 17.0  # 6:30, half an hour at 2 K/h
    assert heat[7] == 19.0
    assert heat[8] == 20.0
    assert heat[17] == 20.0
    assert heat[18] == 19.0
    assert heat[23] == 16.0
    assert ramped(HOURS, points(ramp_k_per_h=np.inf))[6] == 20.0


def test_no_heating_stays_no_heating() -> None:
    none = SetPoints(-np.inf * ONES, -np.inf * ONES, 24.0 * ONES)
    climate = schedule(HOURS, ONES, 0 * ONES, 0 * ONES, none)
    assert np.isneginf(climate.heat_at).all()
    assert (climate.vent_at == 24.0).all()
    frost = SetPoints(3.0 * ONES, 3.0 * ONES, 24.0 * ONES)
    assert (schedule(HOURS, ONES, 0 * ONES, 0 * ONES, frost).heat_at == 3.0).all()


def test_light_raises_both_set_points_and_vents_stay_above() -> None:
    s = points(light_addition_k=3.0, light_full_w_m2=600.0)
    ghi = np.where(np.abs(HOURS - 12.0) < 1.0, 600.0, 300.0)
    climate = schedule(HOURS, ONES, ghi, 10 * ONES, s)
    assert climate.heat_at[12] == pytest.approx(23.0)
    assert climate.vent_at[12] == pytest.approx(27.0)
    assert (climate.vent_at > climate.heat_at).all()
    low = SetPoints(20.0 * ONES, 20.0 * ONES, 18.0 * ONES)
    assert (schedule(HOURS, ONES, ghi, ONES, low).vent_at == 20.5).all()


def test_screens_by_rule() -> None:
    ghi, out = np.where((HOURS > 7) & (HOURS < 17), 700.0, 0.0), 5.0 * ONES
    energy = drawn(ScreenRule(), HOURS, ONES, ghi, out)
    assert energy.sum() == 14
    assert drawn(ScreenRule(), HOURS, ONES, ghi, out + 10.0).sum() == 0
    shade = drawn(ScreenRule("shade", months=(6, 7)), HOURS, 180.0 * ONES, ghi, out)
    assert shade.sum() == 10
    assert drawn(ScreenRule("shade", months=(6, 7)), HOURS, ONES, ghi, out).sum() == 0
    dark = drawn(ScreenRule("blackout", hours=(17.0, 8.0), share=0.98), HOURS, ONES, ghi, out)
    assert dark.sum() == pytest.approx(15 * 0.98)


def test_gap_only_where_something_is_drawn() -> None:
    ghi = np.where((HOURS > 7) & (HOURS < 17), 500.0, 0.0)
    climate = schedule(HOURS, ONES, ghi, 0 * ONES, points(), (ScreenRule(gap=0.08),))
    assert climate.screen_gap_max is not None
    assert climate.screen_gap_max == pytest.approx(0.08 * climate.screen_drawn[0])


def test_hours_wrap_and_months() -> None:
    assert within(np.array([23.0, 2.0, 12.0]), 22.0, 6.0).tolist() == [True, True, False]
    assert within(HOURS, 0.0, 24.0).all()
    assert month_of(np.array([1, 31, 32, 59, 60, 365])).tolist() == [1, 1, 2, 2, 3, 12]
