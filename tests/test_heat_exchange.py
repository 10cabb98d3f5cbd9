"""Convection, leakage, vents, gaps, pipes: published values, and slopes against differences."""

from __future__ import annotations

import numpy as np
import pytest

from canopy import exchange as ex
from canopy.emitters import PIPE_EMISSIVITY, pipe_convection, pipes
from canopy.heatcase import Heating
from canopy.optics import Gap

SIGMA = 5.670374e-8


def test_outside_convection_of_glass_and_film() -> None:
    # Bot (1983): 2.8 + 1.2 v below 4 m/s, 2.5 v^0.8 above
    assert ex.outside_convection("gable", np.array([0.0, 2.0, 8.0])) == pytest.approx(
        [2.8, 5.2, 2.5 * 8**0.8]
    )
    # Papadakis et al. (1992): 0.95 + 6.76 v^0.49
    assert ex.outside_convection("arch", np.array([1.0, 4.0])) == pytest.approx([7.71, 0.95 + 6.76 * 4**0.49])
    edge = ex.outside_convection("arch", np.array([6.3, 6.3001]))
    assert edge[0] == pytest.approx(edge[1], rel=1e-3)


@pytest.mark.parametrize(("above", "watts"), [(40.0, 78.0), (60.0, 130.0)])
def test_pipe_emission_per_metre(above: float, watts: float) -> None:
    # 51 mm steel pipe, about 78 and 130 W/m at 40 and 60 K above air (heat-transfer handbooks, 15 %)
    p = pipes(Heating(np.inf, 0.051, 1.0, 95.0))
    convected, _ = pipe_convection(p, np.array([above]))
    air = 273.15 + 18.0
    radiated = p.surface * PIPE_EMISSIVITY * SIGMA * ((air + above) ** 4 - air**4)
    assert convected[0] + radiated == pytest.approx(watts, rel=0.15)


def test_pipe_water_holds_its_heat() -> None:
    # 1.70 l and 2.7 kg of steel per metre of 51 x 2.25 mm tube: pi/4 d^2 by hand
    p = pipes(Heating(np.inf, 0.051, 1.0, 95.0))
    water = np.pi / 4 * 0.0465**2 * 1000 * 4186
    steel = np.pi / 4 * (0.051**2 - 0.0465**2) * 7850 * 480
    assert p.capacity == pytest.approx(water + steel, rel=1e-9)


@pytest.mark.parametrize(
    ("thickness", "slope", "diff", "value"),
    # EN 673: still air 2.496e-2 / s while Nu = .035 (Gr Pr)^.38 < 1, Gr = 9.81 s^3 dT rho^2 / (Tm mu^2)
    [(0.012, 90.0, 15.0, 2.08), (0.006, 90.0, 15.0, 4.16)],
)
def test_upright_gap(thickness: float, slope: float, diff: float, value: float) -> None:
    h, _ = ex.gap_conductance(ex.gas_layer(Gap(thickness), slope), np.array([diff]))
    assert h[0] == pytest.approx(value, rel=0.02)


def test_flat_wide_gap_convects() -> None:
    layer = ex.gas_layer(Gap(0.10), 20.0)
    h, _ = ex.gap_conductance(layer, np.array([10.0]))
    assert 1.5 < h[0] < 3.5  # EN 673, heat upwards through a wide gap
    argon, _ = ex.gap_conductance(ex.gas_layer(Gap(0.10, "argon"), 20.0), np.array([10.0]))
    assert argon[0] < h[0]


def test_leakage_as_stated_at_its_reference() -> None:
    flow, _ = ex.leakage(1.5, 4.0, np.array([4.0]), np.array([20.0]))
    assert flow[0] * 3600 / 4.0 == pytest.approx(1.5, rel=1e-3)


def test_vents_by_wind_and_by_warmth() -> None:
    # Boulard & Baille (1995): A/2 Cd (Cw v^2)^.5 where wind rules; 30-60 air changes in a usual summer wind
    kelvin = np.array([298.0])
    wind, _ = ex.vent_flow(0.15, 1.0, np.array([4.0]), np.array([0.0]), kelvin)
    assert wind[0] == pytest.approx(0.075 * 0.644 * 0.3 * 4.0, rel=0.01)
    warm, _ = ex.vent_flow(0.15, 1.0, np.array([0.0]), np.array([8.0]), kelvin)
    assert warm[0] == pytest.approx(0.075 * 0.644 * np.sqrt(2 * 9.80665 * 8 / 298 / 4), rel=0.01)
    net, _ = ex.vent_flow(0.15, 0.5, np.array([4.0]), np.array([0.0]), kelvin)
    assert net[0] == pytest.approx(0.5 * wind[0])


def test_leaf_boundary_resistance_of_a_still_house() -> None:
    # Stanghellini (1987): 1174 .05^.5 / (.05 x 2 + 207 x .01)^.25 = 216 s/m at 2 K and 0.1 m/s
    g, _, _ = ex.leaf_boundary(np.array([2.0]), np.array([0.01]))
    assert 1.0 / g[0] == pytest.approx(216.0, abs=2.0)


def test_slopes() -> None:
    x = np.array([-12.0, -3.0, -0.3, 0.2, 1.5, 9.0])
    kelvin, wind, step = np.full(6, 290.0), np.full(6, 2.0), 1e-5
    forced = np.full(6, 2.0)
    layer = ex.gas_layer(Gap(0.05), 25.0)
    cases = {
        "cube": lambda d: ex.cube_law(1.7, d, forced)[:2],
        "floor": lambda d: ex.floor_convection(d, forced)[:2],
        "leaf": lambda d: ex.leaf_boundary(d, np.full(6, 0.02))[:2],
        "leak": lambda d: ex.leakage(1.0, 4.0, wind, d),
        "vent": lambda d: ex.vent_flow(0.2, 0.8, wind, d, kelvin),
        "screen": lambda d: ex.screen_flow(np.full(6, 0.9), np.full(6, 0.1), 1.5, d, kelvin)[:2],
        "gap": lambda d: ex.gap_conductance(layer, d),
    }
    for name, law in cases.items():
        numeric = (law(x + step)[0] - law(x - step)[0]) / (2 * step)
        assert law(x)[1] == pytest.approx(numeric, rel=1e-4, abs=1e-9), name
