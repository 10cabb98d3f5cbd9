"""Fuels: from heat to kWh, m3, litres and tonnes bought, and CO2. Figures and sources: data/fuels.toml."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from weather.errors import UserError, nearest

Floats = NDArray[np.float64]
Unit = Literal["m3", "l", "t", "kWh"]

S_PER_H = 3600.0


@dataclass(frozen=True)
class Fuel:
    """One fuel. Heating values in kWh per unit bought; CO2 per kWh of gross heating value."""

    name: str
    title: str
    unit: Unit
    gross_kwh_per_unit: float
    net_kwh_per_unit: float
    co2_kg_per_kwh_gross: float | None  # None: no general figure
    biogenic: bool  # CO2 of recent plant growth: stands in reports apart from fossil CO2
    efficiency: float  # usual boiler, on the net heating value
    source: str
    efficiency_source: str


@dataclass(frozen=True)
class FuelUse:
    """What a year's heat takes from one supply, for the whole house."""

    fuel: Fuel
    efficiency: float  # on net; a heat pump's seasonal performance for its electricity
    heat_kwh: float
    net_kwh: float
    gross_kwh: float
    amount: float  # in fuel.unit
    co2_kg: float | None
    peak_kw: float  # highest hourly draw, kW of gross heating value
    hourly_kw: Floats  # (N,) kW of gross heating value


@cache
def fuels() -> Mapping[str, Fuel]:
    """Return the fuel table by name."""
    text = files("canopy").joinpath("data/fuels.toml").read_text(encoding="utf-8")
    rows = tomllib.loads(text)
    return MappingProxyType(
        {n: Fuel(name=n, **{"co2_kg_per_kwh_gross": None, **row}) for n, row in rows.items()}
    )


def fuel_names() -> tuple[str, ...]:
    """Return the names of the fuels that are known."""
    return tuple(fuels())


def fuel(name: str, where: str = "heating -> fuel") -> Fuel:
    """Return a fuel.

    Errors: UserError for an unknown name, with the nearest one.
    """
    table = fuels()
    if name not in table:
        hint = nearest(name, tuple(table)) or f"; known: {', '.join(table)}"
        raise UserError(f'{where}: unknown fuel "{name}"{hint}')
    return table[name]


def burn(
    heat_w_m2: Floats,
    floor_area_m2: float,
    kind: Fuel,
    efficiency: float | None = None,
    step_s: float = S_PER_H,
    co2_kg_per_kwh: float | None = None,
) -> FuelUse:
    """Return what a boiler takes for an hourly heat load.

    `heat_w_m2` (N,) W per m2 floor; `efficiency` on the NET heating value (the fuel's usual one if None; a
    condensing boiler may pass 1); `co2_kg_per_kwh` replaces the table's factor, per kWh GROSS.
    """
    eta = kind.efficiency if efficiency is None else efficiency
    ratio = kind.gross_kwh_per_unit / kind.net_kwh_per_unit
    hours = step_s / S_PER_H
    heat_kw = np.asarray(heat_w_m2, float) * (floor_area_m2 / 1000.0)
    gross_kw = heat_kw * (ratio / eta)
    gross = float(gross_kw.sum()) * hours
    factor = kind.co2_kg_per_kwh_gross if co2_kg_per_kwh is None else co2_kg_per_kwh
    return FuelUse(
        fuel=kind,
        efficiency=eta,
        heat_kwh=float(heat_kw.sum()) * hours,
        net_kwh=gross / ratio,
        gross_kwh=gross,
        amount=gross / kind.gross_kwh_per_unit,
        co2_kg=None if factor is None else gross * factor,
        peak_kw=float(gross_kw.max(initial=0.0)),
        hourly_kw=gross_kw,
    )
