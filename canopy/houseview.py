"""What a grower sees of a house: light by month and by sun height, sky map, turning the ridge."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.house import House
from canopy.light import HouseTransmission, SunBands
from canopy.lightpath import Paths, trace
from canopy.optics import SolarOptics
from canopy.passing import Sheets
from canopy.rays import Floats
from canopy.sheettable import sheet_table
from canopy.skyparts import Hills, sky_shares
from weather.record import Site, Weather

PAR = SOLAR.index("par")
HEIGHT_EDGES_DEG = (0.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0, 90.0)
DIRECT_SUN_W_M2 = 120.0
"""Direct normal light from which an hour counts as sunshine: WMO-No. 8 (2018), ch. 8."""


@dataclass(frozen=True)
class MonthLight:
    """PAR at the crop plane by month, before light returns from the crop; (12,), NaN where there is none."""

    transmission: Floats
    transmission_beam: Floats
    transmission_diffuse: Floats
    diffuse_share_outside: Floats
    diffuse_share_inside: Floats
    dli_outside: Floats  # mol m-2 d-1
    dli_inside: Floats  # mol m-2 d-1 under covering and structure, no screen
    direct_sun_h: Floats  # hours of direct sun on the crop, sunlit share of the plane counted


@dataclass(frozen=True)
class HeightLight:
    """PAR transmission by height of the sun, energy-weighted; (H,), NaN where the sun does not stand."""

    low_deg: Floats
    high_deg: Floats
    hours: Floats
    transmission_beam: Floats
    transmission: Floats


@dataclass(frozen=True)
class PolarMap:
    """PAR transmission of the house for light from each direction, per unit on the horizontal."""

    zenith_deg: Floats  # (Z,) cell middles
    azimuth_deg: Floats  # (A,) cell middles, from north clockwise
    transmission: Floats  # (Z, A) straight and one bounce


@dataclass(frozen=True)
class SunPath:
    """The sun's way on one day of the year, where it is up."""

    title: str
    zenith_deg: Floats
    azimuth_deg: Floats


@dataclass(frozen=True)
class TurnTable:
    """PAR transmission with the ridge turned in steps; (R,). Winter is the darkest three months."""

    ridge_azimuth_deg: Floats
    year: Floats
    winter: Floats
    year_beam: Floats
    winter_beam: Floats


def _ratio(part: Floats, whole: Floats) -> Floats:
    """Return part / whole, NaN where the whole is nothing."""
    return np.asarray(np.where(whole > 0.0, part / np.where(whole > 0.0, whole, 1.0), np.nan))


def month_numbers(weather: Weather) -> NDArray[np.int64]:
    """Return the month (0 ... 11) of every hour."""
    return np.asarray(weather.time.astype("datetime64[M]").astype(np.int64) % 12)


def _par(house: HouseTransmission, sun: SunBands, weather: Weather) -> tuple[Floats, Floats, Floats, Floats]:
    """Return outside beam and diffuse PAR and what of each arrives, W/m2, (N,)."""
    up = np.maximum(np.cos(np.radians(weather.zenith)), 0.0)
    beam, diffuse = sun.direct[PAR] * up, sun.diffuse[PAR]
    arrives = beam * (house.beam[PAR] + house.beam_scattered[PAR])
    return beam, diffuse, arrives, diffuse * house.sky[PAR]


def by_month(house: HouseTransmission, sun: SunBands, weather: Weather) -> MonthLight:
    """Return the house's light by month, screens stowed and crop black."""
    month = month_numbers(weather)

    def total(values: Floats) -> Floats:
        return np.asarray(np.bincount(month, weights=values, minlength=12), dtype=np.float64)

    beam, diffuse, beam_in, diffuse_in = _par(house, sun, weather)
    still_beam = beam * house.beam[PAR]
    days = total(np.full(len(weather), weather.step_s / 86400.0))
    outside = total(beam + diffuse)
    inside = total(beam_in + diffuse_in)
    mol = weather.step_s * 1e-6
    photons_out = beam * sun.direct_umol_per_j + diffuse * sun.diffuse_umol_per_j
    photons_in = beam_in * sun.direct_umol_per_j + diffuse_in * sun.diffuse_umol_per_j
    sunshine = (weather.dni >= DIRECT_SUN_W_M2) * house.sunny * weather.step_s / 3600.0
    return MonthLight(
        transmission=_ratio(inside, outside),
        transmission_beam=_ratio(total(beam_in), total(beam)),
        transmission_diffuse=_ratio(total(diffuse_in), total(diffuse)),
        diffuse_share_outside=_ratio(total(diffuse), outside),
        diffuse_share_inside=_ratio(inside - total(still_beam), inside),
        dli_outside=_ratio(total(photons_out) * mol, days),
        dli_inside=_ratio(total(photons_in) * mol, days),
        direct_sun_h=total(sunshine),
    )


