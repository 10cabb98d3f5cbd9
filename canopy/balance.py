"""The hourly heat balance of a record: all hours at once by semismooth Newton steps, closed in every hour."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import vapour as vp
from canopy.bands import THERMAL, BandSet
from canopy.heatcase import HeatCase, HeatResult
from canopy.heatindex import order_index
from canopy.heatmodel import Model, build_model
from canopy.heatout import result
from canopy.heatregime import PAST_KINK, evaluate, vent_reach
from canopy.heatretry import alone
from canopy.heatrows import FILM, HISTORY, SPEED, Context, State, past, soil_line
from canopy.longwave import band_emission
from canopy.march import Response, march, run_modes
from canopy.newton import Entry, eliminate
from canopy.optics import ThermalOptics
from weather.errors import OpenHourError

Floats = NDArray[np.float64]

CLOSED_W_M2: Final = 1e-6  # every row of every hour
FILM_LAPS: Final = 60  # a film that gains 1 g/m2 a day fills in as many
ENOUGH_W_M2: Final = 1e-2  # left after all turns: one day that repeats itself closes slowly
LET_GO_HUMIDITY: Final = 2
LET_GO_VENTS: Final = 4
OPEN_W_M2: Final = 1e-3  # what sends an hour to the other route
TURNS: Final = 8  # of Newton passes and other route
FIRST_PASSES: Final = 12
LATER_PASSES: Final = 5
APART: Final = 3  # first passes, each hour by itself: far from the answer the past only spreads the error
GREY_C: Final = 10.0  # temperature at which grey means are weighted
LARGEST_STEP_K: Final = 8.0
LARGEST_STEP_PA: Final = 800.0
SATURATED: Final = 1.004  # a step goes no further beyond saturation; fog keeps the air below


GREY: Final = BandSet(("all",), (3.0, 100.0))
"""One band over all wavelengths."""


def solve(case: HeatCase, warm: HeatResult | None = None, bands: BandSet = THERMAL) -> HeatResult:
    """Solve a heat case; `warm` is the result of a like case (same hours) to start from.

    The thermal records may stand in `bands` other than the house's own table; a case from `grey`, with one
    band, is recognised by its one row. Raises OpenHourError, naming the hour and why, if an hour stays open
    after the other route.
    """
    if case.outside.sky_bands.shape[0] == 1 and len(bands) != 1:
        bands = GREY
    model = build_model(case, bands)
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        state = first_guess(model, warm)
        context, passes, retried = settle(model, state, quick=warm is not None)
    return result(model, state, context, passes, retried)


def settle(model: Model, state: State, quick: bool = False) -> tuple[Context, int, int]:
    """Newton passes of the whole record, and the other route for what they leave, until every hour is closed.

    The state is changed in place. Returns the last evaluation, the number of passes, and how many hours the
    other route solved.
    """
    passes, by_other_route = 0, 0
    for turn in range(TURNS):
        for step in range(FIRST_PASSES if turn == 0 else LATER_PASSES):
            context = evaluate(model, state.unknown, past(model, state))
            error = open_by(model, state, context)
            passes += 1
            if float(error.max()) < CLOSED_W_M2:
                return context, passes, by_other_route
            newton_step(model, state, context, apart=turn == 0 and step < APART and not quick)
        by_other_route += _other_route(model, state, turn)
    context = evaluate(model, state.unknown, past(model, state))
    error = open_by(model, state, context)
    if float(error.max()) < ENOUGH_W_M2:
        return context, passes + 1, by_other_route
    worst = int(np.argmax(model.order.back(error)))
    raise OpenHourError(_why(model, context, error, worst, passes))


def _other_route(model: Model, state: State, turn: int) -> int:
    """Solve the open hours by themselves, each with its past held; returns how many.

    An hour that no regime closes is one whose opening does not bring about what it is opened for (a screen
    that lets warmth out faster than damp, a space above colder than outside). After some turns such an hour
    is taken without its humidity limit, later with its vents open if nothing is heated: `notes` say so.
    """
    gone = past(model, state)
    error = open_by(model, state, evaluate(model, state.unknown, gone))
    at = np.flatnonzero(error > OPEN_W_M2)
    if len(at) == 0:
        return 0
    part, before = model.take(at), gone.take(at)
    unknown, done = alone(part, [u[at] for u in state.unknown], before, 0.1 * CLOSED_W_M2)
    if turn >= LET_GO_HUMIDITY:
        model.dry_outside[at[~done]] = False
        model.let_go[at[~done]] = True
    if turn >= LET_GO_VENTS:
        model.open_all[at[~done]] |= (unknown[model.index.house_air] > part.heat_at + 0.1)[~done]
    context = evaluate(part, unknown, before)
    for k, value in enumerate(unknown):
        state.unknown[k][at] = value
    _run_film(model, state, context, at)
    conductance, recalled = soil_line(context)
    floor = unknown[model.index.floor]
    state.drive[at] = floor + (conductance * floor - recalled) / model.soil.film
    set_soil(model, state)
    return len(at)


def _run_film(model: Model, state: State, part: Context, at: NDArray[np.int64]) -> None:
    """Let the film run through the record at the uptake in hand, lap after lap, until it repeats.

    Newton passes hand the film on by one chunk each; a film that gains a little every day would take as many
    passes as days to fill.
    """
    order = model.order
    inflow = evaluate(model, state.unknown, past(model, state)).inflow
    inflow[at] = part.inflow
    cut = inflow.reshape(order.steps, order.chunks)
    film = state.film.reshape(order.steps, order.chunks).copy()
    for _ in range(FILM_LAPS):
        end = film[-1].copy()
        now = np.roll(end, 1)
        if not model.case.periodic:
            now[0] = 0.0
        for k in range(order.steps):
            now = vp.film_step(now, cut[k])[0]
            film[k] = now
        if float(np.abs(film[-1] - end).max()) < 1e-12:
            break
    state.film = film.ravel()


def _why(model: Model, c: Context, error: Floats, hour: int, passes: int) -> str:
    """Diagnostics for an open hour."""
    at = int(np.flatnonzero(order_index(model.order) == hour)[0])
    ix = model.index
    rows = [abs(float(r[at])) for r in c.system.residual]
    names = {ix.floor: "floor", ix.leaf: "crop", ix.air0_vapour: "vapour", ix.house_air: "air",
             ix.pipe: "heating", ix.vent: "venting"}  # fmt: skip
    names |= {ix.cover(k): f"covering layer {k + 1}" for k in range(ix.layers)}
    worst = int(np.argmax(rows))
    return (
        f"hour {hour} of the record: {float(error[at]):.3g} W/m2 stay open in the balance of "
        f"{names.get(worst, 'screen space')} (outside {model.temp_out[at]:.1f} degC, "
        f"wind {model.wind[at]:.1f} m/s, inside {c.u[ix.house_air][at]:.1f} degC, "
        f"vents {c.u[ix.vent][at]:.2f}); "
        f"{int((error > CLOSED_W_M2).sum())} hours open after {passes} passes"
    )


def open_by(model: Model, state: State, c: Context) -> Floats:
    """Largest open amount over the rows of each hour, W/m2 (regime rows by their weights)."""
    error = np.abs(c.system.residual[0])
    for row in c.system.residual[1:]:
        np.maximum(error, np.abs(row), out=error)
    film = np.abs(c.film_after - state.film) * (vp.LATENT_HEAT * model.cover_size / model.step_s)
    return np.maximum(error, film)


def _right_sides(model: Model, c: Context) -> list[list[Entry]]:
    """Columns: residual, soil history, each store's hour before, film before."""
    ix, n = model.index, c.n
    sides: list[list[Entry]] = []
    for row in range(n):
        a = c.system.slope[row]
        line: list[Entry] = [c.system.residual[row].copy(), None]
        if a[n + HISTORY] is not None:
            line[1] = -a[n + HISTORY]  # type: ignore[operator]
        for store in ix.stores:
            entry: Entry = None
            if store == row:
                entry = model.capacity[row].copy()
                if row == ix.air0_vapour:
                    entry *= vp.mixing_ratio(c.before[row], model.pressure)[1]
                if row == ix.pipe:
                    entry *= c.pipe_keeps
            line.append(entry)
        film = a[n + FILM]
        line.append(None if film is None else -film)
        sides.append(line)
    return sides


