"""The hourly balance as rows: fluxes between the nodes of a house, with their slopes.

Rows are W/m2 floor. Vapour rows carry latent heat, so that water and heat add up in one unit; latent heat is
constant (at 20 degC), liquid water carries heat relative to 20 degC. Stores step implicitly (Euler), fluxes
belong to the state at the end of the step, the soil to the exact hour mean of its modes.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy import exchange as ex
from canopy import vapour as vp
from canopy.heatmodel import STAND_ALONE_FACE, Model
from canopy.newton import System
from weather.constants import CP_AIR, CP_WATER

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

WET, GAIN, LOSS, SPEED, FILM, HISTORY = range(6)
"""Columns behind the unknowns: wet share, what the film gains and loses, squared air speed, film before, soil
history."""
AUXILIARY = 6


@dataclass
class State:
    """The iterate: unknowns by `Index`, film (kg per m2 cover), soil modes and film temperature T*."""

    unknown: list[Floats]
    film: Floats
    modes: Floats  # (M, N) at the end of each step
    drive: Floats  # (N,) T*
    history: Floats  # (N,) W/m2, what the modes before recall


@dataclass(frozen=True)
class Past:
    """What the hours before hand on: unknowns with a store, film, and the soil's recall (W/m2)."""

    before: dict[int, Floats]
    film: Floats
    history: Floats

    def take(self, at: Ints) -> Past:
        """The same for some hours."""
        return Past({k: v[at] for k, v in self.before.items()}, self.film[at], self.history[at])


def past(model: Model, state: State) -> Past:
    """The past of every hour of a record, from the iterate itself."""
    keep = 1.0 - model.soil_start
    return Past(
        {k: model.order.before(state.unknown[k]) for k in model.index.stores},
        model.order.before(state.film) * keep,
        state.history,
    )


class Context:
    """One evaluation: unknowns, what several rows share, and the rows themselves."""

    def __init__(self, model: Model, unknown: list[Floats], gone: Past) -> None:
        """Look up saturation and humidity ratios."""
        ix = model.index
        self.model, self.ix, self.u, self.n = model, ix, unknown, ix.size
        self.system = System(ix.size, ix.size + AUXILIARY, model.hours)
        spaces = range(ix.screens + 1)
        wanted = [ix.leaf, ix.floor, ix.cover(ix.layers - 1), *(ix.air(k) for k in spaces)]
        wanted += [ix.screen(k) for k in range(ix.screens)]
        value, slope = vp.saturation(np.array([unknown[k] for k in wanted]))
        self.saturation = {k: (value[i], slope[i]) for i, k in enumerate(wanted)}
        self.ratio = [vp.mixing_ratio(unknown[ix.vapour(k)], model.pressure) for k in spaces]
        self.before, self.film_before, self.history = gone.before, gone.film, gone.history
        self.wet = np.minimum(self.film_before / vp.FILM_FULL_KG_M2, 1.0)
        self.film_after = self.film_gain = self.film_loss = self.speed = np.empty(0)
        self.film_slopes = (np.empty(0), np.empty(0))
        self.gain_slopes: list[tuple[int, Floats]] = []
        self.loss_slopes: list[tuple[int, Floats]] = []
        self.speed_slopes: list[tuple[int, Floats]] = []
        self.pipe_keeps = np.empty(0)
        self.at_limit = self.humid = np.empty(0, dtype=bool)
        opening = unknown[ix.vent]
        some = model.gap_max > 0.0
        self.gap = np.where(some, np.minimum(opening, model.gap_max), 0.0)
        self.gap_slope = (some & (opening < model.gap_max)).astype(float)

    def air_flow(self, mass: Floats, mass_slopes: list[tuple[int, Floats]], low: int, high: int | None,
                 name: str = "") -> None:  # fmt: skip
        """Air (kg m-2 s-1) between a space and the one above it or outside: sensible and latent."""
        m, ix = self.model, self.ix
        t_low, e_low = ix.air(low), ix.vapour(low)
        sink_t = None if high is None else ix.air(high)
        sink_e = None if high is None else ix.vapour(high)
        diff = self.u[t_low] - (m.temp_out if sink_t is None else self.u[sink_t])
        moist = self.ratio[low][0] - (m.ratio_out if high is None else self.ratio[high][0])
        dry, wet = CP_AIR * mass, vp.LATENT_HEAT * mass
        warm = [(k, CP_AIR * diff * slope) for k, slope in mass_slopes] + [(t_low, dry)]
        damp = [(k, vp.LATENT_HEAT * moist * slope) for k, slope in mass_slopes]
        damp.append((e_low, wet * self.ratio[low][1]))
        if sink_t is not None and sink_e is not None and high is not None:
            warm.append((sink_t, -dry))
            damp.append((sink_e, -wet * self.ratio[high][1]))
        self.system.flow(dry * diff, t_low, sink_t, warm, name and name + "_dry")
        self.system.flow(wet * moist, e_low, sink_e, damp, name and name + "_wet")


