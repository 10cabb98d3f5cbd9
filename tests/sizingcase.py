"""A small heated glasshouse for sizing tests: plain records, real weather shape, no study file."""

from __future__ import annotations

import numpy as np

from canopy.bands import THERMAL
from canopy.heatcase import (
    Climate,
    CoveringHeat,
    CropHeat,
    HeatCase,
    Heating,
    Outside,
    Shell,
    SolarGain,
)
from canopy.optics import Gap, Ground, Screen, SolarOptics, ThermalOptics
from canopy.skybands import sky_bands
from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K

T = len(THERMAL)


def sheet(transmit: float, emissivity: float, layers: int = 1) -> ThermalOptics:
    """Return grey layers with the same emissivity on both faces."""
    shape = (layers, T)
    back = np.full(shape, 1.0 - transmit - emissivity)
    return ThermalOptics(np.full(shape, transmit), back, back)


def glass() -> CoveringHeat:
    """Return 4 mm float glass: opaque to long-wave, emissivity .837 and conductivity 1 W/mK (EN 673)."""
    one = sheet(0.0, 0.837)
    return CoveringHeat(one, one, (8400.0,), (0.004,), ())


def twin_film() -> CoveringHeat:
    """Return a double film with an air gap."""
    two = sheet(0.3, 0.6, 2)
    return CoveringHeat(two, two, (350.0, 350.0), (0.0005, 0.0005), (Gap(0.05),))


def shell() -> Shell:
    """Return a 4800 m2 multi-span: numbers as of ten 8 m spans, 60 m long, 4.5 m gutters."""
    return Shell(
        form="gable", floor_area_m2=4800.0, roof_ratio=1.095, wall_ratio=0.28, roof_sky_view=0.92,
        wall_sky_view=0.45, roof_slope_deg=24.0, mean_height_m=5.39, ridge_height_m=6.28,
        perimeter_per_floor=0.0583, perimeter_loss=0.8, wind_factor=0.65, leakage_per_hour=1.0,
        vent_area_ratio=0.2, vent_factor=1.0,
    )  # fmt: skip


def energy_screen() -> Screen:
    """Return a tight plastic screen: long-wave passes .3, emissivity .6."""
    none = np.zeros((0, 0))
    solar = SolarOptics(*([none] * 12))
    return Screen(
        "screen", "Energy screen", "energy", "common practice", "tests", solar, sheet(0.3, 0.6), 0.0, 0.05,
        True, 300.0, 0.03,
    )  # fmt: skip


def ground() -> Ground:
    """Return white mulch on soil."""
    return Ground(
        "mulch", "Mulch", "common practice", "tests", np.full(5, 0.5), np.full(T, 0.93), 1.2, 2.2e6, 0.1, 0.05
    )


def winter_case(
    days: int = 20,
    covering: CoveringHeat | None = None,
    screens: tuple[Screen, ...] = (),
    lai: float = 2.0,
    capacity: float = np.inf,
    coldest_c: float = -10.0,
) -> HeatCase:
    """Return winter weeks: a daily wave, a cold spell, weak sun, set-points 17 and 19 degC with a ramp."""
    hours = 24 * days
    at = np.arange(hours)
    hour, day = at % 24, at / 24.0
    spell = np.exp(-(((day - days / 2) / 3.0) ** 2))
    temp = 2.0 + 4.0 * np.cos(2 * np.pi * (hour - 15) / 24) + (coldest_c + 2.0) * spell
    height = np.maximum(0.0, np.sin(np.pi * (hour - 8) / 8)) * ((hour >= 8) & (hour < 16))
    sun = 250.0 * height
    vapour = 0.8 * 611.0 * np.exp(17.6 * temp / (243.0 + temp))
    longwave = 0.78 * STEFAN_BOLTZMANN * (temp + ZERO_C_K) ** 4
    full = np.ones(hours)
    cover = covering or glass()
    layers = len(cover.resistance)
    gain = SolarGain(
        0.35 * sun, 0.2 * sun, 0.15 * sun, np.full((layers, hours), 0.04 / layers) * sun,
        np.zeros((len(screens), hours)), 0.03 * sun,
    )  # fmt: skip
    ramp = np.clip((hour - 5.0) * 1.0, 0.0, 2.0) * (hour < 19)
    drawn = np.tile(((hour >= 17) | (hour < 8)).astype(float), (len(screens), 1))
    return HeatCase(
        outside=Outside(
            3600.0, temp, vapour, 98e3 * full, 3.0 * full, sky_bands(longwave, temp, vapour), sun > 0
        ),
        shell=shell(),
        covering=cover,
        screens=screens,
        crop=CropHeat(lai * full, np.exp(-0.7 * lai) * full, np.full(T, 0.97), 1.2, 0.5 * lai * full),
        ground=ground(),
        climate=Climate(
            heat_at=17.0 + ramp, vent_at=26.0 * full, humidity_max_pct=95.0 * full, screen_drawn=drawn,
            min_pipe_c=-np.inf * full, limit_c=8.0 * full,
        ),
        heating=Heating(capacity, 0.051, 2.5, 90.0),
        gain_dry=gain,
        gain_wet=gain,
    )  # fmt: skip
