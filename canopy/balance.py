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
from canopy.heatregime import evaluate
from canopy.heatretry import alone, descend
from canopy.heatrows import Context, State, past, soil_line
from canopy.heatstep import Stepper, open_by, set_soil
from canopy.longwave import band_emission
from canopy.march import run_film
from canopy.optics import ThermalOptics
from weather.errors import OpenHourError

Floats = NDArray[np.float64]

CLOSED_W_M2: Final = 2e-5  # every row of every hour
FILM_LAPS: Final = 60  # a film that gains 1 g/m2 a day fills in as many
ENOUGH_W_M2: Final = 1e-2  # left after all turns: one day that repeats itself closes slowly
LET_GO_HUMIDITY: Final = 2
HOLD_OPENING: Final = 3
OPEN_W_M2: Final = 1e-3  # what sends an hour to the other route
TURNS: Final = 8  # of Newton passes and other route
FIRST_PASSES: Final = 13
LATER_PASSES: Final = 5
APART: Final = 1  # first passes, each hour by itself: far from the answer the past only spreads the error
GREY_C: Final = 10.0  # temperature at which grey means are weighted
FEW: Final = 0.6  # share of hours still moving below which only they are evaluated


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
    stepper = Stepper(model, state)
    for turn in range(TURNS):
        for step in range(FIRST_PASSES if turn == 0 else LATER_PASSES):
            passes += 1
            active = stepper.active
            if active is not None and 0 < len(active) < FEW * model.hours:
                stepper.step_moving()
                continue
            context, error, gone = stepper.look()
            if float(error.max()) < CLOSED_W_M2:
                return context, passes, by_other_route
            if turn == 0 and step < APART and not quick:
                stepper.apart(context)
            else:
                stepper.step(context, error, gone)
        by_other_route += _other_route(model, state, turn)
        stepper.active = None
    context, error, _ = stepper.look()
    if float(error.max()) < ENOUGH_W_M2:
        return context, passes + 1, by_other_route
    worst = int(np.argmax(model.order.back(error)))
    raise OpenHourError(_why(model, context, error, worst, passes))


def _other_route(model: Model, state: State, turn: int) -> int:
    """Solve the open hours by themselves, each with its past held; returns how many.

    An hour that no regime closes is one whose opening does not bring about what it is opened for (a screen
    that lets warmth out faster than damp, a space above colder than outside). After some turns such an hour
    is taken without its humidity limit, later with its opening held where the control changes its mind:
    `notes` say so.
    """
    gone = past(model, state)
    error = open_by(model, state.film, evaluate(model, state.unknown, gone))
    at = np.flatnonzero(error > OPEN_W_M2)
    if len(at) == 0:
        return 0
    part, before = model.take(at), gone.take(at)
    unknown, done, opening = alone(part, [u[at] for u in state.unknown], before, 0.1 * CLOSED_W_M2)
    if turn >= LET_GO_HUMIDITY:
        model.dry_outside[at[~done]] = False
        model.let_go[at[~done]] = True
    if turn >= HOLD_OPENING and not done.all():
        model.hold[at[~done]] = opening[~done]
        part = model.take(at)
        unknown, done = descend(part, unknown, before, 0.1 * CLOSED_W_M2)
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
    whole = evaluate(model, state.unknown, past(model, state))
    inflow = np.array([whole.film_gain, whole.film_loss])
    inflow[:, at] = part.film_gain, part.film_loss
    state.film = run_film(model, state.film, inflow, FILM_LAPS)


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
    state = State(u, np.zeros(hours), np.empty(0), air - 1.0, np.empty(0))
    if warm is not None:
        _take_over(model, state, warm)
    set_soil(model, state)
    return state


def _take_over(model: Model, state: State, warm: HeatResult) -> None:
    """Start from a like case; of an unlike one (layers, screens) what fits, the rest keeps its guess."""
    ix, u, into = model.index, state.unknown, model.order.into
    if warm.start is None:
        return
    *rows, state.film, state.drive = into(warm.start)
    most = model.gap_max + model.vent_max
    if len(warm.temp_covering) == ix.layers and len(warm.temp_screen) == ix.screens:
        for k, row in enumerate(rows):
            u[k] = row
        u[ix.vent] = np.where(model.open_all, most, np.minimum(u[ix.vent], most))
        return
    u[ix.leaf], u[ix.floor], u[ix.pipe] = into(warm.temp_leaf), into(warm.temp_floor), into(warm.temp_pipe)
    u[ix.air0_vapour] = into(warm.vapour_pressure)
    open_part = into(warm.vent_open)
    u[ix.vent] = np.where(model.open_all, most, np.where(open_part > 0.0, model.gap_max + open_part, 0.0))


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
