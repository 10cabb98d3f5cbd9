"""Heat cases for tests, made by hand: weather, coverings, screens, gains. No library, no study file."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from canopy.heatcase import Climate, CoveringHeat, CropHeat, HeatCase, Heating, Outside, Shell, SolarGain
from canopy.optics import Gap, Ground, Screen, SolarOptics, ThermalOptics
from canopy.skybands import sky_bands
from weather.psychro import vapour_pressure

Floats = NDArray[np.float64]
NONE = np.zeros(0)


def thermal(transmit: object, outside: object, inside: object | None = None) -> ThermalOptics:
    """Thermal optics from nested lists, (L, T)."""
    t, r = np.atleast_2d(np.array(transmit, float)), np.atleast_2d(np.array(outside, float))
    return ThermalOptics(t, r, r if inside is None else np.atleast_2d(np.array(inside, float)))


THREE = [1.0, 1.0, 1.0]
GLASS = CoveringHeat(
    thermal([0, 0, 0], [0.16] * 3), thermal([0, 0, 0], [0.16] * 3, [0.04] * 3), (8400.0,), (0.004,), ()
)
FILM = CoveringHeat(
    thermal([0.50, 0.75, 0.55], [0.08] * 3),
    thermal([0.10] * 3, [0.08] * 3, [0.05] * 3),
    (350.0,),
    (0.0005,),
    (),
)
DARK_FILM = CoveringHeat(
    thermal([0.50, 0.05, 0.50], [0.08] * 3),
    thermal([0.10, 0.03, 0.10], [0.08] * 3, [0.05] * 3),
    (350.0,),
    (0.0005,),
    (),
)
DOUBLE_FILM = CoveringHeat(
    thermal([[0.5, 0.75, 0.55]] * 2, [[0.08] * 3] * 2),
    thermal([[0.5, 0.75, 0.55], [0.1] * 3], [[0.08] * 3] * 2, [[0.08] * 3, [0.05] * 3]),
    (350.0, 350.0),
    (0.0005, 0.0005),
    (Gap(0.10),),
)
TWIN_WALL = CoveringHeat(
    thermal([[0.0] * 3] * 2, [[0.10] * 3] * 2),
    thermal([[0.0] * 3] * 2, [[0.10] * 3] * 2, [[0.10] * 3, [0.04] * 3]),
    (900.0, 900.0),
    (0.002, 0.002),
    (Gap(0.009, web_conductance=0.3),),
)


def solar_nothing() -> SolarOptics:
    """Solar optics that the heat side does not read."""
    return SolarOptics(NONE, NONE, NONE, NONE, NONE, NONE, NONE, NONE, NONE, NONE, NONE, NONE)


def cloth(transmit: float, reflect: float, permeability: float = 1.0, vapour_open: bool = True) -> Screen:
    """A grey screen."""
    t = thermal([transmit] * 3, [reflect] * 3)
    return Screen(
        "cloth", "cloth", "energy", "from memory", "test", solar_nothing(), t, 0.02, permeability,
        vapour_open, 150.0, 0.03,
    )  # fmt: skip


SOIL = Ground("soil", "soil", "from memory", "test", NONE, np.full(3, 0.95), 1.2, 2.0e6, 0.05, 0.2)


@lru_cache(maxsize=1)
def greensboro() -> tuple[Floats, Floats, Floats, Floats, Floats, Floats]:
    """The TMY3 year that pvlib carries: temperature, vapour, wind, pressure, global, long-wave (Prata)."""
    import pvlib

    file = Path(pvlib.__file__).parent / "data" / "723170TYA.CSV"
    data, _ = pvlib.iotools.read_tmy3(file, map_variables=True, coerce_year=1990)
    temp = data["temp_air"].to_numpy(float)
    vapour = vapour_pressure(temp, data["relative_humidity"].to_numpy(float), over="water")
    kelvin = temp + 273.15
    water = 46.5 * vapour / 100.0 / kelvin
    clear = 1.0 - (1.0 + water) * np.exp(-np.sqrt(1.2 + 3.0 * water))
    cloud = 0.05 * (1.0 + np.sin(np.arange(temp.size) / 37.0)) * 8.0 / 10.0
    sky = (clear + (1.0 - clear) * cloud) * 5.670374e-8 * kelvin**4
    wind = data["wind_speed"].to_numpy(float)
    return temp, vapour, wind, np.full(temp.size, 98900.0), data["ghi"].to_numpy(float), sky


def house(form: str = "gable", **changes: object) -> Shell:
    """A house of 3000 m2; arches with a gable's areas so that coverings can be compared."""
    shell = Shell(
        form=form, floor_area_m2=3000.0, roof_ratio=1.15, wall_ratio=0.25, roof_sky_view=0.9,  # type: ignore[arg-type]
        wall_sky_view=0.45, roof_slope_deg=24.0, mean_height_m=4.5, ridge_height_m=6.0,
        perimeter_per_floor=0.08, perimeter_loss=0.8, wind_factor=0.7, leakage_per_hour=1.0,
        vent_area_ratio=0.15, vent_factor=1.0,
    )  # fmt: skip
    return replace(shell, **changes)  # type: ignore[arg-type]


