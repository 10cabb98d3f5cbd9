"""Builds canopy/data/leaves/leaves.toml from its recipes: PROSPECT-D spectra cut to the solar bands.

Run from the project root: python -m tests.build_leaves
"""

from __future__ import annotations

import json
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np
import prosail
from pvlib.spectrum import get_reference_spectra

from canopy.bands import SOLAR

ROOT = Path(__file__).resolve().parents[1]
RECIPES = ROOT / "canopy" / "data" / "leaves" / "recipes.toml"
TABLE = ROOT / "canopy" / "data" / "leaves" / "leaves.toml"
UV_REFLECT, UV_TRANSMIT = 0.05, 0.01


def spectrum(recipe: Mapping[str, Any]) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return wavelength (nm), reflectance and transmittance, extended over UV and above 2500 nm."""
    wave, reflect, transmit = prosail.run_prospect(
        recipe["structure"],
        recipe["chlorophyll_ug_cm2"],
        recipe["carotenoids_ug_cm2"],
        recipe["brown"],
        recipe["water_cm"],
        recipe["dry_matter_g_cm2"],
        ant=recipe["anthocyanins_ug_cm2"],
        prospect_version="D",
    )
    wave = np.concatenate([[280.0, 399.999], wave, [2800.0]])
    reflect = np.concatenate([[UV_REFLECT, UV_REFLECT], reflect, reflect[-1:]])
    transmit = np.concatenate([[UV_TRANSMIT, UV_TRANSMIT], transmit, transmit[-1:]])
    return wave, reflect, transmit


def band_means(wave: np.ndarray, values: np.ndarray) -> list[float]:
    """Return means over the solar bands, weighted by the energy of ASTM G173 global sunlight."""
    sun = get_reference_spectra()["global"]
    means = []
    for low, high in zip(SOLAR.lower, SOLAR.upper, strict=True):
        grid = np.arange(low * 1000.0, high * 1000.0 + 0.25, 0.5)
        weight = np.interp(grid, sun.index, sun.to_numpy())
        means.append(float(np.average(np.interp(grid, wave, values), weights=weight)))
    return means


def photon_absorptance(wave: np.ndarray, reflect: np.ndarray, transmit: np.ndarray) -> float:
    """Return absorptance over 400-700 nm, weighted by photons of ASTM G173 global sunlight."""
    sun = get_reference_spectra()["global"]
    grid = np.arange(400.0, 700.5, 0.5)
    weight = np.interp(grid, sun.index, sun.to_numpy()) * grid
    taken = 1.0 - np.interp(grid, wave, reflect + transmit)
    return float(np.average(taken, weights=weight))


def table() -> str:
    """Return the whole table as TOML text."""
    recipes = tomllib.loads(RECIPES.read_text(encoding="utf-8"))
    lines = [
        "# Leaf optics by solar band (uv, par, far_red, nir_1, nir_2), emissivity 3-8, 8-14, 14-100 um.",
        "# Built by tests/build_leaves.py from recipes.toml; a test rebuilds it. Do not edit by hand.",
        "",
    ]
    for row in recipes["leaf"]:
        wave, reflect, transmit = spectrum(row)
        lines += [
            "[[leaf]]",
            f"name = {json.dumps(row['name'])}",
            f"title = {json.dumps(row['title'], ensure_ascii=False)}",
            'provenance = "computed"',
            f"source = {json.dumps(recipes['model'] + ' Leaf: ' + row['source'], ensure_ascii=False)}",
            f"reflect = {[round(v, 4) for v in band_means(wave, reflect)]}",
            f"transmit = {[round(v, 4) for v in band_means(wave, transmit)]}",
            f"emissivity = {row.get('emissivity', recipes['emissivity'])}",
            f"emissivity_source = {json.dumps(row.get('emissivity_source', recipes['emissivity_source']))}",
            f"par_photon_absorptance = {round(photon_absorptance(wave, reflect, transmit), 4)}",
            "",
        ]
    return "\n".join(lines)


if __name__ == "__main__":
    TABLE.write_text(table(), encoding="utf-8")
