"""Hedgerows and beds against photon tracing, and where they turn into an even stand."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy.leafangle import extinction
from canopy.rows import Rows, row_sight
from canopy.stand import Stand, respond
from tests.standcase import Case, floor, plain_leaf, reference, traced

HEDGE = Rows(0.8, 1.6, 2.0, 0.0)


def test_gap_of_hedgerows() -> None:
    """Width .8, spacing 1.6, height 2 m, LAI 3, spherical leaves: photon tracing by another code, 5e-4."""
    zenith, across = np.radians([30.0, 30.0, 30.0, 60.0]), np.radians([0.0, 45.0, 90.0, 90.0])
    gap = HEDGE.gap(3.0 * extinction(1.0, zenith), HEDGE.sweep(zenith, across))
    assert gap == pytest.approx([0.51565, 0.27478, 0.20257, 0.05081], abs=5e-5)
    assert 1.0 - row_sight(HEDGE, 1.0).interception(np.array([3.0])) == pytest.approx([0.20882], abs=5e-4)


def test_gap_along_the_rows_is_two_parts() -> None:
    """Sun along the rows: bare alleys let everything through, rows exp(-Kb LAI spacing / width). Exact."""
    for zenith in np.radians([0.0, 40.0, 80.0]):
        thick = 3.0 * extinction(1.0, zenith)
        gap = HEDGE.gap(thick[None], HEDGE.sweep(np.array([zenith]), np.array([0.0])))
        assert gap == pytest.approx([0.5 + 0.5 * np.exp(-2.0 * thick)], abs=2e-5)


def _errors(cases: list[Case], keep: list[bool]) -> np.ndarray:
    chosen = [case for case, yes in zip(cases, keep, strict=True) if yes]
    truth = np.array([[case[key] for key in ("crop", "ground", "up", "sunlit")] for case in chosen])
    return np.array([traced(case, rows=True) for case in chosen]) - truth


def test_hedgerows_against_photon_tracing() -> None:
    """Rows of .8-1 m, 2-2.5 m high, LAI 1-5, chi .5-2, all suns and floors, PAR and NIR: crop within .01.

    5e5 photons a case, standard deviation up to .0007.
    """
    cases, _ = reference("stand_rows.csv")
    error = _errors(cases, [case["height"] >= 2.0 for case in cases])
    assert len(error) == 288
    assert np.abs(error[:, 0]).max() < 0.0105
    assert np.sqrt((error**2).mean(0))[:3].max() < 0.009
    assert np.abs(error[:, 1:3]).max() < 0.04  # floor and up: NIR over dark floor, LAI 5, is the worst
    par = _errors(cases, [case["height"] >= 2.0 and case["reflect"] < 0.1 for case in cases])
    assert np.abs(par[:, :3]).max() < 0.008


def test_low_beds_against_photon_tracing() -> None:
    """Beds .25-.5 m high: PAR within .02; NIR .022 up to LAI 1, .036 at 3, .068 at 5 (10-15 in the bed)."""
    cases, _ = reference("stand_rows.csv")
    low = [case["height"] < 1.0 for case in cases]
    for lai, limit in ((1.0, 0.022), (3.0, 0.036), (5.0, 0.068)):
        error = _errors(cases, [yes and case["lai"] == lai for yes, case in zip(low, cases, strict=True)])
        assert np.abs(error[:, :3]).max() < limit
    par = _errors(cases, [yes and case["reflect"] < 0.1 for yes, case in zip(low, cases, strict=True)])
    assert np.abs(par[:, :3]).max() < 0.02


def test_a_day_over_hedgerows() -> None:
    """Eight suns from 20 to 75 degrees, along to across, weighted by cos zenith: a day's crop within .005."""
    cases, _ = reference("stand_rows.csv")
    days: dict[tuple[float, ...], list[tuple[float, float]]] = {}
    for case in cases:
        if case["height"] >= 2.0 and not case["diffuse"]:
            key = tuple(case[k] for k in ("width", "lai", "chi", "reflect", "floor"))
            error = traced(case, rows=True)[0] - case["crop"]
            days.setdefault(key, []).append((np.cos(np.radians(case["zenith"])), error))
    assert len(days) == 32
    for key, hours in days.items():
        weight, error = np.array(hours).T
        assert len(hours) == 8
        assert weight @ error / weight.sum() == pytest.approx(0.0, abs=0.005), key


def test_rows_that_touch_are_an_even_stand() -> None:
    sun = np.array([10.0, 50.0, 80.0])
    touching = Stand(np.full(3, 2.0), 1.0, Rows(1.6, 1.6, 2.0, 30.0))
    args = plain_leaf(0.44, 0.44), floor(0.5), sun, np.array([20.0, 100.0, 200.0])
    rows, even = respond(touching, *args), respond(Stand(np.full(3, 2.0)), *args)
    for name in (
        "beam_crop",
        "beam_ground",
        "beam_up",
        "diffuse_crop",
        "diffuse_up",
        "sunlit_lai",
        "beam_gap",
    ):
        assert getattr(rows, name) == pytest.approx(getattr(even, name), abs=1.5e-3), name
    assert rows.beam_crop_sunlit == pytest.approx(even.beam_crop_sunlit, abs=5e-3)


@settings(max_examples=15, deadline=None)
@given(
    width=st.floats(0.1, 2.0),
    alley=st.floats(0.0, 3.0),
    height=st.floats(0.05, 4.0),
    lai=st.floats(0.0, 8.0),
    zenith=st.floats(0.0, 120.0),
    azimuth=st.floats(0.0, 360.0),
    ground=st.floats(0.0, 0.9),
    leaf=st.floats(0.0, 0.48),
)
def test_rows_lose_nothing(
    width: float,
    alley: float,
    height: float,
    lai: float,
    zenith: float,
    azimuth: float,
    ground: float,
    leaf: float,
) -> None:
    stand = Stand(np.array([lai]), 1.0, Rows(width, width + alley, height, 15.0))
    answer = respond(stand, plain_leaf(leaf, leaf), floor(ground), np.array([zenith]), np.array([azimuth]))
    for kind in ("beam", "diffuse"):
        parts = [getattr(answer, f"{kind}_{name}")[0, 0] for name in ("crop", "ground", "up")]
        assert sum(parts) == pytest.approx(1.0, abs=1e-12)
        assert min(parts) > -1e-4
        assert -1e-9 <= getattr(answer, f"{kind}_crop_sunlit")[0, 0] <= parts[0] + 1e-9
    assert 0.0 <= answer.sunlit_lai[0] <= lai + 1e-9
    assert answer.diffuse_gap[0] >= 0.0


@settings(max_examples=40, deadline=None)
@given(zenith=st.floats(0, 89), azimuth=st.floats(0, 360), lai=st.floats(0.1, 8))
def test_rows_let_more_through_than_even_leaves_and_know_no_left_or_right(
    zenith: float, azimuth: float, lai: float
) -> None:
    """Convexity of the exponential (Jensen): alleys only add gaps. Mirror images of the sun are alike."""
    leaf, ground = plain_leaf(0.0, 0.0), floor(0.0)
    sun = np.full(3, zenith)
    turned = np.array([azimuth, -azimuth, 180.0 + azimuth])
    rows = respond(Stand(np.full(3, lai), 1.0, HEDGE), leaf, ground, sun, turned).beam_gap
    even = respond(Stand(np.full(3, lai)), leaf, ground, sun, turned).beam_gap
    assert (rows >= even - 1e-6).all()
    assert rows == pytest.approx(rows[0], abs=1e-9)
