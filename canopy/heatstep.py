"""Newton steps of the whole record: answers of each hour, marched in time, limited and applied.

Every hour's answer to its own open amounts, to the soil's history and to each carried quantity of the hour
before is kept between passes. Once most hours have settled, only those that still move are evaluated anew;
the others answer as they did. Every end is checked on all hours.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import vapour as vp
from canopy.heatmodel import Model
from canopy.heatregime import HIGHEST_C, LOWEST_C, PAST_KINK, evaluate, vent_reach
from canopy.heatretry import alone, descend
from canopy.heatrows import FILM, HISTORY, SPEED, Context, Past, State, past, soil_line
from canopy.march import Response, march, run_film, run_modes
from canopy.newton import Entry, eliminate

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

FILM_LAPS: Final = 2  # of the film through the record in each pass
FAR_W_M2: Final = 1.0  # an hour that is open by more is first solved by itself, if there are not too many
FAR_FEW_W_M2: Final = 0.02  # the same when few hours still move
FAR_FEW: Final = 50  # hours that may use every start of the other route
FAR_SHARE: Final = 0.2
NEAR_W_M2: Final = 0.05
FAR_TRIES: Final = 12
LARGEST_STEP_K: Final = 8.0
LARGEST_STEP_PA: Final = 800.0
SATURATED: Final = 1.004  # a step goes no further beyond saturation; fog keeps the air below
STILL_K: Final = 1e-4  # an hour that moved less, and whose past moved less, answers as it did
PASCAL_PER_K: Final = 100.0  # weights of vapour, opening and film in that test
OPENING_PER_K: Final = 0.1
FILM_PER_K: Final = 1e-3


def open_by(model: Model, film: Floats, c: Context) -> Floats:
    """Largest open amount over the rows of each hour, W/m2 (regime rows by their weights)."""
    error = np.abs(c.system.residual[0])
    for row in c.system.residual[1:]:
        np.maximum(error, np.abs(row), out=error)
    water = np.abs(c.film_after - film) * (vp.LATENT_HEAT * model.cover_size / model.step_s)
    return np.maximum(error, water)


def right_sides(model: Model, c: Context, alone: bool) -> list[list[Entry]]:
    """Columns: residual, then (unless `alone`) soil history, each store's hour before, film before."""
    ix, n = model.index, c.n
    if alone:
        return [[row.copy()] for row in c.system.residual]
    sides: list[list[Entry]] = []
    for row in range(n):
        a = c.system.slope[row]
        history, film = a[n + HISTORY], a[n + FILM]
        line: list[Entry] = [c.system.residual[row].copy(), None if history is None else -history]
        for store in ix.stores:
            entry: Entry = None
            if store == row:
                entry = model.capacity[row].copy()
                if row == ix.air0_vapour:
                    entry *= vp.mixing_ratio(c.before[row], model.pressure)[1]
                if row == ix.pipe:
                    entry *= c.pipe_keeps
            line.append(entry)
        line.append(None if film is None else -film)
        sides.append(line)
    return sides


def film_line(
    model: Model, film: Floats, c: Context, x: list[list[Entry]]
) -> tuple[list[Floats], list[Floats], list[Floats]]:
    """The film's own row after elimination, and those of its gain and loss, for every right-hand side."""
    by_before, by_loss = c.film_slopes
    gain, loss = (_answers(model, c, slopes, x) for slopes in (c.gain_slopes, c.loss_slopes))
    out = [by_before * one + by_loss * two for one, two in zip(gain, loss, strict=True)]
    out[0] += c.film_after - film
    if len(out) > 1:
        out[-1] += by_before
    return out, gain, loss


def _answers(
    model: Model, c: Context, slopes: list[tuple[int, Floats]], x: list[list[Entry]]
) -> list[Floats]:
    """What a quantity with these slopes answers to every right-hand side."""
    totals: dict[int, Floats] = {}
    for column, slope in slopes:
        parts = [(column, slope)]
        if column == c.n + SPEED:
            parts = [(k, slope * s) for k, s in c.speed_slopes]
        for k, value in parts:
            totals[k] = totals[k] + value if k in totals else value
    out = []
    for column in range(len(x[0])):
        value = np.zeros(model.hours)
        for k, slope in totals.items():
            entry = x[k][column]
            if entry is not None:
                value += slope * entry
        out.append(value)
    return out


