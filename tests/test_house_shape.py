"""Sizes of houses against plane geometry; impossible houses are refused by name."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from scipy.integrate import quad

from canopy.house import House, check_shape
from tests.housecase import PLAIN
from weather.errors import UserError

ARCH = replace(PLAIN, form="arch", spans=3, rise=2.0, pitch=0.0, pitch_other=0.0)


def test_gable_sizes_by_hand() -> None:
    # tan 26 = .487733, cos 26 = .898794 (tables): rise 4 x .487733 = 1.95093, slope 4 / .898794 = 4.45041 m
    house = PLAIN
    assert house.floor_area == 240.0
    assert house.ridge_height == pytest.approx(4.95093, abs=1e-4)
    assert house.roof_area == pytest.approx(2 * 4.45041 * 30, rel=1e-5)
    assert house.wall_area == pytest.approx(2 * 30 * 3 + 2 * (8 * 3 + 8 * 1.95093 / 2), rel=1e-5)
    assert house.volume == pytest.approx(30 * (24 + 4 * 1.95093), rel=1e-5)
    assert house.perimeter == 76.0
    assert house.roof_slope_deg == pytest.approx(26.0)
    assert house.roof_sky_view == pytest.approx((1 + 0.898794) / 2, rel=1e-5)


def test_two_pitches_meet_at_one_ridge() -> None:
    house = replace(PLAIN, pitch=40.0, pitch_other=20.0)
    run = house.roof_rise / np.tan(np.radians([40.0, 20.0]))
    assert run.sum() == pytest.approx(8.0)
    assert house.roof_line == pytest.approx(np.hypot(run, house.roof_rise).sum())


def test_arc_by_integration() -> None:
    half, rise = 4.0, ARCH.rise
    radius = (half**2 + rise**2) / (2 * rise)

    def height(x: float) -> float:
        return float(np.sqrt(radius**2 - x * x) - (radius - rise))

    area = quad(height, -half, half)[0]
    line = quad(lambda x: radius / np.sqrt(radius**2 - x * x), -half, half)[0]
    assert ARCH.roof_section == pytest.approx(area, rel=1e-9)
    assert ARCH.roof_line == pytest.approx(line, rel=1e-9)
    slope = quad(
        lambda x: abs(np.degrees(np.arcsin(x / radius))) * radius / np.sqrt(radius**2 - x * x), -half, half
    )
    assert ARCH.roof_slope_deg == pytest.approx(slope[0] / line, rel=1e-6)


def test_semicircle_is_half_a_cylinder() -> None:
    house = replace(ARCH, spans=1, rise=4.0)
    assert house.roof_line == pytest.approx(4.0 * np.pi)
    assert house.roof_section == pytest.approx(8.0 * np.pi)
    # mean of (1 + cos t) / 2 over a half circle: 1/2 + 1/pi
    assert house.roof_sky_view == pytest.approx(0.5 + 1.0 / np.pi)


def test_valleys_see_less_sky_than_single_roofs() -> None:
    # an endless row sees the sky through its ridges alone: opening / slope length = cos 26 (reciprocity)
    many = replace(PLAIN, spans=1000)
    assert many.roof_sky_view == pytest.approx(0.898794, abs=1e-3)
    assert many.roof_sky_view < PLAIN.roof_sky_view


def test_structure_in_plan() -> None:
    house = replace(PLAIN, spans=2, gutter_width=0.2, ridge_width=0.1, bar_spacing=1.0, bar_width=0.05)
    boxes = (3 * 0.2 + 2 * 0.1) / 16.0
    assert house.structure_plan_fraction == pytest.approx(boxes + (1 - boxes) * 0.05)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"form": "arch", "rise": 4.5}, "crossing roofs"),
        ({"pitch": 75.0}, "crossing roofs"),
        ({"pitch": -1.0}, "pitch = -1"),
        ({"pitch": 0.0}, "never meet"),
        ({"gutter_height": -0.5}, "negative walls"),
        ({"crop_plane_height": 3.5}, "crop_plane_height = 3.5"),
        ({"crop_plane_height": 2.9, "gutter_width": 0.2, "gutter_depth": 0.2}, "crop_plane_height"),
        ({"gutter_width": 9.0}, "less than span_width"),
        ({"gutter_width": 0.2, "gutter_depth": 4.0, "crop_plane_height": 0.0}, "gutter_depth"),
        ({"bar_spacing": 1.0, "bar_width": 1.0}, "bar_spacing"),
        ({"bar_depth": -0.1}, "bar_depth = -0.1"),
        ({"spans": 0}, "at least 1 span"),
        ({"span_width": 0.0}, "span_width"),
        ({"length": float("nan")}, "length"),
        ({"form": "arch", "rise": 0.0}, "rise = 0"),
    ],
)
def test_impossible_houses_are_refused(change: dict[str, Any], words: str) -> None:
    with pytest.raises(UserError, match=r"^house: ") as found:
        check_shape(replace(PLAIN, **change))
    assert words in str(found.value)
    assert "\n" not in str(found.value)


@pytest.mark.parametrize(
    "house", [PLAIN, ARCH, replace(PLAIN, pitch=0.0, pitch_other=0.0), replace(ARCH, rise=4.0)]
)
def test_usual_houses_pass(house: House) -> None:
    check_shape(house)
