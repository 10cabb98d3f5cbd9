"""What supplies the heat and what it costs: boiler, or heat pump with a back-up boiler, and own tariffs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.energykeys import HeatPumpKeys, TariffKeys
from canopy.fuel import FuelUse, burn, fuel
from canopy.heatpump import HeatPump, HeatPumpRun, run_heat_pump
from canopy.loadcurve import heating_only
from canopy.tariff import Cost, Tariff, cost

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Supply:
    """How the heat is made, as the study asks for it."""

    fuel: str
    efficiency: float | None  # on the net heating value; the fuel's usual one if None
    price_per_kwh: float | None  # flat price per kWh gross, when there is no tariff
    co2_kg_per_kwh: float | None = None  # per kWh gross; the fuel's figure if None
    tariff: TariffKeys | None = None
    heat_pump: HeatPumpKeys | None = None
    heat_pump_tariff: TariffKeys | None = None


@dataclass(frozen=True)
class Energy:
    """One candidate's energy over the record, whole house."""

    boiler: FuelUse  # the only supply, or the heat pump's back-up
    pump: HeatPumpRun | None
    electricity: FuelUse | None  # of the heat pump
    boiler_cost: Cost | None  # None: no price given
    electricity_cost: Cost | None

    @property
    def total_cost(self) -> float | None:
        """Sum of all costs; None when a supply that is used has no price."""
        parts = [self.boiler_cost, self.electricity_cost]
        used = [self.boiler.gross_kwh > 0.0, self.electricity is not None]
        if any(need and part is None for need, part in zip(used, parts, strict=True)) or not any(used):
            return None
        return sum(part.total for part in parts if part is not None)

    @property
    def co2_kg(self) -> float | None:
        """CO2 of all supplies, kg; None when one that is used has no factor."""
        uses = [u for u in (self.boiler, self.electricity) if u is not None and u.gross_kwh > 0.0]
        known = [u.co2_kg for u in uses if u.co2_kg is not None]
        return sum(known) if len(known) == len(uses) else None


def make_tariff(keys: TariffKeys | None, flat: float | None = None) -> Tariff | None:
    """Return a tariff from the study's table, else from a flat price, else None."""
    if keys is None:
        return None if flat is None else Tariff(flat)
    return Tariff(
        price_per_kwh=keys.price_per_kwh,
        night_price_per_kwh=keys.night_price_per_kwh,
        night_from_h=keys.night_from,
        night_until_h=keys.night_until,
        capacity_charge_per_kw_year=keys.capacity_charge_per_kw_year,
        contract_kw=keys.contract_kw,
        over_contract_per_kw_year=keys.over_contract_per_kw_year,
        standing_per_year=keys.standing_per_year,
        currency=keys.currency,
    )


def make_pump(keys: HeatPumpKeys) -> HeatPump:
    """Return the heat pump of the study's table."""
    return HeatPump(
        source=keys.source,
        capacity_w_m2=keys.capacity_w_m2,
        flow_max_c=keys.flow_max_c,
        lowest_source_c=keys.lowest_source_c,
        source_c=keys.source_c,
        defrost_pct=keys.defrost_pct,
    )


def energy(
    load: Floats,
    flow_c: Floats,
    outside_c: Floats,
    humidity_pct: Floats,
    civil_hour: Floats,
    floor_area_m2: float,
    supply: Supply,
    step_s: float = 3600.0,
) -> Energy:
    """Return fuel, electricity, CO2 and cost of an hourly heat load (N,) W/m2 floor.

    `flow_c` (N,) flow temperature needed, `civil_hour` (N,) for day and night prices.
    Errors: UserError for an unknown fuel.
    """
    kind = fuel(supply.fuel)
    asked = heating_only(load)
    boiler_load, pump, power = asked, None, None
    power_cost: Cost | None = None
    if supply.heat_pump is not None:
        pump = run_heat_pump(asked, flow_c, outside_c, humidity_pct, make_pump(supply.heat_pump), step_s)
        boiler_load = pump.backup
        co2 = supply.heat_pump.co2_kg_per_kwh
        power = burn(pump.electricity, floor_area_m2, fuel("electricity"), 1.0, step_s, co2)
        own = make_tariff(supply.heat_pump_tariff)
        power_cost = None if own is None else cost(power.hourly_kw, civil_hour, own, step_s)
    use = burn(boiler_load, floor_area_m2, kind, supply.efficiency, step_s, supply.co2_kg_per_kwh)
    tariff = make_tariff(supply.tariff, supply.price_per_kwh)
    return Energy(
        boiler=use,
        pump=pump,
        electricity=power,
        boiler_cost=None if tariff is None else cost(use.hourly_kw, civil_hour, tariff, step_s),
        electricity_cost=power_cost,
    )
