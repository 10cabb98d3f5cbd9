"""Laboratory spectra: known n, k come back; noise, percent, coats; what cannot be had is said; bad files."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
import tmm
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.coats import coat
from canopy.coveringfigures import figures
from canopy.labcsv import read_lab_csv
from canopy.labspectrum import covering_from_spectrum
from canopy.layers import build_solar, build_thermal
from canopy.materials import material
from canopy.sheets import MaterialSheet
from canopy.slabinverse import constants_from_phase, equal_faces, invert, reflection_phase
from weather.errors import UserError

Floats = NDArray[np.float64]
PAR = SOLAR.index("par")
SOLAR_GRID = np.arange(0.28, 2.9, 0.005)
WHOLE_GRID = np.unique(np.concatenate([SOLAR_GRID, np.geomspace(2.9, 40.0, 1000)]))


def _by_tmm(name: str, mm: float, wave: Floats) -> tuple[Floats, Floats]:
    """Normal-incidence T and R of a shipped material with the general library tmm (incoherent slab)."""
    index = material(name).index_at(wave)
    both = [
        tmm.inc_tmm("s", [1.0, n, 1.0], [np.inf, 1000.0 * mm, np.inf], ["i", "i", "i"], 0.0, w)
        for n, w in zip(index, wave, strict=True)
    ]
    return np.array([b["T"] for b in both]), np.array([b["R"] for b in both])


def _normal(name: str, mm: float, wave: Floats) -> tuple[Floats, Floats]:
    passage = MaterialSheet(name, mm / 1000.0).passage(wave, np.zeros(1))
    return passage.down.mean(axis=0)[:, 0], passage.reflect_outside.mean(axis=0)[:, 0]


def _write(path: Path, wave: Floats, *columns: Floats, header: str) -> Path:
    rows = "\n".join(",".join(f"{x:.6f}" for x in row) for row in zip(wave, *columns, strict=True))
    path.write_text(f"# measured\n{header}\n{rows}\n", encoding="utf-8")
    return path


SHEETS = [
    ("soda-lime-clear", 4.0),
    ("pmma", 3.0),
    ("polycarbonate", 1.0),
    ("pet", 0.15),
    ("polyethylene", 0.18),
]


@pytest.mark.parametrize(("name", "mm"), SHEETS)
def test_known_constants_come_back(tmp_path: Path, name: str, mm: float) -> None:
    """Within .003 at 60 degrees and in diffuse light, every solar band; long-wave within .007, faces .01."""
    t, r = _normal(name, mm, WHOLE_GRID)
    head = "wavelength_um,transmittance,reflectance_front,reflectance_back"
    path = _write(tmp_path / "lab.csv", WHOLE_GRID, t, r, r, header=head)
    lab = covering_from_spectrum(path, "mine", mm, kind="film" if mm < 0.5 else "glass")
    light, truth = lab.covering.solar_dry, build_solar([MaterialSheet(name, mm / 1000.0)])
    at_60 = int(np.argmin(np.abs(np.degrees(truth.angles) - 60.0)))
    np.testing.assert_allclose(light.beam_beam[:, at_60], truth.beam_beam[:, at_60], rtol=0, atol=0.003)
    np.testing.assert_allclose(light.diffuse_in, truth.diffuse_in, rtol=0, atol=0.003)
    heat = build_thermal([MaterialSheet(name, mm / 1000.0)])
    np.testing.assert_allclose(lab.covering.thermal_dry.transmit, heat.transmit, rtol=0, atol=0.007)
    np.testing.assert_allclose(
        lab.covering.thermal_dry.reflect_outside, heat.reflect_outside, rtol=0, atol=0.005
    )


def test_wet_states_follow_from_the_spectrum(tmp_path: Path) -> None:
    t, r = _normal("soda-lime-low-iron", 4.0, SOLAR_GRID)
    path = _write(tmp_path / "lab.csv", SOLAR_GRID, t, r, header="wavelength_um,transmittance,reflectance")
    lab = covering_from_spectrum(path, "mine", 4.0, wet="film")
    truth = build_solar([MaterialSheet("soda-lime-low-iron", 0.004)], wetness="film")
    np.testing.assert_allclose(lab.covering.solar_wet.diffuse_in, truth.diffuse_in, rtol=0, atol=0.003)


def test_n_and_k_against_the_general_library() -> None:
    """The spectrum comes from tmm, so that nothing of ours made it."""
    wave = np.linspace(0.4, 1.6, 40)
    t, r = _by_tmm("soda-lime-clear", 4.0, wave)
    found = invert(wave, 4000.0, t, r)
    truth = material("soda-lime-clear").index_at(wave)
    np.testing.assert_allclose(found.index_front, truth.real, rtol=0, atol=1e-6)
    np.testing.assert_allclose(found.k, truth.imag, rtol=1e-4, atol=1e-10)


def test_dark_bands_of_glass_from_reflectance_alone() -> None:
    """Rubin's constants (1985) at the reststrahlen peaks come back from R by Kramers-Kronig."""
    wave = WHOLE_GRID
    truth = material("soda-lime-clear").index_at(wave)
    reflect = np.abs((truth - 1.0) / (truth + 1.0)) ** 2
    n, k = constants_from_phase(reflect, reflection_phase(wave, reflect))
    for um in (8.5, 9.2, 10.0, 12.0):
        at = int(np.argmin(np.abs(wave - um)))
        assert n[at] == pytest.approx(truth[at].real, abs=0.03)
        assert k[at] == pytest.approx(truth[at].imag, abs=0.03)


