"""Leaf classes and the profile down the canopy."""

from __future__ import annotations

import numpy as np
import pytest

from canopy.bands import SOLAR
from canopy.leaflight import leaf_light, profile
from canopy.leaves import leaf
from canopy.light import Light
from canopy.rows import Rows
from canopy.stand import Stand, respond
from tests.standcase import floor

BEAM = np.array([10.0, 200.0, 30.0, 150.0, 80.0])
SHAPES = [None, Rows(0.8, 1.6, 2.0, 0.0)]


@pytest.mark.parametrize("rows", SHAPES)
@pytest.mark.parametrize("zenith", [20.0, 70.0, 95.0])
def test_layers_add_up_to_the_stand(rows: Rows | None, zenith: float) -> None:
    stand, ground = Stand(np.array([2.4]), 1.0, rows, 0.8), floor(0.5, 5)
    course = profile(stand, leaf("tomato"), ground, BEAM, 0.4 * BEAM, zenith, 40.0, layers=40)
    answer = respond(stand, leaf("tomato"), ground, np.array([zenith]), np.array([40.0]))
    total = answer.beam_crop[:, 0] * BEAM + answer.diffuse_crop[:, 0] * 0.4 * BEAM
    assert 0.8 * course.layer_absorbed.sum(1) == pytest.approx(total, rel=1e-9)
    assert 0.8 * course.sunlit_share.sum() * course.layer_lai == pytest.approx(answer.sunlit_lai[0], abs=1e-9)
    assert (course.sunlit >= course.shaded - 1e-12).all()
    assert course.depth[-1] == pytest.approx(3.0 * (1 - 0.5 / 40))


def test_profile_of_an_even_stand_needs_no_scaling() -> None:
    """Sums of the layers equal the integrals in closed form; fluxes change by what is taken."""
    stand, ground = Stand(np.array([3.0])), floor(0.2, 5)
    course = profile(stand, leaf("rose"), ground, BEAM, 0.4 * BEAM, 35.0, 0.0, layers=400)
    answer = respond(stand, leaf("rose"), ground, np.array([35.0]), np.array([0.0]))
    sunlit = (course.sunlit_share * course.sunlit).sum(1) * course.layer_lai
    expected = (answer.beam_crop_sunlit[:, 0] + 0.4 * answer.diffuse_crop_sunlit[:, 0]) * BEAM
    assert sunlit == pytest.approx(expected, rel=2e-4)
    net = course.beam + course.down - course.up
    lost = net[:, 0] - net[:, -1]
    between = course.layer_absorbed[:, 1:-1].sum(1) + 0.5 * course.layer_absorbed[:, [0, -1]].sum(1)
    assert lost == pytest.approx(between, rel=1e-3)


def test_profile_needs_leaves() -> None:
    with pytest.raises(ValueError, match="lai is 0"):
        profile(Stand(np.zeros(1)), leaf("rose"), floor(0.2, 5), BEAM, BEAM, 30.0, 0.0)


def test_leaf_classes_of_a_year() -> None:
    """LAI 3, beam 1000 and diffuse 300 µmol: photon tracing by another code; an empty dark hour is nil."""
    bands, par = len(SOLAR), SOLAR.index("par")
    zero = np.zeros((bands, 2))
    light = {name: zero.copy() for name in ("beam", "diffuse", "crop", "sunlit")}
    light["beam"][par, 0], light["diffuse"][par, 0] = 1000 / 4.6, 300 / 4.6
    light["crop"][par, 0], light["sunlit"][par, 0] = 1063.5 / 4.6, 643.7 * 1.4256 / 4.6
    record = Light(
        outside_beam=light["beam"],
        outside_diffuse=light["diffuse"],
        inside_beam=light["beam"],
        inside_diffuse=light["diffuse"],
        crop=light["crop"],
        crop_sunlit=light["sunlit"],
        ground=zero,
        crop_up=zero,
        covering=zero[None],
        screen=zero[None],
        structure=zero,
        sunlit_lai=np.array([1.4256, 0.0]),
        sunny=np.array([1.0, 0.0]),
    )
    found = leaf_light(record, np.array([3.0, 0.0]), np.full(2, 4.6))
    assert found.ppfd_sunlit == pytest.approx([643.7, 0.0])
    assert found.ppfd_shaded == pytest.approx([92.6, 0.0], rel=5e-3)
    assert found.sunlit_share == pytest.approx([1.4256 / 3, 0.0])
    assert found.par_use == pytest.approx([1063.5 / 1300, 0.0])
    assert found.ppfd_leaf == pytest.approx([1063.5 / 3, 0.0])
