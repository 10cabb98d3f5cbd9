"""Screens and grounds: conservation, geometry of holes, plausible ranges, sources."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from canopy import library
from canopy.fabric import hole_view
from canopy.library_rows import table
from weather.errors import UserError


def test_there_are_enough_and_no_name_is_used_twice() -> None:
    assert len(library.screen_names()) >= 8
    assert len(library.ground_names()) >= 6
    assert len(library.leaf_names()) >= 5
    every = library.covering_names() + library.screen_names() + library.ground_names() + library.leaf_names()
    assert len(set(every)) == len(every)


@pytest.mark.parametrize("name", library.screen_names())
def test_screen_conserves(name: str) -> None:
    screen = library.screen(name)
    light = screen.solar
    total = light.beam_beam + light.beam_diffuse + light.beam_reflect + light.beam_absorbed.sum(axis=0)
    np.testing.assert_allclose(total, 1.0, rtol=0, atol=1e-12)
    down = light.diffuse_in + light.reflect_outside + light.absorbed_from_outside.sum(axis=0)
    up = light.diffuse_out + light.reflect_inside + light.absorbed_from_inside.sum(axis=0)
    np.testing.assert_allclose(np.concatenate([down, up]), 1.0, rtol=0, atol=1e-12)
    np.testing.assert_allclose(light.diffuse_out, light.diffuse_in, rtol=0, atol=1e-12)
    for part in (light.beam_beam, light.beam_diffuse, light.beam_reflect, light.beam_absorbed):
        assert part.min() >= -1e-12
    assert (light.beam_specular <= light.beam_reflect + 1e-12).all()
    heat = screen.thermal
    for face in (heat.reflect_outside, heat.reflect_inside):
        emissivity = 1.0 - heat.transmit - face
        assert (emissivity >= 0.0).all()
        assert (emissivity <= 1.0).all()


@pytest.mark.parametrize("name", library.screen_names())
def test_isotropic_values_are_the_integral_of_the_angles(name: str) -> None:
    # 2 * integral of f(theta) sin cos over the tabled 2 degree steps; trapezoid error below .002
    light = library.screen(name).solar
    weight = 2.0 * np.sin(light.angles) * np.cos(light.angles)
    through = np.trapezoid((light.beam_beam + light.beam_diffuse) * weight, light.angles, axis=1)
    np.testing.assert_allclose(through, light.diffuse_in, rtol=0, atol=2e-3)


@given(st.floats(0.01, 1.0), st.floats(0.0, 80.0))
def test_holes_close_with_angle(depth: float, degrees: float) -> None:
    theta = np.deg2rad(np.array([0.0, degrees, degrees + 5.0]))
    seen = hole_view(theta, depth)
    assert seen[0] == pytest.approx(1.0, abs=1e-12)
    assert seen[0] >= seen[1] >= seen[2] >= 0.0


def test_hole_view_by_hand() -> None:
    # depth tan(theta) = .2 < 1: mean over azimuth of 1 - .2 |cos phi| = 1 - .2 * 2/pi
    theta = np.arctan(np.array([2.0]))
    assert hole_view(theta, 0.1)[0] == pytest.approx(1.0 - 0.2 * 2.0 / np.pi, abs=1e-4)


def test_open_weave_passes_what_it_leaves_open() -> None:
    screen = library.screen("screen-aluminised-open-50")
    assert screen.solar.beam_beam[1, 0] == pytest.approx(0.5, abs=1e-9)
    assert screen.solar.beam_diffuse[1, 0] == pytest.approx(0.0, abs=1e-9)


def test_published_order_of_screens() -> None:
    """Saving of screens follows their long-wave reflectance (Biosyst. Eng. 2009, 2011)."""

    def loss(name: str) -> float:
        # night loss by radiation upwards per unit from below: what the fabric passes or absorbs
        return float(1.0 - library.screen(name).thermal.reflect_inside[0, 1])

    order = [
        "screen-aluminised-closed-100",
        "screen-aluminised-closed-75",
        "screen-aluminised-closed-50",
        "screen-transparent",
        "screen-blackout-black",
    ]
    values = [loss(name) for name in order]
    assert values[0] < values[1] < values[2] < values[3]
    assert values[3] == pytest.approx(values[4], abs=0.08)
    assert library.screen("screen-blackout-white").solar.diffuse_in[1] < 0.001  # sold as 99.9 % dark
    # sold transparent energy screens: direct .80-.88, diffuse .72-.81 PAR (common practice)
    clear = library.screen("screen-transparent").solar
    assert 0.80 <= clear.beam_beam[1, 0] + clear.beam_diffuse[1, 0] <= 0.88
    assert 0.72 <= clear.diffuse_in[1] <= 0.81


@pytest.mark.parametrize("name", library.ground_names())
def test_ground_is_plausible(name: str) -> None:
    ground = library.ground(name)
    assert ((ground.reflect > 0.0) & (ground.reflect < 0.85)).all()
    assert ((ground.emissivity > 0.8) & (ground.emissivity < 1.0)).all()
    assert 0.2 < ground.conductivity < 2.5
    assert 1e6 < ground.volumetric_heat < 4e6
    assert 0.0 <= ground.wetness <= 1.0


def test_soil_reflectance_rebuilt_from_the_open_spectra() -> None:
    """Dry and wet soil of Jacquemoud et al. 1992 in the open package prosail, ASTM G173 weights (pvlib)."""
    import pvlib
    from prosail import spectral_library

    soil = spectral_library.get_spectra().soil
    sun = pvlib.spectrum.get_reference_spectra()["global"]
    wave = np.arange(400, 2501)
    weight = np.interp(wave, sun.index.to_numpy(), sun.to_numpy())

    def band(values: object, low: float, high: float) -> float:
        inside = (wave >= low) & (wave <= high)
        return float(np.average(np.asarray(values)[inside], weights=weight[inside]))

    edges = [(400, 700), (700, 750), (750, 1350), (1350, 2500)]
    dry = np.array([band(soil.rsoil1, *e) for e in edges])
    wet = np.array([band(soil.rsoil2, *e) for e in edges])
    np.testing.assert_allclose(library.ground("soil-dry").reflect[1:], dry, atol=1e-3)
    np.testing.assert_allclose(library.ground("soil-moist").reflect[1:], wet + 0.25 * (dry - wet), atol=1e-3)


def test_every_row_has_source_and_range() -> None:
    for name in library.screen_names() + library.ground_names():
        row = library.row(name)
        assert len(row.source) > 15
        assert len(row.range_source) > 15
        assert row.provenance in ("computed", "published", "common practice", "from memory")
        for key, figure in row.figures.items():
            assert figure.low <= figure.value <= figure.high, (name, key)
        assert any(figure.low < figure.high for figure in row.figures.values())
    for name in library.screen_names():
        for strip in table("screen", name)["strips"]:
            assert len(table("strip", strip)["source"]) > 15
        assert sum(table("screen", name)["strips"].values()) == pytest.approx(1.0)


def test_unknown_names_say_the_nearest() -> None:
    with pytest.raises(UserError, match=r'screen "screen-transparant".*did you mean "screen-transparent"'):
        library.screen("screen-transparant")
    with pytest.raises(UserError, match=r'ground "conkrete".*did you mean "concrete"'):
        library.ground("conkrete")
    with pytest.raises(UserError, match=r'covering "glass-clear-5".*did you mean "glass-clear'):
        library.covering("glass-clear-5")
