"""The rest of the hourly rows: long-wave, sun, stores, fog, and the two rows that hold the regime.

The regime needs no guessing. With v the opening (screen gap first, then vents) and Q the heat given to the
pipe water, the two control rows are

    heating   max( min(k (T_air - T_heat), T_pipe - T_min, Q), Q - Q_max, min(T_pipe - T_flow,max, Q) ) = 0
    venting   max( min(k1 (T_vent - T_air), k2 (e_max - e), k3 v), k3 (v - v_max) ) = 0

Each is a rising function of its own lever, so that heating, its limit, floating, venting for heat or for
humidity and fully open are all the one zero of a continuous function (a semismooth Newton step picks the
branch). When outside is within half a kelvin of the vent set-point, or warmer, vents stand fully open: a
controller that sees only the inside has several valid answers there.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import vapour as vp
from canopy.emitters import pipe_convection
from canopy.heatmodel import Model
from canopy.heatrows import (
    FILM,
    GAIN,
    LOSS,
    SPEED,
    WET,
    Context,
    Past,
    air_change,
    covering,
    floor,
    screens,
    stand,
)
from canopy.longwave import band_emission
from weather.constants import CP_WATER

Floats = NDArray[np.float64]

HEAT_WEIGHT: Final = 10.0  # W/m2 per K of air error, against W/m2 of pipe heat
HEATED_K: Final = 0.3  # so far above its set-point a house may still be on the way down to it
PIPE_WEIGHT: Final = 3.0  # W/m2 per K of pipe temperature
VENT_WEIGHT: Final = 10.0  # K per unit of opening
VAPOUR_WEIGHT: Final = 0.01  # K per Pa above the humidity limit
HUMID_VENT_MAX: Final = 0.3  # vents open no further than this for humidity; common practice
PAST_KINK: Final = 0.004  # opening beyond a kink that a step may reach: the row then shows its other side
OUTSIDE_REACH: Final = 1.05  # venting for humidity aims no lower than this share of the outside vapour
LOWEST_C: Final = -90.0  # unknowns are kept in the range where the formulas mean something
HIGHEST_C: Final = 130.0
HIGHEST_PA: Final = 60000.0
GIVE_WAY_K: Final = 0.5  # humidity venting gives way when the heating cannot hold the air this near


def evaluate(model: Model, unknown: list[Floats], gone: Past) -> Context:
    """Residuals and slopes of every row for given unknowns and a given past."""
    c = Context(model, unknown, gone)
    air_change(c)
    covering(c)
    screens(c)
    stand(c)
    floor(c)
    longwave(c)
    gains_and_stores(c)
    fog(c)
    n = c.n
    c.system.chain(n + WET, [(n + FILM, (c.film_before < vp.FILM_FULL_KG_M2) / vp.FILM_FULL_KG_M2)])
    c.system.chain(n + GAIN, c.gain_slopes)
    c.system.chain(n + LOSS, c.loss_slopes)
    c.system.chain(n + SPEED, c.speed_slopes)
    pipe_row(c)
    vent_row(c)
    return c


def longwave(c: Context) -> None:
    """Banded exchange of every pair of surfaces, and with sky and surroundings."""
    m, ix, system, x = c.model, c.ix, c.system, c.model.exchange
    nodes = ix.surfaces
    emission, rise = band_emission(np.array([c.u[k] for k in nodes]), m.bands)
    wet_column = c.n + WET
    for (i, j), base, wet, gap in zip(x.pairs, x.base, x.wet, x.gap, strict=True):
        a, b = nodes[i], nodes[j]
        diff = emission[:, i] - emission[:, j]
        flux, up, down = _sum(base, diff), _sum(base, rise[:, i]), _sum(base, rise[:, j])
        slopes: list[tuple[int, Floats]] = []
        for change, share, column, slope in (
            (wet, c.wet, wet_column, 1.0), (gap, c.gap, ix.vent, c.gap_slope)
        ):  # fmt: skip
            if change is None:
                continue
            by = _sum(change, diff)
            flux += share * by
            up += share * _sum(change, rise[:, i])
            down += share * _sum(change, rise[:, j])
            slopes.append((column, by * slope))
        system.flow(flux, a, b, [(a, up), (b, -down), *slopes])
    sky_terms: dict[str, Floats] = {"skin": np.zeros(m.hours), "through": np.zeros(m.hours)}
    total = np.zeros(m.hours)
    for i, node in enumerate(nodes):
        seen = x.out_base[i]
        if seen is None:
            continue
        net, sky = m.cover_size * emission[:, i] - m.incident, emission[:, i] - m.sky
        out, above, up = _sum(seen, net), _sum(seen, sky), _sum(seen, rise[:, i])
        slopes = []
        for change, share, column, slope in (
            (x.out_wet[i], c.wet, wet_column, 1.0), (x.out_gap[i], c.gap, ix.vent, c.gap_slope)
        ):  # fmt: skip
            if change is None:
                continue
            by = _sum(change, net)
            out += share * by
            above += share * _sum(change, sky)
            up += share * _sum(change, rise[:, i])
            slopes.append((column, by * slope))
        system.flow(out, node, None, [(node, m.cover_size * up), *slopes])
        sky_terms["skin" if i < ix.layers else "through"] += m.sky_size * above
        total += out
    system.flows |= sky_terms
    system.flows["surroundings"] = total - sky_terms["skin"] - sky_terms["through"]


def _sum(weights: Floats, values: Floats) -> Floats:
    """Sum over bands of weights x values; weights alike in all hours are one row."""
    if weights.shape[1] == 1:
        return np.asarray(weights[:, 0] @ values)
    return np.asarray(np.einsum("bn,bn->n", weights, values))


def gains_and_stores(c: Context) -> None:
    """Absorbed sun (dry and wet optics by the wet share) and what the stores take up."""
    m, ix, system = c.model, c.ix, c.system
    solar = np.zeros(m.hours)
    for row, (dry, change) in m.gain.items():
        value = dry + c.wet * change
        solar += value
        system.flow(value, None, row, [(c.n + WET, change)])
    system.flows["solar"] = solar
    for row, capacity in m.capacity.items():
        if row == ix.air0_vapour:
            ratio, slope = c.ratio[0]
            before, _ = vp.mixing_ratio(c.before[row], m.pressure)
            system.flow(capacity * (ratio - before), row, None, [(row, capacity * slope)], f"store{row}")
        else:
            taken = capacity * (c.u[row] - c.before[row])
            system.flow(taken, row, None, [(row, capacity)], f"store{row}")


def fog(c: Context) -> None:
    """Vapour above saturation turns to fog, warms the air and settles."""
    m, ix = c.model, c.ix
    mass = m.air_kg / vp.FOG_S
    for space in range(ix.screens + 1):
        air, vapour = ix.air(space), ix.vapour(space)
        full, rise = c.saturation[air]
        ratio, slope = c.ratio[space]
        limit, limit_slope = vp.mixing_ratio(full, m.pressure)
        over = np.maximum(ratio - limit, 0.0)
        if not over.any():
            c.system.flows.setdefault("fog", np.zeros(m.hours))
            continue
        on = np.where(over > 0.0, vp.LATENT_HEAT * mass, 0.0)
        slopes = [(vapour, on * slope), (air, -on * limit_slope * rise)]
        c.system.flow(on * over, vapour, air, slopes, "fog")
        share = CP_WATER / vp.LATENT_HEAT
        warm = share * (c.u[air] - vp.REFERENCE_C)
        taken = [(k, warm * v) for k, v in slopes] + [(air, share * on * over)]
        c.system.flow(warm * on * over, air, None, taken, "drain")


def pipe_row(c: Context) -> None:
    """Pipe convection, then the heating regime in place of the pipe's balance."""
    m, ix, system = c.model, c.ix, c.system
    pipe, air = ix.pipe, ix.house_air
    value, slope = pipe_convection(m.pipes, c.u[pipe] - c.u[air])
    system.flow(value, pipe, air, [(pipe, slope), (air, -slope)], "pipe_heat")
    heat = -system.residual[pipe]  # what the boiler must give for the pipe to balance
    system.flows["heat"] = heat
    heating = m.case.heating
    # The vents hold the air, or should: no heat. Only above the set-point, where no answer has any either.
    cooling = (m.vent_at - c.u[air] <= VENT_WEIGHT * c.u[ix.vent]) & (c.u[air] > m.heat_at + HEATED_K)
    warm = np.where(cooling, np.inf, HEAT_WEIGHT * (c.u[air] - m.heat_at))
    least = PIPE_WEIGHT * (c.u[pipe] - m.min_pipe)
    low = np.minimum(np.minimum(warm, least), heat)
    over = heat - heating.capacity_w_m2
    hot = PIPE_WEIGHT * (c.u[pipe] - heating.flow_max_c)
    hot = np.where(heat <= hot, np.inf, hot)  # a house hotter than the flow may be: no heat, but no cooling
    high = np.maximum(over, np.minimum(hot, heat))
    value = np.maximum(low, high)
    top = high > low
    by_heat = (np.where(top, (over >= hot) | np.isinf(hot), (heat <= warm) & (heat <= least))).astype(float)
    by_air = np.where(top | (by_heat > 0.0), 0.0, HEAT_WEIGHT * (warm <= least))
    by_pipe = np.where(by_heat > 0.0, 0.0, np.where(top, PIPE_WEIGHT, PIPE_WEIGHT * (warm > least)))
    system.residual[pipe] = -value
    for entry in system.slope[pipe]:
        if entry is not None:
            entry *= by_heat
    c.pipe_keeps, c.at_limit = by_heat, top
    system.add_slope(pipe, air, by_air)
    system.add_slope(pipe, pipe, by_pipe)


