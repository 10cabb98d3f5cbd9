"""What a grower sees of a house: sky map, sun paths, turning the ridge."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.house import House
from canopy.lightpath import Paths, trace
from canopy.optics import SolarOptics
from canopy.passing import Sheets
from canopy.rays import Floats
from canopy.sheettable import sheet_table
from canopy.skyparts import Hills, sky_shares
from weather.record import Site, Weather

PAR = SOLAR.index("par")


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


def month_numbers(weather: Weather) -> NDArray[np.int64]:
    """Return the month (0 ... 11) of every hour."""
    return np.asarray(weather.time.astype("datetime64[M]").astype(np.int64) % 12)


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
