"""Houses, sheets and weather that the tests of a house's light share."""

from __future__ import annotations

import json
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pvlib

from canopy.house import House
from canopy.optics import SolarOptics
from weather.record import Site, Weather

BANDS = 5
PLAIN = House(
    form="gable", spans=1, span_width=8.0, length=30.0, gutter_height=3.0, pitch=26.0, pitch_other=26.0,
    rise=0.0, ridge_azimuth=0.0, gutter_width=0.0, gutter_depth=0.0, ridge_width=0.0, ridge_depth=0.0,
    bar_spacing=0.0, bar_width=0.0, bar_depth=0.0, crop_plane_height=1.0,
)  # fmt: skip
"""One span of 8 m, pitch 26 degrees, gutter 3 m, 30 m long, crop plane at 1 m: no structure."""


def fresnel(angle: np.ndarray, n: float = 1.526, depth: float = 0.0185145) -> tuple[np.ndarray, np.ndarray]:
    """Transmittance and reflectance of one sheet (Fresnel, Bouguer, all inner reflections)."""
    c1 = np.maximum(np.cos(angle), 1e-12)
    c2 = np.sqrt(1.0 - (1.0 - c1**2) / n**2)
    a = np.exp(-depth / c2)
    passed, mirrored = np.zeros_like(c1), np.zeros_like(c1)
    for r in (((c1 - n * c2) / (c1 + n * c2)) ** 2, ((n * c1 - c2) / (n * c1 + c2)) ** 2):
        passed += 0.5 * (1.0 - r) ** 2 * a / (1.0 - (r * a) ** 2)
        mirrored += 0.5 * r * (1.0 + a * (1.0 - r) ** 2 * a / (1.0 - (r * a) ** 2))
    return passed, mirrored


def optics(beam: np.ndarray, scatter: np.ndarray, mirror: np.ndarray, angles: np.ndarray) -> SolarOptics:
    """One layer with the same optics in every band."""
    weight = np.sin(2.0 * angles)
    mean = [
        float(np.trapezoid(v * weight, angles) / np.trapezoid(weight, angles))
        for v in (beam + scatter, mirror)
    ]
    kept = 1.0 - beam - scatter - mirror
    rows = np.ones((BANDS, 1))
    through, back = np.full(BANDS, mean[0]), np.full(BANDS, mean[1])
    taken = np.full((1, BANDS), 1.0 - mean[0] - mean[1])
    return SolarOptics(
        angles, rows * beam, rows * scatter, rows * mirror, rows * mirror, (rows * kept)[None],
        through, through, back, back, taken, taken,
    )  # fmt: skip


@cache
def glass(haze: float = 0.0, *, mirror: bool = True) -> SolarOptics:
    """The sheet of the reference values: n 1.526, K d .0185145; without its mirror on request."""
    angles = np.linspace(0.0, np.pi / 2, 721)
    passed, mirrored = fresnel(angles)
    passed[-1], mirrored[-1] = 0.0, 1.0
    found = optics(passed * (1.0 - haze), passed * haze, mirrored, angles)
    if mirror:
        return found
    none = np.zeros_like(found.beam_reflect)
    return replace(found, beam_reflect=none, beam_specular=none)


@cache
def clear() -> SolarOptics:
    """A sheet that is not there."""
    angles = np.linspace(0.0, np.pi / 2, 19)
    none = np.zeros_like(angles)
    return optics(none + 1.0, none, none, angles)


@cache
def weather(latitude: float = 52.0, longitude: float = 5.0) -> Weather:
    """A clear year after Haurwitz, a fifth of it diffuse, every sixth day overcast."""
    n = 8760
    times = pd.date_range("1990-01-01", periods=n, freq="h", tz="UTC")
    sun = pvlib.solarposition.get_solarposition(
        times + pd.Timedelta("30min"), latitude, longitude, method="nrel_numpy"
    )
    zenith = sun["apparent_zenith"].to_numpy()
    up = np.cos(np.radians(zenith))
    bright = pvlib.clearsky.haurwitz(sun["apparent_zenith"])["ghi"].to_numpy()
    grey = (np.arange(n) // 24) % 6 == 5
    ghi = np.where(grey, 0.3 * bright, bright)
    dni = np.where((up > 0.03) & ~grey, 0.8 * ghi / np.maximum(up, 0.03), 0.0)
    dhi = ghi - dni * np.maximum(up, 0.0)

    def even(value: float) -> np.ndarray:
        return np.full(n, value)

    return Weather(
        site=Site(latitude, longitude, 0.0, "UTC"), title="test year", source="Haurwitz 1945 via pvlib",
        utc_offset_h=0.0, step_s=3600.0, typical=False, clear_sky=False,
        time=times.tz_localize(None).to_numpy().astype("datetime64[s]"), ghi=ghi, dni=dni, dhi=dhi,
        dni_extra=even(1361.0), ghi_clear=bright, temp_air=even(10.0), temp_dew=even(5.0),
        relative_humidity=even(70.0), vapour_pressure=even(870.0), pressure=even(101325.0),
        wind_speed=even(3.0),
        precipitable_water=even(1.5), longwave_down=even(300.0), longwave_modelled=np.ones(n, dtype=bool),
        albedo=even(0.2), zenith=zenith, azimuth=sun["azimuth"].to_numpy(), filled=np.zeros(n, dtype=bool),
        in_season=np.ones(n, dtype=bool), findings=(), design=None,
    )  # fmt: skip


def references() -> dict[str, Any]:
    """Monte Carlo values of straight and mirrored light; `reference/house_rays.py` made them."""
    found: dict[str, Any] = json.loads((Path(__file__).parent / "reference" / "house_rays.json").read_text())
    return found


def reference_house(sizes: dict[str, Any]) -> House:
    """The house of a Monte Carlo case, ridge along north."""
    known = {k: v for k, v in sizes.items() if k not in ("pitch_other",)}
    return replace(PLAIN, **known, pitch_other=sizes.get("pitch_other", sizes["pitch"]))
