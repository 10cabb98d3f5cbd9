"""One sheet: against the general library tmm, textbook examples, and laws."""

from __future__ import annotations

import numpy as np
import pytest
import tmm
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy.materials import NAMES, material
from canopy.sheet import Passage, join, slab
from canopy.thinfilm import coated_face


def plain(index: complex, um: float, degrees: float | np.ndarray, wavelength: float = 0.55) -> Passage:
    """Return one sheet at one wavelength."""
    theta = np.radians(np.atleast_1d(np.asarray(degrees, dtype=np.float64)))
    return slab(np.array([index], dtype=np.complex128), um, np.array([wavelength]), theta)


@settings(max_examples=60)
@given(
    st.floats(1.01, 4.0),
    st.floats(0.0, 2.0),
    st.floats(1.0, 1e4),
    st.floats(0.3, 50.0),
    st.floats(0.0, 89.9),
)
def test_slab_is_tmm(n: float, k: float, um: float, wavelength: float, degrees: float) -> None:
    """Incoherent sheet of tmm (Byrnes, arXiv:1603.02720), both polarisations, 1e-8."""
    ours = plain(complex(n, k), um, degrees, wavelength)
    for i, pol in enumerate("sp"):
        ref = tmm.inc_tmm(
            pol, [1, complex(n, k), 1], [np.inf, um, np.inf], ["i", "i", "i"], np.radians(degrees), wavelength
        )
        assert ours.down[i, 0, 0] == pytest.approx(ref["T"], abs=1e-8)
        assert ours.reflect_outside[i, 0, 0] == pytest.approx(ref["R"], abs=1e-8)


@pytest.mark.parametrize("name", NAMES)
def test_every_material_is_tmm(name: str) -> None:
    """The shipped constants over wavelength and angle, 1e-8."""
    w = np.array([0.35, 0.5, 0.7, 1.2, 2.2, 3.5, 6.0, 9.5, 13.8, 25.0])
    theta = np.radians([0.0, 45.0, 75.0, 88.0])
    index = material(name).index_at(w)
    ours = slab(index, 150.0, w, theta)
    for i, pol in enumerate("sp"):
        for j, wave in enumerate(w):
            for a, angle in enumerate(theta):
                ref = tmm.inc_tmm(
                    pol, [1, index[j], 1], [np.inf, 150.0, np.inf], ["i", "i", "i"], angle, wave
                )
                assert ours.down[i, j, a] == pytest.approx(ref["T"], abs=1e-8)
                assert ours.reflect_outside[i, j, a] == pytest.approx(ref["R"], abs=1e-8)


@settings(max_examples=40)
@given(
    st.floats(1.1, 2.6),
    st.floats(0.0, 1.0),
    st.floats(0.01, 0.5),
    st.floats(0.35, 12.0),
    st.floats(0.0, 88.0),
)
def test_coat_is_tmm(n: float, k: float, um: float, wavelength: float, degrees: float) -> None:
    """A coherent film on the outer and one on the inner face of a thick sheet, mixed coherence in tmm."""
    glass, theta, w = 1.52 + 1e-6j, np.radians([degrees]), np.array([wavelength])
    film = np.array([complex(n, k)])
    index = np.array([glass])
    ours = slab(
        index,
        3000.0,
        w,
        theta,
        coated_face([(film, um)], index, w, theta),
        coated_face([(film, 0.5 * um)], index, w, theta, inside=True),
    )
    for i, pol in enumerate("sp"):
        ref = tmm.inc_tmm(
            pol,
            [1, film[0], glass, film[0], 1],
            [np.inf, um, 3000.0, 0.5 * um, np.inf],
            ["i", "c", "i", "c", "i"],
            theta[0],
            wavelength,
        )
        assert ours.down[i, 0, 0] == pytest.approx(ref["T"], abs=1e-8)
        assert ours.reflect_outside[i, 0, 0] == pytest.approx(ref["R"], abs=1e-8)
    assert ours.up == pytest.approx(ours.down, abs=1e-12)