@given(st.floats(1.2, 2.4), st.floats(0.01, 1.0))
def test_inversion_is_exact_for_any_sheet(n: float, crossing: float) -> None:
    r = ((n - 1.0) / (n + 1.0)) ** 2
    series = 1.0 - r * r * crossing**2
    transmit = (1.0 - r) ** 2 * crossing / series
    reflect = r + (1.0 - r) ** 2 * r * crossing**2 / series
    face, t = equal_faces(np.array([transmit]), np.array([reflect]))
    assert face[0] == pytest.approx(r, abs=1e-9)
    assert t[0] == pytest.approx(crossing, abs=1e-7)


def test_noise_of_a_laboratory(tmp_path: Path) -> None:
    rng = np.random.default_rng(5)
    t, r = _normal("pmma", 3.0, SOLAR_GRID)
    noisy = [np.clip(x + 0.003 * rng.standard_normal(x.size), 0.0, 1.0) for x in (t, r, r)]
    head = "wavelength_um,transmittance,reflectance_front,reflectance_back"
    path = _write(tmp_path / "lab.csv", SOLAR_GRID, *noisy, header=head)
    lab = covering_from_spectrum(path, "mine", 3.0)
    truth = build_solar([MaterialSheet("pmma", 0.003)])
    np.testing.assert_allclose(lab.covering.solar_dry.diffuse_in, truth.diffuse_in, rtol=0, atol=0.005)
    assert not any("interference" in text for text in lab.limits)


def test_percent_nanometres_semicolons_and_descending_rows(tmp_path: Path) -> None:
    wave = np.arange(2500.0, 299.0, -10.0)
    t, r = _normal("soda-lime-clear", 4.0, wave[::-1] / 1000.0)
    rows = [
        f"{w:.0f};{100 * a:.2f};{100 * b:.2f}".replace(".", ",")
        for w, a, b in zip(wave, t[::-1], r[::-1], strict=True)
    ]
    path = tmp_path / "lab.csv"
    path.write_text("Wavelength (nm);Transmittance (%);Reflectance (%)\n" + "\n".join(rows), encoding="utf-8")
    lab = read_lab_csv(path)
    assert lab.wavelength_um[0] == pytest.approx(0.3)
    assert (np.diff(lab.wavelength_um) > 0).all()
    assert "values read as percent" in lab.notes
    np.testing.assert_allclose(lab.transmit, t, atol=1e-4)
    covering = covering_from_spectrum(path, "mine", 4.0).covering
    assert figures(covering).par_normal == pytest.approx(0.885, abs=0.003)


def test_noise_beyond_the_ends_is_clipped_and_said(tmp_path: Path) -> None:
    rows = [f"{w},{1.004 if w == 500 else 0.9},{-0.002 if w == 600 else 0.0}" for w in range(380, 800, 10)]
    path = tmp_path / "lab.csv"
    path.write_text("wavelength_nm,transmittance,reflectance\n" + "\n".join(rows), encoding="utf-8")
    lab = read_lab_csv(path)
    assert lab.front is not None
    assert lab.transmit.max() == 1.0
    assert lab.front.min() == 0.0
    assert "lab.csv: transmittance clipped to 0 ... 1 in 1 rows (noise)" in lab.notes
    assert "lab.csv: reflectance clipped to 0 ... 1 in 1 rows (noise)" in lab.notes


def test_low_values_in_percent_are_percent_by_their_header(tmp_path: Path) -> None:
    wave = np.linspace(0.38, 0.78, 40)
    path = tmp_path / "lab.csv"
    rows = "\n".join(f"{w:.3f},0.9,4.0" for w in wave)
    path.write_text(f"wavelength_um,transmittance_pct,reflectance_pct\n{rows}\n", encoding="utf-8")
    lab = read_lab_csv(path)
    assert lab.transmit.max() == pytest.approx(0.009)
    assert lab.front is not None
    assert lab.front.max() == pytest.approx(0.04)


