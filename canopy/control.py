"""Control: set-points by hour with ramps and light, and screens by rules that look only at what is outside.

Everything here is decided before the balance is solved, so that light and heat use the same drawn screens and
no hour hangs between two answers. What depends on the inside (heating, vents, the gap that a drawn screen
opens for humidity) is part of the balance itself.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy.heatcase import Climate

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

RAMP_K_PER_H: Final = 2.0  # common practice; faster ramps wet fruit and buds
ENERGY_BELOW_W_M2: Final = 5.0  # energy screen by night: drawn below this global radiation; common practice
ENERGY_BELOW_C: Final = 12.0  # and only when outside is colder than this; common practice
SHADE_ABOVE_W_M2: Final = 600.0  # shade screen drawn above this global radiation; common practice
HUMIDITY_GAP: Final = 0.05  # widest gap that a drawn energy screen opens; common practice, 2-10 %
LIGHT_FULL_W_M2: Final = 600.0  # global radiation at which the light addition is whole; common practice
MONTH_STARTS: Final = (1, 32, 60, 91, 121, 152, 182, 213, 244, 274, 305, 335, 366)  # nominal non-leap year


@dataclass(frozen=True)
class SetPoints:
    """Temperatures to hold, degC, (N,) each already resolved by date; day hours in civil time.

    Study keys: climate.heat_day, heat_night, vent_at, day_from, day_until, ramp_k_per_h, light_addition_k.
    `heat_*` of -inf means no heating (a tunnel); a frost-only house holds a few degrees day and night.
    """

    heat_day: Floats
    heat_night: Floats
    vent_at: Floats
    day_from: float = 6.0
    day_until: float = 18.0
    ramp_k_per_h: float = RAMP_K_PER_H  # inf: steps
    light_addition_k: float = 0.0  # added to heating and venting in full light
    light_full_w_m2: float = LIGHT_FULL_W_M2


@dataclass(frozen=True)
class ScreenRule:
    """When one screen is drawn. Study keys: the field names, below each entry of `screens`.

    energy: global below `close_below_w_m2` and outside below `close_below_outside_c`.
    shade: global above `close_above_w_m2`. blackout: inside `hours`, whatever the weather.
    `hours` (civil, from, until; may wrap midnight) and `months` (1-12) or `days` limit every purpose.
    """

    purpose: Literal["energy", "shade", "blackout"] = "energy"
    close_below_w_m2: float = ENERGY_BELOW_W_M2
    close_below_outside_c: float = ENERGY_BELOW_C
    close_above_w_m2: float = SHADE_ABOVE_W_M2
    hours: tuple[float, float] | None = None
    months: tuple[int, ...] | None = None
    share: float = 1.0  # how far it is drawn
    gap: float = HUMIDITY_GAP  # widest gap it opens for humidity or heat
    days: tuple[int, int] | None = None  # first and last day of the year, 1-365; may wrap over the new year


def within(hour: Floats, start: float, end: float) -> Bools:
    """True where a civil hour lies in [start, end), across midnight if end <= start; (0, 24) is always."""
    if end - start >= 24.0:
        return np.ones(hour.shape, dtype=bool)
    return np.asarray((hour - start) % 24.0 < (end - start) % 24.0)


def month_of(day_of_year: Floats) -> NDArray[np.int64]:
    """Month 1-12 of a day of the nominal year."""
    return np.clip(np.searchsorted(MONTH_STARTS, day_of_year, side="right"), 1, 12)


def ramped(civil_hour: Floats, s: SetPoints) -> Floats:
    """Heating set-point with ramps: it starts to rise at `day_from` and to fall at `day_until`.

    A ramp that has not ended when the other begins goes on from where it would have ended; ramps of a few
    hours never meet.
    """
    heated = np.isfinite(s.heat_day) & np.isfinite(s.heat_night)
    day, night = np.where(heated, s.heat_day, 0.0), np.where(heated, s.heat_night, 0.0)
    gap = day - night
    is_day = within(civil_hour, s.day_from, s.day_until)
    since = (civil_hour - np.where(is_day, s.day_from, s.day_until)) % 24.0
    if np.isfinite(s.ramp_k_per_h):
        done = np.clip(since * s.ramp_k_per_h / np.maximum(np.abs(gap), 1e-9), 0.0, 1.0)
    else:
        done = np.ones_like(since)
    level = np.where(is_day, night + done * gap, day - done * gap)
    return np.where(heated, level, np.where(is_day, s.heat_day, s.heat_night))


def drawn(
    rule: ScreenRule, civil_hour: Floats, day_of_year: Floats, ghi: Floats, temp_outside: Floats
) -> Floats:
    """How far a screen is drawn, (N,) 0 ... share, from outside conditions alone."""
    if rule.purpose == "energy":
        on = (ghi < rule.close_below_w_m2) & (temp_outside < rule.close_below_outside_c)
    elif rule.purpose == "shade":
        on = ghi > rule.close_above_w_m2
    else:
        on = np.ones(ghi.shape, dtype=bool)
    if rule.hours is not None:
        on = on & within(civil_hour, *rule.hours)
    if rule.months is not None:
        on = on & np.isin(month_of(day_of_year), rule.months)
    if rule.days is not None:
        first, last = rule.days
        day = np.floor(day_of_year)
        on = on & ((day >= first) & (day <= last) if first <= last else (day >= first) | (day <= last))
    return np.where(on, rule.share, 0.0)


def schedule(
    civil_hour: Floats,
    day_of_year: Floats,
    ghi: Floats,
    temp_outside: Floats,
    set_points: SetPoints,
    screens: tuple[ScreenRule, ...] = (),
    *,
    humidity_max_pct: float | Floats = 100.0,
    min_pipe_c: float | Floats = -np.inf,
    limit_c: float | Floats = 0.0,
) -> Climate:
    """Set-points and screens of every hour.

    `civil_hour` (N,) 0 ... 24 at mid-step, `day_of_year` (N,) 1 ... 365, `ghi` W/m2, `temp_outside` degC;
    screens outermost first. The venting set-point stays at least 0.5 K above the heating one.
    """
    light = light_addition(set_points, ghi)
    heat = ramped(civil_hour, set_points) + light
    vent = np.maximum(set_points.vent_at + light, np.where(np.isfinite(heat), heat + 0.5, -np.inf))
    states = [drawn(rule, civil_hour, day_of_year, ghi, temp_outside) for rule in screens]
    gaps = [np.where(state > 0.0, rule.gap, 0.0) for rule, state in zip(screens, states, strict=True)]
    shape = ghi.shape
    return Climate(
        heat_at=heat,
        vent_at=vent,
        humidity_max_pct=np.broadcast_to(np.asarray(humidity_max_pct, dtype=float), shape).copy(),
        screen_drawn=np.array(states).reshape(len(screens), len(ghi)),
        min_pipe_c=np.broadcast_to(np.asarray(min_pipe_c, dtype=float), shape).copy(),
        limit_c=np.broadcast_to(np.asarray(limit_c, dtype=float), shape).copy(),
        screen_gap_max=np.max(gaps, axis=0) if gaps else None,
    )


def light_addition(s: SetPoints, ghi: Floats) -> Floats:
    """Light-dependent addition to the set-points, K."""
    return s.light_addition_k * np.clip(ghi / s.light_full_w_m2, 0.0, 1.0)
