"""Light paths against two other ray tracers, closed forms and laws."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy.archlight import arch_light
from canopy.gablelight import gable_light
from canopy.house import House
from canopy.lightpath import trace, transmit
from canopy.passing import Passed, Sheets
from canopy.rays import house_rays
from canopy.sheettable import sheet_table
from tests.housecase import PLAIN, clear, fresnel, glass, reference_house, references, weather
from tests.reference.house_rays import Scene, sun
from weather.errors import UserError
from weather.record import Weather

CASES = references()
ANGLE = st.floats(0.5, 89.0)


def passed(
    house: House, zenith: np.ndarray, azimuth: np.ndarray, *, hazy: float = 0.0, none: bool = False
) -> Passed:
    """Light through a house of the reference glass (or of nothing at all)."""
    rays = house_rays(house, np.asarray(zenith, float), np.asarray(azimuth, float))
    light = arch_light(house, rays) if house.form == "arch" else gable_light(house, rays)
    table = sheet_table(clear() if none else glass(hazy))
    return light.give(Sheets(table, table, table))


def test_one_span_against_published_tracing() -> None:
    # two independent ray tracers, 1e-4: sun 90 degrees off the ridge and along it, heights 10, 30, 60
    zenith = np.array([80.0, 60.0, 30.0])
    off, along = passed(PLAIN, zenith, np.full(3, 90.0)), passed(PLAIN, zenith, np.zeros(3))
    np.testing.assert_allclose(off.straight[1], [0.89987, 0.89554, 0.87753], atol=1e-4)
    np.testing.assert_allclose(along.straight[1], [0.68218, 0.81239, 0.88685], atol=1e-4)
    np.testing.assert_allclose(off.bounce[1], [0.0715, 0.0279, 0.0190], atol=2e-4)


def test_isotropic_sky_through_one_span() -> None:
    # the same two tracers, without a bounce: .85900
    record = weather()
    paths = trace(PLAIN, record.zenith[:24], record.azimuth[:24])
    short = replace_weather(24)
    assert transmit(paths, glass(mirror=False), short).isotropic[1] == pytest.approx(0.85900, abs=1e-4)
    assert transmit(paths, glass(), short).isotropic[1] > 0.88


def replace_weather(hours: int) -> Weather:
    """The first hours of the test year."""
    record = weather()
    values = {
        name: getattr(record, name)[:hours]
        for name in record.__dataclass_fields__
        if isinstance(getattr(record, name), np.ndarray)
    }
    return replace(record, **values)


@pytest.mark.parametrize("name", list(CASES))
def test_against_monte_carlo(name: str) -> None:
    # 30 suns, heights 10-75 degrees, Sobol points
    case = CASES[name]
    rays = np.array(case["rays"])
    light = passed(reference_house(case["house"]), 90.0 - rays[:, 0], rays[:, 1])
    np.testing.assert_allclose(light.straight[1], rays[:, 2], atol=1e-4)
    # wider: shadows of gutters on what the inside of an arch mirrors are sampled
    wider = {"flat arches, gutters": 2.5e-4}
    np.testing.assert_allclose(light.bounce[1], rays[:, 3], atol=wider.get(name, 2e-4))


@pytest.mark.parametrize("name", ["two pitches, boxes", "one tunnel"])
def test_the_stored_references_can_be_made_again(name: str) -> None:
    from scipy.stats import qmc

    case = CASES[name]
    scene = Scene(case["house"])
    points = qmc.Sobol(2, seed=3).random_base2(12)
    for elevation, turn, straight, bounce in case["rays"][3::9]:
        way = sun(elevation, turn)
        assert scene.straight(way, points) == pytest.approx(straight, abs=4e-3)
        assert scene.bounce(way, points) == pytest.approx(bounce, abs=4e-3)


@pytest.mark.parametrize(
    "shape",
    [
        {"form": "gable", "spans": 1, "pitch": 3.0},
        {"form": "arch", "spans": 3, "rise": 1.5},
    ],
)
def test_gutter_boxes_on_tall_side_walls(shape: dict[str, float | str]) -> None:
    # sun along the wall: the box is met behind the wall, past the gable end or not; bounce: both walls
    from scipy.stats import qmc

    sizes = {
        **shape, "span_width": 3.0, "length": 30.0, "gutter_height": 6.0, "gutter_width": 0.25,
        "gutter_depth": 0.25, "crop_plane_height": 0.0,
    }  # fmt: skip
    pitch = float(shape.get("pitch", 26.0))
    sides = {"pitch": pitch, "pitch_other": pitch}
    house, scene = reference_house({**sizes, **sides}), Scene(sizes)
    points = qmc.Sobol(2, seed=1).random_base2(15)
    for zenith, azimuth in ((76.0, 2.0), (76.0, 5.0), (70.0, 30.0)):
        light = passed(house, np.array([zenith]), np.array([azimuth]))
        way = sun(90.0 - zenith, azimuth)
        assert light.straight[1, 0] == pytest.approx(scene.straight(way, points), abs=2e-4)
        assert light.bounce[1, 0] == pytest.approx(scene.bounce(way, points), abs=2e-4)


def test_flat_roof_is_its_sheet() -> None:
    # 1000 km wide: walls play no part
    wide = replace(PLAIN, spans=1, span_width=1e6, length=1e6, pitch=0.0, pitch_other=0.0)
    angle = np.array([0.0, 30.0, 60.0, 80.0])
    light = passed(wide, angle, np.full(4, 37.0))
    # Fresnel and Bouguer, n 1.526, K d .0185145: handbook form, worked with tmm
    np.testing.assert_allclose(light.straight[1], [0.90000, 0.89669, 0.82285, 0.44079], atol=2e-5)
    np.testing.assert_allclose(light.straight[1], fresnel(np.radians(angle))[0], atol=1e-5)
    np.testing.assert_allclose(light.bounce, 0.0, atol=1e-5)


HOUSES = st.builds(
    lambda form, spans, width, pitch, other, flat, height, crop: replace(
        PLAIN, form=form, spans=spans, span_width=width, pitch=pitch, pitch_other=other, rise=flat * width,
        gutter_height=height, crop_plane_height=crop * height,
    ),
    st.sampled_from(["gable", "arch"]), st.integers(1, 12), st.floats(3.0, 15.0), st.floats(3.0, 60.0),
    st.floats(3.0, 60.0), st.floats(0.05, 0.5), st.floats(1.0, 7.0), st.floats(0.0, 1.0),
)  # fmt: skip


@settings(max_examples=60, deadline=None)
@given(house=HOUSES, zenith=ANGLE, azimuth=st.floats(0.0, 360.0))
def test_a_clear_sheet_passes_everything(house: House, zenith: float, azimuth: float) -> None:
    light = passed(house, np.array([zenith]), np.array([azimuth]), none=True)
    np.testing.assert_allclose(light.straight, 1.0, atol=1e-9)
    np.testing.assert_allclose(light.bounce, 0.0, atol=1e-12)
    np.testing.assert_allclose(light.absorbed, 0.0, atol=1e-12)


@settings(max_examples=60, deadline=None)
@given(house=HOUSES, zenith=ANGLE, azimuth=st.floats(0.0, 360.0), gutter=st.floats(0.0, 0.4))
def test_nothing_is_made_from_nothing(house: House, zenith: float, azimuth: float, gutter: float) -> None:
    depth = min(gutter, house.gutter_height - house.crop_plane_height)
    boxed = replace(
        house, gutter_width=gutter, gutter_depth=depth, ridge_width=0.1 * gutter, ridge_depth=0.05
    )
    light = passed(boxed, np.array([zenith]), np.array([azimuth]))
    plain = passed(house, np.array([zenith]), np.array([azimuth]))
    for one in (light, plain):
        assert one.straight.min() >= -1e-9
        assert one.bounce.min() >= -1e-6
        assert (one.straight <= 0.91).all()
    # boxes cut the Gauss pieces of an arch anew: within the error of the rule, 2e-4 from suns 10 degrees up;
    # shares are per unit on the horizontal, so that below the same error weighs as 1 / cos z
    error = 2e-4 * max(1.0, np.cos(np.radians(80.0)) / np.cos(np.radians(zenith)))
    assert (light.straight <= plain.straight + error).all()


@settings(max_examples=25, deadline=None)
@given(zenith=ANGLE, azimuth=st.floats(0.0, 360.0), turn=st.floats(0.0, 360.0))
def test_only_the_angle_to_the_ridge_counts(zenith: float, azimuth: float, turn: float) -> None:
    house = replace(PLAIN, spans=4, pitch_other=35.0)
    here = passed(house, np.array([zenith]), np.array([azimuth]))
    turned = passed(replace(house, ridge_azimuth=turn), np.array([zenith]), np.array([azimuth + turn]))
    np.testing.assert_allclose(here.straight + here.bounce, turned.straight + turned.bounce, atol=1e-6)


def test_pitches_change_sides_with_the_sun() -> None:
    # `pitch` faces the ridge's azimuth + 90: a steep slope there meets a low eastern sun more squarely
    house = replace(PLAIN, spans=20, pitch=50.0, pitch_other=15.0)
    east, west = passed(house, np.array([75.0, 75.0]), np.array([90.0, 270.0])).straight[1]
    mirrored = replace(house, pitch=15.0, pitch_other=50.0)
    east_mirrored, west_mirrored = passed(mirrored, np.array([75.0, 75.0]), np.array([90.0, 270.0])).straight[
        1
    ]
    assert (east, west) == pytest.approx((west_mirrored, east_mirrored), abs=1e-9)
    assert abs(east - west) > 0.02


def test_haze_moves_light_from_beam_to_diffuse_only() -> None:
    house = replace(PLAIN, spans=3)
    still, hazy = (passed(house, np.array([70.0]), np.array([60.0]), hazy=h) for h in (0.0, 0.4))
    np.testing.assert_allclose(hazy.straight, still.straight, atol=1e-12)
    # one sheet keeps 1 - .4 of its light as beam, two sheets .36: between the two
    share = hazy.beam[1] / hazy.straight[1]
    assert 0.36 < float(share[0]) <= 0.6 + 1e-9


def test_bars_shade_by_plane_geometry() -> None:
    # upright sun on a flat roof, bars .05 wide and .1 deep every 1 m; at 45 degrees across: .05 + .1 = .15
    wide = replace(
        PLAIN, span_width=1e6, length=1e6, pitch=0.0, pitch_other=0.0, bar_spacing=1.0, bar_width=0.05
    )
    deep = replace(wide, bar_depth=0.1)
    light = passed(deep, np.array([0.0, 45.0, 45.0]), np.array([0.0, 0.0, 90.0]), none=True)
    np.testing.assert_allclose(light.straight[1], [0.95, 0.85, 0.95], atol=1e-4)


def test_deep_gutters_cost_more_than_their_plan() -> None:
    # crossed strings (Hottel 1954): a slot of width g and depth d between gutters every w metres passes
    # (sqrt(g^2 + d^2) - d) / w of isotropic light; .28 x .28 m every 4 m: .863, while the plan leaves .93
    house = replace(PLAIN, spans=200, span_width=4.0, length=4000.0, pitch=0.0, pitch_other=0.0,
                    gutter_width=0.28, gutter_depth=0.28)  # fmt: skip
    record = replace_weather(24)
    open_share = trace(house, record.zenith, record.azimuth).sky_open
    assert open_share == pytest.approx((np.hypot(3.72, 0.28) - 0.28) / 4.0, abs=2e-3)
    assert house.structure_plan_fraction == pytest.approx(0.07, abs=0.001)


def test_absorbed_by_a_black_covering_is_its_shadow() -> None:
    # a black sheet keeps all the light that falls on the house: its shadow on level ground
    black = replace(
        glass(),
        beam_beam=0 * glass().beam_beam,
        beam_reflect=0 * glass().beam_reflect,
        beam_specular=0 * glass().beam_specular,
        beam_absorbed=np.ones_like(glass().beam_absorbed),
    )
    table = sheet_table(black)
    for height in (35.0, 60.0, 80.0):
        e = np.radians(height)
        kept = gable_light(PLAIN, house_rays(PLAIN, np.array([90.0 - height]), np.array([90.0])))
        absorbed = kept.give(Sheets(table, table, table)).absorbed[0, 1, 0]
        # from the far gutter to the near wall's foot, or the ridge where it stands out (plane geometry)
        reach = max(8.0 + 3.0 / np.tan(e), 4.0 + 4.95093 / np.tan(e))
        assert absorbed == pytest.approx(reach / 8.0, abs=1e-3)


def test_hills_hide_sun_and_sky() -> None:
    record = weather()
    open_paths = trace(PLAIN, record.zenith, record.azimuth)
    ring = trace(PLAIN, record.zenith, record.azimuth, horizon=((0.0, 20.0), (180.0, 20.0)))
    hidden = (90.0 - record.zenith[ring.day]) <= 20.0
    assert (ring.visible[hidden] == 0.0).all()
    assert (ring.visible[~hidden] == 1.0).all()
    # a ring of height h leaves cos^2 h of the sky's light on the horizontal (closed form)
    assert ring.grid.dome.sum() == pytest.approx(np.cos(np.radians(20.0)) ** 2, abs=1e-9)
    assert open_paths.grid.dome.sum() == pytest.approx(1.0, abs=1e-12)
    with pytest.raises(UserError, match="horizon"):
        trace(PLAIN, record.zenith, record.azimuth, horizon=((90.0, 5.0), (10.0, 5.0)))
    with pytest.raises(UserError, match="elevation 95"):
        trace(PLAIN, record.zenith, record.azimuth, horizon=((90.0, 95.0),))


NARROW = {
    "spans": 20, "span_width": 4.0, "length": 100.0, "gutter_height": 5.5, "pitch": 22.0, "pitch_other": 22.0,
    "gutter_width": 0.2, "gutter_depth": 0.15, "ridge_width": 0.05, "ridge_depth": 0.05,
}  # fmt: skip
WIDE = {
    **NARROW, "spans": 10, "span_width": 8.0, "length": 60.0, "gutter_height": 4.5,
    "pitch": 24.0, "pitch_other": 24.0,
}  # fmt: skip


@pytest.mark.parametrize("house", [NARROW, WIDE])
def test_whole_houses_lie_in_the_usual_range(house: dict[str, float]) -> None:
    # multi-span glass .60-.75 of diffuse PAR: common practice; here with bars and a parked screen (4 %)
    full = replace(PLAIN, **house, bar_spacing=1.0, bar_width=0.035, bar_depth=0.05)
    record = replace_weather(24)
    value = transmit(trace(full, record.zenith, record.azimuth), glass(), record).isotropic[1]
    assert 0.60 < 0.96 * value < 0.75
