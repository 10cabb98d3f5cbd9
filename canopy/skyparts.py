"""Parts of the sky as a house sees them: isotropic dome, circumsolar disc, horizon band, hills.

The dome is integrated on 24 x 12 Gauss points per quadrant (elevation x azimuth from the ridge), which keeps
whole-house transmission within 1e-4 of a 400 x 200 grid. Circumsolar and horizon shares are the brightness
coefficients F1, F2 of Perez et al. (1990), Solar Energy 44:271.
"""

from __future__ import annotations

import weakref
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.house import House
from weather.errors import UserError
from weather.record import Weather

Floats = NDArray[np.float64]
Hills = tuple[tuple[float, float], ...]

ELEVATIONS, AZIMUTHS, BAND_ELEVATIONS = 24, 12, 3
BAND_TOP_DEG = 6.5
"""Upper edge of the horizon band, Perez et al. (1987), Solar Energy 39:221."""
BAND_PLAN = float(np.pi * np.sin(np.radians(BAND_TOP_DEG)) ** 2 / (2.0 * np.radians(BAND_TOP_DEG)))
"""Light on the horizontal from a band that gives 1 on an upright plane (where F2 is defined)."""


@dataclass(frozen=True)
class SkyGrid:
    """Directions that stand for the whole sky, (Q,), and their weights on the horizontal."""

    zenith_deg: Floats
    azimuth_deg: Floats
    dome: Floats  # isotropic dome, hills cut out
    hills: Floats  # the part of the isotropic dome that hills hide
    band: Floats  # horizon band, hills cut out


@dataclass(frozen=True)
class SkyShares:
    """Shares of the diffuse light on the horizontal, (N,); the dome takes the rest."""

    circumsolar: Floats
    band: Floats  # negative under an overcast sky, which is darker near the horizon
    ground: Floats  # light from the ground outside (albedo x ghi) per unit of diffuse light

    @property
    def dome(self) -> Floats:
        """Share of the isotropic dome."""
        return 1.0 - self.circumsolar - self.band


def check_hills(horizon: Hills | None) -> None:
    """Refuse a horizon profile that is not a list of (azimuth, elevation) in degrees, azimuth rising."""
    if horizon is None:
        return
    last = -1.0
    for azimuth, elevation in horizon:
        if not (0.0 <= azimuth <= 360.0 and azimuth > last):
            raise UserError(f"horizon: azimuth {azimuth:g}; degrees from north, rising from 0 to 360")
        if not 0.0 <= elevation < 90.0:
            raise UserError(f"horizon: elevation {elevation:g} at azimuth {azimuth:g}; 0 to below 90 degrees")
        last = azimuth


def hill_height(horizon: Hills | None, azimuth_deg: Floats) -> Floats:
    """Return the height of hills in degrees at azimuths, straight lines between the given points."""
    if not horizon:
        return np.zeros_like(azimuth_deg)
    table = np.array(horizon, dtype=float)
    height: Floats = np.interp(np.mod(azimuth_deg, 360.0), table[:, 0], table[:, 1], period=360.0)
    return height


def sky_grid(house: House, horizon: Hills | None) -> SkyGrid:
    """Return the directions to trace for one house; mirror images of the house share a direction."""
    even = house.form == "arch" or house.pitch == house.pitch_other
    node, weight = np.polynomial.legendre.leggauss(AZIMUTHS)
    from_ridge, turn_weight = 45.0 * (node + 1.0), 0.5 * weight
    parts = []
    for top, count in ((90.0, ELEVATIONS), (BAND_TOP_DEG, BAND_ELEVATIONS)):
        node, weight = np.polynomial.legendre.leggauss(count)
        height = 0.5 * top * (node + 1.0)
        plan = weight * np.sin(2.0 * np.radians(height))
        plan /= plan.sum()
        edges = np.concatenate([[0.0], np.cumsum(plan)]) * np.sin(np.radians(top)) ** 2
        for start in (0.0,) if even else (0.0, 180.0):
            seen = np.zeros((count, AZIMUTHS))
            signs = ((1, 0), (-1, 180)) + (((-1, 0), (1, 180)) if even else ())
            for sign, base in signs:
                azimuth = house.ridge_azimuth + start + base + sign * from_ridge
                hidden = np.sin(np.radians(hill_height(horizon, azimuth))) ** 2
                cell = np.clip((hidden - edges[:-1, None]) / np.diff(edges)[:, None], 0.0, 1.0)
                seen += (1.0 - cell) / len(signs)
            whole = np.outer(plan, turn_weight) / (1.0 if even else 2.0)
            zenith, turn = np.meshgrid(90.0 - height, house.ridge_azimuth + start + from_ridge, indexing="ij")
            parts.append((zenith.ravel(), turn.ravel(), (whole * seen).ravel(), whole.ravel(), top == 90.0))
    zenith = np.concatenate([p[0] for p in parts])
    turn = np.concatenate([p[1] for p in parts])
    dome = np.concatenate([p[2] * p[4] for p in parts])
    hills = np.concatenate([(p[3] - p[2]) * p[4] for p in parts])
    band = np.concatenate([p[2] * (not p[4]) for p in parts])
    return SkyGrid(zenith, turn, dome, hills, band)


def sky_shares(weather: Weather) -> SkyShares:
    """Return the shares of circumsolar, horizon and ground light, hour by hour; kept per weather record."""
    known = _KEPT.get(id(weather))
    if known is not None and known[0]() is weather:
        return known[1]
    shares = _sky_shares(weather)
    _KEPT[id(weather)] = (weakref.ref(weather), shares)
    for key in [k for k, (ref, _) in _KEPT.items() if ref() is None]:
        del _KEPT[key]
    return shares


_KEPT: dict[int, tuple[weakref.ref[Weather], SkyShares]] = {}


def _sky_shares(weather: Weather) -> SkyShares:
    """Read F1 and F2 off pvlib's Perez model on an upright plane that faces the sun."""
    from pvlib.atmosphere import get_relative_airmass
    from pvlib.irradiance import perez

    n = len(weather)
    circumsolar, band, ground = np.zeros(n), np.zeros(n), np.zeros(n)
    lit = np.flatnonzero((weather.dhi > 0.0) & (weather.zenith < 90.0))
    zenith, dhi = weather.zenith[lit], weather.dhi[lit]
    if len(lit):
        with np.errstate(all="ignore"):
            parts = perez(
                90.0,
                weather.azimuth[lit],
                dhi,
                weather.dni[lit],
                weather.dni_extra[lit],
                zenith,
                weather.azimuth[lit],
                get_relative_airmass(zenith),
                return_components=True,
            )
        # pvlib names the parts "isotropic", ... or "poa_isotropic", ... depending on its release
        dome, around, upright = (
            np.nan_to_num(np.asarray(parts[name if name in parts else f"poa_{name}"]), nan=0.0)
            for name in ("isotropic", "circumsolar", "horizon")
        )
        # eq. 9: isotropic = dhi (1 - F1) / 2 on an upright plane; nothing at all where the model was cut at 0
        known = (dome > 0.0) | (around > 0.0)
        f1 = np.where(known, np.clip(1.0 - 2.0 * dome / dhi, 0.0, 1.0), 0.0)
        f2 = np.where(known, upright / dhi, 0.0)
        circumsolar[lit] = f1
        band[lit] = np.minimum(f2 * BAND_PLAN, 1.0 - f1)
    some = weather.dhi > 0.0
    ground[some] = weather.albedo[some] * weather.ghi[some] / weather.dhi[some]
    return SkyShares(circumsolar, band, ground)
