"""The ground below the floor: a column with real storage, reduced to exact modes.

A column of unequal slices conducts to a deep temperature. Its linear equations are put into independent
modes, each of which steps exactly (exponential) through an hour of constant drive, so that a whole year is a
first-order recursion per mode. The drive is the "film temperature" T* = T_floor + q / h0 with a nominal
surface film h0: seen through that film the column hardly feels what the rest of the house answers, which is
what makes it cheap to couple. It changes no physics: T_floor = T* - q / h0 holds in every hour.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.optics import Ground

Floats = NDArray[np.float64]

COLUMN_DEPTH_M: Final = 4.0
SLICES: Final = 9
FIRST_SLICE_M: Final = 0.03
FILM_W_M2_K: Final = 9.0  # nominal radiation and convection of a floor; any value gives the same answer
YEAR_S: Final = 365.0 * 86400.0


@dataclass(frozen=True)
class SoilModes:
    """Modes of the column for one step length; M modes, fluxes W/m2.

    x_t = keep x_{t-1} + drive T*_t + deep T_deep,t            (end of the hour)
    q_t = conductance T*_t - recall . x_{t-1} - conductance_deep T_deep,t   (hour mean into the floor)
    out_t = out_drive T*_t + out_recall . x_{t-1} + out_deep T_deep,t       (hour mean out at the foot)
    """

    keep: Floats  # (M,)
    drive: Floats  # (M,)
    deep: Floats  # (M,)
    recall: Floats  # (M,)
    conductance: float
    conductance_deep: float
    out_drive: float
    out_recall: Floats  # (M,)
    out_deep: float
    film: float  # h0
    content: Floats  # (M,) J m-2 per unit of mode, for the stored heat
    depth_m: float
    damping_m: float  # depth over which the yearly wave fades to 1/e


def _slices() -> Floats:
    """Slice thicknesses, m, growing geometrically to the column's depth."""
    low, high = 1.0, 3.0
    for _ in range(60):
        ratio = 0.5 * (low + high)
        total = FIRST_SLICE_M * sum(ratio**k for k in range(SLICES))
        low, high = (ratio, high) if total < COLUMN_DEPTH_M else (low, ratio)
    return np.asarray(FIRST_SLICE_M * ratio ** np.arange(SLICES))


def soil_modes(ground: Ground, step_s: float) -> SoilModes:
    """Reduce the column under a ground to its modes for one step length (seconds)."""
    thick = _slices()
    heat = ground.volumetric_heat * thick
    half = 0.5 * thick / ground.conductivity
    link = 1.0 / (half[:-1] + half[1:])
    top = 1.0 / (1.0 / FILM_W_M2_K + ground.surface_resistance + half[0])
    bottom = 1.0 / half[-1]
    matrix = np.diag(np.concatenate([[top], link]) + np.concatenate([link, [bottom]]))
    index = np.arange(SLICES - 1)
    matrix[index, index + 1] = matrix[index + 1, index] = -link
    root = np.sqrt(heat)
    rate, vectors = np.linalg.eigh(matrix / np.outer(root, root))
    beta = top * vectors[0] / root[0]
    delta = bottom * vectors[-1] / root[-1]
    keep = np.exp(-rate * step_s)
    mean_keep = (1.0 - keep) / (rate * step_s)  # hour mean of the decaying start
    settle = (1.0 - mean_keep) / rate
    return SoilModes(
        keep=keep,
        drive=(1.0 - keep) / rate * beta,
        deep=(1.0 - keep) / rate * delta,
        recall=beta * mean_keep,
        conductance=float(top - np.sum(beta * beta * settle)),
        conductance_deep=float(np.sum(beta * delta * settle)),
        out_drive=float(np.sum(delta * beta * settle)),
        out_recall=delta * mean_keep,
        out_deep=float(np.sum(delta * delta * settle) - bottom),
        film=FILM_W_M2_K,
        content=vectors.T @ root,
        depth_m=COLUMN_DEPTH_M,
        damping_m=float(np.sqrt(ground.conductivity / ground.volumetric_heat * YEAR_S / np.pi)),
    )


def deep_temperature(temp_air_c: Floats, step_s: float, modes: SoilModes) -> Floats:
    """Temperature at the foot of the column, degC, (N,): yearly mean of the air with its damped, late wave.

    First harmonic of the outside air over the record (Kusuda & Achenbach 1965, ASHRAE Trans. 71:61), damped
    by exp(-z/d) and late by z/d. A record shorter than 300 days gives its mean only.
    """
    hours = len(temp_air_c)
    mean = float(np.mean(temp_air_c))
    if hours * step_s < 300 * 86400.0:
        return np.full(hours, mean)
    angle = 2.0 * np.pi * (np.arange(hours) + 0.5) * step_s / YEAR_S
    cos = 2.0 * float(np.mean((temp_air_c - mean) * np.cos(angle)))
    sin = 2.0 * float(np.mean((temp_air_c - mean) * np.sin(angle)))
    fade = modes.depth_m / modes.damping_m
    return np.asarray(mean + np.exp(-fade) * (cos * np.cos(angle - fade) + sin * np.sin(angle - fade)))