def test_coated_sheet_is_said_and_carried(tmp_path: Path) -> None:
    """One anti-reflection coat: faces differ; angles come back within .02 at 60 degrees, as the text says."""
    sheet = MaterialSheet("soda-lime-low-iron", 0.004, outer=coat("ar"))
    passage = sheet.passage(SOLAR_GRID, np.zeros(1))
    columns = [x.mean(axis=0)[:, 0] for x in (passage.down, passage.reflect_outside, passage.reflect_inside)]
    head = "wavelength_um,transmittance,reflectance_front,reflectance_back"
    lab = covering_from_spectrum(_write(tmp_path / "lab.csv", SOLAR_GRID, *columns, header=head), "mine", 4.0)
    assert any("anti-reflection coat" in text for text in lab.limits)
    truth = build_solar([sheet])
    assert lab.covering.solar_dry.diffuse_in[PAR] == pytest.approx(truth.diffuse_in[PAR], abs=0.02)
    at_60 = int(np.argmin(np.abs(np.degrees(truth.angles) - 60.0)))
    assert lab.covering.solar_dry.beam_beam[PAR, at_60] == pytest.approx(
        truth.beam_beam[PAR, at_60], abs=0.02
    )


def test_absorbing_sheet_with_two_faces(tmp_path: Path) -> None:
    """A grey pane with a mirror coat on one side: the faces differ, and come back exactly."""
    wave = np.linspace(0.38, 2.5, 120)
    r1, r2, t = 0.20, 0.05, np.linspace(0.4, 0.8, wave.size)
    series = 1.0 - r1 * r2 * t**2
    transmit = (1 - r1) * (1 - r2) * t / series
    front = r1 + (1 - r1) ** 2 * r2 * t**2 / series
    back = r2 + (1 - r2) ** 2 * r1 * t**2 / series
    head = "wavelength_um,transmittance,reflectance_front,reflectance_back"
    path = _write(tmp_path / "lab.csv", wave, transmit, front, back, header=head)
    lab = covering_from_spectrum(path, "mine", 4.0)
    assert any("not one n, k" in text for text in lab.limits)
    root = np.sqrt(np.array([r1, r2]))
    np.testing.assert_allclose(lab.inverted.index_front, (1 + root[0]) / (1 - root[0]), atol=2e-4)
    np.testing.assert_allclose(lab.inverted.index_back, (1 + root[1]) / (1 - root[1]), atol=2e-4)
    light = lab.covering.solar_dry
    assert light.beam_reflect[PAR, 0] > light.reflect_inside[PAR] - 0.1  # the mirror is outside


def test_what_the_physics_does_not_allow_is_said(tmp_path: Path) -> None:
    wave = np.linspace(0.38, 1.1, 100)
    t, _ = _normal("soda-lime-clear", 4.0, wave)
    path = _write(tmp_path / "t.csv", wave, t, header="wavelength_um,transmittance")
    lab = covering_from_spectrum(path, "mine")
    said = " ".join(lab.assumed + lab.limits)
    for words in (
        "no reflectance",
        "thickness not given",
        "haze not measured",
        "no long-wave",
        "no data from 1.1",
    ):
        assert words in said
    truth = build_solar([MaterialSheet("soda-lime-clear", 0.004)])
    assert lab.covering.solar_dry.diffuse_in[PAR] == pytest.approx(truth.diffuse_in[PAR], abs=0.003)
    film = covering_from_spectrum(path, "mine", 0.2)
    assert film.covering.kind == "film"
    assert any("plain polyethylene" in text for text in film.assumed)


def test_dark_bands_and_fringes_are_said(tmp_path: Path) -> None:
    t, r = _normal("soda-lime-clear", 4.0, WHOLE_GRID)
    path = _write(tmp_path / "a.csv", WHOLE_GRID, t, r, header="wavelength_um,transmittance,reflectance")
    assert any(
        "nothing comes through at 0.28-0.31" in x for x in covering_from_spectrum(path, "a", 4.0).limits
    )
    wave = np.linspace(0.4, 2.5, 1500)
    waving = 0.85 + 0.04 * np.cos(4.0 * np.pi * 1.5 * 6.0 / wave)  # a film of 6 µm
    path = _write(
        tmp_path / "b.csv", wave, waving, 0.99 - waving, header="wavelength_um,transmittance,reflectance"
    )
    assert any("interference" in x for x in covering_from_spectrum(path, "b", 0.006).limits)


