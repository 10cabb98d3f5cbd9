"""Outside sunlight hour by hour in solar bands: clear-sky spectra by sun height and water vapour, and cloud.

Clear spectra come from SPECTRL2 (Bird & Riordan 1986), tabled on cos zenith x water vapour in
data/materials/sunlight-clear.csv; straight lines in ln(cos zenith) and ln(water) between rows: no band is off
by more than .2 % of all light, from a sun at 2 degrees up.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR, BandSet
from canopy.light import SunBands
from canopy.materials import read_table, reference_sunlight
from canopy.planck import PHOTON_UMOL_PER_J_UM, band_share
from weather.constants import SUN_TEMPERATURE_K
from weather.record import Weather

Floats = NDArray[np.float64]

COS_NODES: Final = (0.02, 0.03, 0.045, 0.065, 0.09, 0.125, 0.18, 0.26, 0.40, 0.64, 1.0)
WATER_NODES: Final = (0.1, 0.2, 0.4, 0.7, 1.1, 1.7, 2.7, 4.3, 7.0)
EDGES: Final = (
    *(0.28, 0.32, 0.36),
    *(round(0.40 + 0.02 * i, 2) for i in range(15)),
    *(0.70, 0.75, 0.80, 0.90, 1.00, 1.10, 1.20, 1.35, 1.50, 1.80, 2.00, 2.50, 2.80),
)
"""Sub-bands of the table, µm."""

SEA_LEVEL_PA: Final = 101_325.0
VISIBLE_SCALE: Final = 0.993
"""On the UV and PAR share of SPECTRL2, which lies .3 % above ASTM G173 (same tilt and air) and 3-5 % above
one roof's record: a choice between the two. Clear hours carry .44 and 2.02 µmol/J; hourly measurements give
.460 and 1.97 (Theor. Appl. Climatol. 74:227)."""
CLOUD_POWER: Final = 0.06
"""UV and PAR share of cloud light grows as (ghi / clear-sky ghi)^-.06, 1.075 at .3: between what one hourly
study found for energy (.460 clear to .501 overcast) and for photons (1.97 to 2.10 µmol/J; Theor. Appl.
Climatol. 74:227), which differ by more than 4.57 µmol/J allows; one roof's record gave .07."""
CLEARNESS_MIN: Final = 0.10


@dataclass(frozen=True)
class ClearTable:
    """Clear-sky shares per band on the table's grid, (cos, water, column)."""

    direct: Floats  # (C, W, B) shares of .28-2.8 µm
    diffuse: Floats  # (C, W, B)
    direct_photons: Floats  # (C, W) µmol of PAR photons per joule of .28-2.8 µm
    diffuse_photons: Floats  # (C, W)
    diffuse_part: Floats  # (C, W) diffuse over global on the horizontal
    visible: Floats  # (B,) share of each band that lies below .70 µm


@lru_cache(maxsize=8)
def clear_table(bands: BandSet = SOLAR) -> ClearTable:
    """Return the shipped table in the given bands, which must span .28-2.80 µm.

    Bands that cut a sub-band of the table share it out by ASTM G173; totals stay the same.
    """
    if abs(bands.edges[0] - EDGES[0]) > 1e-9 or abs(bands.edges[-1] - EDGES[-1]) > 1e-9:
        raise ValueError(f"solar bands must span .28-2.80 µm, found {bands.edges[0]}-{bands.edges[-1]}")
    grid = read_table("sunlight-clear").values.reshape(len(COS_NODES), len(WATER_NODES), -1)
    count = len(EDGES) - 1
    direct, diffuse = grid[..., 3 : 3 + count], grid[..., 3 + count :]
    edges = np.array(EDGES)
    direct, diffuse = _scaled(direct, edges), _scaled(diffuse, edges)
    share = _sharing(bands)
    par = (edges[:-1] >= 0.40 - 1e-9) & (edges[1:] <= 0.70 + 1e-9)
    photons = np.where(par, 0.5 * (edges[1:] + edges[:-1]) * PHOTON_UMOL_PER_J_UM, 0.0)
    visible = np.clip((0.70 - bands.lower) / (bands.upper - bands.lower), 0.0, 1.0)
    return ClearTable(
        direct @ share, diffuse @ share, direct @ photons, diffuse @ photons, grid[..., 2], visible
    )


def _scaled(shares: Floats, edges: Floats) -> Floats:
    """Return shares that sum to 1 with all below .70 µm times VISIBLE_SCALE."""
    seen = edges[1:] <= 0.70 + 1e-9
    shares = shares / shares.sum(axis=-1, keepdims=True)
    total = shares[..., seen].sum(axis=-1, keepdims=True)
    rest = (1.0 - VISIBLE_SCALE * total) / (1.0 - total)
    return np.asarray(np.where(seen, shares * VISIBLE_SCALE, shares * rest))


def _sharing(bands: BandSet) -> Floats:
    """Return the share of each sub-band in each band, (K, B), by ASTM G173 energy."""
    w, s = reference_sunlight()
    run = np.concatenate([[0.0], np.cumsum(0.5 * (s[1:] + s[:-1]) * np.diff(w))])
    low, high = np.array(EDGES[:-1])[:, None], np.array(EDGES[1:])[:, None]
    start, stop = np.maximum(low, bands.lower), np.minimum(high, bands.upper)

    def below(x: Floats) -> Floats:
        return np.asarray(np.interp(x, w, run))

    part = np.where(stop > start, below(stop) - below(np.minimum(start, stop)), 0.0)
    return np.asarray(part / (below(high) - below(low)))