def by_height(house: HouseTransmission, sun: SunBands, weather: Weather) -> HeightLight:
    """Return the house's PAR transmission by height of the sun."""
    edges = np.array(HEIGHT_EDGES_DEG)
    height = 90.0 - weather.zenith
    place = np.where(
        height > 0.0, np.clip(np.searchsorted(edges, height, side="right") - 1, 0, len(edges) - 2), -1
    )
    up = place >= 0

    def total(values: Floats) -> Floats:
        return np.asarray(
            np.bincount(place[up], weights=values[up], minlength=len(edges) - 1), dtype=np.float64
        )

    beam, diffuse, beam_in, diffuse_in = _par(house, sun, weather)
    return HeightLight(
        low_deg=edges[:-1],
        high_deg=edges[1:],
        hours=total(np.full(len(weather), weather.step_s / 3600.0)),
        transmission_beam=_ratio(total(beam_in), total(beam)),
        transmission=_ratio(total(beam_in + diffuse_in), total(beam + diffuse)),
    )


def _arrives(paths: Paths, solar: SolarOptics) -> Floats:
    """Return PAR transmission, straight and one bounce, for every direction of a trace."""
    table = sheet_table(solar)
    passed = paths.roof.give(Sheets(table, table, table))
    return np.asarray(passed.straight[PAR] + passed.bounce[PAR])


def polar_map(house: House, solar: SolarOptics, *, step_deg: float = 5.0) -> PolarMap:
    """Return the house's transmission over the whole sky in cells of step x 2 step degrees."""
    zenith = np.arange(0.5 * step_deg, 90.0, step_deg)
    azimuth = np.arange(step_deg, 360.0, 2.0 * step_deg)
    grid_zenith, grid_azimuth = np.meshgrid(zenith, azimuth, indexing="ij")
    paths = trace(house, grid_zenith.ravel(), grid_azimuth.ravel())
    values = _arrives(paths, solar)[: grid_zenith.size]
    return PolarMap(zenith, azimuth, values.reshape(grid_zenith.shape))


def sun_paths(site: Site) -> tuple[SunPath, ...]:
    """Return the sun's way on 21 December, March and June in steps of 10 minutes (pvlib)."""
    import pandas as pd
    from pvlib.solarposition import get_solarposition

    found = []
    for title, day in (("21 December", "12-21"), ("21 March", "03-21"), ("21 June", "06-21")):
        # start at the place's own midnight, so that a path is one unbroken line
        start = pd.Timestamp(f"1990-{day}", tz="UTC") - pd.Timedelta(hours=site.longitude / 15.0)
        times = pd.date_range(start, periods=144, freq="10min")
        sun = get_solarposition(times, site.latitude, site.longitude, altitude=site.elevation)
        up = sun["apparent_zenith"].to_numpy() < 90.0
        found.append(SunPath(title, sun["apparent_zenith"].to_numpy()[up], sun["azimuth"].to_numpy()[up]))
    return tuple(found)


@dataclass(frozen=True)
class _Suns:
    """Suns of a year gathered by half-month and hour of day, with the light they stand for, (G,)."""

    zenith: Floats
    azimuth: Floats
    beam: Floats
    around: Floats  # circumsolar light
    winter: NDArray[np.bool_]
    dome: tuple[float, float]  # isotropic light, year and winter
    band: tuple[float, float]