def air_change(c: Context) -> None:
    """Leakage through roof and walls, vents in the roof; also the air speed inside."""
    m, ix, shell = c.model, c.ix, c.model.case.shell
    top = ix.screens
    leaked = np.zeros(m.hours)
    for space, share in _inner_faces(m):
        at = ix.air(space)
        leak, by_diff = ex.leakage(
            share * shell.leakage_per_hour, shell.mean_height_m, m.wind, c.u[at] - m.temp_out
        )
        c.air_flow(m.density * leak, [(at, m.density * by_diff)], space, None, "leak")
        leaked += leak
    air = ix.air(top)
    diff = c.u[air] - m.temp_out
    full, full_slope = ex.vent_flow(shell.vent_area_ratio, shell.vent_factor, m.wind, diff, m.mean_k)
    opening = c.u[ix.vent] - c.gap
    flow, by_temp, by_vent = opening * full, opening * full_slope, (1.0 - c.gap_slope) * full
    slopes = [(air, m.density * by_temp), (ix.vent, m.density * by_vent)]
    c.air_flow(m.density * flow, slopes, top, None, "vent")
    c.system.flows["vent_m3"], c.system.flows["leak_m3"] = flow, leaked
    c.system.flows["opening"] = opening
    c.speed, by_flow = ex.air_speed_sq(flow, shell.mean_height_m)
    c.speed_slopes = [(air, by_flow * by_temp), (ix.vent, by_flow * by_vent)]


def covering(c: Context) -> None:
    """Outer convection, gaps between layers, inner convection, condensation and the film."""
    m, ix, system = c.model, c.ix, c.system
    size, resistance = m.cover_size, m.case.covering.resistance
    h_out = size / (1.0 / m.outer_h + 0.5 * resistance[0])
    first = ix.cover(0)
    system.flow(h_out * (c.u[first] - m.temp_out), first, None, [(first, h_out)], "convection")
    for k, layer in enumerate(m.gaps):
        a, b = ix.cover(k + 1), ix.cover(k)
        diff = c.u[a] - c.u[b]
        h, slope = ex.gap_conductance(layer, diff)
        total = 1.0 / (1.0 / h + 0.5 * (resistance[k] + resistance[k + 1]))
        by_diff = size * (total + diff * slope * (total / h) ** 2)
        system.flow(size * total * diff, a, b, [(a, by_diff), (b, -by_diff)])
    forced, by_speed = ex.forced_cube(c.speed)
    faces = [_face(c, space, share, forced, by_speed) for space, share in _inner_faces(m)]
    _condense(c, faces)


@dataclass(frozen=True)
class _Face:
    """Part of the covering's inner face: the space before it, its share, and its convection with slopes."""

    space: int
    share: float
    h: Floats
    by_diff: Floats
    by_speed: Floats