def absorbing(kd: float, um: float = 1000.0, wavelength: float = 0.55) -> float:
    """Return the extinction whose Bouguer exponent over the thickness is kd."""
    return kd * wavelength / (4.0 * np.pi * um)


def test_interface_n_1526() -> None:
    """Duffie & Beckman, example 5.1.1: face of n 1.526 at normal .04336; 60 degrees s .1855, p .00145."""
    black = plain(1.526 + 0.01j, 1e5, [0.0, 60.0, np.degrees(np.arctan(1.526))])  # nothing comes back
    assert black.reflect_outside[0, 0, 0] == pytest.approx(0.04336, abs=1e-4)
    assert black.reflect_outside[:, 0, 1] == pytest.approx([0.1855, 0.00145], abs=1e-4)
    assert black.reflect_outside[:, 0, 1].mean() == pytest.approx(0.0935, abs=1e-4)
    assert black.reflect_outside[1, 0, 2] == pytest.approx(0.0, abs=2e-5)  # Brewster, 56.76 degrees


def test_one_cover_at_60_degrees() -> None:
    """Duffie & Beckman, example 5.3.1: 2.3 mm, K = 32 per m, 60 degrees: tau .768, rho .147, alpha .085."""
    one = plain(complex(1.526, absorbing(32.0 * 0.0023)), 1000.0, 60.0)
    assert one.down.mean() == pytest.approx(0.768, abs=0.001)
    assert one.reflect_outside.mean() == pytest.approx(0.147, abs=0.001)
    assert one.absorbed_down.mean() == pytest.approx(0.085, abs=0.001)


def test_lossless_covers() -> None:
    """1 to 4 lossless covers at normal incidence: .917 .847 .786 .734 (Duffie & Beckman fig. 5.1.2)."""
    cover = plain(1.526, 1000.0, 0.0)
    stack, found = cover, [cover.down.mean()]
    for _ in range(3):
        stack = join(stack, cover)
        found.append(stack.down.mean())
    assert found == pytest.approx([0.917, 0.847, 0.786, 0.734], abs=0.001)


def test_sheet_by_angle() -> None:
    """n 1.526, K d .0185145: Fresnel and Bouguer worked out apart (real index, textbook form)."""
    angles = np.array([0.0, 30.0, 60.0, 80.0])
    ours = plain(complex(1.526, absorbing(0.0185145)), 1000.0, angles).down.mean(axis=0)[0]
    assert ours == pytest.approx([0.90000, 0.89669, 0.82285, 0.44079], abs=2e-5)


@pytest.mark.parametrize(("kd", "expected"), [(0.0, 0.8451), (0.0370, 0.8094), (0.0185145, 0.82703)])
def test_isotropic_transmittance(kd: float, expected: float) -> None:
    """Integral over angle of Fresnel and Bouguer, n 1.526 (quadrature)."""
    x, w = np.polynomial.legendre.leggauss(64)
    mu = 0.5 * (x + 1.0)
    tau = plain(complex(1.526, absorbing(kd)), 1000.0, np.degrees(np.arccos(mu))).down.mean(axis=0)[0]
    assert float(tau @ (w * mu)) == pytest.approx(expected, abs=1e-4)


def test_grazing_light_is_thrown_back() -> None:
    edge = plain(1.5 + 1e-6j, 100.0, 90.0)
    assert edge.down.max() == 0.0
    assert edge.reflect_outside.min() == 1.0


@given(st.floats(1.01, 3.0), st.floats(0.0, 3.0), st.floats(20.0, 1e4), st.floats(0.0, 90.0))
def test_nothing_negative_and_reciprocal(n: float, k: float, um: float, degrees: float) -> None:
    """Sheets of four wavelengths and more; thinner dark ones are no longer incoherent."""
    p = plain(complex(n, k), um, degrees, 5.0)
    assert p.down == pytest.approx(p.up, abs=1e-12)
    for part in (p.down, p.reflect_outside, p.absorbed_down):
        assert part.min() >= -1e-12
        assert part.max() <= 1.0 + 1e-12
