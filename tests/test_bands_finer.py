"""Finer bands: they nest, they add up to the usual ones, and totals move by no more than what is stated."""

from __future__ import annotations

import tomllib
from functools import lru_cache
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.constants import c, h, k
from scipy.integrate import quad

from canopy import library, library_rows
from canopy.bands import SOLAR, THERMAL, BandSet, finer, parents
from canopy.cells import directions
from canopy.coveringfigures import whole_thermal
from canopy.finer import STATED_PCT, Finer
from canopy.finercovering import finer_covering
from canopy.library_build import stack_of
from canopy.run import CandidateRun, Run
from canopy.simulate import simulate
from canopy.skybands import sky_bands
from canopy.studyfile import Study, build_study
from canopy.sunlight import split
from weather.errors import UserError
from weather.load import WeatherRequest, load_weather
from weather.record import Weather

SOLAR_CUTS = (0.28, 0.32, 0.36, 0.40, 0.50, 0.60, 0.70, 0.75, 0.90, 1.10, 1.35, 1.80, 2.20, 2.80)
THERMAL_CUTS = (3, 5, 6.5, 8, 9, 10, 11, 12, 14, 17, 25, 40, 100)
TABLE = f"[bands]\nsolar = {list(SOLAR_CUTS)}\nthermal = {list(THERMAL_CUTS)}\n"
BASE = """
[weather]
shipped = "greensboro"
first_day = "02-01"
last_day = "02-28"
[house]
form = "gable"
"""
PLAIN = """
[[candidate]]
name = "glass"
covering = "glass-clear-4"
screens = ["screen-transparent"]
[[candidate]]
name = "infrared film"
covering = "film-pe-infrared"
[[candidate]]
name = "plain film"
covering = "film-pe-plain"
"""


def study_of(text: str, folder: Path = Path()) -> Study:
    return build_study(tomllib.loads(text), folder, "study", text.encode())


@lru_cache(maxsize=2)
def month(table: str) -> Run:
    """Return February of the plain study, with a [bands] table or without."""
    return simulate(study_of(BASE + table + PLAIN))


def total(one: CandidateRun, *columns: str) -> float:
    return float(sum(one.hourly[name].sum() for name in columns))


def cuts_of(base: BandSet) -> st.SearchStrategy[list[float]]:
    """Return edges between those of a band set, at least 2 % from each other."""
    grid = np.geomspace(base.edges[0], base.edges[-1], 60)
    free = [x for x in grid if all(abs(x / e - 1.0) > 0.02 for e in base.edges)]
    return st.lists(st.sampled_from(free), unique=True, max_size=30).map(lambda x: sorted({*x, *base.edges}))


@given(st.sampled_from([SOLAR, THERMAL]).flatmap(lambda b: cuts_of(b).map(lambda cuts: (b, cuts))))
def test_finer_bands_nest(both: tuple[BandSet, list[float]]) -> None:
    base, cuts = both
    bands = finer(cuts, base)
    row = parents(bands, base)
    assert len(set(bands.names)) == len(bands) == len(cuts) - 1
    assert (base.lower[row] <= bands.lower).all()
    assert (bands.upper <= base.upper[row]).all()
    width = np.zeros(len(base))
    np.add.at(width, row, bands.upper - bands.lower)
    np.testing.assert_allclose(width, base.upper - base.lower, rtol=1e-12)
    for name, at in zip(bands.names, row, strict=True):
        assert name.startswith(base.names[at])


@settings(max_examples=8, deadline=None)
@given(cuts_of(SOLAR), cuts_of(THERMAL))
def test_sunlight_and_sky_in_finer_bands_add_up_to_the_usual_ones(
    solar: list[float], thermal: list[float]
) -> None:
    weather = greensboro()
    fine, base = finer(solar, SOLAR), split(weather)
    made = split(weather, fine)
    for name in ("direct", "diffuse"):
        folded = _folded(getattr(made, name), parents(fine, SOLAR), len(SOLAR))
        np.testing.assert_allclose(folded, getattr(base, name), rtol=1e-9, atol=1e-9)
    # photons per joule of PAR do not depend on how PAR is cut
    np.testing.assert_allclose(made.direct_umol_per_j, base.direct_umol_per_j, rtol=1e-9)
    bands = finer(thermal, THERMAL)
    sky = (weather.longwave_down, weather.temp_air, weather.vapour_pressure)
    folded = _folded(sky_bands(*sky, bands), parents(bands, THERMAL), len(THERMAL))
    np.testing.assert_allclose(folded, sky_bands(*sky), rtol=1e-9)