def split(weather: Weather, bands: BandSet = SOLAR) -> SunBands:
    """Return beam and diffuse sunlight in solar bands; they sum to dni and dhi in every hour.

    A pyranometer's .28-2.8 µm are taken for all of it. Diffuse light is blue sky as far as beam comes
    through, the rest is cloud light: the spectrum of clear global light with its UV and PAR raised by
    (ghi/ghi_clear)^-.06. Photons per joule count 400-700 nm.
    """
    table = clear_table(bands)
    cos_z = np.maximum(np.cos(np.radians(weather.zenith)), 0.0)
    air = np.minimum(cos_z * SEA_LEVEL_PA / weather.pressure, 1.0)  # as much air as this sun at sea level
    corner, weight = _corners(air, weather.precipitable_water)

    def at(values: Floats) -> Floats:
        flat = values.reshape(len(COS_NODES) * len(WATER_NODES), -1)
        return np.asarray(sum(weight[i] * flat[corner[i]].T for i in range(4)))  # (columns, N)

    direct, blue = at(table.direct), at(table.diffuse)
    photons_direct, photons_blue = at(table.direct_photons)[0], at(table.diffuse_photons)[0]
    part = at(table.diffuse_part)[0]
    clear = np.maximum(weather.ghi_clear, 1e-6)
    open_sky = np.clip(weather.dni * cos_z / np.maximum((1.0 - part) * clear, 1e-6), 0.0, 1.0)
    dhi = np.maximum(weather.dhi, 1e-9)
    of_blue = np.minimum(open_sky * part * clear / dhi, 1.0)
    grey = part * blue + (1.0 - part) * direct
    photons_grey = part * photons_blue + (1.0 - part) * photons_direct
    lift = np.clip(weather.ghi / clear, CLEARNESS_MIN, 1.0) ** -CLOUD_POWER
    grey, lift = _lifted(grey, table.visible, lift)
    photons_grey = photons_grey * lift
    diffuse = of_blue * blue + (1.0 - of_blue) * grey
    photons_diffuse = of_blue * photons_blue + (1.0 - of_blue) * photons_grey
    par = _par_share(bands)
    return SunBands(
        direct=direct / direct.sum(axis=0) * weather.dni,
        diffuse=diffuse / diffuse.sum(axis=0) * weather.dhi,
        direct_umol_per_j=photons_direct / (par @ direct),
        diffuse_umol_per_j=photons_diffuse / (par @ diffuse),
    )


def _par_share(bands: BandSet) -> Floats:
    """Return the share of each band that lies in .40-.70 µm, (B,); bands must not straddle these edges."""
    inside = np.minimum(bands.upper, 0.70) - np.maximum(bands.lower, 0.40)
    return np.asarray(np.clip(inside / (bands.upper - bands.lower), 0.0, 1.0))


def _lifted(shares: Floats, visible: Floats, lift: Floats) -> tuple[Floats, Floats]:
    """Return shares with all below .70 µm times `lift` (N,), NIR lowered so that they still sum to 1."""
    seen = visible @ shares
    lift = np.minimum(lift, 0.95 / np.maximum(seen, 1e-6))
    rest = (1.0 - lift * seen) / (1.0 - seen)
    return np.asarray(shares * (visible[:, None] * lift + (1.0 - visible)[:, None] * rest)), lift


def _corners(cos_z: Floats, water_cm: Floats) -> tuple[list[NDArray[np.intp]], list[Floats]]:
    """Return flat table rows and weights of the four neighbours, straight in ln(cos z) and ln(water)."""
    x, y = np.log(np.array(COS_NODES)), np.log(np.array(WATER_NODES))
    c = np.log(np.clip(cos_z, COS_NODES[0], COS_NODES[-1]))
    v = np.clip(np.log(np.maximum(water_cm, 1e-3)), y[0], y[-1])
    i = np.clip(np.searchsorted(x, c, side="right") - 1, 0, x.size - 2)
    j = np.clip(np.searchsorted(y, v, side="right") - 1, 0, y.size - 2)
    p = (c - x[i]) / (x[i + 1] - x[i])
    q = (v - y[j]) / (y[j + 1] - y[j])
    row = i * y.size + j
    corner = [row, row + 1, row + y.size, row + y.size + 1]
    return corner, [(1 - p) * (1 - q), (1 - p) * q, p * (1 - q), p * q]


def reference_split(bands: BandSet = SOLAR) -> Floats:
    """Return ASTM G173 global sunlight in bands, W/m2 (B,): for rating figures."""
    w, s = reference_sunlight()
    run = np.concatenate([[0.0], np.cumsum(0.5 * (s[1:] + s[:-1]) * np.diff(w))])
    return np.asarray(np.diff(np.interp(np.array(bands.edges), w, run)))


def blackbody_split(bands: BandSet = SOLAR, temp_k: float = SUN_TEMPERATURE_K) -> Floats:
    """Return shares of the bands in a blackbody sun, (B,), of all its power: a cross-check, not a source."""
    return band_share(bands.lower, bands.upper, temp_k)
