"""Study tables of supply: what is read, and what is refused in one line."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from pydantic import ValidationError

from canopy.energy import Supply, energy, make_pump, make_tariff
from canopy.energykeys import HeatPumpKeys, StoreKeys, TariffKeys
from canopy.study import HeatingKeys


@pytest.mark.parametrize(
    ("table", "message"),
    [
        ({"fuel": "naturalgas"}, r'unknown fuel "naturalgas" \(did you mean "natural-gas"\?\)'),
        ({"price_per_kwh": 0.1, "tariff": {"price_per_kwh": 0.1}}, "exclude each other"),
        ({"heat_pump_tariff": {"price_per_kwh": 0.1}}, "needs the table heat_pump"),
        ({"tariff": {"price_per_kwh": 0.1, "over_contract_per_kw_year": 5.0}}, "needs contract_kw"),
        ({"heat_pump": {"source": "air", "capacity_w_m2": 50.0, "source_c": 8.0}}, "follows the outside air"),
        ({"heat_pump": {"source": "sea", "capacity_w_m2": 50.0}}, "'air', 'ground' or 'water'"),
        ({"store": {"spread_k": 1.0}}, "greater than or equal to 5"),
        ({"store": {"volume": 1.0}}, "Extra inputs"),
    ],
)
def test_refused(table: dict[str, Any], message: str) -> None:
    with pytest.raises(ValidationError, match=message):
        HeatingKeys.model_validate(table)


def test_tables_reach_the_calculation() -> None:
    keys = HeatingKeys.model_validate(
        {
            "fuel": "wood-chips",
            "tariff": {"price_per_kwh": 0.04, "currency": "EUR"},
            "heat_pump": {"source": "water", "capacity_w_m2": 60.0, "source_c": 11.0, "flow_max_c": 55.0},
            "heat_pump_tariff": {"price_per_kwh": 0.3, "night_price_per_kwh": 0.2, "contract_kw": 100.0},
        }
    )
    assert keys.heat_pump is not None
    pump = make_pump(keys.heat_pump)
    assert (pump.source, pump.source_c, pump.flow_max_c) == ("water", 11.0, 55.0)
    tariff = make_tariff(keys.heat_pump_tariff)
    assert tariff is not None
    assert (tariff.night_price_per_kwh, tariff.contract_kw) == (0.2, 100.0)
    assert make_tariff(None) is None


def test_pump_with_back_up_and_two_prices() -> None:
    load = np.full(24, 100.0)
    pump = HeatPumpKeys(source="ground", capacity_w_m2=60.0, source_c=5.0)
    supply = Supply(
        "fuel-oil", 0.9, None, None, TariffKeys(price_per_kwh=0.1), pump, TariffKeys(price_per_kwh=0.3)
    )
    found = energy(load, np.full(24, 45.0), np.zeros(24), np.full(24, 80.0), np.arange(24.0), 1000.0, supply)
    cop = 8.77 - 0.150 * 40 + 0.000734 * 1600  # Staffell et al. 2012, lift of 40 K
    assert found.electricity is not None
    assert found.electricity.gross_kwh == pytest.approx(24 * 60.0 / cop)
    assert found.boiler.heat_kwh == pytest.approx(24 * 40.0)
    litres = 24 * 40.0 / 0.9 / 10.150
    assert found.boiler.amount == pytest.approx(litres)
    assert found.total_cost == pytest.approx(litres * 10.684 * 0.1 + 24 * 60.0 / cop * 0.3)
    assert found.co2_kg == pytest.approx(litres * 10.684 * 0.25236 + 24 * 60.0 / cop * 0.366)
    unpriced = energy(
        load,
        np.full(24, 45.0),
        np.zeros(24),
        np.full(24, 80.0),
        np.arange(24.0),
        1000.0,
        Supply("fuel-oil", None, None),
    )
    assert unpriced.total_cost is None
    assert StoreKeys().reserve_pct == 10.0
