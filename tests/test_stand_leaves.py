"""Shipped leaves, spectra of one's own, leaf area through the year."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from canopy.bands import SOLAR, THERMAL
from canopy.growth import lai_series
from canopy.leaves import leaf, leaf_from_csv, leaf_names
from canopy.seasonal import parse
from tests import build_leaves
from weather.errors import UserError


def test_shipped_table_is_what_its_recipes_give() -> None:
    """PROSPECT-D by the general package prosail."""
    assert build_leaves.table() == build_leaves.TABLE.read_text(encoding="utf-8")


@pytest.mark.parametrize("name", leaf_names())
def test_leaves_obey_their_laws(name: str) -> None:
    one = leaf(name)
    assert one.reflect.shape == one.transmit.shape == (len(SOLAR),)
    assert one.emissivity.shape == (len(THERMAL),)
    assert (one.reflect > 0).all()
    assert (one.transmit > 0).all()
    assert (one.reflect + one.transmit < 1).all()
    taken = 1.0 - one.reflect - one.transmit
    assert taken[SOLAR.index("par")] > taken[SOLAR.index("nir_2")] > taken[SOLAR.index("nir_1")]
    assert "Emissivity" in one.source


def test_absorptance_of_leaves_for_photons() -> None:
    """Björkman & Demmig 1987, Planta 170:489: 37 species, mean .838; here G173 photons, tolerance .03."""
    import tomllib

    rows = tomllib.loads(build_leaves.TABLE.read_text(encoding="utf-8"))["leaf"]
    found = {row["name"]: row["par_photon_absorptance"] for row in rows}
    assert found["generic"] == pytest.approx(0.838, abs=0.03)
    assert all(0.75 < value < 0.93 for value in found.values())  # range of healthy leaves in the same paper


@pytest.mark.parametrize(("name", "emissivity"), [("tomato", 0.980), ("cucumber", 0.983)])
def test_emissivity(name: str, emissivity: float) -> None:
    """López et al. 2012, 8-14 µm, measured leaves; tolerance .01."""
    assert leaf(name).emissivity[THERMAL.index("8-14")] == pytest.approx(emissivity, abs=0.01)


def test_unknown_leaf_gets_a_hint() -> None:
    with pytest.raises(UserError, match='did you mean "tomato"'):
        leaf("tomatoe")


def test_names_need_no_heavy_imports() -> None:
    code = (
        "import sys, canopy.leaves as l; l.leaf_names(); print({'scipy','pandas','pvlib'} & set(sys.modules))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "set()"


def _write(path: Path, body: str) -> Path:
    path.write_text(body, encoding="utf-8")
    return path


def test_spectrum_in_percent_and_nanometres(tmp_path: Path) -> None:
    """The shipped recipe, written out as a spectrum and read back, gives the shipped bands."""
    import tomllib

    recipe = tomllib.loads(build_leaves.RECIPES.read_text(encoding="utf-8"))["leaf"][1]
    wave, reflect, transmit = build_leaves.spectrum(recipe)
    lines = [f"{w},{100 * r},{100 * t}" for w, r, t in zip(wave, reflect, transmit, strict=True)]
    body = "wavelength (nm),reflectance (%),transmittance (%)\n" + "\n".join(lines)
    (own, notes), shipped = leaf_from_csv(_write(tmp_path / "own.csv", body)), leaf("tomato")
    assert notes == ("leaf spectrum values read as percent",)
    assert own.reflect == pytest.approx(shipped.reflect, abs=2e-4)
    assert own.transmit == pytest.approx(shipped.transmit, abs=2e-4)


GOOD = "wavelength,reflectance,transmittance\n0.4,.1,.1\n0.7,.1,.1\n" + "".join(
    f"{w},.3,.2\n" for w in (0.8, 1.0, 1.2, 1.5, 1.8, 2.1, 2.4)
)


@pytest.mark.parametrize(
    ("body", "words"),
    [
        ("", "empty"),
        ("wavelength,reflectance\n.4,.1\n", "header: wavelength and transmittance are needed"),
        ("wavelength,transmittance\n" + "".join(f"{w / 10},.1\n" for w in range(4, 24)), "needs reflectance"),
        (GOOD.replace("0.7,.1,.1", "0.7,x,.1"), 'row 3: "x" is not a number'),
        (GOOD.replace("0.7,.1,.1", "0.7,.9,.2"), "row 3: found 1.1; transmittance"),
        (GOOD.replace("0.7,.1,.1", "0.7,-.1,.2"), "row 3: found -0.1; reflectance below"),
        (GOOD.replace("0.7,.1,.1", "0.3,.1,.1"), "row 3: found 0.3; wavelength does not rise"),
        (GOOD.replace("0.7,.1,.1", "0.7,.1"), "row 3: 2 cells"),
        (GOOD.replace("2.4", "2.2"), "0.4-2.3 is needed"),
        (GOOD.replace("2.4", "nan"), 'row 10: "nan" is not a number'),
        ("wavelength,reflectance,transmittance\n", "0 rows"),
    ],
)
def test_bad_spectra_name_row_and_reason(tmp_path: Path, body: str, words: str) -> None:
    with pytest.raises(UserError, match=words.replace("(", r"\(")) as caught:
        leaf_from_csv(_write(tmp_path / "bad.csv", body))
    assert "bad.csv" in str(caught.value)


def test_noise_is_clipped_and_said(tmp_path: Path) -> None:
    body = GOOD.replace("0.4,.1,.1", "0.4,.1,-.003").replace("1.0,.3,.2", "1.0,.805,.2")
    clean = GOOD.replace("0.4,.1,.1", "0.4,.1,0").replace("1.0,.3,.2", "1.0,.8,.2")
    made, notes = leaf_from_csv(_write(tmp_path / "noisy.csv", body))
    assert sum("(noise)" in note for note in notes) == 2
    assert all(note.startswith("leaf spectrum ") for note in notes)
    expected, _ = leaf_from_csv(_write(tmp_path / "clean.csv", clean))
    np.testing.assert_allclose(made.reflect, expected.reflect)
    np.testing.assert_allclose(made.transmit, expected.transmit)


def test_missing_and_binary_spectra(tmp_path: Path) -> None:
    with pytest.raises(UserError, match="no such file"):
        leaf_from_csv(tmp_path / "none.csv")
    (tmp_path / "binary.csv").write_bytes(b"\xff\xfe\x00\x81")
    with pytest.raises(UserError, match="UTF-8"):
        leaf_from_csv(tmp_path / "binary.csv")


@dataclass
class Crop:
    planted: str
    removed: str
    start_lai: float = 0.2
    final_lai: float = 3.0
    days_to_final: float = 60.0


def test_leaf_area_by_dates_runs_straight_over_the_new_year() -> None:
    spec = parse([["01-11", 1.0], ["12-22", 2.0]], 0, 10)
    assert lai_series(spec, np.array([11.0, 356.0, 1.0, 366.0])) == pytest.approx([1.0, 2.0, 1.5, 1.5])


def test_plantings_leave_the_house_empty_between() -> None:
    plan = [Crop("01-10", "06-20"), Crop("08-01", "12-01", 0.5, 4.0, 40.0)]
    day = np.array([9.5, 10.0, 40.0, 70.0, 170.9, 171.0, 212.9, 213.0, 233.0, 253.0, 334.9, 335.0])
    expected = [0, 0.2, 1.6, 3.0, 3.0, 0, 0, 0.5, 2.25, 4.0, 4.0, 0]
    assert lai_series(plan, day) == pytest.approx(expected)


def test_planting_over_the_new_year() -> None:
    found = lai_series([Crop("12-01", "03-01")], np.array([335.0, 350.0, 365.0, 20.0, 29.0, 60.0, 200.0]))
    assert (found[:5] > 0).all()
    assert (np.diff(found[:5]) > 0).all()
    assert not found[5:].any()


@pytest.mark.parametrize(
    ("plan", "words"),
    [
        ([Crop("01-10", "06-20"), Crop("06-01", "12-01")], "planting 2: planted 06-01 while planting 1"),
        ([Crop("03-01", "03-01")], "planted and removed on 03-01"),
    ],
)
def test_impossible_plantings(plan: list[Crop], words: str) -> None:
    with pytest.raises(UserError, match=words):
        lai_series(plan, np.array([1.0]))


@given(st.floats(0.1, 2.0), st.floats(2.0, 8.0), st.floats(10, 200))
def test_growth_rises_and_ends_level(start: float, final: float, days: float) -> None:
    """Yin et al. 2003: determinate growth, without overshoot; half way at half time."""
    age = np.linspace(0, 250, 400)
    from canopy.growth import grown

    lai = grown(age, start, final, days)
    assert (np.diff(lai) >= -1e-12).all()
    assert lai[0] == start
    assert lai[-1] == pytest.approx(final)
    assert grown(np.array([days / 2]), start, final, days)[0] == pytest.approx(0.5 * (start + final))