def _film_line(model: Model, state: State, c: Context, x: list[list[Entry]]) -> list[Floats]:
    """The film's own row after elimination, for every right-hand side."""
    by_before, by_inflow = c.film_slopes
    totals: dict[int, Floats] = {}
    for column, slope in c.inflow_slopes:
        parts = [(column, slope)]
        if column == c.n + SPEED:
            parts = [(k, slope * s) for k, s in c.speed_slopes]
        for k, value in parts:
            totals[k] = totals[k] + value if k in totals else value
    columns = len(x[0])
    out = []
    for column in range(columns):
        value = np.zeros(model.hours)
        for k, slope in totals.items():
            entry = x[k][column]
            if entry is not None:
                value += slope * entry
        out.append(by_inflow * value)
    out[0] += c.film_after - state.film
    out[-1] += by_before
    return out


def _response(model: Model, c: Context, x: list[list[Entry]], film: list[Floats]) -> Response:
    """Stack what the march needs: stores and film, then the floor."""
    zero = np.zeros(model.hours)
    rows: list[list[Entry]] = [*(x[k] for k in model.index.stores), list(film), x[model.index.floor]]
    dense = [[zero if e is None else e for e in row] for row in rows]
    conductance, _ = soil_line(c)
    soil = model.soil
    return Response(
        own=np.array([row[0] for row in dense]),
        history=np.array([row[1] for row in dense]),
        before=np.array([row[2:] for row in dense]),
        drive_floor=1.0 + conductance / soil.film,
        drive_history=-(1.0 - model.soil_start) / (soil.film - soil.conductance),
    )