def vent_row(c: Context) -> None:
    """The venting regime: screen gap first, then vents, for heat and for humidity."""
    m, ix = c.model, c.ix
    opening, air, vapour = c.u[ix.vent], c.u[ix.house_air], c.u[ix.air0_vapour]
    most = m.gap_max + m.vent_max
    cool = m.vent_at - air
    cool = np.where((cool > 0.0) & (c.u[ix.air(ix.screens)] < m.temp_out), np.inf, cool)  # opening would warm
    target = m.humidity_max * c.saturation[ix.house_air][0]
    reach = OUTSIDE_REACH * m.vapour_out
    dry = VAPOUR_WEIGHT * (np.maximum(target, reach) - vapour)
    stop = VENT_WEIGHT * (opening - m.gap_max - HUMID_VENT_MAX)
    give_way = np.where(c.at_limit, (m.heat_at - GIVE_WAY_K) - air, -np.inf)
    humid = np.where(m.dry_outside, np.maximum(np.maximum(dry, stop), give_way), np.inf)
    shut = VENT_WEIGHT * opening
    low = np.minimum(np.minimum(cool, humid), shut)
    high = np.where(m.open_all, np.inf, VENT_WEIGHT * (opening - most))
    held = np.isfinite(m.hold)
    full = (high > low) | m.open_all | (most <= 0.0) | held
    value = np.where(full, VENT_WEIGHT * (opening - np.where(held, m.hold, most)), low)
    by_cool = ~full & (cool <= humid) & (cool <= shut)
    by_shut = ~full & ~by_cool & (shut <= humid)
    rest = ~full & ~by_cool & ~by_shut
    by_stop = rest & (stop >= dry) & (stop >= give_way)
    by_give = rest & ~by_stop & (give_way >= dry)
    by_dry = rest & ~by_stop & ~by_give
    row, system = ix.vent, c.system
    system.residual[row] = -value
    system.add_slope(row, row, VENT_WEIGHT * (full | by_shut | by_stop))
    by_air = -1.0 * (by_cool | by_give)
    rise = VAPOUR_WEIGHT * m.humidity_max * c.saturation[ix.house_air][1] * (target > reach)
    system.add_slope(row, ix.house_air, by_air + np.where(by_dry, rise, 0.0))
    system.add_slope(row, ix.air0_vapour, np.where(by_dry, -VAPOUR_WEIGHT, 0.0))
    c.humid = by_dry | by_stop | by_give


def vent_reach(c: Context) -> tuple[Floats, Floats]:
    """How far the opening may move in one step, down and up to just past its row's next kink.

    Kinks are shut, the end of the screen gap, the limit for humidity and fully open. Stopping there, before
    the other unknowns are solved, keeps a step from settling them for a regime that does not hold.
    """
    model, opening = c.model, c.u[c.ix.vent]
    most = model.gap_max + model.vent_max
    humid = np.where(model.humidity_max < 1.0, np.minimum(model.gap_max + HUMID_VENT_MAX, most), most)
    low, high = np.full(model.hours, -PAST_KINK), most + PAST_KINK
    for kink in (0.0 * most, model.gap_max, humid, most):
        low = np.where(opening > kink + 1.01 * PAST_KINK, np.maximum(low, kink - PAST_KINK), low)
        high = np.where(opening < kink - 1.01 * PAST_KINK, np.minimum(high, kink + PAST_KINK), high)
    return low - opening, high - opening