def _inner_faces(m: Model) -> tuple[tuple[int, float], ...]:
    """Roof over the topmost space; walls beside the house air, since ceiling screens leave them free."""
    top = m.index.screens
    if top == 0 or m.wall_share == 0.0:
        return ((top, 1.0),)
    return ((top, 1.0 - m.wall_share), (0, m.wall_share))


def _face(c: Context, space: int, share: float, forced: Floats, by_speed: Floats) -> _Face:
    """Inner convection of one part of the covering."""
    m, ix = c.model, c.ix
    last, air = ix.cover(ix.layers - 1), ix.air(space)
    diff = c.u[air] - c.u[last]
    h, by_diff, by_cube = ex.cube_law(m.inner_free, diff, forced)
    series = 1.0 / (1.0 + 0.5 * h * m.case.covering.resistance[-1])
    size = share * m.cover_size
    total, chain = size * h * series, size * series * series
    slope = total + diff * chain * by_diff
    slopes = [(air, slope), (last, -slope), (c.n + SPEED, diff * chain * by_cube * by_speed)]
    c.system.flow(total * diff, air, last, slopes)
    return _Face(space, share, h, by_diff, by_cube * by_speed)


def _condense(c: Context, faces: list[_Face]) -> None:
    """Vapour against the inner face (Lewis), the film that it leaves, and what runs off.

    One film serves all parts of the face. A part that collects takes up all; one that gives off does so by
    the film's wet share, after what the others brought.
    """
    m, ix = c.model, c.ix
    last = ix.cover(ix.layers - 1)
    gain, loss = np.zeros(m.hours), np.zeros(m.hours)
    parts = []
    for face in faces:
        air, vapour = ix.air(face.space), ix.vapour(face.space)
        unit = face.share * m.lewis * (m.step_s / vp.LATENT_HEAT)
        excess = c.u[vapour] - c.saturation[last][0]
        by_heat = unit * excess * face.by_diff
        slopes = [
            (vapour, unit * face.h),
            (air, by_heat),
            (last, -unit * face.h * c.saturation[last][1] - by_heat),
            (c.n + SPEED, unit * excess * face.by_speed),
        ]
        value, on = unit * face.h * excess, excess >= 0.0
        gain += np.where(on, value, 0.0)
        loss += np.where(on, 0.0, value)
        c.gain_slopes += [(column, np.where(on, slope, 0.0)) for column, slope in slopes]
        c.loss_slopes += [(column, np.where(on, 0.0, slope)) for column, slope in slopes]
        parts.append((vapour, value, on, slopes))
    c.film_gain, c.film_loss = gain, loss
    film, _, over, by_before, by_loss = vp.film_step(c.film_before + gain, loss)
    share, by_before_share, by_loss_share = vp.film_share(c.film_before + gain, loss)
    per_kg = m.cover_size * vp.LATENT_HEAT / m.step_s
    for vapour, value, on, slopes in parts:
        taken, dry = np.where(on, 1.0, share), np.where(on, 0.0, per_kg * value)
        by = [(column, per_kg * taken * slope) for column, slope in slopes]
        by += [(c.n + column, dry * by_before_share) for column in (FILM, GAIN)]
        by.append((c.n + LOSS, dry * by_loss_share))
        c.system.flow(per_kg * taken * value, vapour, last, by, "condense_cover")
    held = over <= 0.0
    per_k = m.cover_size * CP_WATER / m.step_s
    warm = c.u[last] - vp.REFERENCE_C
    lost = np.where(held, 0.0, per_k) * warm
    run_off = [(last, per_k * over), (c.n + LOSS, lost * by_loss)]
    run_off += [(c.n + column, lost * by_before) for column in (FILM, GAIN)]
    c.system.flow(per_k * over * warm, last, None, run_off, "drain")
    c.film_after, c.film_slopes = film, (by_before * held, by_loss * held)