@lru_cache(maxsize=1)
def greensboro() -> Weather:
    return load_weather(WeatherRequest(shipped="greensboro"))


def _folded(values: NDArray[np.float64], row: NDArray[np.intp], count: int) -> NDArray[np.float64]:
    out = np.zeros((count, values.shape[1]))
    np.add.at(out, row, values)
    return out


@pytest.mark.parametrize("at", range(3))
def test_totals_stay_within_the_stated_error(at: int) -> None:
    base, fine = month("").candidates[at], month(TABLE).candidates[at]
    stated = {
        "par": ["inside_par_umol_m2_s", "crop_par_absorbed_umol_m2_s"],
        "nir": ["inside_nir_w_m2", "crop_nir_absorbed_w_m2"],
        "uv": ["crop_uv_absorbed_w_m2"],
        "heat": ["heat_delivered_w_m2"],
        "sky_loss": ["sky_loss_w_m2"],
    }
    assert stated.keys() == STATED_PCT.keys()
    for part, columns in stated.items():
        for column in columns:
            change = 100.0 * (total(fine, column) / total(base, column) - 1.0)
            assert abs(change) <= STATED_PCT[part], (column, change)
    for column in ("outside_global_w_m2", "outside_par_umol_m2_s"):
        np.testing.assert_allclose(fine.hourly[column], base.hourly[column], rtol=1e-9, atol=1e-9)
    assert total(fine, "sky_loss_w_m2") != total(base, "sky_loss_w_m2")
    assert fine.light.crop.shape == base.light.crop.shape
    assert max(closure.worst_w_m2 for closure in fine.closures) < 1e-3


def test_the_run_says_so() -> None:
    run = month(TABLE)
    said = next(note for note in run.notes if note.startswith("finer bands"))
    assert "computed in 13 bands and folded back to 5" in said
    assert "in 12 long-wave bands (usual: 3)" in said
    assert "finer bands: glass-clear-4 is averaged anew from its spectrum" in run.candidates[0].notes
    assert any("film-pe-infrared is tabled by band" in note for note in run.candidates[1].notes)
    assert not any("finer" in note for note in month("").notes)


def test_bands_cut_nowhere_change_nothing() -> None:
    table = f"[bands]\nsolar = {list(SOLAR.edges)}\nthermal = {list(THERMAL.edges)}\n"
    text = BASE + '%s[[candidate]]\nname = "diffuse"\ncovering = "glass-diffuse-high-haze"\n'
    same, base = (simulate(study_of(text % part)).candidates[0] for part in (table, ""))
    for name, values in base.hourly.items():
        np.testing.assert_allclose(same.hourly[name], values, rtol=1e-6, atol=1e-6, err_msg=name)


def test_two_clear_films_pass_the_window_as_their_spectra_say() -> None:
    """Wavelength by wavelength under Planck's law (CODATA constants): what passes film 1 fits film 2."""
    entry = library_rows.table("covering", "film-double-pe-plain")
    films = [layer.optics for layer in stack_of(entry).layers]
    wave = np.linspace(8.0, 14.0, 1201)
    where = directions()
    t1, t2 = ((f.passage(wave, where.theta).down.mean(0)) @ where.weights for f in films)
    r1 = films[0].passage(wave, where.theta).reflect_inside.mean(0) @ where.weights
    r2 = films[1].passage(wave, where.theta).reflect_outside.mean(0) @ where.weights
    through = t1 * t2 / (1.0 - r1 * r2)

    def planck(um: float) -> float:
        return float(um**-5.0 / np.expm1(h * c / (um * 1e-6 * k * 283.0)))

    want = np.average(through, weights=[planck(w) for w in wave])
    base = library.covering("film-double-pe-plain")
    study = study_of(BASE + TABLE + PLAIN)
    error = [abs(whole_thermal(base.thermal_dry).transmit[1] - want)]
    for steps in (6, 12, 30):  # 1, .5 and .2 µm
        cuts = np.linspace(8.0, 14.0, steps + 1)
        bands = finer([3.0, *cuts, 100.0], THERMAL)
        made, _ = finer_covering(base.name, base, study, SOLAR, bands)
        share = [quad(planck, low, high)[0] for low, high in pairwise(cuts)]
        got = np.average(whole_thermal(made.thermal_dry).transmit[1:-1], weights=share)
        error.append(abs(got - want))
    assert error == sorted(error, reverse=True)
    assert error[-1] < 0.4 * error[0]


