"""The coverings command: contract of the JSON, table, one covering in full, the page of its spectrum."""

from __future__ import annotations

import json
import math
import shutil
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from canopy import library
from canopy.coveringfigures import figures
from canopy.coveringspectrum import spectrum_of
from reports import coverings_view
from weather.errors import UserError

# the contract of `coverings --json`
CONTRACT = [
    "name",
    "title",
    "kind",
    "par_normal",
    "par_hemispherical",
    "nir_normal",
    "nir_hemispherical",
    "uv_hemispherical",
    "haze",
    "thermal_transmittance",
    "thermal_emissivity_sky_side",
    "thermal_emissivity_crop_side",
    "thermal_8_14_transmittance",
    "u_value_w_m2_cover_k",
    "source",
]


def test_json_has_exactly_the_contract_keys() -> None:
    rows = json.loads(json.dumps(coverings_view.coverings_json()))
    assert [row["name"] for row in rows] == list(library.covering_names())
    for row in rows:
        assert list(row) == CONTRACT
        assert row["kind"] in ("glass", "film", "rigid plastic")
        for key in CONTRACT[3:-2]:
            assert 0.0 <= row[key] <= 1.0
        assert row["thermal_transmittance"] + row["thermal_emissivity_sky_side"] <= 1.0
        assert 1.0 <= row["u_value_w_m2_cover_k"] <= 7.5


def test_table_names_every_covering_and_its_terms() -> None:
    text = coverings_view.coverings_table()
    for name in library.covering_names():
        assert name in text
    for words in ("EN 673", "283 K", "ASTM G173", "from memory"):
        assert words in text
    assert max(len(line) for line in text.splitlines()) <= 140


@pytest.mark.parametrize("name", ["glass-clear-4", "film-double-infrared", "polycarbonate-multi-16"])
def test_detail_shows_bands_angles_states_and_sources(name: str) -> None:
    text = coverings_view.covering_detail(name)
    covering = library.covering(name)
    for words in (
        "Light, dry",
        "Light, wet",
        "8-14 µm",
        "60°",
        "U-value",
        "How known",
        "Ranges",
        "low",
        "high",
    ):
        assert words in text
    assert f"{covering.solar_dry.diffuse_in[1]:.3f}" in text
    assert f"{figures(covering).u_value_w_m2_cover_k:.2f}" in text
    for title in covering.layer_titles:
        assert title in text


def test_unknown_covering_is_refused_with_the_nearest(tmp_path: Path) -> None:
    with pytest.raises(UserError, match="glass-clear-4"):
        coverings_view.covering_detail("glas-clear-4")
    page = tmp_path / "x.html"
    with pytest.raises(UserError, match="glass-clear-4"):
        coverings_view.covering_plot("glas-clear-4", page)
    assert list(tmp_path.iterdir()) == []


def test_plot_is_one_whole_page(tmp_path: Path) -> None:
    page = tmp_path / "film.html"
    coverings_view.covering_plot("film-pe-infrared", page)
    text = page.read_text(encoding="utf-8")
    assert text.startswith("<!DOCTYPE html>") or "<!DOCTYPE html>" in text[:6000]
    assert "<script src=" not in text
    assert "https://cdn" not in text
    assert "infrared-absorbing" in text
    assert [path.name for path in tmp_path.iterdir()] == ["film.html"]
    with pytest.raises(UserError, match="cannot be written"):
        coverings_view.covering_plot("film-pe-infrared", tmp_path / "none" / "film.html")


@pytest.mark.browser
def test_plot_opens_without_a_console_error(tmp_path: Path) -> None:
    from playwright.sync_api import sync_playwright

    page_file = tmp_path / "film.html"
    coverings_view.covering_plot("film-pe-infrared", page_file)
    with sync_playwright() as play:
        browser = play.chromium.launch(
            executable_path=shutil.which("chromium"), args=["--headless", "--no-sandbox", "--disable-gpu"]
        )
        page = browser.new_page()
        problems: list[str] = []
        page.on("console", lambda m: problems.append(m.text) if m.type == "error" else None)
        page.on("pageerror", lambda e: problems.append(str(e)))
        page.goto(page_file.as_uri())
        page.wait_for_selector("[data-drawn=yes]", timeout=20000)
        assert page.locator(".plot .scatterlayer .trace").count() >= 5
        browser.close()
    assert problems == []


def test_spectrum_agrees_with_the_bands() -> None:
    """PAR straight through from the drawn spectrum is the record's, but for scattering between films."""
    for name in ("glass-clear-4", "film-double-pe-plain", "film-pe-infrared"):
        found = spectrum_of(name)
        inside = (found.wavelength_um > 0.4) & (found.wavelength_um < 0.7)
        weight = found.sunlight[inside] * found.wavelength_um[inside]  # points are even in log wavelength
        mean = float(np.average(found.transmit[inside], weights=weight))
        assert mean == pytest.approx(figures(library.covering(name)).par_normal, abs=0.006)
        assert ((found.transmit + found.reflect) <= 1.0 + 1e-12).all()
        assert (found.transmit_wet[found.wavelength_um > 20.0] < 0.02).all()  # water is black beyond 20 µm


def test_looking_up_is_light() -> None:
    """Names, rows and the table import neither numpy nor scipy nor pvlib nor pandas nor plotly."""
    code = (
        "import sys\n"
        "from canopy import library\n"
        "from reports import coverings_view\n"
        "library.covering_names(); library.screen_names(); library.ground_names()\n"
        "library.row('glass-clear-4'); coverings_view.coverings_table(); coverings_view.coverings_json()\n"
        "heavy = {'scipy', 'pvlib', 'pandas', 'plotly', 'numpy'} & set(sys.modules)\n"
        "print(sorted(heavy))\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_peak_positions_of_the_two_sources() -> None:
    # Wien: 2897.772 µm K / 283 K = 10.24 µm; sunlight at ground peaks between .45 and .56 µm
    found = spectrum_of("glass-clear-4")
    assert found.wavelength_um[int(np.argmax(found.blackbody))] == pytest.approx(2897.772 / 283.0, rel=0.01)
    assert 0.45 < found.wavelength_um[int(np.argmax(found.sunlight))] < 0.56
    assert math.isclose(found.wavelength_um[0], 0.28)
    assert math.isclose(found.wavelength_um[-1], 50.0)
