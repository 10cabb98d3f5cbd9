"""What the grower sees of a house, and its figures."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from canopy.floormap import floor_map, season_light
from canopy.houseview import polar_map, sun_paths, turn_table
from canopy.lightpath import trace, transmit
from tests.housecase import PLAIN, glass, weather
from weather.record import Site

RECORD = weather()
HOUSE = replace(PLAIN, spans=10, length=100.0, pitch=24.0, pitch_other=24.0)


def test_polar_map_is_even_about_the_ridge() -> None:
    sky = polar_map(HOUSE, glass())
    assert sky.transmission.shape == (len(sky.zenith_deg), len(sky.azimuth_deg))
    np.testing.assert_allclose(sky.transmission, sky.transmission[:, ::-1], atol=1e-9)
    weight = np.sin(2.0 * np.radians(sky.zenith_deg))
    mean = float((sky.transmission.mean(axis=1) * weight).sum() / weight.sum())
    plain = transmit(trace(HOUSE, RECORD.zenith, RECORD.azimuth), glass(), RECORD)
    assert mean == pytest.approx(plain.isotropic[1], abs=2e-3)


def test_turning_the_ridge() -> None:
    table = turn_table(HOUSE, glass(), RECORD)
    assert table.ridge_azimuth_deg.tolist() == list(range(0, 180, 15))
    # known since the 1970s for multi-span glass at 50-55 N: an east-west ridge is the lighter one in winter
    assert table.winter[6] > 1.04 * table.winter[0]
    # the gathered suns stand for the hours: the present ridge against the whole year hour by hour
    plain = transmit(trace(HOUSE, RECORD.zenith, RECORD.azimuth), glass(), RECORD)
    beam = RECORD.ghi - RECORD.dhi
    arrives = beam * (plain.beam + plain.beam_scattered)[1] + RECORD.dhi * plain.sky[1]
    assert table.year[0] == pytest.approx(arrives.sum() / RECORD.ghi.sum(), abs=0.004)


@pytest.mark.parametrize("form", ["gable", "arch"])
def test_turning_on_open_ground_is_turning_among_hills_of_no_height(form: str) -> None:
    house = replace(HOUSE, form=form, rise=2.0, spans=3, ridge_azimuth=20.0, pitch_other=35.0)
    one = turn_table(house, glass(), RECORD, step_deg=60.0)
    other = turn_table(house, glass(), RECORD, step_deg=60.0, horizon=((0.0, 0.0), (180.0, 0.0)))
    np.testing.assert_allclose(one.year, other.year, atol=1e-9)
    np.testing.assert_allclose(one.winter_beam, other.winter_beam, atol=1e-9)


def test_sun_paths_reach_the_known_noon_heights() -> None:
    # 90 - |latitude - declination|, obliquity 23.44 degrees
    for latitude, heights in ((52.0, (14.56, 38.0, 61.44)), (-35.0, (78.44, 55.0, 31.56))):
        for path, height in zip(sun_paths(Site(latitude, 10.0, 0.0, "UTC")), heights, strict=True):
            assert 90.0 - path.zenith_deg.min() == pytest.approx(height, abs=0.5)


def test_floor_map_agrees_with_the_mean_over_the_plane() -> None:
    house = replace(PLAIN, spans=2, gutter_width=0.2, gutter_depth=0.2, pitch_other=35.0)
    zenith, azimuth = np.array([50.0]), np.array([60.0])
    still = transmit(trace(house, np.full(24, 50.0), np.full(24, 60.0)), glass(), _short())
    found = floor_map(house, glass(), zenith, azimuth, np.ones(1), across=160, along=60)
    assert found.transmission.mean() == pytest.approx(still.beam[1, 0], abs=4e-3)
    arch = replace(PLAIN, form="arch", rise=2.0)
    still = transmit(trace(arch, np.full(24, 50.0), np.full(24, 60.0)), glass(), _short())
    found = floor_map(arch, glass(), zenith, azimuth, np.ones(1), across=160, along=60)
    assert found.transmission.mean() == pytest.approx(still.beam[1, 0], abs=4e-3)


def _short():  # type: ignore[no-untyped-def]
    values = {k: getattr(RECORD, k) for k in RECORD.__dataclass_fields__}
    return replace(RECORD, **{k: v[:24] for k, v in values.items() if isinstance(v, np.ndarray)})


def test_gathered_light_over_the_floor_gives_the_year_hour_by_hour() -> None:
    light = season_light(RECORD, np.arange(8760))
    assert light[2].sum() == pytest.approx(1.0, abs=1e-12)
    house = replace(HOUSE, gutter_width=0.2, gutter_depth=0.2)
    found = floor_map(house, glass(mirror=False), *light, across=100, along=30)
    plain = transmit(trace(house, RECORD.zenith, RECORD.azimuth), glass(mirror=False), RECORD)
    beam = RECORD.ghi - RECORD.dhi
    arrives = beam * (plain.beam + plain.beam_scattered)[1] + RECORD.dhi * plain.sky[1]
    assert found.transmission.mean() == pytest.approx(arrives.sum() / RECORD.ghi.sum(), abs=0.01)
    # at 52 N the gable end that faces south is the bright one
    assert found.edge("low_y", 3.0)[0] > found.edge("high_y", 3.0)[0]
    # hills of height h leave cos^2 h of an even sky, and less of the low sun
    hidden = season_light(RECORD, np.arange(8760), horizon=((0.0, 30.0), (180.0, 30.0)))
    assert 0.3 < hidden[2].sum() < 0.85
