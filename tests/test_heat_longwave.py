"""Banded long-wave: shares, emission, exchange areas, the two-part sky."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from canopy.bands import THERMAL, BandSet
from canopy.longwave import Plane, band_emission, exchange_areas, opaque, share_between, widening
from canopy.skybands import sky_bands, window_and_rest

SIGMA = 5.670374e-8  # CODATA 2018
TWELVE = BandSet(tuple(f"b{k}" for k in range(12)), (3, 5, 6, 7, 8, 9, 10, 11, 12.5, 14, 17, 25, 100))


@pytest.mark.parametrize(("kelvin", "share"), [(273.15, 0.34985), (283.15, 0.36107), (300.0, 0.37574)])
def test_window_share_of_a_blackbody(kelvin: float, share: float) -> None:
    # 8-14 µm share, computed with quadrature of Planck's law (blackbody tables agree to 4 digits)
    assert share_between(8.0, 14.0, np.array([kelvin]))[0] == pytest.approx(share, abs=1e-5)


@pytest.mark.parametrize("bands", [THERMAL, TWELVE])
def test_emission_is_planck_and_sums_to_stefan_boltzmann(bands: BandSet) -> None:
    temp = np.linspace(-45.0, 95.0, 141)
    value, slope = band_emission(temp, bands)
    assert value.sum(axis=0) == pytest.approx(SIGMA * (temp + 273.15) ** 4, rel=1e-6)
    edges = [0.0, *bands.edges[1:-1], np.inf]
    for k in range(len(bands)):
        exact = share_between(edges[k], edges[k + 1], temp + 273.15) * SIGMA * (temp + 273.15) ** 4
        assert value[k] == pytest.approx(exact, abs=0.02)
    step = 1e-4
    numeric = (band_emission(temp + step, bands)[0] - band_emission(temp - step, bands)[0]) / (2 * step)
    assert slope == pytest.approx(numeric, abs=1e-5)


@pytest.mark.parametrize(
    ("warm", "cold", "e_warm", "e_cold", "flux"),
    # grey parallel plates, sigma (T1^4 - T2^4) / (1/e1 + 1/e2 - 1): heat-transfer textbooks
    [(20.0, 0.0, 0.9, 0.9, 84.36), (20.0, 0.0, 0.95, 0.84, 82.94), (18.0, 0.0, 0.95, 0.05, 4.58)],
)
def test_parallel_plates(warm: float, cold: float, e_warm: float, e_cold: float, flux: float) -> None:
    back = np.full((3, 1), 1.0 - e_cold)
    plate = Plane(0 * back, 0 * back, back, back)
    areas = exchange_areas([opaque(np.full((3, 1), e_warm)), widening(1.0), plate])
    emission, _ = band_emission(np.array([warm, cold]))
    net = np.sum(areas.pair[0, 1, :, 0] * (emission[:, 0] - emission[:, 1]))
    assert net == pytest.approx(flux, abs=0.05)


def test_film_between_floor_and_cold_sky_by_hand() -> None:
    # One band at a time the floor, a film and a black sky are three resistances in a row; the sum over bands
    # differs from what one mean transmittance says. Worked out here from first principles.
    t, r = np.array([[0.6], [0.0], [0.6]]), np.full((3, 1), 0.1)
    areas = exchange_areas([opaque(np.ones((3, 1))), widening(1.0), Plane(t, t, r, r)])
    a = 1.0 - t - r
    assert areas.pair[0, 1] == pytest.approx(a)  # black floor: what the film takes of the floor's emission
    assert areas.outside[0] == pytest.approx(t)  # and what passes
    assert areas.outside[1] == pytest.approx(a)


fractions = arrays(float, (3, 1), elements=st.floats(0.0, 1.0))


@settings(max_examples=60, deadline=None, derandomize=True)
@given(st.lists(st.tuples(fractions, fractions, fractions), min_size=1, max_size=5), st.floats(1.0, 2.5))
def test_exchange_is_reciprocal_and_loses_nothing(
    layers: list[tuple[np.ndarray, np.ndarray, np.ndarray]], size: float
) -> None:
    planes = [opaque(np.full((3, 1), 0.93))]
    for k, (t, low, high) in enumerate(layers):
        if k == len(layers) - 1:
            planes.append(widening(size))
        shrink = 0.98 / np.maximum(t + np.maximum(low, high), 1.0)
        last = size if k == len(layers) - 1 else 1.0
        planes.append(Plane(t * shrink, t * shrink, low * shrink, high * shrink, last))
    areas = exchange_areas(planes)
    assert areas.pair == pytest.approx(np.swapaxes(areas.pair, 0, 1), abs=1e-12)
    solid = [p for p in planes if p.surface]
    for i, p in enumerate(solid):
        below = 1 - p.pass_down - p.reflect_below if i else np.zeros((3, 1))
        emitted = p.size * (1 - p.pass_up - p.reflect_above + below)
        everywhere = areas.pair[i].sum(axis=0) + areas.cover_size * areas.outside[i]
        # each face emits what is absorbed somewhere, itself included, or leaves
        assert everywhere == pytest.approx(emitted, abs=1e-10)


def test_sky_bands_keep_the_total_and_the_window_is_the_cold_part() -> None:
    temp, vapour = np.array([10.0, -10.0, 25.0]), np.array([900.0, 150.0, 2000.0])
    down = np.array([290.0, 190.0, 420.0])
    bands = sky_bands(down, temp, vapour)
    assert bands.sum(axis=0) == pytest.approx(down, rel=1e-14)
    window, rest, _ = window_and_rest(down, temp, vapour)
    assert (window < rest).all()
    assert (rest < 1.01).all()


@settings(max_examples=60, deadline=None, derandomize=True)
@given(st.floats(100.0, 500.0), st.floats(-40.0, 40.0), st.floats(10.0, 4000.0))
def test_sky_bands_are_never_negative(down: float, temp: float, vapour: float) -> None:
    for bands in (THERMAL, TWELVE):
        sky = sky_bands(np.array([down]), np.array([temp]), np.array([vapour]), bands)
        assert (sky >= 0.0).all()
        assert sky.sum() == pytest.approx(down, rel=1e-12)