def screens(c: Context) -> None:
    """Drawn screens: both faces against the air, dew on the lower face, air through fabric and gap."""
    m, ix = c.model, c.ix
    still, _ = ex.forced_cube(np.full(m.hours, ex.STILL_AIR_M_S**2))
    for number, screen in enumerate(m.case.screens):
        node, low = ix.screen(number), ix.screens - 1 - number
        high = low + 1
        drawn = m.drawn[number] * (1.0 - c.gap)
        by_vent = -m.drawn[number] * c.gap_slope
        face = STAND_ALONE_FACE + (1.0 - STAND_ALONE_FACE) * drawn
        by_face = (1.0 - STAND_ALONE_FACE) * by_vent
        coefficients = []
        for space in (low, high):
            air = ix.air(space)
            diff = c.u[air] - c.u[node]
            h, slope, _ = ex.cube_law(ex.SCREEN_FACE, diff, still)
            by_diff = face * (h + diff * slope)
            c.system.flow(
                face * h * diff, air, node, [(air, by_diff), (node, -by_diff), (ix.vent, by_face * h * diff)]
            )
            coefficients.append((h, slope))
        _dew(c, node, low, high, drawn, by_vent, coefficients, screen.vapour_open)
        diff = c.u[ix.air(low)] - c.u[ix.air(high)]
        flow, by_diff, by_open = ex.screen_flow(
            m.drawn[number], 1.0 - drawn, screen.air_permeability, diff, m.mean_k
        )
        slopes = [
            (ix.air(low), m.density * by_diff),
            (ix.air(high), -m.density * by_diff),
            (ix.vent, -m.density * by_open * by_vent),
        ]
        c.air_flow(m.density * flow, slopes, low, high)


def _dew(c: Context, node: int, low: int, high: int, drawn: Floats, by_vent: Floats,
         coefficients: list[tuple[Floats, Floats]], passes: bool) -> None:  # fmt: skip
    """Dew on a screen's lower face; a vapour-open fabric gives it off again above, else it drips."""
    m, ix = c.model, c.ix
    e_low, t_low = ix.vapour(low), ix.air(low)
    excess = c.u[e_low] - c.saturation[node][0]
    on = excess > 0.0
    h, slope = coefficients[0]
    unit = np.where(on, m.lewis * drawn, 0.0)
    dew = unit * h * excess
    by = {
        e_low: unit * h,
        t_low: unit * slope * excess,
        node: -unit * (h * c.saturation[node][1] + slope * excess),
        ix.vent: np.where(on, m.lewis * by_vent * h * excess, 0.0),
    }
    c.system.flow(dew, e_low, node, by.items(), "condense_screen")
    share = CP_WATER / vp.LATENT_HEAT
    warm = c.u[node] - vp.REFERENCE_C
    if not passes:
        slopes = [(k, share * warm * v) for k, v in by.items()]
        c.system.flow(share * warm * dew, node, None, [*slopes, (node, share * dew)], "drain")
        return
    e_high, t_high = ix.vapour(high), ix.air(high)
    h, slope = coefficients[1]
    short = np.maximum(c.saturation[node][0] - c.u[e_high], 0.0)
    offered = m.lewis * drawn * h * short
    limited = offered < dew
    rise = np.where(limited & (short > 0.0), m.lewis * drawn, 0.0)
    give = np.where(limited, offered, dew)
    up: list[tuple[int, Floats]] = [(k, np.where(limited, 0.0, v)) for k, v in by.items()]
    up += [
        (e_high, -rise * h),
        (t_high, rise * slope * short),
        (node, rise * (h * c.saturation[node][1] - slope * short)),
        (ix.vent, np.where(limited, m.lewis * by_vent * h * short, 0.0)),
    ]
    c.system.flow(give, node, e_high, up, "screen_passed")
    drip = dew - give
    slopes = [(k, share * warm * v) for k, v in by.items()] + [(k, -share * warm * v) for k, v in up]
    c.system.flow(share * warm * drip, node, None, [*slopes, (node, share * drip)], "drain")


