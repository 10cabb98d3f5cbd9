"""Shipped constants: rebuilt from their source, intact, honest about gaps; bad spectra refused."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from canopy.layers import build_solar, build_thermal
from canopy.materials import NAMES, Material, material, read_table
from canopy.sheets import MaterialSheet
from canopy.spectrumcheck import check_spectrum
from tests import build_materials
from weather.errors import UserError


def test_tables_rebuild() -> None:
    """Every byte of every table is what its builder makes from the open collection."""
    for name, text in build_materials.files().items():
        assert (build_materials.FOLDER / name).read_text(encoding="utf-8") == text, name


@pytest.mark.parametrize("name", NAMES)
def test_every_material_says_where_it_is_from(name: str) -> None:
    m = material(name)
    assert "CC0" in m.licence
    assert len(m.source) > 40
    assert m.bridged
    assert m.wavelength_um[0] <= 0.28
    assert m.wavelength_um[-1] >= 100.0
    assert (np.diff(m.wavelength_um) > 0.0).all()
    assert (m.n > 0.5).all()
    assert (m.k >= 0.0).all()
    header = read_table(name).header
    assert "micrometres" in header["units"]


def test_known_indices() -> None:
    """Refractive index at .589 µm as handbooks print it."""
    expected = {
        "soda-lime-clear": 1.52,
        "pmma": 1.491,
        "polycarbonate": 1.585,
        "pet": 1.58,
        "polyethylene": 1.515,
        "water": 1.333,
        "ice": 1.309,
    }
    for name, n in expected.items():
        assert material(name).index_at(np.array([0.589])).real[0] == pytest.approx(n, abs=0.012), name


def moved(m: Material, low: float, high: float, times: float = 1.0, plus: float = 0.0) -> Material:
    """Return the material with another k between two wavelengths."""
    inside = (m.wavelength_um > low) & (m.wavelength_um < high)
    return replace(m, name=f"{m.name} moved", k=np.where(inside, m.k * times + plus, m.k))


def passes(m: Material, mm: float) -> np.ndarray:
    """Return transmittance of the thermal bands."""
    return build_thermal([MaterialSheet(m, mm / 1000.0)]).transmit[0]


@pytest.mark.parametrize(
    ("name", "mm", "limit"),
    [("pmma", 1.7, 0.03), ("polycarbonate", 0.45, 0.03), ("polycarbonate", 0.1, 0.11), ("pet", 0.15, 0.11)],
)
def test_bridge_of_polymers_beyond_20_um(name: str, mm: float, limit: float) -> None:
    """The doubt stated in the header holds: k halved or doubled beyond 20 µm."""
    m = material(name)
    assert f"{limit:g}"[1:] in m.bridged
    for times in (0.5, 2.0):
        change = passes(moved(m, 20.0, 300.0, times), mm) - passes(m, mm)
        assert np.abs(change).max() <= limit


def test_bridge_of_polyethylene() -> None:
    """The doubts stated in the header hold."""
    m = material("polyethylene")
    for mm in (0.15, 0.18):
        change = passes(moved(m, 2.0, 12.4, plus=0.001), mm) - passes(m, mm)
        assert np.abs(change).max() == pytest.approx(0.10, abs=0.02)
        for times in (0.5, 2.0):
            change = np.abs(passes(moved(m, 12.3, 40.0, times), mm) - passes(m, mm))
            assert change[2] <= 0.055
            assert change[1] <= 0.026


def test_bridge_of_glass_in_the_ultraviolet() -> None:
    for name in ("soda-lime-clear", "soda-lime-low-iron"):
        m = material(name)
        base = build_solar([MaterialSheet(m, 0.003)]).diffuse_in[0]
        for times in (0.2, 5.0):
            other = build_solar([MaterialSheet(moved(m, 0.0, 0.3099, times), 0.003)]).diffuse_in[0]
            assert other == pytest.approx(base, abs=0.0015)


# ---------------------------------------------------------------- laboratory spectra

W = np.array([0.38, 0.45, 0.55, 0.65, 0.75])


@pytest.mark.parametrize(
    ("wave", "t", "r", "text"),
    [
        (W, [0.8, 0.8, -0.01, 0.8, 0.8], None, r"lab.csv, row 3: found -0.01; transmittance below -0.005"),
        (W, [0.8, 80.0, 0.8, 0.8, 0.8], None, r"row 2: found 80; transmittance above 1.02; write fractions"),
        (
            W,
            [0.9] * 5,
            [0.1, 0.1, 0.1, 0.13, 0.1],
            r"row 4: found 1.03; transmittance \+ reflectance above 1.02",
        ),
        (W[[0, 2, 1, 3, 4]], [0.8] * 5, None, r"row 3: found 0.45; wavelength does not rise; sort"),
        (W * 1000.0, [0.8] * 5, None, r"row 1: wavelength 380 looks like nm; write µm \(0.38\)"),
        (W + 0.1, [0.8] * 5, None, r"wavelengths 0.48-0.85 µm; 0.4-0.7 is needed"),
        (W, [0.8, float("nan"), 0.8, 0.8, 0.8], None, r"row 2: found nan; transmittance is not a number"),
        (W[:3], [0.8] * 3, None, r"3 rows; a spectrum needs at least 4"),
        (W, [0.8] * 4, None, r"4 values of transmittance for 5 wavelengths"),
    ],
)
def test_bad_spectra(wave: np.ndarray, t: list[float], r: list[float] | None, text: str) -> None:
    front = None if r is None else np.array(r)
    with pytest.raises(UserError, match=text):
        check_spectrum("lab.csv", wave, np.array(t), front)


def test_noise_is_clipped_and_said() -> None:
    checked = check_spectrum(
        "lab.csv", W, np.array([-0.004, 0.5, 0.93, 0.9, 1.01]), np.array([0.1, 0.1, 0.08, 0.1, 0.005])
    )
    assert checked.transmit.tolist() == [0.0, 0.5, 0.93, 0.9, 1.0]
    assert checked.front is not None
    assert (checked.transmit + checked.front <= 1.0).all()
    assert checked.notes == (
        "lab.csv: transmittance clipped to 0 ... 1 in 2 rows (noise)",
        "lab.csv: transmittance + reflectance above 1 in 2 rows; reflectance lowered (noise)",
    )


@given(
    st.lists(st.floats(allow_nan=True, allow_infinity=True), min_size=1, max_size=12),
    st.lists(st.floats(allow_nan=True, allow_infinity=True), min_size=1, max_size=12),
)
def test_any_numbers_end_in_a_message_or_a_clean_spectrum(wave: list[float], t: list[float]) -> None:
    try:
        checked = check_spectrum("x", np.array(wave), np.array(t))
    except UserError as said:
        message = str(said)
    else:
        message = ""
        assert ((checked.transmit >= 0.0) & (checked.transmit <= 1.0)).all()
    assert len(message) < 200