def test_scattered_light_gives_haze(tmp_path: Path) -> None:
    wave = np.linspace(0.38, 1.1, 100)
    t, r = _normal("soda-lime-low-iron", 4.0, wave)
    head = "wavelength_um,transmittance,reflectance,transmittance_diffuse"
    path = _write(tmp_path / "t.csv", wave, t, r, 0.4 * t, header=head)
    assert covering_from_spectrum(path, "mine", 4.0).covering.haze == pytest.approx(0.4, abs=1e-3)


def _good() -> list[str]:
    return ["wavelength_nm,transmittance,reflectance", *(f"{w},0.9,0.08" for w in range(380, 800, 10))]


def _broken(change: Callable[[list[str]], list[str]]) -> str:
    return "\n".join(change(_good()))


BAD = {
    "unknown column": (_broken(lambda x: ["wave,transmittance", *x[1:]]), 'column "wave" is not known'),
    "no transmittance": (
        _broken(lambda x: ["wavelength_nm,reflectance_back,reflectance", *x[1:]]),
        "wavelength and transmittance are needed",
    ),
    "twice": (_broken(lambda x: ["wavelength_nm,t,transmittance", *x[1:]]), "two columns mean"),
    "not a number": (_broken(lambda x: [*x, "810,many,0.1"]), 'row 44: "many" is not a number'),
    "cells": (_broken(lambda x: [*x, "810,0.9"]), "row 44: 2 cells; the header has 3"),
    "infinite": (_broken(lambda x: [*x, "810,inf,0.1"]), "is not a number"),
    "repeated": (
        _broken(lambda x: [*x, "790,0.9,0.08"]),
        "row 44: found 0.79; wavelength does not rise",
    ),
    "too much": (
        _broken(lambda x: [*x, "810,0.97,0.2"]),
        "row 44: found 1.17; transmittance + refl",
    ),
    "negative": (
        _broken(lambda x: [*x, "810,-0.006,0.2"]),
        "row 44: found -0.006; transmittance below",
    ),
    "unsorted": (
        _broken(lambda x: [*x[:9], x[10], x[9], *x[11:]]),
        "row 11: found 0.46; wavelength does",
    ),
    "spike": (_broken(lambda x: [*x, "810,1.05,0.0"]), "row 44: found 1.05; transmittance above 1.02"),
    "scattered": (
        _broken(lambda x: [x[0] + ",t_diffuse", *(f"{row},0.95" for row in x[1:])]),
        "row 2: found 0.95; diffuse transmittance above transmittance",
    ),
    "short": (_broken(lambda x: x[:5]), "at least 8"),
    "range": (_broken(lambda x: x[:20]), "0.4-0.7 is needed"),
    "units": (
        "\n".join(["wavelength_um,t", *(f"{w},0.9" for w in range(380, 800, 10))]),
        "row 2: wavelength 380 looks like nm",
    ),
    "empty": ("", "empty"),
}


@pytest.mark.parametrize(("text", "words"), BAD.values(), ids=BAD.keys())
def test_bad_files_are_refused_in_one_line(tmp_path: Path, text: str, words: str) -> None:
    path = tmp_path / "lab.csv"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(UserError) as problem:
        covering_from_spectrum(path, "mine", 4.0)
    assert words in str(problem.value)
    assert "\n" not in str(problem.value)
    assert "lab.csv" in str(problem.value)


def test_missing_and_unreadable_files(tmp_path: Path) -> None:
    with pytest.raises(UserError, match="no such file"):
        read_lab_csv(tmp_path / "none.csv")
    with pytest.raises(UserError, match="no such file"):
        read_lab_csv(tmp_path)
    path = tmp_path / "lab.csv"
    path.write_bytes(b"wavelength_nm,t\n400,\xff\n")
    with pytest.raises(UserError, match="UTF-8"):
        read_lab_csv(path)


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.integers(0, 700), st.integers(0, 255))
def test_any_damage_ends_in_a_message_or_a_reading(tmp_path: Path, place: int, byte: int) -> None:
    raw = bytearray("\n".join(_good()).encode())
    raw[place % len(raw)] = byte
    path = tmp_path / "lab.csv"
    path.write_bytes(bytes(raw))
    try:
        lab = read_lab_csv(path)
    except UserError as problem:
        said = str(problem)
        lab = None
    if lab is None:
        assert "\n" not in said
        return
    assert lab.transmit.shape == lab.wavelength_um.shape
    assert (lab.transmit >= 0.0).all()
    assert (lab.transmit <= 1.0).all()
