"""Gaps and U-values against EN 673, EN ISO 10077-1 and Hollands et al."""

from __future__ import annotations

from typing import Literal

import ht
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy.coats import coat
from canopy.glazing_u import (
    covering_u_value,
    exchange_matrix,
    gap_convection,
    gap_convection_slope,
    gas_conductivity,
    u_value,
)
from canopy.layers import build_solar, build_thermal
from canopy.optics import Covering, Gap, ThermalOptics
from canopy.sheets import MaterialSheet

GLASS = MaterialSheet("soda-lime-clear", 0.004)
R_GLASS = 0.004  # m2 K/W: 4 mm at 1 W m-1 K-1, EN 673 5.4


def panes(emissivity: float, count: int = 2) -> ThermalOptics:
    """Return opaque panes of emissivity .837; the second pane's outer face has a coat of this emissivity."""
    shape = (count, 3)
    outer = np.full(shape, 1.0 - 0.837)
    if count > 1:
        outer[1] = 1.0 - emissivity
    return ThermalOptics(np.zeros(shape), outer, np.full(shape, 1.0 - 0.837))


def test_single_glass() -> None:
    """EN 673: 1/(1/25 + .004/1 + 1/7.7) = 5.75 for bare 4 mm glass, also from the optical constants: .03."""
    assert u_value(panes(0.837, 1), [R_GLASS], []) == pytest.approx(5.752, abs=1e-3)
    assert u_value(build_thermal([GLASS]), [R_GLASS], []) == pytest.approx(5.75, abs=0.03)


def test_double_glass_4_12_4() -> None:
    """EN 673: 2.85 with air, grey and from the constants: .03."""
    gap = [Gap(0.012)]
    assert u_value(panes(0.837), [R_GLASS] * 2, gap) == pytest.approx(2.85, abs=0.03)
    assert u_value(build_thermal([GLASS, GLASS]), [R_GLASS] * 2, gap) == pytest.approx(2.85, abs=0.03)


# EN ISO 10077-1, table of double glazing by EN 673, 4 mm panes; printed to one decimal (from memory)
ISO_10077 = [
    (0.837, "air", (3.3, 3.1, 2.8, 2.7, 2.7)),
    (0.837, "argon", (3.0, 2.9, 2.7, 2.6, 2.6)),
    (0.2, "air", (2.7, 2.4, 2.0, 1.8, 1.8)),
    (0.2, "argon", (2.3, 2.0, 1.7, 1.6, 1.6)),
    (0.1, "air", (2.6, 2.2, 1.8, 1.5, 1.6)),
    (0.1, "argon", (2.1, 1.8, 1.4, 1.3, 1.3)),
    (0.05, "air", (2.5, 2.1, 1.7, 1.4, 1.4)),
    (0.05, "argon", (2.0, 1.7, 1.3, 1.1, 1.2)),
]


@pytest.mark.parametrize(("emissivity", "gas", "values"), ISO_10077)
def test_double_glazing_table(
    emissivity: float, gas: Literal["air", "argon"], values: tuple[float, ...]
) -> None:
    """Gaps of 6, 8, 12, 16, 20 mm; half a printed digit and .03 (printed values are for 4-6-4 ... 4-20-4)."""
    for mm, printed in zip((6, 8, 12, 16, 20), values, strict=True):
        ours = u_value(panes(emissivity), [R_GLASS] * 2, [Gap(mm / 1000.0, gas)])
        assert ours == pytest.approx(printed, abs=0.08)


def test_triple_glass() -> None:
    """EN ISO 10077-1: 4-12-4-12-4 air 1.9, 4-6-4-6-4 air 2.3 (one decimal, from memory)."""
    for mm, printed in ((6, 2.3), (12, 1.9)):
        ours = u_value(panes(0.837, 3), [R_GLASS] * 3, [Gap(mm / 1000.0)] * 2)
        assert ours == pytest.approx(printed, abs=0.08)


def test_low_emissivity_double() -> None:
    """4-16-4 argon with a hard coat of about .16: 1.5-1.6 by EN 673 practice."""
    inner = MaterialSheet("soda-lime-clear", 0.004, outer=coat("low-e"))
    ours = u_value(build_thermal([GLASS, inner]), [R_GLASS] * 2, [Gap(0.016, "argon")])
    assert 1.4 < ours < 1.6


def test_layers_that_pass_long_wave() -> None:
    """ASABE EP406 and handbooks (from memory): single PE 6.2-7.2, double 4.0-4.7; a wet film loses less."""
    film = MaterialSheet("polyethylene", 0.00018)
    single = u_value(build_thermal([film]), [5e-4], [])
    double = u_value(build_thermal([film, film]), [5e-4] * 2, [Gap(0.08)], slope_deg=30.0)
    wet = u_value(build_thermal([film], wetness="film"), [5e-4], [])
    assert 6.2 < single < 7.2
    assert 4.0 < double < 4.7
    assert wet < single
    glass = u_value(build_thermal([GLASS]), [R_GLASS], [])
    assert single > glass


def test_nothing_in_the_way() -> None:
    """A film that is not there, seen by both blacks: convection in series, radiation straight through."""
    open_air = ThermalOptics(np.ones((1, 3)), np.zeros((1, 3)), np.zeros((1, 3)))
    radiation = 4.0 * 5.670374e-8 * 283.0**3
    outside, inside = 25.0 - 0.837 * radiation, 7.7 - 0.837 * radiation
    expected = radiation + outside * inside / (outside + inside)
    assert u_value(open_air, [0.0], []) == pytest.approx(expected, rel=1e-6)


