"""Light of sun and sky into one house: geometry once (`trace`), a covering in one state on it (`transmit`).

`trace` knows nothing of materials: for every daylight hour and every direction of the sky grid it lists which
sheets light crosses on its way to the crop plane, straight and with one mirror bounce. `transmit` multiplies
these lists with what the sheets pass. A hundred coverings share one trace.

Left out: second bounces, and light that comes in through one gable end and is mirrored by the other (a sun
along the ridge that stands lower than height above the crop over length, 3-6 degrees in usual houses).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from canopy.archlight import ArchLight, arch_light
from canopy.gablelight import GableLight, gable_light
from canopy.house import House, check_shape
from canopy.light import HouseTransmission
from canopy.optics import SolarOptics
from canopy.passing import Passed, Sheets
from canopy.rays import Floats, Ints, house_rays
from canopy.sheettable import SheetTable, sheet_table
from canopy.skyparts import Hills, SkyGrid, check_hills, hill_height, sky_grid, sky_shares
from canopy.structure import upright_per_floor
from weather.record import Weather

RoofLight = GableLight | ArchLight


@dataclass(frozen=True)
class Paths:
    """Geometry of light in one house: D daylight hours first, then Q directions of the sky grid."""

    house: House
    hours: int
    day: Ints  # (D,) hours with the sun above the horizon
    visible: Floats  # (D,) 0 where hills hide the sun
    grid: SkyGrid
    roof: RoofLight
    horizon: Hills | None

    @property
    def sunny(self) -> Floats:
        """(N,) share of the crop plane that the straight beam reaches."""
        sunny = np.zeros(self.hours)
        sunny[self.day] = self.roof.sunny[: len(self.day)] * self.visible
        return sunny

    @property
    def sky_open(self) -> float:
        """Share of an isotropic sky's light that gutters, ridges and bars leave free."""
        return float((self.grid.dome + self.grid.hills) @ self.roof.sunny[len(self.day) :])

    @property
    def down(self) -> float:
        """Share of isotropic light from the crop plane that the first face mirrors downwards."""
        return float((self.grid.dome + self.grid.hills) @ self.roof.down[len(self.day) :])


def trace(house: House, zenith_deg: Floats, azimuth_deg: Floats, *, horizon: Hills | None = None) -> Paths:
    """Trace a house for suns (N,), degrees (apparent zenith; azimuth from north, clockwise).

    `horizon` gives hills as ((azimuth, elevation), ...) in degrees. Hours with zenith >= 90 carry no beam.

    Raises
    ------
    UserError
        For an impossible house or horizon.
    """
    check_shape(house)
    check_hills(horizon)
    zenith, azimuth = np.asarray(zenith_deg, dtype=float), np.asarray(azimuth_deg, dtype=float)
    day = np.flatnonzero(zenith < 90.0)
    grid = sky_grid(house, horizon)
    rays = house_rays(
        house,
        np.concatenate([zenith[day], grid.zenith_deg]),
        np.concatenate([azimuth[day], grid.azimuth_deg]),
    )
    visible = (90.0 - zenith[day] > hill_height(horizon, azimuth[day])) if horizon else np.ones(len(day))
    roof: RoofLight = arch_light(house, rays) if house.form == "arch" else gable_light(house, rays)
    return Paths(house, len(zenith), day, np.asarray(visible, dtype=float), grid, roof, horizon)


def transmit(
    paths: Paths,
    solar: SolarOptics,
    weather: Weather,
    *,
    walls: SolarOptics | None = None,
    gables: SolarOptics | None = None,
) -> HouseTransmission:
    """Give a traced house its covering in one state (dry or wet), for the hours of `weather`.

    `walls` and `gables` cover side walls and gable ends where these differ from the roof. Scattered light is
    followed along the way of its beam: lobes of horticultural coverings are narrow against the hemisphere.
    """
    table = sheet_table(solar)
    layers = solar.beam_absorbed.shape[0]
    sheets = Sheets(table, _other(walls, table, layers), _other(gables, table, layers))
    passed = paths.roof.give(sheets)
    return _Filler(paths, solar, walls or solar, weather, passed, layers).fill()


