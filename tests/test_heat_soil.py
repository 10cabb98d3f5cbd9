"""The soil column: steady slab, yearly wave, energy kept, independence of the film."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from canopy import soil as so
from canopy.soil import deep_temperature, soil_modes
from tests.heatcases import SOIL


def run(surface_drive: np.ndarray, deep: float, step: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """March the modes under a film temperature; returns flux in, flux out below, stored heat."""
    m = soil_modes(SOIL, step)
    z = np.zeros(m.keep.size)
    flux, out, store = [], [], []
    for drive in surface_drive:
        flux.append(m.conductance * drive - m.recall @ z - m.conductance_deep * deep)
        out.append(m.out_drive * drive + m.out_recall @ z + m.out_deep * deep)
        z = m.keep * z + m.drive * drive + m.deep * deep
        store.append(m.content @ z)
    return np.array(flux), np.array(out), np.array(store)


def test_steady_slab() -> None:
    flux, out, _ = run(np.full(4000, 20.0), 10.0, 86400.0)
    u = 1.0 / (1.0 / so.FILM_W_M2_K + SOIL.surface_resistance + so.COLUMN_DEPTH_M / SOIL.conductivity)
    assert flux[-1] == pytest.approx(10.0 * u, rel=1e-6)
    assert out[-1] == pytest.approx(10.0 * u, rel=1e-6)


def test_what_goes_in_stays_or_leaves() -> None:
    step = 3600.0
    rng = np.random.default_rng(3)
    flux, out, store = run(15.0 + 10.0 * rng.standard_normal(300), 12.0, step)
    kept = np.diff(np.concatenate([[0.0], store])) / step
    assert flux - out == pytest.approx(kept, abs=1e-8)


def test_daily_wave_meets_the_half_space() -> None:
    # Semi-infinite solid under a sine through a resistance (Carslaw & Jaeger 1959, ch. 2): admittance
    # 1 / (R + 1 / sqrt(i w k c)). The slices are fine enough for a day within 6 %.
    step = 900.0
    t = np.arange(0, 40 * 96) * step
    w = 2 * np.pi / 86400.0
    flux, _, _ = run(10.0 * np.sin(w * (t + step / 2)), 0.0, step)
    resistance = 1.0 / so.FILM_W_M2_K + SOIL.surface_resistance
    admittance = 1.0 / (resistance + 1.0 / np.sqrt(1j * w * SOIL.conductivity * SOIL.volumetric_heat))
    last = slice(-96, None)
    wave = np.mean(flux[last] * np.exp(-1j * w * (t[last] + step / 2))) * 2j / 10.0
    assert abs(wave) == pytest.approx(abs(admittance), rel=0.06)


def test_deep_temperature_is_late_and_damped() -> None:
    hours = np.arange(8760)
    air = 12.0 + 11.0 * np.cos(2 * np.pi * (hours - 4800) / 8760)
    m = soil_modes(SOIL, 3600.0)
    deep = deep_temperature(air, 3600.0, m)
    fade = np.exp(-m.depth_m / m.damping_m)  # Kusuda & Achenbach (1965)
    assert np.mean(deep) == pytest.approx(12.0, abs=0.02)
    assert np.ptp(deep) / 2 == pytest.approx(11.0 * fade, rel=0.01)
    late = (np.argmax(deep) - 4800) / 8760 * 2 * np.pi
    assert late == pytest.approx(m.depth_m / m.damping_m, abs=0.02)
    assert deep_temperature(air[:500], 3600.0, m) == pytest.approx(np.mean(air[:500]))


def test_surface_resistance_slows_the_ground() -> None:
    bench = soil_modes(replace(SOIL, surface_resistance=1.0), 3600.0)
    assert bench.conductance < soil_modes(SOIL, 3600.0).conductance
