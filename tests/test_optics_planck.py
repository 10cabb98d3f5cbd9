"""Blackbody radiation against CODATA, handbook tables and quadrature."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from canopy.bands import SOLAR, THERMAL, BandSet
from canopy.planck import (
    band_emission,
    band_share,
    blackbody_power,
    peak_wavelength_um,
    photons_umol,
    share_below,
)
from weather.constants import C1_W_M2, C2_UM_K, STEFAN_BOLTZMANN, WIEN_B_UM_K

# Blackbody radiation functions, series = quadrature; heat-transfer handbooks print the same to 4 digits
# (e.g. Incropera & DeWitt, table 12.1: .066728 at 2000, .250108 at 2897.8, .737818 at 6000 µm K).
HANDBOOK = {
    1000.0: 0.000321,
    1400.0: 0.007790,
    2000.0: 0.066730,
    2898.0: 0.250106,
    4000.0: 0.480865,
    6000.0: 0.737789,
    10000.0: 0.914157,
    20000.0: 0.985554,
}


@pytest.mark.parametrize(("lambda_t", "share"), HANDBOOK.items())
def test_blackbody_table(lambda_t: float, share: float) -> None:
    assert float(share_below(lambda_t)) == pytest.approx(share, abs=2e-6)


def test_constants_are_codata_2018() -> None:
    """CODATA 2018: c1 (W m2), c2 (µm K), Stefan-Boltzmann (W m-2 K-4), Wien b (µm K)."""
    assert pytest.approx(3.741771852e-16, rel=1e-9) == C1_W_M2
    assert pytest.approx(14387.76877, rel=1e-9) == C2_UM_K
    assert pytest.approx(5.670374419e-8, rel=1e-9) == STEFAN_BOLTZMANN
    assert pytest.approx(2897.771955, rel=1e-9) == WIEN_B_UM_K


@given(st.floats(150.0, 1e7))
def test_share_agrees_with_quadrature(lambda_t: float) -> None:
    """Adaptive quadrature (QUADPACK) of Planck's law in x = C2/(lambda T)."""
    x = C2_UM_K / lambda_t

    def part(a: float, b: float) -> float:
        return float(quad(lambda y: y**3 / np.expm1(y), a, b, epsabs=1e-14, epsrel=1e-13, limit=200)[0])

    short = part(x, max(x + 1.0, 12.0)) + part(max(x + 1.0, 12.0), max(x + 1.0, 12.0) + 90.0)
    assert float(share_below(lambda_t)) == pytest.approx(15.0 / np.pi**4 * short, abs=1e-10)


def test_ends_and_arrays() -> None:
    values = share_below(np.array([[0.0, np.inf], [1e-3, 1e12]]))
    assert values.shape == (2, 2)
    assert values.ravel().tolist() == pytest.approx([0.0, 1.0, 0.0, 1.0], abs=1e-12)


@given(st.floats(100.0, 7000.0), st.floats(0.05, 500.0), st.floats(1e-3, 500.0))
def test_shares_rise_and_add_up(temp: float, low: float, width: float) -> None:
    middle, high = low + 0.5 * width, low + width
    whole = float(band_share(low, high, temp))
    assert -1e-12 <= whole <= 1.0
    assert float(band_share(low, middle, temp) + band_share(middle, high, temp)) == pytest.approx(
        whole, abs=1e-12
    )


def test_sun_and_window_shares() -> None:
    """Quadrature values: .4-.7 µm at 5800 and 5772 K; 8-14 µm at 0 and 10 degC and 300 K."""
    assert band_share(0.4, 0.7, np.array([5800.0, 5772.0])) == pytest.approx([0.36766, 0.36638], abs=1e-5)
    window = band_share(8.0, 14.0, np.array([273.15, 283.15, 300.0]))
    assert window == pytest.approx([0.34985, 0.36107, 0.37574], abs=1e-5)


def test_peaks() -> None:
    """Wien's law: .4996 µm at 5800 K, 9.659 µm at 300 K; the peak is where power stops rising."""
    assert peak_wavelength_um(np.array([5800.0, 300.0])) == pytest.approx([0.49962, 9.65924], abs=1e-4)
    w = float(peak_wavelength_um(300.0))
    around = blackbody_power(np.array([0.999 * w, w, 1.001 * w]), 300.0)
    assert around[1] > around[0]
    assert around[1] > around[2]


@given(st.floats(230.0, 340.0))
def test_power_integrates_to_band_emission(temp: float) -> None:
    """Trapezoid rule over 20,000 wavelengths against the closed form."""
    bands = BandSet(("a", "b"), (4.0, 9.0, 30.0))
    for i, emitted in enumerate(band_emission(bands, temp)):
        w = np.linspace(bands.edges[i], bands.edges[i + 1], 20001)
        assert float(np.trapezoid(blackbody_power(w, temp), w)) == pytest.approx(float(emitted), rel=1e-6)


def test_bands_to_the_ends_are_all_of_it() -> None:
    temps = np.array([250.0, 283.0, 320.0])
    total = band_emission(THERMAL, temps, to_ends=True).sum(axis=0)
    assert total == pytest.approx(STEFAN_BOLTZMANN * temps**4, rel=1e-12)
    assert band_emission(SOLAR, 5772.0).shape == (5,)


def test_photons() -> None:
    """One joule at 550 nm is 4.5977 µmol (h c N_A = .11962656 J m/mol, CODATA 2018)."""
    assert float(photons_umol(0.55, 1.0)) == pytest.approx(0.55 / 0.11962656, rel=1e-7)