def _other(solar: SolarOptics | None, roof: SheetTable, layers: int) -> SheetTable:
    """Return the table of another covering with its layers folded into the roof's number of layers."""
    if solar is None:
        return roof
    table = sheet_table(solar)
    bands = solar.beam_beam.shape[0]
    absorbed = table.absorbed.reshape(-1, bands, table.absorbed.shape[1])
    folded = np.zeros((layers, *absorbed.shape[1:]))
    for i, layer in enumerate(absorbed):
        folded[min(i, layers - 1)] += layer
    return SheetTable(
        table.beam, table.total, table.reflect, table.specular, folded.reshape(layers * bands, -1), table.hazy
    )


@dataclass(frozen=True)
class _Filler:
    """Puts sun and sky parts together for all hours."""

    paths: Paths
    solar: SolarOptics
    walls: SolarOptics
    weather: Weather
    passed: Passed
    layers: int

    def fill(self) -> HouseTransmission:
        """Return the record."""
        paths, passed = self.paths, self.passed
        days, bands = len(paths.day), passed.beam.shape[0]
        arrives = passed.straight + passed.bounce
        grid = paths.grid
        sky_side = arrives[:, days:]
        dome, hills, band = sky_side @ grid.dome, sky_side @ grid.hills, sky_side @ grid.band
        beam = passed.beam[:, :days] * paths.visible
        direct = arrives[:, :days] * paths.visible
        sky = self._sky(direct, dome, hills, band)
        kept = passed.absorbed
        kept_beam = kept[:, :, :days] * paths.visible
        kept_dome = kept[:, :, days:] @ (grid.dome + grid.hills)
        sunny = paths.sunny
        stopped = np.zeros(paths.hours)
        stopped[paths.day] = (1.0 - paths.roof.sunny[:days]) * paths.visible
        shares = sky_shares(self.weather)
        around = shares.circumsolar
        sky_stopped = around * stopped + (1.0 - around) * (1.0 - paths.sky_open)
        kept_sky = np.repeat(kept_dome[:, :, None], paths.hours, axis=2) * (1.0 - around)
        kept_sky[:, :, paths.day] += kept_beam * around[paths.day]
        return HouseTransmission(
            beam=self._hours(beam),
            beam_scattered=self._hours(direct - beam),
            sky=sky,
            isotropic=dome + hills,
            covering_beam=self._hours(kept_beam),
            covering_sky=kept_sky,
            structure_beam=np.broadcast_to(stopped, (bands, paths.hours)),
            structure_sky=np.broadcast_to(sky_stopped, (bands, paths.hours)),
            return_down=self._return_down(),
            sunny=sunny,
            covering_up=self._kept_up(),
        )

    def _hours(self, values: Floats) -> Floats:
        """Spread values of the daylight hours over all hours (last axis)."""
        out = np.zeros((*values.shape[:-1], self.paths.hours))
        out[..., self.paths.day] = values
        return out

    def _sky(self, direct: Floats, dome: Floats, hills: Floats, band: Floats) -> Floats:
        """Return the diffuse part: dome, sun's surroundings, horizon band, hills and the ground outside."""
        shares = sky_shares(self.weather)
        sky = dome[:, None] * shares.dome + band[:, None] * shares.band
        sky[:, self.paths.day] += direct * shares.circumsolar[self.paths.day]
        # hills are as bright as the ground before them: albedo x ghi on the horizontal
        sky += (hills + self._ground())[:, None] * shares.ground
        np.maximum(sky, 0.0, out=sky)
        return sky

    def _ground(self) -> Floats:
        """Return the light from the ground outside that the roof's inside throws down to the crop, (B,).

        Upright faces see the ground with a view factor of 1/2; what they let in goes up to the roof.
        """
        side, gable = upright_per_floor(self.paths.house)
        return 0.5 * (side + gable) * self.walls.diffuse_in * self.solar.reflect_inside * self.paths.down

    def _return_down(self) -> Floats:
        """Return the share of upward light that comes back: first face mirrors down, or a later one does."""
        reflect, down = self.solar.reflect_inside, self.paths.down
        back: Floats = reflect * down / (1.0 - reflect * (1.0 - down))
        return back

    def _kept_up(self) -> Floats:
        """Return the share of upward light that each layer keeps, second faces included, (L, B)."""
        again = 1.0 - self.solar.reflect_inside * (1.0 - self.paths.down)
        kept: Floats = self.solar.absorbed_from_inside * self.paths.sky_open / again
        return kept