def case(
    hours: slice = slice(None),
    cover: CoveringHeat = GLASS,
    screens: tuple[Screen, ...] = (),
    *,
    shell: Shell | None = None,
    lai: float = 3.0,
    heat: float = 16.0,
    night: float | None = None,
    vent: float = 24.0,
    humidity: float = 100.0,
    gap: float | None = None,
    drawn: float | None = None,
    capacity: float = np.inf,
    pipe_m: float = 2.5,
    flow_max: float = 95.0,
    min_pipe: float = -np.inf,
    periodic: bool = False,
    sun: float = 0.65,
    weather: tuple[Floats, ...] | None = None,
    ground: Ground = SOIL,
) -> HeatCase:
    """A heat case on some hours of the Greensboro year, or on a record of your own."""
    temp, vapour, wind, pressure, ghi, sky = (x[hours] for x in weather or greensboro())
    n = temp.size
    clock = np.arange(8760)[hours] % 24 if weather is None else np.arange(n) % 24
    day = (clock >= 7) & (clock < 19)
    layers, in_house = len(cover.heat_capacity), ghi * sun
    draw = (ghi < 5.0) & (temp < 12.0) if drawn is None else np.full(n, drawn)

    def gain(factor: float) -> SolarGain:
        q = factor * in_house * (lai > 0.0)
        return SolarGain(
            0.6 * q, 0.4 * q, in_house * (0.15 if lai > 0.0 else 0.75),
            np.tile(0.05 * ghi, (layers, 1)), np.tile(0.02 * in_house, (len(screens), 1)), 0.03 * ghi,
        )  # fmt: skip

    return HeatCase(
        outside=Outside(3600.0, temp, vapour, pressure, wind, sky_bands(sky, temp, vapour), ghi > 0.0),
        shell=shell or house(),
        covering=cover,
        screens=screens,
        crop=CropHeat(
            np.full(n, lai), np.full(n, np.exp(-0.7 * lai)), np.full(3, 0.98), 0.5, np.full(n, 0.4 * lai)
        ),
        ground=ground,
        climate=Climate(
            np.where(day, heat, heat if night is None else night).astype(float), np.full(n, vent),
            np.full(n, humidity), np.tile(draw.astype(float), (len(screens), 1)), np.full(n, min_pipe),
            np.full(n, 5.0), None if gap is None else np.full(n, gap),
        ),
        heating=Heating(capacity, 0.051, pipe_m, flow_max),
        gain_dry=gain(1.0),
        gain_wet=gain(0.95),
        periodic=periodic,
    )  # fmt: skip


def steady_night(
    outside_c: float = -5.0, wind: float = 4.0, hours: int = 48, cloudy: bool = False, clear: float = 0.72
) -> tuple[Floats, ...]:
    """A night without end: steady temperature, dry air, wind; a clear or a black sky."""
    temp = np.full(hours, outside_c)
    vapour = vapour_pressure(temp, 70.0)
    black = 5.670374e-8 * (temp + 273.15) ** 4
    share = 1.0 if cloudy else clear
    zero = np.zeros(hours)
    return temp, vapour, np.full(hours, wind), np.full(hours, 101325.0), zero, share * black
