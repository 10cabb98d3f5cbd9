"""Fuels, heat pump and tariffs against published figures and hand arithmetic."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from canopy.fuel import burn, fuel, fuel_names, fuels
from canopy.heatpump import HeatPump, performance, run_heat_pump
from canopy.tariff import Tariff, at_night, cost
from weather.errors import UserError

KWH_PER_MMBTU = 293.0711  # 1e6 x 1055.056 J


@pytest.mark.parametrize(
    ("name", "heat_mmbtu", "per", "co2_kg_per_mmbtu"),
    [  # 40 CFR 98 table C-1 (2016): default high heat values and CO2 factors
        ("natural-gas", 1.026e-3, 0.0283168, 53.06),  # per scf
        ("propane", 0.091, 3.785412, 62.87),  # per US gallon
        ("fuel-oil", 0.138, 3.785412, 73.96),
        ("heavy-fuel-oil", 0.150, 3.785412, 75.10),
        ("anthracite", 25.09, 0.9071847, 103.69),  # per short ton
        ("bituminous-coal", 24.93, 0.9071847, 93.28),
    ],
)
def test_gross_values_and_co2(name: str, heat_mmbtu: float, per: float, co2_kg_per_mmbtu: float) -> None:
    kind = fuel(name)
    assert kind.gross_kwh_per_unit == pytest.approx(heat_mmbtu * KWH_PER_MMBTU / per, rel=2e-4)
    assert kind.co2_kg_per_kwh_gross == pytest.approx(co2_kg_per_mmbtu / KWH_PER_MMBTU, rel=2e-4)


@pytest.mark.parametrize(
    ("name", "net_mj_per_kg", "kg_per_unit", "co2_kg_per_gj_net", "within"),
    [  # IPCC 2006 guidelines vol. 2 tables 1.2 and 1.4 (net basis); densities: common practice
        ("natural-gas", 48.0, 0.725, 56.1, 0.06),  # kg/m3 at 15 °C, mostly methane
        ("propane", 47.3, 0.505, 63.1, 0.05),  # kg/l
        ("fuel-oil", 43.0, 0.845, 74.1, 0.05),
        ("heavy-fuel-oil", 40.4, 0.98, 77.4, 0.05),
        ("anthracite", 26.7, 1000.0, 98.3, 0.06),
        ("wood-pellets", 16.5, 1000.0, 95.6, 0.12),  # ISO 17225-2 class A1; 112 on the IPCC's wetter wood
    ],
)
def test_net_values_agree_with_a_second_source(
    name: str, net_mj_per_kg: float, kg_per_unit: float, co2_kg_per_gj_net: float, within: float
) -> None:
    kind = fuel(name)
    assert kind.net_kwh_per_unit * 3.6 == pytest.approx(net_mj_per_kg * kg_per_unit, rel=within)
    assert kind.co2_kg_per_kwh_gross is not None
    on_net = kind.co2_kg_per_kwh_gross * kind.gross_kwh_per_unit / kind.net_kwh_per_unit / 3.6e-3
    if not kind.biogenic:
        assert on_net == pytest.approx(co2_kg_per_gj_net, rel=within)


def test_every_fuel_has_sources() -> None:
    for kind in fuels().values():
        assert kind.source
        assert kind.efficiency_source
        assert kind.net_kwh_per_unit <= kind.gross_kwh_per_unit
    with pytest.raises(UserError, match=r'unknown fuel "natural gas" \(did you mean "natural-gas"'):
        fuel("natural gas")
    assert "electricity" in fuel_names()


def test_gas_by_hand() -> None:
    # 100 W/m2 on 1000 m2 for 10 h = 1000 kWh of heat; at 93 % on net: 1075.3 kWh net, 112.5 m3
    use = burn(np.full(10, 100.0), 1000.0, fuel("natural-gas"))
    assert use.heat_kwh == pytest.approx(1000.0)
    assert use.net_kwh == pytest.approx(1000.0 / 0.93)
    assert use.amount == pytest.approx(1000.0 / 0.93 / 9.557)
    assert use.gross_kwh == pytest.approx(use.amount * 10.619)
    assert use.co2_kg == pytest.approx(use.gross_kwh * 0.18105)
    assert use.peak_kw == pytest.approx(use.gross_kwh / 10.0)
    assert burn(np.ones(3), 10.0, fuel("district-heat")).co2_kg is None
    assert burn(np.ones(3), 1000.0, fuel("district-heat"), 1.0, co2_kg_per_kwh=0.1).co2_kg == pytest.approx(
        0.3
    )


@pytest.mark.parametrize(
    ("source", "outside", "flow", "low", "high"),
    [  # usual data-sheet figures (EN 14511): A7/W35 4.0-5.0, A2/W35 3.2-4.0, B0/W35 4.3-4.9, W10/W35 5.2-6.2;
        # A-7/W55 1.8-2.3: common practice
        ("air", 7.0, 35.0, 3.7, 5.0),
        ("air", 2.0, 35.0, 3.2, 4.0),
        ("air", -7.0, 55.0, 1.6, 2.3),
        ("ground", 0.0, 35.0, 4.2, 4.9),
        ("water", 10.0, 35.0, 5.2, 6.2),
    ],
)
def test_performance_at_rating_points(
    source: str, outside: float, flow: float, low: float, high: float
) -> None:
    value = performance(source, np.array([outside]), np.array([flow]))[0]  # type: ignore[arg-type]
    assert low <= value <= high


@settings(max_examples=50, deadline=None)
@given(st.floats(-30.0, 25.0), st.floats(25.0, 95.0))
def test_performance_below_carnot(source_c: float, flow_c: float) -> None:
    """No heat pump beats Carnot, and none is worse than a resistance heater."""
    for source in ("air", "ground", "water"):
        value = performance(source, np.array([source_c]), np.array([flow_c]))[0]  # type: ignore[arg-type]
        carnot = (flow_c + 273.15) / max(flow_c - source_c, 1e-9)
        assert value >= 1.0
        assert value < carnot or flow_c - source_c < 0


def test_heat_pump_limits_defrost_and_back_up() -> None:
    load = np.array([0.0, 40.0, 80.0, 80.0, 80.0, 80.0])
    flow = np.array([30.0, 45.0, 45.0, 75.0, 45.0, 45.0])
    outside = np.array([2.0, 8.0, 8.0, 8.0, -20.0, 1.0])
    rh = np.full(6, 90.0)
    run = run_heat_pump(load, flow, outside, rh, HeatPump("air", 60.0))
    assert list(run.heat) == [0.0, 40.0, 60.0, 0.0, 0.0, 60.0]
    assert list(run.heat + run.backup) == list(load)
    assert (run.too_hot_h, run.too_cold_h, run.short_h, run.defrost_h) == (1.0, 1.0, 2.0, 1.0)
    cop = 6.81 - 0.121 * 44 + 0.00063 * 44**2  # Staffell et al. 2012 at a lift of 44 K, 8 % for defrost
    assert run.cop[5] == pytest.approx(cop / 1.08)
    assert run.seasonal == pytest.approx(run.heat.sum() / run.electricity.sum())
    ground = run_heat_pump(load, flow, outside, rh, HeatPump("ground", 60.0, source_c=8.0))
    assert ground.too_cold_h == 0.0
    assert ground.defrost_h == 0.0


def test_tariff_by_hand() -> None:
    # 48 hours of 100 kW: 8 of 24 hours at night; a two-day record carries 48/8760 of the yearly charges
    hour = np.tile(np.arange(24.0), 2)
    draw = np.full(48, 100.0)
    draw[12] = 150.0
    own = Tariff(0.20, 0.10, 22.0, 6.0, 50.0, 120.0, 80.0, 1000.0, "EUR")
    bill = cost(draw, hour, own)
    share = 48 / 8760
    assert bill.energy_night == pytest.approx(16 * 100 * 0.10)
    assert bill.energy_day == pytest.approx((32 * 100 + 50) * 0.20)
    assert bill.capacity == pytest.approx(120 * 50 * share)
    assert bill.over_contract == pytest.approx(30 * 80 * share)
    assert (bill.over_contract_h, bill.over_contract_kw) == (1.0, 30.0)
    assert bill.total == pytest.approx(
        bill.energy_day + bill.energy_night + bill.capacity + bill.over_contract + 1000 * share
    )
    flat = cost(draw, hour, Tariff(0.2, capacity_charge_per_kw_year=50.0))
    assert flat.capacity == pytest.approx(150 * 50 * share)
    assert flat.energy_night == 0.0
    assert list(at_night(np.array([21.9, 22.0, 5.9, 6.0]), 22.0, 6.0)) == [False, True, True, False]
