"""Light between house, screens and stand: budgets, laws, paint, parts of the sky."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pvlib
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy.house import House
from canopy.houselight import inside
from canopy.light import HouseTransmission, Light, StandResponse, SunBands
from canopy.lightpath import Paths, trace, transmit
from canopy.optics import Screen, SolarOptics, ThermalOptics
from canopy.shading import Paint, paint_factor, paint_optics
from canopy.skyparts import BAND_PLAN, sky_shares
from tests.housecase import BANDS, PLAIN, clear, glass, weather
from weather.errors import UserError
from weather.record import Weather

HOUSE = replace(PLAIN, spans=5, gutter_width=0.2, gutter_depth=0.15, bar_spacing=1.0, bar_width=0.03)
SHARES = np.array([0.05, 0.45, 0.04, 0.39, 0.07])[:, None]
RECORD = weather()
HOURS = len(RECORD)
PATHS = trace(HOUSE, RECORD.zenith, RECORD.azimuth)


def sunlight(record: Weather = RECORD) -> SunBands:
    """Sun and sky split into bands in fixed shares."""
    photons = np.full(len(record), 4.57)
    return SunBands(SHARES * record.dni, SHARES * record.dhi, photons, photons)


def stand(crop: float, ground: float) -> StandResponse:
    """A stand with fixed shares; the rest goes up."""
    one = np.ones((BANDS, HOURS))
    hours = np.ones(HOURS)
    up = 1.0 - crop - ground
    return StandResponse(
        one * crop, one * ground, one * up, one * crop, one * ground, one * up,
        hours, one * 0.5 * crop, one * 0.3 * crop, 0.2 * hours, 0.2 * hours,
    )  # fmt: skip


def fabric(through: float, scatter: float, back: float, parked: float = 0.03) -> Screen:
    """A level screen: shares of beam kept as beam, scattered, sent back."""
    angles = np.linspace(0.0, np.pi / 2, 10)
    rows = np.ones((BANDS, 10))
    kept = 1.0 - through - scatter - back
    flat = np.ones(BANDS)
    taken = np.full((1, BANDS), kept)
    solar = SolarOptics(
        angles, rows * through, rows * scatter, rows * back, 0.0 * rows, (rows * kept)[None],
        flat * (through + scatter), flat * (through + scatter), flat * back, flat * back, taken, taken,
    )  # fmt: skip
    none = np.zeros((1, 3))
    thermal = ThermalOptics(none, none, none)
    return Screen(
        "test", "test", "energy", "from memory", "test", solar, thermal, 0.1, 1.0, True, 200.0, parked
    )


def light(
    house: HouseTransmission, screens: tuple[Screen, ...] = (), drawn: np.ndarray | None = None,
    below: StandResponse | None = None, paint: Paint | None = None,
) -> Light:  # fmt: skip
    """Light of the test year."""
    drawn = np.zeros((len(screens), HOURS)) if drawn is None else drawn
    return inside(sunlight(), house, RECORD, screens, drawn, below or stand(0.7, 0.15), paint)


GLASS = transmit(PATHS, glass(0.2), RECORD)


def check_budget(found: Light) -> None:
    """The laws of a light budget."""
    arrives = found.inside_beam + found.inside_diffuse - found.crop_up
    np.testing.assert_allclose(arrives, found.crop + found.ground, atol=1e-9)
    for part in (found.inside_beam, found.inside_diffuse, found.crop, found.crop_sunlit, found.ground,
                 found.crop_up, found.covering, found.screen, found.structure):  # fmt: skip
        assert part.min(initial=0.0) >= -1e-12
    kept = found.crop + found.ground + found.covering.sum(axis=0) + found.screen.sum(axis=0) + found.structure
    assert kept.sum() <= 1.05 * (found.outside_beam + found.outside_diffuse).sum()


@settings(max_examples=15, deadline=None)
@given(
    crop=st.floats(0.0, 0.9), ground=st.floats(0.02, 0.1), through=st.floats(0.0, 0.4),
    scatter=st.floats(0.0, 0.3),
    back=st.floats(0.0, 0.3), share=st.floats(0.0, 1.0), count=st.integers(0, 3),
)  # fmt: skip
def test_the_budget_closes(
    crop: float, ground: float, through: float, scatter: float, back: float, share: float, count: int
) -> None:
    screens = tuple(fabric(through, scatter, back) for _ in range(count))
    check_budget(light(GLASS, screens, np.full((count, HOURS), share), stand(crop, ground)))


def test_a_clear_house_over_a_black_crop_passes_everything() -> None:
    bare = replace(HOUSE, gutter_width=0.0, gutter_depth=0.0, bar_spacing=0.0)
    found = light(
        transmit(trace(bare, RECORD.zenith, RECORD.azimuth), clear(), RECORD), below=stand(0.9, 0.1)
    )
    outside = found.outside_beam + found.outside_diffuse
    # the horizon band aside, which has its own directions, every watt outside arrives
    np.testing.assert_allclose(found.crop + found.ground, outside, rtol=1e-9, atol=1e-9)
    np.testing.assert_allclose(found.covering, 0.0, atol=1e-9)
    np.testing.assert_allclose(found.inside_beam, found.outside_beam, rtol=1e-9, atol=1e-9)


def test_white_crop_under_mirror_sums_a_geometric_series() -> None:
    # flat sheet over a stand that sends half up: inside = t / (1 - r / 2), r what the house sends back
    found = light(GLASS, below=stand(0.3, 0.2))
    first = light(GLASS, below=stand(0.8, 0.2))
    noon = int(np.argmax(RECORD.ghi))
    total = [(f.inside_beam + f.inside_diffuse)[1, noon] for f in (found, first)]
    assert total[0] / total[1] == pytest.approx(1.0 / (1.0 - 0.5 * GLASS.return_down[1]), rel=1e-9)


def test_two_screens_match_a_transfer_matrix() -> None:
    # diffuse light alone, two drawn screens, worked as one linear system of up and down flux
    screens = (fabric(0.0, 0.5, 0.3), fabric(0.0, 0.3, 0.6))
    below = stand(0.5, 0.2)
    found = light(GLASS, screens, np.ones((2, HOURS)), below)
    hour = int(np.argmax(RECORD.dhi))
    first = light(GLASS, below=stand(0.9, 0.1))
    beam, source = first.inside_beam[1, hour], first.inside_diffuse[1, hour]
    back, up = float(GLASS.return_down[1]), 0.3
    # unknown: down 0, 1, 2 and up 0, 1, 2
    (t1, r1), (t2, r2) = (0.5, 0.3), (0.3, 0.6)
    a = np.array([
        [1, 0, 0, -back, 0, 0], [-t1, 1, 0, 0, -r1, 0], [0, -t2, 1, 0, 0, -r2],
        [-r1, 0, 0, 1, -t1, 0], [0, -r2, 0, 0, 1, -t2], [0, 0, -up, 0, 0, 1],
    ])  # fmt: skip
    right = np.array([source, t1 * beam, 0.0, r1 * beam, 0.0, 0.0])
    assert found.inside_diffuse[1, hour] == pytest.approx(np.linalg.solve(a, right)[2], rel=1e-9)


def test_screens_shade_by_what_is_drawn_and_parked() -> None:
    screen = fabric(0.0, 0.4, 0.4, parked=0.04)
    below = stand(0.9, 0.1)
    stowed, half, drawn = (light(GLASS, (screen,), np.full((1, HOURS), s), below) for s in (0.0, 0.5, 1.0))
    without = light(GLASS, below=below)
    plain = without.inside_beam.sum()
    assert stowed.inside_beam.sum() / plain == pytest.approx(0.96, abs=1e-9)
    assert half.inside_beam.sum() / plain == pytest.approx(0.48, abs=1e-9)
    assert drawn.inside_beam.sum() == 0.0
    assert drawn.screen.sum() > half.screen.sum() > stowed.screen.sum() > 0.0


def test_wrong_screen_hours_are_refused() -> None:
    with pytest.raises(ValueError, match="drawn has shape"):
        light(GLASS, (fabric(0.0, 0.4, 0.4),), np.zeros((2, HOURS)))


def test_paint_takes_its_share_and_wears_off() -> None:
    shade = paint_factor(RECORD, [["05-01", 0.4, 100]])
    first = np.flatnonzero(RECORD.time == np.datetime64("1990-05-01T00:00:00"))[0]
    assert shade[first] == pytest.approx(0.4)
    assert shade[first + 50 * 24] == pytest.approx(0.2)
    assert shade[first + 100 * 24] == 0.0
    assert shade[first - 1] == 0.0
    # a second coat of the same kind on the first: depths add
    twice = paint_factor(RECORD, [["05-01", 0.4, 100], ["05-01", 0.4, 100]])
    assert twice[first] == pytest.approx(1.0 - 0.6**2)
    found, plain = light(GLASS, paint=paint_optics(shade)), light(GLASS)
    check_budget(found)
    hour = first + 12
    ratio = (found.crop / np.where(plain.crop > 0.0, plain.crop, 1.0))[:, hour]
    assert ratio[1] == pytest.approx(0.6, abs=0.01)
    assert ratio[4] > ratio[1] > ratio[0]
    assert found.inside_beam[1, hour] < 0.6 * plain.inside_beam[1, hour]


@pytest.mark.parametrize(
    "row",
    [["05-41", 0.4, 100], ["05-01", 0.95, 100], ["05-01", 0.4, 0], ["05-01", 0.4], ["05-01", True, 100]],
)
def test_bad_paint_is_refused(row: list[object]) -> None:
    with pytest.raises(UserError, match="house -> paint"):
        paint_factor(RECORD, [row])


def test_sky_parts_put_together_give_perez_again() -> None:
    # on a plane tilted 35 degrees south: dome (1 + cos) / 2, circumsolar a / b, horizon on the upright plane
    shares = sky_shares(RECORD)
    sun = RECORD.zenith < 80.0
    airmass = pvlib.atmosphere.get_relative_airmass(RECORD.zenith[sun])
    known = pvlib.irradiance.perez(
        35.0, 180.0, RECORD.dhi[sun], RECORD.dni[sun], RECORD.dni_extra[sun], RECORD.zenith[sun],
        RECORD.azimuth[sun], airmass,
    )  # fmt: skip
    tilt = np.radians(35.0)
    facing = np.maximum(
        pvlib.irradiance.aoi_projection(35.0, 180.0, RECORD.zenith[sun], RECORD.azimuth[sun]), 0.0
    )
    around = shares.circumsolar[sun]
    upright = shares.band[sun] / BAND_PLAN
    mine = RECORD.dhi[sun] * (
        0.5 * (1.0 - around) * (1.0 + np.cos(tilt))
        + around * facing / np.cos(np.radians(RECORD.zenith[sun]))
        + upright * np.sin(tilt)
    )
    np.testing.assert_allclose(mine, known, rtol=1e-9, atol=1e-9)


def test_sky_transmission_lies_between_its_parts() -> None:
    assert (GLASS.sky >= 0.0).all()
    day = RECORD.dhi > 1.0
    # a sky with more light around the sun passes as the beam does, an overcast one as the dome
    assert 0.5 < float(np.average(GLASS.sky[1], weights=RECORD.dhi)) < 0.95
    grey = day & (RECORD.dni == 0.0) & (RECORD.zenith < 80.0)
    assert np.abs(GLASS.sky[1, grey] - GLASS.isotropic[1]).max() < 0.06


def test_ground_outside_adds_light_through_walls() -> None:
    bright = replace(RECORD, albedo=np.full(HOURS, 0.8))
    more = transmit(PATHS, glass(), bright).sky - transmit(PATHS, glass(), RECORD).sky
    day = RECORD.dhi > 1.0
    assert (more[1, day] > 0.0).all()
    assert (more[1, RECORD.dhi == 0.0] == 0.0).all()


def test_other_walls_matter_for_a_low_sun() -> None:
    black = replace(glass(), beam_beam=0 * glass().beam_beam, beam_absorbed=1.0 - glass().beam_reflect[None])
    house = replace(PLAIN, spans=1)
    paths = trace(house, RECORD.zenith, RECORD.azimuth)
    clear_walls, black_walls = transmit(paths, glass(), RECORD), transmit(paths, glass(), RECORD, walls=black)
    low = (RECORD.zenith > 70.0) & (RECORD.zenith < 85.0)
    assert black_walls.beam[1, low].mean() < 0.8 * clear_walls.beam[1, low].mean()
    gables = transmit(paths, glass(), RECORD, gables=black)
    assert gables.beam[1].sum() < clear_walls.beam[1].sum()


def test_night_is_dark() -> None:
    found = light(GLASS)
    night = RECORD.ghi == 0.0
    for part in (found.inside_beam, found.inside_diffuse, found.crop, found.structure):
        assert (part[:, night] == 0.0).all()
    assert (found.sunny[RECORD.dni == 0.0] == 0.0).all()
    assert (GLASS.beam[:, RECORD.zenith >= 90.0] == 0.0).all()


def test_direct_sun_needs_sunshine_and_a_way_in() -> None:
    # WMO-No. 8 (2018), ch. 8: the sun shines from 120 W/m2 of direct normal light on
    record = replace(RECORD, dni=0.2 * RECORD.dni)
    faint, bright = (record.dni > 0.0) & (record.dni < 120.0), record.dni >= 120.0
    assert faint.any()
    assert bright.any()
    screens, below = (fabric(0.0, 0.0, 0.5),), stand(0.7, 0.15)
    still = inside(sunlight(record), GLASS, record, screens, np.zeros((1, HOURS)), below)
    assert (still.sunny[faint] == 0.0).all()
    np.testing.assert_array_equal(still.sunny[bright], GLASS.sunny[bright])
    dark = inside(sunlight(record), GLASS, record, screens, np.ones((1, HOURS)), below)
    assert dark.sunny.max() == 0.0


def test_parts_are_finite_in_polar_night_and_at_the_equator() -> None:
    for latitude in (70.0, 0.0, -60.0):
        record = weather(latitude)
        house: House = replace(HOUSE, form="arch", rise=2.0)
        paths: Paths = trace(house, record.zenith, record.azimuth)
        found = transmit(paths, glass(0.3), record)
        for part in (found.beam, found.beam_scattered, found.sky, found.covering_beam, found.covering_sky):
            assert np.isfinite(part).all()
            assert part.min() >= -1e-9
