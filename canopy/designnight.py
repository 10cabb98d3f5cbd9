"""The design night, step by step, as an installer follows it: one long, cold, clear, dark night, house dry.

The steady state is solved by the same physics as every other hour; the soil neither gives nor takes (over one
night it gives: the design does not count on it). Each component stands per m2 floor and in kW, with its sum.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.designoutside import DesignOutside
from canopy.handcheck import HandCheck, hand_check
from canopy.heatcase import Climate, HeatCase, HeatResult, Outside, SolarGain
from canopy.recovery import Recovery, recovery
from weather.constants import CP_AIR, GAS_CONSTANT, MOLAR_MASS_AIR, STEFAN_BOLTZMANN, ZERO_C_K

Floats = NDArray[np.float64]
Solver = Callable[..., HeatResult]  # `balance.solve`: case, and a like result to start from

NIGHT_H: Final = 24  # equal hours that follow on each other: a steady state, whatever the start
NO_VENTING_K: Final = 15.0  # vents for temperature stay shut
HELD_K: Final = 0.1  # the set-point counts as held within this
MORE_PIPE: Final = 12  # steps of half as much pipe again
NEUTRAL_SOIL: Final = 1e5  # m2 K/W under the floor: the column takes less than .001 W/m2


@dataclass(frozen=True)
class Component:
    """One line of the calculation."""

    name: str
    w_m2: float
    kw: float
    how: str


@dataclass(frozen=True)
class NightLoad:
    """One state of the screens: components that add up to the load."""

    screens: str  # "drawn", "open" or "none"
    components: tuple[Component, ...]
    total_w_m2: float
    total_kw: float
    covering_outer_c: float
    covering_inner_c: float
    leaf_c: float
    pipe_c: float
    humidity_pct: float
    gap_w_m2: float  # sum of components less the heat delivered


@dataclass(frozen=True)
class DesignNight:
    """The design night of one candidate."""

    outside: DesignOutside
    inside_c: float
    inside_source: str
    open: NightLoad
    drawn: NightLoad | None  # None: no screen is drawn at night
    recovery: Recovery
    hand: HandCheck
    hold_open_c: float | None  # outside temperature at which the design heat still holds, screens open;
    # None: no screen is drawn, no heat is needed, or only a clear sky makes the house colder than the air
    pipes_note: str = ""  # what the study's pipes lack on this night, if they lack anything

    @property
    def design(self) -> NightLoad:
        """The load that counts: screens as the candidate's control draws them."""
        return self.open if self.drawn is None else self.drawn

    @property
    def design_w_m2(self) -> float:
        """Heat for the design night, W/m2 floor."""
        return self.design.total_w_m2


def _cover_c(night: NightLoad) -> float:
    return 0.5 * (night.covering_outer_c + night.covering_inner_c)


def design_row(case: HeatCase, outside: DesignOutside) -> tuple[int, float]:
    """Return the row of the record that lends crop and control to the night, and the set-point to hold.

    Among the dark hours of the record's coldest 1 %: the highest heating set-point.
    """
    dark = outside.coldest[~case.outside.sun_up[outside.coldest]]
    rows = dark if len(dark) else outside.coldest
    row = int(rows[np.argmax(case.climate.heat_at[rows])])
    return row, float(case.climate.heat_at[row])


def _held(values: Floats | None, row: int, hours: int) -> Floats | None:
    """Return an hourly array (..., N) with one row's value in every hour of the night; others as they are."""
    if values is None or np.shape(values)[-1:] != (hours,):
        return values
    return np.repeat(np.asarray(values)[..., row : row + 1], NIGHT_H, axis=-1)