def stand(c: Context) -> None:
    """Leaves against the house air: heat, transpiration and dew."""
    m, ix = c.model, c.ix
    diff = c.u[ix.leaf] - c.u[ix.house_air]
    g, by_diff, by_speed = ex.leaf_boundary(diff, c.speed)
    slope = m.leaf_unit * (g + diff * by_diff)
    slopes = [
        (ix.leaf, slope),
        (ix.house_air, -slope),
        (c.n + SPEED, m.leaf_unit * diff * by_speed),
    ]
    c.system.flow(m.leaf_unit * g * diff, ix.leaf, ix.house_air, slopes, "leaf_heat")
    inner, by_temp = vp.stomata(c.u[ix.leaf], m.stomata_light, m.day)
    saturated, rise = c.saturation[ix.leaf]
    value, by_deficit, by_g, by_inner = vp.transpiration(
        saturated - c.u[ix.air0_vapour], g, inner, m.leaf_vapour_unit
    )
    slopes = [
        (ix.leaf, by_deficit * rise + by_g * by_diff + by_inner * by_temp),
        (ix.house_air, -by_g * by_diff),
        (ix.air0_vapour, -by_deficit),
        (c.n + SPEED, by_g * by_speed),
    ]
    c.system.flow(value, ix.leaf, ix.air0_vapour, slopes, "transpiration")


def floor(c: Context) -> None:
    """Floor against air, its evaporation, the soil below, and the perimeter."""
    m, ix = c.model, c.ix
    diff = c.u[ix.floor] - c.u[ix.house_air]
    forced, by_speed = ex.forced_cube(c.speed)
    h, by_diff, by_cube = ex.floor_convection(diff, forced)
    by_speed = by_cube * by_speed
    slope = h + diff * by_diff
    slopes = [(ix.floor, slope), (ix.house_air, -slope), (c.n + SPEED, by_speed * diff)]
    c.system.flow(h * diff, ix.floor, ix.house_air, slopes)
    wetness = m.case.ground.wetness
    if wetness > 0.0:
        unit = m.lewis * wetness
        deficit = c.saturation[ix.floor][0] - c.u[ix.air0_vapour]
        turn = unit * deficit * by_diff
        slopes = [
            (ix.floor, unit * h * c.saturation[ix.floor][1] + turn),
            (ix.house_air, -turn),
            (ix.air0_vapour, -unit * h),
            (c.n + SPEED, unit * deficit * by_speed),
        ]
        c.system.flow(unit * h * deficit, ix.floor, ix.air0_vapour, slopes, "evaporation")
    conductance, recalled = soil_line(c)
    one = np.full(m.hours, -1.0 / (1.0 - m.soil.conductance / m.soil.film))
    slopes = [(ix.floor, conductance), (c.n + HISTORY, one * (1.0 - m.soil_start))]
    c.system.flow(conductance * c.u[ix.floor] - recalled, ix.floor, None, slopes, "soil")
    edge = m.case.shell.perimeter_per_floor * m.case.shell.perimeter_loss
    c.system.flow(
        edge * (c.u[ix.house_air] - m.temp_out),
        ix.house_air,
        None,
        [(ix.house_air, np.full(m.hours, edge))],
        "perimeter",
    )


def soil_line(c: Context) -> tuple[Floats, Floats]:
    """Soil flux as conductance x floor temperature - recall, for the hour (see `soil`)."""
    soil, start = c.model.soil, c.model.soil_start
    steady = float(np.sum(soil.recall * soil.drive / (1.0 - soil.keep)))
    steady_deep = float(np.sum(soil.recall * soil.deep / (1.0 - soil.keep)))
    conductance = soil.conductance - start * steady
    recalled = c.history + (soil.conductance_deep + start * steady_deep) * c.model.deep
    ratio = 1.0 - conductance / soil.film
    return conductance / ratio, recalled / ratio