class Stepper:
    """Newton passes of one record; the state is changed in place."""

    def __init__(self, model: Model, state: State) -> None:
        """Keep room for the answers of every hour."""
        ix = model.index
        self.model, self.state = model, state
        self.carried = [*ix.stores, ix.size]  # the film stands behind the unknowns, its gain and loss last
        rest = [row for row in range(ix.size) if row not in (*self.carried, ix.floor)]
        self.rows = [*self.carried, ix.floor, *rest, ix.size + 1, ix.size + 2]  # order of answers
        self.answer = np.zeros((len(self.rows), len(self.carried) + 2, model.hours))
        self.inflow = np.zeros((2, model.hours))  # gain and loss of the film
        self.active: Ints | None = None  # None: all hours
        self.given = np.zeros(model.hours)  # see `Response.given`

    def look(self) -> tuple[Context, Floats, Past]:
        """Evaluate every hour: context, open amounts, past."""
        gone = past(self.model, self.state)
        context = evaluate(self.model, self.state.unknown, gone)
        return context, open_by(self.model, self.state.film, context), gone

    def apart(self, c: Context) -> None:
        """One step of every hour by itself, the past held."""
        m, ix = self.model, self.model.index
        slopes = [row[: c.n] for row in c.system.slope]
        x = eliminate(slopes, right_sides(m, c, True), vent_reach(c), m.hours)
        film, gain, loss = film_line(m, self.state.film, c, x)
        self.inflow = np.array([c.film_gain, c.film_loss])
        steps = [np.zeros(m.hours) if row[0] is None else row[0] for row in x]
        conductance, _ = soil_line(c)
        self._apply([*steps, film[0], gain[0], loss[0]], (1.0 + conductance / m.soil.film) * steps[ix.floor])

    def _learn(self, model: Model, film: Floats, c: Context, at: Ints | slice) -> None:
        """Keep the answers of the hours that were evaluated."""
        slopes = [row[: c.n] for row in c.system.slope]
        x = eliminate(slopes, right_sides(model, c, False), vent_reach(c), model.hours)
        for line in film_line(model, film, c, x):
            x.append(list(line))
        self.inflow[:, at] = c.film_gain, c.film_loss
        for place, row in enumerate(self.rows):
            for j, entry in enumerate(x[row]):
                self.answer[place, j, at] = 0.0 if entry is None else entry

    def step(self, c: Context, error: Floats, gone: Past) -> None:
        """One marched step from a full evaluation; hours far from closed first move by themselves.

        An hour that changes its regime would otherwise do so one kink a pass, and shake the hours after it.
        """
        self._learn(self.model, self.state.film, c, slice(None))
        far = np.flatnonzero(error > FAR_W_M2)
        if 0 < len(far) < FAR_SHARE * self.model.hours:
            self._settle_far(far, gone, error, len(far) < FAR_FEW)
        self._march(error)

    def _settle_far(self, far: Ints, gone: Past, error: Floats, every_start: bool = False) -> None:
        """Solve far hours with their past held, then learn anew from them and the hours after them."""
        m, s = self.model, self.state
        part, before = m.take(far), gone.take(far)
        start = [u[far] for u in s.unknown]
        if every_start:
            unknown, done, _ = alone(part, start, before, NEAR_W_M2)
        else:
            unknown, done = descend(part, start, before, NEAR_W_M2, tries=FAR_TRIES)
        if not done.any():
            return
        at = far[done]
        for k, value in enumerate(unknown):
            s.unknown[k][at] = value[done]
        context = evaluate(part, unknown, before)
        s.film[at] = context.film_after[done]
        conductance, recalled = soil_line(context)
        floor = unknown[m.index.floor]
        drive = (floor + (conductance * floor - recalled) / m.soil.film)[done]
        self.given[at] = drive - s.drive[at]
        s.drive[at] = drive
        mask = np.zeros(m.hours, dtype=bool)
        mask[at] = True
        anew = np.flatnonzero(mask | m.order.before(mask))
        part, before = m.take(anew), past(m, s).take(anew)
        context = evaluate(part, [u[anew] for u in s.unknown], before)
        self._learn(part, s.film[anew], context, anew)
        error[anew] = open_by(part, s.film[anew], context)

    def step_moving(self) -> None:
        """One marched step that evaluates only the hours that still move."""
        at = self.active
        if at is None:
            raise ValueError("a full step comes first")
        gone = past(self.model, self.state)
        part = self.model.take(at)
        context = evaluate(part, [u[at] for u in self.state.unknown], gone.take(at))
        film = self.state.film[at]
        self.answer[:, 0, :] = 0.0
        self._learn(part, film, context, at)
        error = np.zeros(self.model.hours)
        error[at] = open_by(part, film, context)
        far = np.flatnonzero(error > FAR_FEW_W_M2)
        if 0 < len(far) < FAR_SHARE * len(at):
            self._settle_far(far, gone, error)
        self._march(error)

    def _march(self, error: Floats) -> None:
        m, ix = self.model, self.model.index
        picked = self.answer[: len(self.carried) + 1]
        start, soil = m.soil_start, m.soil
        conductance = soil.conductance - start * float(np.sum(soil.recall * soil.drive / (1.0 - soil.keep)))
        response = Response(
            picked[:, 0], picked[:, 1], picked[:, 2:],
            1.0 + conductance / (soil.film - conductance), -(1.0 - start) / (soil.film - soil.conductance),
            len(ix.stores) - 1, self.given,
        )  # fmt: skip
        self.given = np.zeros(m.hours)
        carried, recalled, drive = march(m, response)
        shifted = m.order.before(carried) * (1.0 - start)
        steps: list[Floats] = [carried[0]] * (ix.size + 3)
        for place, row in enumerate(self.rows):
            if place < len(self.carried):
                steps[row] = carried[place]
            else:
                a = self.answer[place]
                steps[row] = a[0] + a[1] * recalled + np.einsum("kn,kn->n", a[2:], shifted)
        moved = self._apply(steps, drive)
        moving = (np.maximum(moved, m.order.before(moved)) > STILL_K) | (error > STILL_K)
        self.active = np.flatnonzero(moving)

    def _apply(self, steps: list[Floats], drive: Floats) -> Floats:
        """Limit and add a step; returns how far each hour moved, in K."""
        m, ix, s = self.model, self.model.index, self.state
        vapours = {ix.vapour(space) for space in range(ix.screens + 1)}
        size, moved = np.ones(m.hours), np.zeros(m.hours)
        for k in range(ix.size):
            step = np.abs(steps[k])
            if k == ix.vent:
                np.maximum(moved, step / OPENING_PER_K, out=moved)
                continue
            np.maximum(size, step / (LARGEST_STEP_PA if k in vapours else LARGEST_STEP_K), out=size)
            np.maximum(moved, step / PASCAL_PER_K if k in vapours else step, out=moved)
        share = 1.0 / size
        for k in range(ix.size):
            s.unknown[k] = s.unknown[k] + share * steps[k]
        self.inflow = self.inflow + share * np.array(steps[ix.size + 1 :])
        film = run_film(m, s.film, self.inflow, FILM_LAPS)
        np.maximum(moved, np.abs(film - s.film) / FILM_PER_K, out=moved)
        s.film = film
        s.drive = s.drive + np.clip(share * drive, -LARGEST_STEP_K, LARGEST_STEP_K)
        keep_in_range(m, s, vapours)
        return moved