def night_case(case: HeatCase, outside: DesignOutside, row: int, inside_c: float, drawn: Floats) -> HeatCase:
    """Return a steady dark night as a heat case; `drawn` (S,) state of each screen."""
    full, zero = np.ones(NIGHT_H), np.zeros(NIGHT_H)
    hours = len(case.outside.temp_air)
    layers, screens = len(case.covering.resistance), len(case.screens)
    dark = SolarGain(zero, zero, zero, np.zeros((layers, NIGHT_H)), np.zeros((screens, NIGHT_H)), zero)
    held: dict[str, Any] = {
        f.name: _held(getattr(case.climate, f.name), row, hours) for f in fields(case.climate)
    }
    return replace(
        case,
        outside=Outside(
            step_s=3600.0,
            temp_air=outside.temp_c * full,
            vapour_pressure=outside.vapour_pressure_pa * full,
            pressure=outside.pressure_pa * full,
            wind_speed=outside.wind_m_s * full,
            sky_bands=outside.sky_bands[:, None] * full,
            sun_up=np.zeros(NIGHT_H, dtype=bool),
        ),
        covering=replace(case.covering, wet=case.covering.dry),
        crop=replace(
            case.crop, lai=case.crop.lai[row] * full, gap=case.crop.gap[row] * full, sunlit_lai=zero
        ),
        ground=replace(case.ground, surface_resistance=NEUTRAL_SOIL),
        climate=Climate(
            **{
                **held,
                "heat_at": inside_c * full,
                "vent_at": (inside_c + NO_VENTING_K) * full,
                "screen_drawn": drawn[:, None] * full,
                "min_pipe_c": np.full(NIGHT_H, -np.inf),
            }
        ),
        heating=replace(case.heating, capacity_w_m2=np.inf),
        gain_dry=dark,
        gain_wet=dark,
        periodic=True,
    )


def _covering_lines(night: HeatCase, result: HeatResult) -> list[tuple[str, float, str]]:
    """Return name, W/m2 and derivation of what the covering loses in the last hour of a night."""
    shell, out = night.shell, night.outside
    outer, cold = float(result.temp_covering[0, -1]), float(out.temp_air[-1])
    ratio = shell.roof_ratio + shell.wall_ratio
    sky = float(out.sky_bands[:, -1].sum())
    sky_c = (sky / STEFAN_BOLTZMANN) ** 0.25 - ZERO_C_K
    wind = float(result.convection_loss[-1])
    film = wind / (ratio * (outer - cold)) if abs(outer - cold) > 1e-6 else 0.0
    return [
        (
            "covering: long-wave straight through to the sky",
            float(result.through_loss[-1]),
            f"clear sky as a black body of {sky_c:.1f} °C ({sky:.0f} W/m2)",
        ),
        (
            "covering: long-wave from its outer face to the sky",
            float(result.skin_loss[-1]),
            f"outer face at {outer:.1f} °C, sky at {sky_c:.1f} °C",
        ),
        (
            "covering: long-wave to ground and neighbours",
            float(result.surroundings_loss[-1]),
            f"surroundings at {cold:.1f} °C",
        ),
        (
            "covering: convection to the wind",
            wind,
            f"{ratio:.3f} m2/m2 x {film:.2f} W/m2K x ({outer:.2f} - {cold:.2f}) K",
        ),
    ]


def _other_lines(night: HeatCase, result: HeatResult) -> list[tuple[str, float, str]]:
    """Return name, W/m2 and derivation of leakage, humidity, perimeter and ground."""
    shell = night.shell
    difference = float(result.temp_air[-1] - night.outside.temp_air[-1])
    changes = float(result.air_changes_per_h[-1])
    mean_k = ZERO_C_K + 0.5 * float(result.temp_air[-1] + night.outside.temp_air[-1])
    density = float(night.outside.pressure[-1]) * MOLAR_MASS_AIR / (GAS_CONSTANT * mean_k)
    per_m3 = density * CP_AIR / 3600.0  # Wh m-3 K-1
    dry = per_m3 * changes * shell.mean_height_m * difference
    leak = f"{changes:.2f}/h x {shell.mean_height_m:.2f} m"
    if np.any(night.climate.screen_drawn > 0.0):
        leak += "; through the roof it leaves from above the screen, where air is colder and drier"
    else:
        leak += f" x {per_m3:.3f} Wh/m3K x {difference:.1f} K = {dry:.1f} dry, the rest as vapour"
    return [
        (
            "leakage",
            float(result.air_change_loss[-1]),
            leak,
        ),
        (
            "humidity: venting to stay below the limit",
            float(result.venting[-1]),
            "0 where leakage and condensation dry enough",
        ),
        (
            "perimeter",
            float(result.perimeter_loss[-1]),
            f"{shell.perimeter_loss:.2f} W/mK x {shell.perimeter_per_floor:.4f} m/m2 x {difference:.1f} K",
        ),
        (
            "ground and run-off",
            float(result.deep_loss[-1] + result.soil_store[-1] + result.drain_loss[-1]),
            "soil taken as neither giving nor taking; water that runs off",
        ),
    ]