def test_a_stack_of_spectrum_and_table_says_both() -> None:
    study = study_of(BASE + TABLE + PLAIN)
    base = library.covering("film-double-infrared")
    made, how = finer_covering(base.name, base, study, finer(SOLAR_CUTS, SOLAR), finer(THERMAL_CUTS, THERMAL))
    assert how == "is averaged anew; its layers that are tabled by band keep the band's value"
    plain, infrared = made.thermal_dry.transmit
    row = parents(finer(THERMAL_CUTS, THERMAL), THERMAL)
    np.testing.assert_allclose(infrared, base.thermal_dry.transmit[1][row], rtol=1e-6)
    assert np.ptp(plain[row == 1]) > 0.02


MIXED = """
[[covering]]
name = "quoted"
based_on = "glass-clear-4"
par_hemispherical = 0.80
[[covering]]
name = "as the library"
based_on = "film-pe-plain"
age_years = 2.0
[[candidate]]
name = "quoted, painted"
covering = "quoted"
house = { paint = [["02-05", 0.3, 60]], gable_covering = "polycarbonate-twin-8" }
screens = ["screen-transparent"]
[[candidate]]
name = "old film"
covering = "as the library"
[[candidate]]
name = "laboratory"
covering = "sheet.csv"
"""


def test_quoted_painted_aged_and_laboratory_coverings_close(tmp_path: Path) -> None:
    wave = np.concatenate([np.arange(0.30, 2.5, 0.02), np.arange(2.5, 20.0, 0.25)])
    through = np.where(wave < 2.5, 0.88, 0.25 + 0.2 * np.sin(wave))
    rows = "\n".join(f"{w:.3f},{t:.4f},0.08" for w, t in zip(wave, through, strict=True))
    (tmp_path / "sheet.csv").write_text(f"wavelength_um,transmittance,reflectance\n{rows}\n", "utf-8")
    base, fine = (simulate(study_of(BASE + part + MIXED, tmp_path)) for part in ("", TABLE))
    words = (
        "quoted is quoted",
        "polycarbonate-twin-8 is averaged",
        "as the library is averaged",
        "sheet.csv is",
    )
    notes = [note for one in fine.candidates for note in one.notes if note.startswith("finer bands")]
    assert all(any(word in note for note in notes) for word in words), notes
    for old, new in zip(base.candidates, fine.candidates, strict=True):
        assert max(closure.worst_w_m2 for closure in new.closures) < 1e-3
        for column in ("inside_par_umol_m2_s", "inside_nir_w_m2", "heat_delivered_w_m2"):
            assert total(new, column) == pytest.approx(total(old, column), rel=0.005), (new.plan.name, column)


@pytest.mark.parametrize(
    ("line", "words"),
    [
        (
            "solar = [0.28, 0.4, 0.7, 1.35, 2.8]",
            "bands -> solar: the edge 0.75 µm is missing; 0.28, 0.4, 0.7,",
        ),
        (
            "thermal = [3, 8, 12, 100]",
            "bands -> thermal: the edge 14 µm is missing; 3, 8, 14, 100 stay edges",
        ),
        ("thermal = [3, 8, 7, 14, 100]", "bands -> thermal: 8 is followed by 7; edges rise"),
        ("thermal = [3, 8, 8, 14, 100]", "bands -> thermal: 8 is followed by 8; edges rise"),
        ("thermal = [3, 8, 8.01, 14, 100]", "8 and 8.01 lie less than 1 % apart"),
        ("thermal = [3, 8, 14, 100, 150]", "found 150; allowed is 3 to 100"),
        ("solar = [0.2, 0.28, 0.4]", "found 0.2; allowed is 0.28 to 2.8"),
        ("solar = 3", "bands -> solar: found 3; allowed is a list of 0.28 to 2.8, 0 to 40 entries"),
        (f"thermal = {[3.0 + i for i in range(41)]}", "bands -> thermal: found 41 entries"),
        ("thermals = [3, 8, 14, 100]", 'bands -> thermals: unknown key (did you mean "thermal"?)'),
    ],
)
def test_edges_that_do_not_nest_are_refused(line: str, words: str) -> None:
    with pytest.raises(UserError) as refused:
        study_of(f"{BASE}[bands]\n{line}\n{PLAIN}")
    assert words in str(refused.value)
    assert "\n" not in str(refused.value)


def test_without_the_table_nothing_is_made() -> None:
    from canopy.candidate import make_place

    place = make_place(study_of(BASE + PLAIN), greensboro())
    assert place.finer is None
    made = make_place(study_of(BASE + TABLE + PLAIN), greensboro()).finer
    assert isinstance(made, Finer)
    assert len(made.sun.direct) == 13
