"""Time in the solver: a Newton step of the whole record marched through its stores and the soil.

A step d of hour t answers to the step of the hour before through the stores, the film and the soil's modes.
The march runs the steps of every chunk (day) at once. Chunk ends hand on to the next chunk in a second
sweep, and further ones where pipes hold very much water; what is left is far below the step and the next
Newton pass takes it up. The modes themselves are then recomputed exactly, and close on themselves where the
record is periodic.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.heatmodel import Model
from canopy.vapour import FILM_FULL_KG_M2, FILM_MAX_KG_M2

Floats = NDArray[np.float64]

SWEEPS: Final = (2, 12)  # fewest and most: pipes with much water remember for days
HEAVY_PIPES: Final = 100.0  # W/K and m2 in an hour: such water carries a house over the night
LEFT_OVER: Final = 0.5  # K of pipe water at a chunk's end that may be left to the next Newton pass


def run_modes(model: Model, drive: Floats) -> Floats:
    """Soil modes at the end of every step, (M, N), for a film temperature T* (N,); exact and periodic."""
    soil, order = model.soil, model.order
    steps, chunks = order.steps, order.chunks
    keep, push = _first_step(model)
    forcing = (soil.drive[:, None] * drive + soil.deep[:, None] * model.deep).reshape(
        len(soil.keep), steps, chunks
    )
    if not model.case.periodic:
        forcing[:, 0, 0] *= push[:, 0] / soil.drive
    out = np.empty_like(forcing)
    now = forcing[:, 0].copy()
    out[:, 0] = now
    for k in range(1, steps):
        now = soil.keep[:, None] * now + forcing[:, k]
        out[:, k] = now
    ends = link_chunks(out[:, -1], soil.keep**steps, model.case.periodic)
    starts = np.roll(ends, 1, axis=1)
    if not model.case.periodic:
        starts[:, 0] = 0.0
    power = soil.keep[:, None] ** np.arange(1, steps + 1)
    out += power[:, :, None] * starts[:, None, :]
    del keep
    return out.reshape(len(soil.keep), -1)


def run_film(model: Model, film: Floats, inflow: Floats, laps: int) -> Floats:
    """Let the film run through the record, `laps` times or until it repeats; `inflow` (2, N) gain, loss."""
    order = model.order
    gain = np.maximum(inflow, 0.0).sum(axis=0).reshape(order.steps, order.chunks)
    drying = np.minimum(inflow, 0.0).sum(axis=0).reshape(order.steps, order.chunks)
    divisor = 1.0 - drying / FILM_FULL_KG_M2
    dries = drying < 0.0
    out = film.reshape(order.steps, order.chunks).copy()
    for _ in range(laps):
        end = out[-1].copy()
        now = np.roll(end, 1)
        if not model.case.periodic:
            now[0] = 0.0
        for k in range(order.steps):
            now = now + gain[k]
            grown = now + drying[k]
            patchy = dries[k] & (grown < FILM_FULL_KG_M2)
            now = np.minimum(np.where(patchy, now / divisor[k], grown), FILM_MAX_KG_M2)  # `vapour.film_step`
            out[k] = now
        if float(np.abs(out[-1] - end).max()) < 1e-12:
            break
    return out.ravel()


def link_chunks(ends: Floats, keep: Floats, periodic: bool) -> Floats:
    """Turn chunk ends from a zero start into true ends: y_d = e_d + keep y_{d-1}, (M, D); doubling."""
    total = ends.copy()
    factor, shift, chunks = keep.copy(), 1, ends.shape[1]
    while shift < chunks:
        total[:, shift:] = total[:, shift:] + factor[:, None] * total[:, :-shift]
        factor = factor * factor
        shift *= 2
    if periodic:
        start = total[:, -1] / (1.0 - keep**chunks)
        total = total + keep[:, None] ** np.arange(1, chunks + 1) * start[:, None]
    return total


def _first_step(model: Model) -> tuple[Floats, Floats]:
    """keep and drive (M, D) in the first step of each chunk: a record without memory starts settled."""
    soil, chunks = model.soil, model.order.chunks
    keep = np.repeat(soil.keep[:, None], chunks, axis=1)
    push = np.repeat(soil.drive[:, None], chunks, axis=1)
    if not model.case.periodic:
        keep[:, 0] = 0.0
        push[:, 0] = soil.drive / (1.0 - soil.keep)
    return keep, push


@dataclass(frozen=True)
class Response:
    """What every hour answers: `own` (R, N), to the soil's history (R, N), to the hour before (R, K, N).

    Rows: the K carried quantities (stores, film) and, last, the floor.
    """

    own: Floats
    history: Floats
    before: Floats
    drive_floor: Floats  # dT* per d(floor)
    drive_history: Floats  # dT* per d(history)
    slowest: int  # row of the pipe water, whose left-over decides on a further sweep
    given: Floats  # T* changes that are in the iterate already, but not yet in the soil's modes


def march(model: Model, r: Response) -> tuple[Floats, Floats, Floats]:
    """March a step: returns (K, N) of the carried quantities, history (N,) and drive (N,) steps."""
    soil, order = model.soil, model.order
    steps, chunks = order.steps, order.chunks
    carried = r.own.shape[0] - 1
    cut = (steps, chunks)
    own, by_history = r.own.reshape(-1, *cut), r.history.reshape(-1, *cut)
    before = r.before.reshape(*r.before.shape[:2], *cut)
    floor_gain, history_gain = r.drive_floor.reshape(cut), r.drive_history.reshape(cut)
    given = r.given.reshape(cut)
    first_keep, first_push = _first_step(model)
    periodic = model.case.periodic
    state, modes = np.zeros((carried, chunks)), np.zeros((len(soil.keep), chunks))
    out, history, drive = np.empty((carried, *cut)), np.empty(cut), np.empty(cut)
    light = model.pipes.capacity < HEAVY_PIPES * model.step_s
    for sweep in range(1, SWEEPS[1] + 1):
        now, ground = state, modes
        for k in range(steps):
            recalled = soil.recall @ ground
            if k == 0 and not periodic:
                recalled[0] = 0.0
            step = own[:, k] + by_history[:, k] * recalled
            step += np.einsum("rkd,kd->rd", before[:, :, k], now)
            pushed = floor_gain[k] * step[-1] + history_gain[k] * recalled
            now, whole = step[:-1], pushed + given[k]
            if k == 0:
                ground = first_keep * ground + first_push * whole
            else:
                ground = soil.keep[:, None] * ground + soil.drive[:, None] * whole
            out[:, k], history[k], drive[k] = now, recalled, pushed
        fresh = ground - soil.keep[:, None] ** steps * modes
        ends = link_chunks(fresh, soil.keep**steps, periodic)
        before_sweep = state
        state, modes = np.roll(now, 1, axis=1), np.roll(ends, 1, axis=1)
        if not periodic:
            state[:, 0], modes[:, 0] = 0.0, 0.0
        left = float(np.abs((state - before_sweep)[r.slowest]).max())
        if sweep >= SWEEPS[0] and (light or left < LEFT_OVER or not np.isfinite(left)):
            break
    return out.reshape(carried, -1), history.ravel(), drive.ravel()