def newton_step(model: Model, state: State, c: Context, apart: bool = False) -> None:
    """One Newton step of the whole record, marched in time (unless `apart`), limited, applied."""
    ix, n = model.index, c.n
    x = eliminate([row[:n] for row in c.system.slope], _right_sides(model, c), vent_reach(c), model.hours)
    response = _response(model, c, x, _film_line(model, state, c, x))
    if apart:
        carried, drive = response.own[:-1], response.drive_floor * response.own[-1]
        steps = [np.zeros(model.hours) if row[0] is None else row[0] for row in x]
    else:
        carried, recalled, drive = march(model, response)
        shifted = model.order.before(carried) * (1.0 - model.soil_start)
        steps = [_total(model.hours, row, recalled, shifted) for row in x]
    size = np.ones(model.hours)
    vapours = {ix.vapour(space) for space in range(ix.screens + 1)}
    for k in range(n):
        if k != ix.vent:
            limit = LARGEST_STEP_PA if k in vapours else LARGEST_STEP_K
            np.maximum(size, np.abs(steps[k]) / limit, out=size)
    share = 1.0 / size
    for k in range(n):
        state.unknown[k] = state.unknown[k] + share * steps[k]
    state.film = np.clip(state.film + share * carried[-1], 0.0, vp.FILM_MAX_KG_M2)
    state.drive = state.drive + np.clip(share * drive, -LARGEST_STEP_K, LARGEST_STEP_K)
    keep_in_range(model, state)


def _total(hours: int, row: list[Entry], recalled: Floats, shifted: Floats) -> Floats:
    """An unknown's step: its own, by the soil's history, by each carried quantity of the hour before."""
    step = np.zeros(hours) if row[0] is None else row[0]
    if row[1] is not None:
        step = step + row[1] * recalled
    for entry, before in zip(row[2:], shifted, strict=True):
        if entry is not None:
            step = step + entry * before
    return step


def keep_in_range(model: Model, state: State) -> None:
    """Hold unknowns in the range where the formulas mean something, and the soil in line with its drive."""
    ix, u = model.index, state.unknown
    vapours = {ix.vapour(space) for space in range(ix.screens + 1)}
    for k in range(ix.size):
        if k == ix.vent:
            u[k] = np.clip(u[k], -PAST_KINK, model.gap_max + model.vent_max + PAST_KINK)
        elif k not in vapours:
            u[k] = np.clip(u[k], -80.0, 110.0)
    for space in range(ix.screens + 1):
        full = SATURATED * vp.saturation(u[ix.air(space)])[0]
        u[ix.vapour(space)] = np.clip(u[ix.vapour(space)], 1.0, full)
    set_soil(model, state)


def set_soil(model: Model, state: State) -> None:
    """Bring modes and floor temperature in line with the film temperature T*."""
    soil, start = model.soil, model.soil_start
    state.modes = run_modes(model, state.drive)
    history = (soil.recall @ model.order.before(state.modes)) * (1.0 - start)
    steady = float(np.sum(soil.recall * soil.drive / (1.0 - soil.keep)))
    steady_deep = float(np.sum(soil.recall * soil.deep / (1.0 - soil.keep)))
    flux = (soil.conductance - start * steady) * state.drive - history
    flux -= (soil.conductance_deep + start * steady_deep) * model.deep
    state.unknown[model.index.floor] = state.drive - flux / soil.film


