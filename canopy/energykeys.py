"""Study tables under [heating] that concern supply: heat pump, own tariff, heat store. Light to import."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, model_validator

from canopy.section import Section

Money = Annotated[float, Field(ge=0, le=1e6)]
Price = Annotated[float, Field(ge=0, le=10)]
Hour = Annotated[float, Field(ge=0, le=24)]


class HeatPumpKeys(Section):
    """[heating.heat_pump]: heat pump with the boiler of [heating] as back-up."""

    source: Literal["air", "ground", "water"]
    capacity_w_m2: Annotated[float, Field(gt=0, le=1000)]
    flow_max_c: Annotated[float, Field(ge=25, le=100)] = 65.0
    lowest_source_c: Annotated[float, Field(ge=-40, le=20)] | None = None
    source_c: Annotated[float, Field(ge=-10, le=40)] | None = None
    defrost_pct: Annotated[float, Field(ge=0, le=30)] = 8.0
    co2_kg_per_kwh: Annotated[float, Field(ge=0, le=2)] | None = None

    @model_validator(mode="after")
    def _source(self) -> HeatPumpKeys:
        if self.source == "air" and self.source_c is not None:
            raise ValueError("an air source follows the outside air; source_c is for ground and water")
        return self


class TariffKeys(Section):
    """[heating.tariff] and [heating.heat_pump_tariff]: own prices per kWh bought (fuels: gross value)."""

    price_per_kwh: Price
    night_price_per_kwh: Price | None = None
    night_from: Hour = 22.0
    night_until: Hour = 6.0
    capacity_charge_per_kw_year: Money = 0.0
    contract_kw: Annotated[float, Field(ge=0, le=1e6)] | None = None
    over_contract_per_kw_year: Money = 0.0
    standing_per_year: Money = 0.0
    currency: Annotated[str, Field(max_length=8)] = ""

    @model_validator(mode="after")
    def _contract(self) -> TariffKeys:
        if self.over_contract_per_kw_year > 0 and self.contract_kw is None:
            raise ValueError("over_contract_per_kw_year needs contract_kw")
        return self


class StoreKeys(Section):
    """[heating.store]: heat store volumes to look at."""

    volumes_m3_per_1000_m2: Annotated[
        list[Annotated[float, Field(ge=0, le=2000)]], Field(min_length=1, max_length=12)
    ] = [0.0, 25.0, 50.0, 100.0, 150.0, 200.0]
    spread_k: Annotated[float, Field(ge=5, le=80)] = 40.0
    standing_loss_per_h: Annotated[float, Field(ge=0, le=0.1)] = 0.0004
    reserve_pct: Annotated[float, Field(ge=0, le=100)] = 10.0