def test_webs_add_to_the_gap() -> None:
    """Twin-wall polycarbonate 8-10 mm: 3.0-3.7 (EN 16153 sheets and ASABE EP406, from memory)."""
    wall = MaterialSheet("polycarbonate", 0.00045)
    thermal = build_thermal([wall, wall])
    plain = u_value(thermal, [0.00225] * 2, [Gap(0.0071)])
    webbed = u_value(thermal, [0.00225] * 2, [Gap(0.0071, "air", 1.07)])
    assert plain < webbed
    assert 3.0 < webbed < 3.7


# ---------------------------------------------------------------- gaps


def test_still_gas() -> None:
    """EN 673 table 1: air .02496, argon .01684 W/(m K) at 10 degC; a thin gap only conducts."""
    assert gas_conductivity(283.15) == pytest.approx(0.02496)
    assert gas_conductivity(283.15, "argon") == pytest.approx(0.01684)
    assert gap_convection(10.0, 283.15, 0.004, 90.0) == pytest.approx(0.02496 / 0.004)


def test_upright_gap_en_673() -> None:
    """EN 673 5.3: Nu = .035 (9.81 s^3 dT rho^2 c / (T mu lambda))^.38, by hand: 20 mm air, 15 K, 283 K."""
    ra = 9.80665 * 0.02**3 * 15.0 * 1.232**2 * 1008.0 / (283.0 * 1.761e-5 * 0.02496)
    expected = 0.035 * ra**0.38 * 0.02496 / 0.02
    assert gap_convection(15.0, 283.0, 0.02, 90.0, method="en673") == pytest.approx(expected, rel=2e-3)


@pytest.mark.parametrize("delta", [0.5, 2.0, 8.0, 20.0])
def test_level_gap_against_general_library(delta: float) -> None:
    """Library ht, level layer heated from below after Hollands (1984): the 1976 form within 6 %."""
    k, thick = 0.02496, 0.05
    ra = 9.80665 * delta * thick**3 * 1.232**2 * 1008.0 / (283.15 * 1.761e-5 * k)
    pr = 1.761e-5 * 1008.0 / k
    nu = ht.Nu_Nusselt_Rayleigh_Hollands(Pr=pr, Gr=ra / pr, buoyancy=True)
    assert float(gap_convection(delta, 283.15, thick, 0.0)) * thick / k == pytest.approx(nu, rel=0.06)


def test_inclined_gap_by_hand() -> None:
    """Hollands et al. (1976) by hand: 25 mm, 45 degrees, 70 to 50 degC, air at 333 K with handbook k .0288,
    nu 1.89e-5, alpha 2.69e-5: Ra cos 12,800, Nu = 1 + 1.44 x .867 x .869 + .300 = 2.385."""
    assert float(gap_convection(20.0, 333.0, 0.025, 45.0)) == pytest.approx(2.385 * 0.0288 / 0.025, rel=0.02)


@settings(max_examples=80)
@given(
    st.floats(-25.0, 25.0),
    st.floats(255.0, 320.0),
    st.floats(0.004, 0.2),
    st.floats(0.0, 90.0),
    st.sampled_from(["hollands", "en673"]),
)
def test_gap_laws(
    delta: float, mean: float, thick: float, slope: float, method: Literal["hollands", "en673"]
) -> None:
    """Never below still gas; heat upwards never slower than downwards; derivative as by differences."""
    h, by_delta = gap_convection_slope(delta, mean, thick, slope, method=method)
    assert h >= gas_conductivity(mean) / thick * (1.0 - 1e-12)
    if slope <= 60.0:
        down, up = (gap_convection(s * abs(delta), mean, thick, slope, method=method) for s in (-1.0, 1.0))
        assert up >= down * 0.9
    step = 1e-5
    values = gap_convection(
        delta + step * np.array([-2.0, -1.0, 1.0, 2.0]), mean, thick, slope, method=method
    )
    slopes = np.diff(values) / (step * np.array([1.0, 2.0, 1.0]))
    if np.ptp(slopes) < 1e-6:  # away from a kink
        assert float(by_delta) == pytest.approx(float(slopes[1]), abs=1e-5)


def test_gap_takes_arrays() -> None:
    h = gap_convection(np.linspace(-5, 5, 7)[:, None], np.array([270.0, 290.0]), 0.08, 25.0)
    assert h.shape == (7, 2)


@settings(max_examples=50)
@given(
    st.lists(st.tuples(st.floats(0, 1), st.floats(0, 1), st.floats(0, 1)), min_size=1, max_size=4),
)
def test_exchange_is_symmetric_and_whole(rows: list[tuple[float, float, float]]) -> None:
    """Exchange factors are symmetric; each row adds up to the face's emissivity: isothermal is zero."""
    t = np.array([0.98 * a for a, _, _ in rows])
    r_out, r_in = ((1.0 - t) * np.array([row[i] for row in rows]) * 0.99 for i in (1, 2))
    g = exchange_matrix(t, r_out, r_in)
    assert g == pytest.approx(g.T, abs=1e-12)
    sums = np.ones(2 * len(rows) + 2)
    sums[1:-1:2], sums[2:-1:2] = 1.0 - t - r_out, 1.0 - t - r_in
    assert g.sum(axis=1) == pytest.approx(sums, abs=1e-12)


def test_covering_record() -> None:
    solar = build_solar([GLASS])
    dry, wet = build_thermal([GLASS]), build_thermal([GLASS], wetness="film")
    record = Covering(
        "g",
        "g",
        "glass",
        "computed",
        "constants",
        0.0,
        solar,
        solar,
        dry,
        wet,
        (8000.0,),
        (R_GLASS,),
        (),
        ("g",),
    )
    assert covering_u_value(record) == pytest.approx(5.75, abs=0.03)
    assert covering_u_value(record, wet=True) > covering_u_value(record)