def first_guess(model: Model, warm: HeatResult | None = None) -> State:
    """First iterate: near the set-points, or a like case's result."""
    ix, out, hours = model.index, model.temp_out, model.hours
    into = model.order.into
    u = [np.empty(0)] * ix.size
    heat = np.where(np.isfinite(model.heat_at), model.heat_at, -80.0)
    sun = sum((dry for dry, _ in model.gain.values()), np.zeros(hours))
    air = np.maximum(heat, np.minimum(out + 1.0 + 0.03 * sun, np.maximum(model.vent_at, out + 1.0)))
    if warm is not None:
        air = into(warm.temp_air)
    for space in range(ix.screens + 1):
        u[ix.air(space)] = air + 0.5 * space / (ix.screens + 1.0) * (out - air)
        u[ix.vapour(space)] = 0.8 * vp.saturation(u[ix.air(space)])[0]
    for layer in range(ix.layers):
        u[ix.cover(layer)] = out + (air - out) * (layer + 0.7) / (ix.layers + 1.0)
    for number in range(ix.screens):
        u[ix.screen(number)] = 0.7 * air + 0.3 * out
    u[ix.leaf], u[ix.floor] = air - 0.5, air - 1.0
    pipe = np.clip(air + 1.5 * (air - out), air, np.maximum(model.case.heating.flow_max_c, air))
    u[ix.pipe] = np.where(np.isfinite(model.heat_at), pipe, air)
    u[ix.vent] = np.where(model.open_all, model.gap_max + model.vent_max, 0.0)
    state = State(u, np.zeros(hours), np.empty(0), air - 1.0)
    if warm is not None:
        _take_over(model, state, warm)
    set_soil(model, state)
    return state


def _take_over(model: Model, state: State, warm: HeatResult) -> None:
    """Start from a like case's temperatures; what does not fit (layers, screens) keeps its guess."""
    ix, u, into = model.index, state.unknown, model.order.into
    u[ix.leaf], u[ix.floor], u[ix.pipe] = into(warm.temp_leaf), into(warm.temp_floor), into(warm.temp_pipe)
    u[ix.air0_vapour] = into(warm.vapour_pressure)
    if warm.temp_covering.shape[0] == ix.layers:
        for layer in range(ix.layers):
            u[ix.cover(layer)] = into(warm.temp_covering[layer])
    if warm.temp_screen.shape[0] == ix.screens:
        for number in range(ix.screens):
            u[ix.screen(number)] = into(warm.temp_screen[number])
    u[ix.vent] = np.where(into(warm.vent_open) > 0.0, model.gap_max + into(warm.vent_open), 0.0)
    state.film = vp.FILM_FULL_KG_M2 * into(warm.wet)
    state.drive = u[ix.floor] + (into(warm.soil_store) + into(warm.deep_loss)) / model.soil.film


def grey(case: HeatCase) -> HeatCase:
    """The same case as one grey band would have it: every long-wave property a mean over the bands.

    Means are weighted by blackbody emission at GREY_C, the sky is its total. `solve` takes it like any
    other case.
    """
    emission, _ = band_emission(np.array([GREY_C]))
    weight = emission[:, 0] / emission[:, 0].sum()

    def mean(values: Floats) -> Floats:
        return np.asarray((values * weight).sum(axis=-1, keepdims=True))

    def optics(o: ThermalOptics) -> ThermalOptics:
        return ThermalOptics(mean(o.transmit), mean(o.reflect_outside), mean(o.reflect_inside))

    cover = replace(case.covering, dry=optics(case.covering.dry), wet=optics(case.covering.wet))
    return replace(
        case,
        outside=replace(case.outside, sky_bands=case.outside.sky_bands.sum(axis=0, keepdims=True)),
        covering=cover,
        screens=tuple(replace(s, thermal=optics(s.thermal)) for s in case.screens),
        crop=replace(case.crop, emissivity=mean(case.crop.emissivity)),
        ground=replace(case.ground, emissivity=mean(case.ground.emissivity)),
    )
