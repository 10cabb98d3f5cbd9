"""The user's own prices: day and night, capacity charge, contract maximum, standing charge."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

S_PER_H: Final = 3600.0
YEAR_H: Final = 8760.0


@dataclass(frozen=True)
class Tariff:
    """Prices of one supply, per kWh bought (fuels: gross heating value). No price is shipped."""

    price_per_kwh: float
    night_price_per_kwh: float | None = None
    night_from_h: float = 22.0  # civil time
    night_until_h: float = 6.0
    capacity_charge_per_kw_year: float = 0.0  # on the contract, or on the highest hour without one
    contract_kw: float | None = None
    over_contract_per_kw_year: float = 0.0  # on the highest draw above the contract
    standing_per_year: float = 0.0
    currency: str = ""


@dataclass(frozen=True)
class Cost:
    """What a supply costs over the record, in the tariff's currency."""

    energy_day: float
    energy_night: float
    capacity: float
    over_contract: float
    standing: float
    total: float
    currency: str
    over_contract_h: float  # hours above the contract maximum
    over_contract_kw: float  # highest draw above it


def at_night(civil_hour: Floats, from_h: float, until_h: float) -> Bools:
    """Return (N,) True between two civil hours (0-24); a span over midnight wraps; equal hours: never."""
    hour = np.asarray(civil_hour, float)
    if from_h <= until_h:
        return np.asarray((hour >= from_h) & (hour < until_h))
    return np.asarray((hour >= from_h) | (hour < until_h))


def cost(draw_kw: Floats, civil_hour: Floats, tariff: Tariff, step_s: float = S_PER_H) -> Cost:
    """Return the cost of an hourly draw (N,) kW; yearly charges are shared out by the record's length.

    `civil_hour` (N,) 0-24, start of each step in civil time.
    """
    hours = step_s / S_PER_H
    kw = np.asarray(draw_kw, float)
    years = len(kw) * hours / YEAR_H
    dark = np.zeros(len(kw), dtype=bool)
    if tariff.night_price_per_kwh is not None:
        dark = at_night(civil_hour, tariff.night_from_h, tariff.night_until_h)
    day = float(kw[~dark].sum()) * hours * tariff.price_per_kwh
    night = float(kw[dark].sum()) * hours * (tariff.night_price_per_kwh or 0.0)
    peak = float(kw.max(initial=0.0))
    charged = peak if tariff.contract_kw is None else tariff.contract_kw
    over = 0.0 if tariff.contract_kw is None else max(0.0, peak - tariff.contract_kw)
    above = 0 if tariff.contract_kw is None else int(np.count_nonzero(kw > tariff.contract_kw))
    capacity = charged * tariff.capacity_charge_per_kw_year * years
    penalty = over * tariff.over_contract_per_kw_year * years
    standing = tariff.standing_per_year * years
    return Cost(
        energy_day=day,
        energy_night=night,
        capacity=capacity,
        over_contract=penalty,
        standing=standing,
        total=day + night + capacity + penalty + standing,
        currency=tariff.currency,
        over_contract_h=above * hours,
        over_contract_kw=over,
    )
