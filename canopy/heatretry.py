"""The other route for hours that Newton steps of the whole record leave open.

Each such hour is solved by itself with the hour before held: a few whole steps, then damped ones that must
lower the open amount, and where these stall, fresh starts from each regime (shut, part open, open; heating
off or at its limit). What no start closes has its opening bracketed. Hours that are done are left out.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import vapour as vp
from canopy.heatindex import Index
from canopy.heatmodel import Model
from canopy.heatregime import PAST_KINK, evaluate, vent_reach
from canopy.heatrows import Context, Past
from canopy.newton import Entry, eliminate

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

TRIES: Final = 40
WHOLE_STEPS: Final = 5  # tries whose step is taken whole; later ones must lower the open amount
GIVEN_UP: Final = 1e-3  # share of a step below which an hour is left as it is
SMALLER: Final = 0.35  # what a step that does not help is cut to
CUT_AT: Final = 0.75  # share of hours still open below which the others are left out
BISECTIONS: Final = 12
STARTS: Final = ((0.0, -3.0), (0.0, -3.0), (0.03, 0.0), (1.0, -3.0), (1.0, 3.0), (0.0, 3.0))
"""Openings to start from, and covering less air temperature, K; every other one with a firm turn."""


def alone(model: Model, unknown: list[Floats], gone: Past, closed: float) -> tuple[list[Floats], Bools]:
    """Solve hours by themselves, their past held; returns the unknowns and where they are closed."""
    best, done = descend(model, [u.copy() for u in unknown], gone, closed)
    for number, (opening, cover) in enumerate(STARTS):
        if done.all():
            break
        at = np.flatnonzero(~done)
        part, before = model.take(at), gone.take(at)
        trial, ok = descend(part, _fresh(part, before, opening, cover), before, closed, number % 2 == 1)
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

    def move(self, whole: bool, firm: bool, closed: float) -> None:
        """One step; where it does not lower the open amount it is taken back and shortened."""
        ix = self.model.index
        first = bool(np.isinf(self.error).all())
        trial = self.u if first else [
            _held(self.model, k, self.u[k] + self.share * self.step[k]) for k in range(ix.size)
        ]
        context = evaluate(self.model, trial, self.gone)
        error = opened(context)
        sides: list[list[Entry]] = [[r.copy()] for r in context.system.residual]
        slopes = [row[: ix.size] for row in context.system.slope]
        x = eliminate(slopes, sides, vent_reach(context, firm), self.model.hours)
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
    model: Model, u: list[Floats], gone: Past, closed: float, firm: bool = False, tries: int = TRIES
) -> tuple[list[Floats], Bools]:
    """Newton steps of every hour by itself: whole ones first, then such as lower the open amount."""
    best, left = [v.copy() for v in u], np.full(model.hours, np.inf)
    pool = _Pool(model, u, gone)
    for number in range(tries):
        pool.move(number < WHOLE_STEPS, firm, closed)
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
        return np.clip(value, 1.0, 9000.0)
    return np.clip(value, -80.0, 110.0)


def bracketed(model: Model, u: list[Floats], gone: Past, closed: float) -> tuple[list[Floats], Floats, Bools]:
    """The last resort: the opening between too little and too much, halved again and again.

    With the opening held, an hour's balance always has its answer; the venting row says which way to go. What
    is left when the bracket has shut is the opening at which the control changes its mind. Returns unknowns,
    the opening that was held, and where the balance closed. `model` is a part of its own (`Model.take`): its
    `hold` is written.
    """
    ix = model.index
    low, high = np.zeros(model.hours), model.gap_max + model.vent_max
    best, done = u, np.zeros(model.hours, dtype=bool)
    middle = 0.5 * (low + high)
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        model.hold[:] = middle
        start = [value.copy() for value in best]
        start[ix.vent] = middle.copy()
        best, done = descend(model, start, gone, closed)
        model.hold[:] = np.nan
        wants = -evaluate(model, best, gone).system.residual[ix.vent]
        low, high = np.where(wants < 0.0, middle, low), np.where(wants < 0.0, high, middle)
    model.hold[:] = middle
    return best, middle, done
