"""From the solved iterate to the record that reports read: temperatures, fluxes, stores, water, closure."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import vapour as vp
from canopy.exchange import leaf_boundary
from canopy.heatcase import HeatResult
from canopy.heatmodel import LEAST_LAI, Model
from canopy.heatrows import Context, State
from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K

Floats = NDArray[np.float64]

KG_H: Final = 3600.0 / vp.LATENT_HEAT  # kg m-2 h-1 per W/m2 of latent heat


def _sunlit_leaf(model: Model, c: Context) -> Floats:
    """Temperature of sunlit leaves, degC: the stand's mean plus what their extra sun is worth.

    The extra absorbed per m2 leaf is carried by convection, long-wave and transpiration at the slopes of the
    hour (a linear step from the mean leaf; Jones 2014, Plants and Microclimate, ch. 9).
    """
    m, ix, case = model, model.index, model.case
    lai = np.maximum(m.order.into(case.crop.lai), LEAST_LAI)
    sunlit = np.minimum(m.order.into(case.crop.sunlit_lai), lai)
    dry, wet = case.gain_dry, case.gain_wet
    on_sunlit = m.order.into(dry.crop_sunlit) * (1.0 - c.wet) + m.order.into(wet.crop_sunlit) * c.wet
    crop = m.order.into(dry.crop) * (1.0 - c.wet) + m.order.into(wet.crop) * c.wet
    some = sunlit > 1e-6
    extra = np.where(some, on_sunlit / np.where(some, sunlit, 1.0) - crop / lai, 0.0)
    leaf = c.u[ix.leaf]
    g, _, _ = leaf_boundary(leaf - c.u[ix.house_air], c.speed)
    inner, _ = vp.stomata(leaf, m.stomata_light, m.day)
    full, rise = c.saturation[ix.leaf]
    _, by_deficit, _, _ = vp.transpiration(full - c.u[ix.air0_vapour], g, inner, m.leaf_vapour_unit)
    shown = 2.0 * (1.0 - m.order.into(case.crop.gap)) * float(np.mean(case.crop.emissivity))
    per_k = m.leaf_unit * g + by_deficit * rise + shown * 4.0 * STEFAN_BOLTZMANN * (leaf + ZERO_C_K) ** 3
    return np.asarray(leaf + extra / (per_k / lai))


def _deep_flux(model: Model, state: State, c: Context) -> Floats:
    """Heat leaving the soil column at its foot, W/m2."""
    soil = model.soil
    before = model.order.before(state.modes)
    start = model.soil_start > 0.0
    before[:, start] = state.modes[:, start]
    return np.asarray(soil.out_drive * state.drive + soil.out_recall @ before + soil.out_deep * model.deep)


def _state_of(m: Model, c: Context, covers: list[int], screens: list[int]) -> dict[str, Floats]:
    """Temperatures, humidity, wetness, openings."""
    ix, u = m.index, c.u
    full, _ = c.saturation[ix.house_air]
    return {
        "temp_air": u[ix.house_air],
        "temp_leaf": u[ix.leaf],
        "temp_leaf_sunlit": _sunlit_leaf(m, c),
        "temp_floor": u[ix.floor],
        "temp_covering": np.array([u[k] for k in covers]),
        "temp_screen": np.array([u[k] for k in screens]).reshape(ix.screens, m.hours),
        "temp_pipe": u[ix.pipe],
        "vapour_pressure": u[ix.air0_vapour],
        "relative_humidity": 100.0 * u[ix.air0_vapour] / full,
        "wet": c.wet,
        "vent_open": np.clip(c.system.flows["opening"], 0.0, 1.0),
        "screen_drawn": m.drawn * (1.0 - c.gap),
    }


def _water_of(m: Model, c: Context) -> dict[str, Floats]:
    """Water fluxes, kg m-2 h-1, and air changes. Dew on leaves is negative transpiration."""
    f, zero = c.system.flows, np.zeros(m.hours)
    condensed = np.maximum(f["condense_cover"], 0.0) + f.get("condense_screen", zero)
    return {
        "transpiration": KG_H * f["transpiration"],
        "floor_evaporation": KG_H * f.get("evaporation", zero),
        "condensation": KG_H * condensed,
        "air_changes_per_h": (f["vent_m3"] + f["leak_m3"]) * 3600.0 / m.case.shell.mean_height_m,
    }


def result(model: Model, state: State, c: Context, passes: int, retried: int) -> HeatResult:
    """Bring a closed iterate into the record, in hour order."""
    m, ix, f = model, model.index, c.system.flows
    back = m.order.back
    zero = np.zeros(m.hours)

    def of(*names: str) -> Floats:
        return sum((f.get(name, zero) for name in names), zero)

    def store(*rows: int) -> Floats:
        return of(*(f"store{row}" for row in rows))

    deep = _deep_flux(m, state, c)
    covers = [ix.cover(k) for k in range(ix.layers)]
    screens = [ix.screen(k) for k in range(ix.screens)]
    terms = {
        "sky_loss": of("skin", "through"),
        "surroundings_loss": of("surroundings"),
        "convection_loss": of("convection"),
        "air_change_loss": of("leak_dry", "leak_wet"),
        "venting": of("vent_dry", "vent_wet"),
        "perimeter_loss": of("perimeter"),
        "deep_loss": deep,
        "soil_store": of("soil") - deep,
        "air_store": store(ix.house_air),
        "vapour_store": store(ix.air0_vapour),
        "crop_store": store(ix.leaf),
        "pipe_store": store(ix.pipe),
        "covering_store": store(*covers, *screens),
        "drain_loss": of("drain"),
    }
    heat, solar = np.maximum(f["heat"], 0.0), f["solar"]
    closure = heat + solar - sum(terms.values(), zero)
    humid = np.where(c.humid & (f["opening"] > 0.0), np.clip(of("vent_dry"), 0.0, heat), 0.0)
    worst = int(np.argmax(np.abs(back(closure))))
    values = {**terms, **_state_of(m, c, covers, screens), **_water_of(m, c)}
    values |= {
        "solar": solar,
        "heat_delivered": heat,
        "heat_for_humidity": humid,
        "through_loss": of("through"),
        "skin_loss": of("skin"),
        "closure": closure,
    }
    return HeatResult(
        **{name: back(value) for name, value in values.items()},
        iterations=passes,
        retried_hours=retried,
        worst=f"hour {worst}: {abs(back(closure)[worst]):.1e} W/m2 after {passes} passes",
        notes=_notes(model),
        start=back(np.array([*state.unknown, state.film, state.drive])),
    )


def _notes(model: Model) -> tuple[str, ...]:
    """What the run should say about the record it was given."""
    notes = []
    if not model.case.periodic:
        notes.append("The record starts settled: no heat is taken from or left to a time before it.")
    if model.hours * model.step_s < 300 * 86400.0:
        notes.append("Record below 300 days: the deep ground is at the record's mean outside temperature.")
    if model.let_go.any():
        count = int(model.let_go.sum())
        notes.append(f"{count} hours: opening would not have lowered the humidity; limit let go.")
    if np.isfinite(model.hold).any():
        count = int(np.isfinite(model.hold).sum())
        notes.append(f"{count} hours: no opening of the vents satisfies their control; held between two.")
    return tuple(notes)