def keep_in_range(model: Model, state: State, vapours: set[int]) -> None:
    """Hold unknowns in the range where the formulas mean something, and the soil in line with its drive."""
    ix, u = model.index, state.unknown
    for k in range(ix.size):
        if k == ix.vent:
            u[k] = np.clip(u[k], -PAST_KINK, model.gap_max + model.vent_max + PAST_KINK)
        elif k not in vapours:
            u[k] = np.clip(u[k], LOWEST_C, HIGHEST_C)
    for space in range(ix.screens + 1):
        full = SATURATED * vp.saturation(u[ix.air(space)])[0]
        u[ix.vapour(space)] = np.clip(u[ix.vapour(space)], 1.0, full)
    set_soil(model, state)


def set_soil(model: Model, state: State) -> None:
    """Bring modes and floor temperature in line with the film temperature T*."""
    soil, start = model.soil, model.soil_start
    state.modes = run_modes(model, state.drive)
    history = model.order.before(soil.recall @ state.modes) * (1.0 - start)
    state.history = history
    steady = float(np.sum(soil.recall * soil.drive / (1.0 - soil.keep)))
    steady_deep = float(np.sum(soil.recall * soil.deep / (1.0 - soil.keep)))
    flux = (soil.conductance - start * steady) * state.drive - history
    flux -= (soil.conductance_deep + start * steady_deep) * model.deep
    state.unknown[model.index.floor] = state.drive - flux / soil.film
