"""The other route for hours that Newton steps of the whole record leave open.

Each such hour is solved by itself with the hour before held: a few whole steps, then damped ones that must
lower the open amount, and where these stall, the opening is bracketed: for any opening held, the balance has
its answer. Hours that are done are left out.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.heatindex import Index
from canopy.heatmodel import Model
from canopy.heatregime import HIGHEST_C, HIGHEST_PA, LOWEST_C, PAST_KINK, evaluate, vent_reach
from canopy.heatrows import Context, Past
from canopy.newton import Entry, eliminate

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

TRIES: Final = 40
WHOLE_STEPS: Final = 5  # tries whose step is taken whole; later ones must lower the open amount
GIVEN_UP: Final = 1e-3  # share of a step below which an hour is left as it is
SMALLER: Final = 0.35  # what a step that does not help is cut to
CUT_AT: Final = 0.75  # share of hours still open below which the others are left out
BRACKET_W_M2: Final = 1e-3
GRID: Final = np.linspace(0.0, 1.0, 13)
BRACKETS: Final = 3  # each divides the bracket by 12


def alone(
    model: Model, unknown: list[Floats], gone: Past, closed: float
) -> tuple[list[Floats], Bools, Floats]:
    """Solve hours by themselves, their past held.

    Returns the unknowns, where they are closed, and the opening to hold where they are not.
    """
    best, done = descend(model, [u.copy() for u in unknown], gone, closed)
    opening = best[model.index.vent].copy()
    at = np.flatnonzero(~done)
    if len(at):
        part = model.take(at)
        trial, ok = descend(part, _neutral(part), gone.take(at), closed)
        for k in range(len(best)):
            best[k][at[ok]] = trial[k][ok]
        done[at[ok]] = True
        at = at[~ok]
    if len(at):
        part, before = model.take(at), gone.take(at)
        start, opening[at] = bracketed(part, [u[at] for u in unknown], before)
        trial, ok = descend(part, start, before, closed)
        for k in range(len(best)):
            best[k][at[ok]] = trial[k][ok]
        done[at[ok]] = True
    return best, done, opening


def _neutral(model: Model) -> list[Floats]:
    """A start that no earlier iterate has spoilt: everything near outside, or near the heating set-point."""
    ix, out = model.index, model.temp_out
    warm = np.maximum(out, model.heat_at)
    u = [warm.copy() for _ in range(ix.size)]
    for layer in range(ix.layers):
        u[ix.cover(layer)] = 0.5 * (warm + out) - 2.0
    for space in range(ix.screens + 1):
        u[ix.vapour(space)] = 1.1 * model.vapour_out
    u[ix.vent] = np.where(model.open_all, model.gap_max + model.vent_max, 0.0)
    return u


def bracketed(model: Model, unknown: list[Floats], gone: Past) -> tuple[list[Floats], Floats]:
    """The opening of each hour between too little and too much: unknowns at its lower end, and its middle.

    With the opening held, an hour's balance always has its answer, and the venting row says which way to go.
    A grid of openings is solved at once, then one inside the pair where the row changes its sign, and so on.
    """
    ix, n, points = model.index, model.hours, len(GRID)
    most = model.gap_max + model.vent_max
    low, high = np.zeros(n), most.copy()
    many = np.repeat(np.arange(n), points)
    grid, before = model.take(many), gone.take(many)
    u, best = [value[many] for value in unknown], unknown
    for number in range(BRACKETS):
        spread = GRID**2 if number == 0 else GRID  # small openings matter more
        openings = (low[:, None] + (high - low)[:, None] * spread).ravel()
        u[ix.vent] = openings.copy()
        grid.hold[:] = openings
        u, _ = descend(grid, u, before, BRACKET_W_M2)
        grid.hold[:] = np.nan
        row = -evaluate(grid, u, before).system.residual[ix.vent].reshape(n, points)
        above = row[:, 1:] >= 0.0
        pick = np.where(above.any(axis=1), np.argmax(above, axis=1), points - 2)
        first = np.arange(n) * points + pick
        best, low, high = [value[first] for value in u], openings[first], openings[first + 1]
        u = [np.repeat(value, points) for value in best]
    best[ix.vent] = low
    return best, np.minimum(0.5 * (low + high), most)


def opened(c: Context) -> Floats:
    """Largest open amount over the rows of each hour."""
    return np.asarray(np.max(np.abs(np.array(c.system.residual)), axis=0))


class _Pool:
    """Hours that are still open, at their best iterate so far."""

    def __init__(self, model: Model, u: list[Floats], gone: Past) -> None:
        """Start with every hour of the model."""
        self.model, self.gone = model, gone
        self.at = np.arange(model.hours)
        self.u, self.step = u, u
        self.error = np.full(model.hours, np.inf)
        self.share = np.ones(model.hours)

    def take(self, keep: Bools) -> None:
        """Go on with some hours only."""
        at = np.flatnonzero(keep)
        self.model, self.gone, self.at = self.model.take(at), self.gone.take(at), self.at[at]
        self.u, self.step = [v[at] for v in self.u], [v[at] for v in self.step]
        self.error, self.share = self.error[at], self.share[at]

    def move(self, whole: bool, closed: float) -> None:
        """One step; where it does not lower the open amount it is taken back and shortened."""
        ix = self.model.index
        first = bool(np.isinf(self.error).all())
        trial = (
            self.u
            if first
            else [_held(self.model, k, self.u[k] + self.share * self.step[k]) for k in range(ix.size)]
        )
        context = evaluate(self.model, trial, self.gone)
        error = opened(context)
        sides: list[list[Entry]] = [[r.copy()] for r in context.system.residual]
        slopes = [row[: ix.size] for row in context.system.slope]
        x = eliminate(slopes, sides, vent_reach(context), self.model.hours)
        steps = [np.zeros(self.model.hours) if row[0] is None else row[0] for row in x]
        size = _excess(ix, steps)
        if first or whole:
            self.u, self.error, self.step, self.share = trial, error, steps, 1.0 / size
            return
        better = (error < self.error * (1.0 - 0.1 * self.share)) | (error < closed)
        self.u = [np.where(better, new, old) for new, old in zip(trial, self.u, strict=True)]
        self.step = [np.where(better, new, old) for new, old in zip(steps, self.step, strict=True)]
        self.error = np.where(better, error, self.error)
        self.share = np.where(better, 1.0 / size, SMALLER * self.share)


def _excess(ix: Index, steps: list[Floats]) -> Floats:
    """By how much the longest step of each hour is too long (1: not at all)."""
    vapours = {ix.vapour(space) for space in range(ix.screens + 1)}
    size = np.ones(len(steps[0]))
    for k in range(ix.size):
        limit = 0.3 if k == ix.vent else 500.0 if k in vapours else 5.0
        np.maximum(size, np.abs(steps[k]) / limit, out=size)
    return size


def descend(
    model: Model, u: list[Floats], gone: Past, closed: float, tries: int = TRIES
) -> tuple[list[Floats], Bools]:
    """Newton steps of every hour by itself: whole ones first, then such as lower the open amount."""
    best, left = [v.copy() for v in u], np.full(model.hours, np.inf)
    pool = _Pool(model, u, gone)
    for number in range(tries):
        pool.move(number < WHOLE_STEPS, closed)
        going = (pool.error >= closed) & (pool.share > GIVEN_UP)
        if going.sum() > CUT_AT * len(going) and number < tries - 1:
            continue
        for k, value in enumerate(pool.u):
            best[k][pool.at] = value
        left[pool.at] = pool.error
        if not going.any():
            break
        pool.take(going)
    return best, left < closed


def _held(model: Model, k: int, value: Floats) -> Floats:
    """Keep an unknown where the formulas mean something."""
    ix = model.index
    if k == ix.vent:
        return np.clip(value, -PAST_KINK, model.gap_max + model.vent_max + PAST_KINK)
    if k == ix.air0_vapour or k < ix.screens:
        return np.clip(value, 1.0, HIGHEST_PA)
    return np.clip(value, LOWEST_C, HIGHEST_C)