def _gather(weather: Weather) -> _Suns:
    """Gather a year's suns: mean direction by energy of each half-month and hour of day."""
    up = np.cos(np.radians(weather.zenith))
    beam = weather.dni * np.maximum(up, 0.0)
    shares = sky_shares(weather)
    around, dome, band = (weather.dhi * s for s in (shares.circumsolar, shares.dome, shares.band))
    month = month_numbers(weather)
    light = np.bincount(month, weights=weather.ghi, minlength=12)
    darkest = int(np.argmin([light[m] + light[(m + 1) % 12] + light[(m + 2) % 12] for m in range(12)]))
    winter = np.isin(month, [(darkest + k) % 12 for k in range(3)])
    days = weather.time.astype("datetime64[D]")
    second = (days - days.astype("datetime64[M]")).astype(int) >= 15
    hour = (weather.time - days).astype("timedelta64[h]").astype(int)
    group = (month * 2 + second) * 24 + hour
    flat, turn = np.sin(np.radians(weather.zenith)), np.radians(weather.azimuth)
    weight = np.where(weather.zenith < 90.0, beam + around, 0.0)
    size = 24 * 24
    x, y, z, energy = (
        np.bincount(group, weights=weight * v, minlength=size)
        for v in (flat * np.sin(turn), flat * np.cos(turn), np.maximum(up, 0.0), np.ones_like(up))
    )
    use = energy > 0.0
    light_of = {
        name: np.asarray(
            np.bincount(group, weights=v * (weight > 0.0), minlength=size)[use], dtype=np.float64
        )
        for name, v in (("beam", beam), ("around", around))
    }
    season = np.bincount(group, weights=winter, minlength=size) > 0.0
    return _Suns(
        zenith=np.degrees(np.arctan2(np.hypot(x, y), z))[use],
        azimuth=np.degrees(np.arctan2(x, y))[use] % 360.0,
        beam=light_of["beam"],
        around=light_of["around"],
        winter=season[use],
        dome=(float(dome.sum()), float(dome[winter].sum())),
        band=(float(band.sum()), float(band[winter].sum())),
    )


def turn_table(
    house: House,
    solar: SolarOptics,
    weather: Weather,
    *,
    step_deg: float = 15.0,
    horizon: Hills | None = None,
) -> TurnTable:
    """Return what turning the ridge in steps from 0 to below 180 degrees does to PAR at the crop plane.

    A year's suns are gathered by half-month and hour of day. On open ground all steps are one trace, with the
    suns turned about one house; with hills round the house every step is traced anew.
    """
    suns = _gather(weather)
    ridge = np.arange(0.0, 180.0 - 1e-9, step_deg)
    if horizon is None:
        turned = (house.ridge_azimuth + suns.azimuth - ridge[:, None]).ravel()
        parts = _parts(trace(house, np.tile(suns.zenith, len(ridge)), turned), solar)
        every = [(row, *parts[1:]) for row in parts[0].reshape(len(ridge), -1)]
    else:
        every = [
            _parts(
                trace(replace(house, ridge_azimuth=float(a)), suns.zenith, suns.azimuth, horizon=horizon),
                solar,
            )
            for a in ridge
        ]
    rows = []
    for direct, dome, band in every:
        row = []
        for use, k in ((np.ones(len(suns.zenith), dtype=bool), 0), (suns.winter, 1)):
            beam, around = suns.beam[use], suns.around[use]
            inside = (beam + around) @ direct[use] + suns.dome[k] * dome + suns.band[k] * band
            row += [inside / (beam.sum() + around.sum() + suns.dome[k] + suns.band[k])]
            row += [beam @ direct[use] / max(float(beam.sum()), 1e-12)]
        rows.append(row)
    table = np.array(rows)
    return TurnTable(ridge, table[:, 0], table[:, 2], table[:, 1], table[:, 3])


def _parts(paths: Paths, solar: SolarOptics) -> tuple[Floats, float, float]:
    """Return what arrives of each sun's light (0 below the horizon), of the dome and of the band."""
    arrives = _arrives(paths, solar)
    count = len(paths.day)
    direct = np.zeros(paths.hours)
    direct[paths.day] = arrives[:count] * paths.visible
    sky = arrives[count:]
    return direct, float(sky @ paths.grid.dome), float(sky @ paths.grid.band)
