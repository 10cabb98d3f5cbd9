"""Builds canopy/data/materials/sunlight-clear.csv from SPECTRL2 as pvlib carries it.

Run `python -m tests.build_sunlight` to write the table; a test rebuilds it and compares every byte.
"""

from __future__ import annotations

import hashlib

import numpy as np

from canopy.sunlight import COS_NODES, EDGES, WATER_NODES
from tests.build_materials import FOLDER

OZONE_ATM_CM = 0.31  # pvlib's default
TURBIDITY_500 = 0.10  # rural background; ASTM G173 has .084
ALBEDO = 0.2


def cumulative(wavelength_um: np.ndarray, density: np.ndarray, edges: np.ndarray) -> np.ndarray:
    """Return energy between edges of a piecewise linear spectrum."""
    grid = np.unique(np.concatenate([wavelength_um, edges]))
    value = np.interp(grid, wavelength_um, density, left=0.0)
    run = np.concatenate([[0.0], np.cumsum(0.5 * (value[1:] + value[:-1]) * np.diff(grid))])
    return np.diff(np.interp(edges, grid, run))


def sky(cos_z: float, water_cm: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return wavelength (um), direct normal and diffuse horizontal spectrum of a clear sky at sea level."""
    from pvlib.atmosphere import get_relative_airmass
    from pvlib.spectrum import spectrl2

    zenith = np.degrees(np.arccos(cos_z))
    out = spectrl2(
        apparent_zenith=zenith,
        aoi=zenith,
        surface_tilt=0.0,
        ground_albedo=ALBEDO,
        surface_pressure=101325.0,
        relative_airmass=get_relative_airmass(zenith, "kasten1966"),
        precipitable_water=water_cm,
        ozone=OZONE_ATM_CM,
        aerosol_turbidity_500nm=TURBIDITY_500,
        dayofyear=80,
    )
    w = np.asarray(out["wavelength"]) / 1000.0
    return w, np.ravel(out["dni"]), np.ravel(out["dhi"])


def text() -> str:
    """Return the table as CSV text."""
    edges = np.array(EDGES)
    rows = ""
    for cos_z in COS_NODES:
        for water in WATER_NODES:
            w, direct, diffuse = sky(cos_z, water)
            a, b = cumulative(w, direct, edges), cumulative(w, diffuse, edges)
            part = b.sum() / (b.sum() + a.sum() * cos_z)
            values = [part, *(a / a.sum()), *(b / b.sum())]
            rows += f"{cos_z:g},{water:g}," + ",".join(f"{v:.4e}" for v in values) + "\n"
    digest = hashlib.sha256(rows.encode()).hexdigest()
    names = [f"{kind}_{lo:g}" for kind in ("direct", "diffuse") for lo in EDGES[:-1]]
    return (
        "# title: clear-sky sunlight by sun height and water vapour: shares of .28-2.8 um per sub-band\n"
        "# source: SPECTRL2, Bird & Riordan (1986), J. Clim. Appl. Meteorol. 25:87, as carried by pvlib\n"
        f"# conditions: sea level, "
        f"ozone {OZONE_ATM_CM:g} atm-cm, aerosol optical depth {TURBIDITY_500:g} at .5 um, "
        f"albedo {ALBEDO:g}\n"
        "# units: precipitable water in cm; sub-bands named by kind and lower edge in um; "
        "shares sum to 1 per kind;\n"
        "# diffuse_part: diffuse over global on the horizontal\n"
        f"# sha256 of the rows below the column line: {digest}\n"
        "cos_zenith,water_cm,diffuse_part," + ",".join(names) + "\n" + rows
    )


if __name__ == "__main__":
    (FOLDER / "sunlight-clear.csv").write_text(text(), encoding="utf-8")
