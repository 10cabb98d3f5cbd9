"""Quoted figures: met to .001 where they fit together, contradictions said, laws kept."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy import library
from canopy.choose import choose_covering
from canopy.coveringfigures import figures
from canopy.optics import Covering
from canopy.quoted import MATCH, Quote, fit_quoted
from canopy.studyfile import Study
from canopy.studykeys import CoveringKeys
from tests.reportcase import fakes, make_study
from weather.errors import UserError


def _laws(covering: Covering) -> None:
    for light in (covering.solar_dry, covering.solar_wet):
        total = light.beam_beam + light.beam_diffuse + light.beam_reflect + light.beam_absorbed.sum(axis=0)
        down = light.diffuse_in + light.reflect_outside + light.absorbed_from_outside.sum(axis=0)
        up = light.diffuse_out + light.reflect_inside + light.absorbed_from_inside.sum(axis=0)
        for values in (total, down, up):
            np.testing.assert_allclose(values, 1.0, rtol=0, atol=1e-12)
        for part in (light.beam_beam, light.beam_diffuse, light.beam_reflect, light.beam_absorbed):
            assert part.min() >= -1e-12
        np.testing.assert_allclose(light.diffuse_out, light.diffuse_in, rtol=0, atol=1e-12)
    for heat in (covering.thermal_dry, covering.thermal_wet):
        assert ((1.0 - heat.transmit - heat.reflect_outside) >= -1e-12).all()
        assert ((1.0 - heat.transmit - heat.reflect_inside) >= -1e-12).all()


CONSISTENT = [
    Quote("a", "film-pe-plain", 0.90, 0.81, 0.30, 0.45),
    Quote("b", "film-double-infrared", None, 0.70, 0.50, 0.10, 3.2),
    Quote("c", "polycarbonate-twin-10", 0.80, 0.68, None, None, 3.0),
    Quote("d", "glass-clear-4", 0.91, 0.84),
    Quote("e", "glass-diffuse-low-haze", None, 0.85, 0.55),
    Quote("f", "film-pe-infrared", 0.87, None, 0.20, 0.30),
    Quote("g", "glass-double-4-16-4", None, None, None, None, 1.6),
    Quote("h", "polycarbonate-corrugated", None, None, 0.4, None, 5.6),
]


@pytest.mark.parametrize("quote", CONSISTENT, ids=lambda q: q.based_on)
def test_consistent_quotations_are_met(quote: Quote) -> None:
    fitted = fit_quoted(quote)
    got = figures(fitted.covering)
    assert fitted.contradictions == ()
    for key in ("par_normal", "par_hemispherical", "haze", "thermal_transmittance"):
        want = getattr(quote, key)
        if want is not None:
            assert getattr(got, key) == pytest.approx(want, abs=MATCH)
    if quote.u_value is not None:
        assert got.u_value_w_m2_cover_k == pytest.approx(quote.u_value, abs=MATCH)
    assert fitted.covering.name == quote.name
    assert "quotation" in fitted.covering.source
    assert "What is not quoted can move" in fitted.sensitivity
    _laws(fitted.covering)


def test_quoting_the_library_changes_nothing() -> None:
    base = library.covering("film-double-infrared")
    f = figures(base)
    fitted = fit_quoted(
        Quote(
            "same",
            "film-double-infrared",
            f.par_normal,
            f.par_hemispherical,
            f.haze,
            f.thermal_transmittance,
            f.u_value_w_m2_cover_k,
        )
    )
    assert fitted.contradictions == ()
    new = fitted.covering
    np.testing.assert_allclose(new.solar_dry.beam_beam, base.solar_dry.beam_beam, atol=1e-6)
    np.testing.assert_allclose(new.solar_wet.beam_beam, base.solar_wet.beam_beam, atol=1e-6)
    np.testing.assert_allclose(new.thermal_dry.transmit, base.thermal_dry.transmit, atol=1e-5)


def test_contradictions_are_said() -> None:
    fitted = fit_quoted(Quote("x", "glass-clear-4", 0.80, 0.84, None, 0.3, 3.0))
    text = " ".join(fitted.contradictions)
    assert "par_hemispherical 0.84 exceeds par_normal 0.8" in text
    assert "lets no long-wave through" in text
    assert "u_value 3 cannot be had" in text
    assert figures(fitted.covering).thermal_transmittance < 0.005  # glass stays opaque
    _laws(fitted.covering)
    odd = fit_quoted(Quote("y", "glass-clear-4", 0.91, 0.75))
    assert "different samples" in odd.contradictions[0]


def test_what_is_not_quoted_is_said() -> None:
    fitted = fit_quoted(Quote("x", "film-pe-plain", par_hemispherical=0.80))
    text = " ".join(fitted.assumed)
    for word in (
        "par_normal",
        "haze as film-pe-plain",
        "long-wave as film-pe-plain",
        "U-value computed",
        "NIR",
    ):
        assert word in text
    assert "clear-night loss" in fitted.sensitivity
    assert "haze not quoted" in fitted.sensitivity


def test_more_light_than_plain_faces_pass_is_said() -> None:
    # two faces of n 1.52 pass .918 at most (lossless sheet, Duffie & Beckman form)
    fitted = fit_quoted(Quote("x", "glass-low-iron-4", par_normal=0.97))
    assert any("anti-reflection coat" in text and "(0.91" in text for text in fitted.assumed)
    assert not any("anti-reflection" in text for text in fit_quoted(Quote("y", "glass-clear-4", 0.9)).assumed)


def test_age_after_the_fit() -> None:
    new = fit_quoted(Quote("x", "film-pe-plain", par_hemispherical=0.80))
    old = fit_quoted(Quote("x", "film-pe-plain", par_hemispherical=0.80), age_years=3.0)
    kept = (1.0 - library.row("film-pe-plain").figures["par_loss_per_year"].value) ** 3
    assert figures(old.covering).par_hemispherical == pytest.approx(
        figures(new.covering).par_hemispherical * kept, abs=1e-9
    )


def test_unknown_model_is_refused() -> None:
    with pytest.raises(UserError, match="film-pe-plane"):
        fit_quoted(Quote("x", "film-pe-plane", par_normal=0.8))


@settings(max_examples=25, deadline=None)
@given(
    st.sampled_from(["film-pe-plain", "film-double-infrared", "glass-diffuse-low-haze", "pmma-twin-16"]),
    st.one_of(st.none(), st.floats(0.0, 1.0)),
    st.one_of(st.none(), st.floats(0.0, 1.0)),
    st.one_of(st.none(), st.floats(0.0, 1.0)),
    st.one_of(st.none(), st.floats(0.0, 1.0)),
    st.one_of(st.none(), st.floats(0.3, 9.9)),
)
def test_any_quotation_keeps_the_laws_and_is_met_or_contradicted(
    model: str,
    normal: float | None,
    hemispherical: float | None,
    haze: float | None,
    thermal: float | None,
    u: float | None,
) -> None:
    fitted = fit_quoted(Quote("q", model, normal, hemispherical, haze, thermal, u))
    _laws(fitted.covering)
    got = figures(fitted.covering)
    misses = 0
    for want, have in (
        (normal, got.par_normal),
        (hemispherical, got.par_hemispherical),
        (haze, got.haze),
        (thermal, got.thermal_transmittance),
        (u, got.u_value_w_m2_cover_k),
    ):
        misses += want is not None and abs(want - have) > MATCH
    assert (misses == 0) or len(fitted.contradictions) >= misses


def test_a_covering_in_use_without_a_quotation_is_the_librarys() -> None:
    base, fitted = library.covering("glass-clear-4"), fit_quoted(Quote("in use", "glass-clear-4"))
    assert fitted.covering.title == base.title
    assert fitted.assumed == ("as glass-clear-4 in the library",)
    assert fitted.sensitivity == ""
    assert fitted.contradictions == ()
    assert fitted.covering.thermal_dry is base.thermal_dry
    loss = [0.03] * 3 + [0.04] * 9
    keys = CoveringKeys(name="in use", based_on="glass-clear-4", dirt_by_month=loss, wash_days=["05-01"])
    chosen = choose_covering("in use", _study(keys))
    assert chosen.notes == (
        "in use: as glass-clear-4 in the library; dirt takes 3 to 4 % of the light by month, washed on 05-01",
    )


def _study(keys: CoveringKeys) -> Study:
    study = make_study(fakes(1))
    return replace(study, keys=study.keys.model_copy(update={"covering": [keys]}))
