"""The other route for hours that Newton steps of the whole record leave open.

Each such hour is solved by itself with the hour before held: damped steps that must lower the open amount,
and where these stall, fresh starts from each regime (shut, part open, open; heating off or at its limit).
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import vapour as vp
from canopy.heatmodel import Model
from canopy.heatregime import PAST_KINK, evaluate, vent_reach
from canopy.heatrows import Context, Past
from canopy.newton import Entry, eliminate

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

TRIES: Final = 30
HALVINGS: Final = 9
STARTS: Final = ((0.0, -3.0), (0.0, -3.0), (0.03, 0.0), (1.0, -3.0), (1.0, 3.0), (0.0, 3.0))
"""Openings to start from, and covering less air temperature, K; every other one with a firm turn."""
STALLED: Final = 6  # tries without a better value in any hour that end a descent


def alone(model: Model, unknown: list[Floats], gone: Past, closed: float) -> tuple[list[Floats], Bools]:
    """Solve hours by themselves, their past held; returns the unknowns and where they are closed."""
    best, done = _descend(model, [u.copy() for u in unknown], gone, closed)
    for number, (opening, cover) in enumerate(STARTS):
        if done.all():
            break
        at = np.flatnonzero(~done)
        part, before = model.take(at), gone.take(at)
        trial, ok = _descend(part, _fresh(part, before, opening, cover), before, closed, number % 2 == 1)
        for k in range(len(best)):
            best[k][at[ok]] = trial[k][ok]
        done[at[ok]] = True
    return best, done


def _fresh(model: Model, gone: Past, opening: float, cover: float) -> list[Floats]:
    """A start near the hour before, with a given opening and covering less air temperature."""
    ix = model.index
    u = [np.zeros(model.hours) for _ in range(ix.size)]
    for k, value in gone.before.items():
        u[k] = value.copy()
    u[ix.floor] = u[ix.house_air].copy()
    for layer in range(ix.layers):
        u[ix.cover(layer)] = u[ix.house_air] + cover
    for space in range(1, ix.screens + 1):
        u[ix.air(space)] = 0.5 * (u[ix.house_air] + model.temp_out)
        u[ix.vapour(space)] = 0.8 * vp.saturation(u[ix.air(space)])[0]
    u[ix.vent] = opening * (model.gap_max + model.vent_max)
    return u


def opened(c: Context) -> Floats:
    """Largest open amount over the rows of each hour."""
    return np.asarray(np.max(np.abs(np.array(c.system.residual)), axis=0))


def _descend(
    model: Model, u: list[Floats], gone: Past, closed: float, firm: bool = False
) -> tuple[list[Floats], Bools]:
    """Newton steps, each hour with its own share of the step, halved until the open amount falls."""
    ix = model.index
    vapours = {ix.vapour(space) for space in range(ix.screens + 1)}
    context = evaluate(model, u, gone)
    error = opened(context)
    best, stall = error, 0
    for _ in range(TRIES):
        if float(error.max()) < closed or stall > STALLED:
            break
        sides: list[list[Entry]] = [[r.copy()] for r in context.system.residual]
        slopes = [row[: ix.size] for row in context.system.slope]
        x = eliminate(slopes, sides, vent_reach(context, firm), model.hours)
        steps = [np.zeros(model.hours) if row[0] is None else row[0] for row in x]
        size = np.ones(model.hours)
        for k in range(ix.size):
            limit = 0.3 if k == ix.vent else 500.0 if k in vapours else 5.0
            np.maximum(size, np.abs(steps[k]) / limit, out=size)
        share = np.where(error < closed, 0.0, 1.0 / size)
        for half in range(HALVINGS):
            trial = [_held(model, k, u[k] + share * steps[k], vapours) for k in range(ix.size)]
            found = evaluate(model, trial, gone)
            after = opened(found)
            worse = after > np.maximum(error * (1.0 - 0.1 * share), 0.5 * closed)
            if half == HALVINGS - 1 or not worse.any():
                break
            share = np.where(worse, 0.4 * share, share)
        u, context, error = trial, found, after
        stall = 0 if bool(((error < 0.5 * best) & (best >= closed)).any()) else stall + 1
        best = np.minimum(best, error)
    return u, error < closed


def _held(model: Model, k: int, value: Floats, vapours: set[int]) -> Floats:
    """Keep an unknown where the formulas mean something."""
    ix = model.index
    if k == ix.vent:
        return np.clip(value, -PAST_KINK, model.gap_max + model.vent_max + PAST_KINK)
    return np.clip(value, 1.0, 9000.0) if k in vapours else np.clip(value, -80.0, 110.0)