def _hold(night: HeatCase, solver: Solver, inside_c: float) -> tuple[HeatCase, HeatResult, str]:
    """Solve a night; where the pipes cannot hold the temperature, say so and go on with more of them."""
    heating, result = night.heating, solver(night)
    note = ""
    if float(result.temp_air[-1]) < inside_c - HELD_K:
        note = (
            f"{heating.pipe_m_per_m2:g} m/m2 of pipe at {heating.flow_max_c:g} °C give "
            f"{float(result.heat_delivered[-1]):.0f} W/m2 and hold {float(result.temp_air[-1]):.1f} °C only"
        )
    for _ in range(MORE_PIPE):
        if float(result.temp_air[-1]) >= inside_c - HELD_K:
            break
        longer = replace(night.heating, pipe_m_per_m2=1.5 * night.heating.pipe_m_per_m2)
        night = replace(night, heating=longer)
        result = solver(night)
    if note:
        note += f"; worked out with {night.heating.pipe_m_per_m2:.1f} m/m2"
    return night, result, note


def _night_load(night: HeatCase, result: HeatResult, label: str) -> NightLoad:
    area_kw = night.shell.floor_area_m2 / 1000.0
    lines = _covering_lines(night, result) + _other_lines(night, result)
    parts = tuple(Component(name, w, w * area_kw, how) for name, w, how in lines)
    total = float(result.heat_delivered[-1])
    return NightLoad(
        screens=label,
        components=parts,
        total_w_m2=total,
        total_kw=total * area_kw,
        covering_outer_c=float(result.temp_covering[0, -1]),
        covering_inner_c=float(result.temp_covering[-1, -1]),
        leaf_c=float(result.temp_leaf[-1]),
        pipe_c=float(result.temp_pipe[-1]),
        humidity_pct=float(result.relative_humidity[-1]),
        gap_w_m2=sum(p.w_m2 for p in parts) - total,
    )


def design_night(
    case: HeatCase, outside: DesignOutside, solver: Solver | None = None, u_value: float | None = None
) -> DesignNight | None:
    """Work out the design night of a candidate, or None for a house without heating.

    Solves the steady night with screens open and, when the control draws one at night, with screens drawn.
    """
    if solver is None:
        from canopy.balance import solve

        solver = solve
    row, inside = design_row(case, outside)
    if not np.isfinite(inside) or case.heating.capacity_w_m2 <= 0.0:
        return None
    dark = outside.coldest[~case.outside.sun_up[outside.coldest]]
    state = case.climate.screen_drawn[:, dark].max(axis=1) if len(dark) else np.zeros(len(case.screens))
    loads: list[NightLoad] = []
    notes: list[str] = []
    bare = "open" if len(case.screens) else "none"
    for drawn, label in ((0.0 * state, bare), (state, "drawn")):
        if label == "drawn" and not np.any(drawn > 0.0):
            continue
        night, result, note = _hold(night_case(case, outside, row, inside, drawn), solver, inside)
        loads.append(_night_load(night, result, label))
        state_words = "" if label == "none" else f"screens {label}: "
        notes += [state_words + note] if note else []
    opened, shut = loads[0], (loads[1] if len(loads) > 1 else None)
    hold = None
    if shut is not None and opened.total_w_m2 > 0.0 and inside > outside.temp_c:
        hold = inside - (inside - outside.temp_c) * min(1.0, shut.total_w_m2 / opened.total_w_m2)
    return DesignNight(
        outside=outside,
        inside_c=inside,
        inside_source="highest heating set-point in the dark hours of the record's coldest 1 %",
        open=opened,
        drawn=shut,
        recovery=recovery(case, _cover_c(shut or opened), outside.temp_c, row, inside),
        hand=hand_check(case.covering, case.shell, inside, outside.temp_c, outside.sky_w_m2, u_value),
        hold_open_c=hold,
        pipes_note="; ".join(notes),
    )
