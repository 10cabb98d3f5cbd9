"""Physical constants, each once: value, unit, source. Derived ones are derived."""

from __future__ import annotations

import math
from typing import Final

PLANCK_J_S: Final = 6.62607015e-34  # exact, SI 2019 (CODATA 2018)
LIGHT_SPEED_M_S: Final = 299_792_458.0  # exact, SI
BOLTZMANN_J_K: Final = 1.380649e-23  # exact, SI 2019
AVOGADRO_PER_MOL: Final = 6.02214076e23  # exact, SI 2019

C1_W_M2: Final = 2.0 * math.pi * PLANCK_J_S * LIGHT_SPEED_M_S**2  # W m2, hemispherical
C2_UM_K: Final = PLANCK_J_S * LIGHT_SPEED_M_S / BOLTZMANN_J_K * 1e6  # um K
STEFAN_BOLTZMANN: Final = (
    2.0 * math.pi**5 * BOLTZMANN_J_K**4 / (15.0 * PLANCK_J_S**3 * LIGHT_SPEED_M_S**2)
)  # W m-2 K-4
WIEN_X: Final = 4.965114231744276  # root of x = 5 (1 - exp(-x))
WIEN_B_UM_K: Final = C2_UM_K / WIEN_X  # um K

ZERO_C_K: Final = 273.15  # K at 0 degC, by definition
SOLAR_CONSTANT_W_M2: Final = 1361.1  # W/m2, Gueymard (2018), Solar Energy 168:14
SUN_TEMPERATURE_K: Final = 5772.0  # IAU 2015 resolution B3, nominal effective temperature

GAS_CONSTANT: Final = BOLTZMANN_J_K * AVOGADRO_PER_MOL  # J mol-1 K-1
MOLAR_MASS_AIR: Final = 0.028966  # kg/mol, dry air, ASHRAE Fundamentals (2017) ch. 1
MOLAR_MASS_WATER: Final = 0.018015268  # kg/mol, ASHRAE Fundamentals (2017) ch. 1
WATER_AIR_RATIO: Final = MOLAR_MASS_WATER / MOLAR_MASS_AIR
CP_AIR: Final = 1006.0  # J kg-1 K-1, dry air, ASHRAE Fundamentals (2017) ch. 1
CP_VAPOUR: Final = 1860.0  # J kg-1 K-1, water vapour, same source
CP_WATER: Final = 4186.0  # J kg-1 K-1, liquid water near 20 degC
LATENT_HEAT_0C: Final = 2.501e6  # J/kg at 0 degC, ASHRAE Fundamentals (2017) ch. 1
GRAVITY: Final = 9.80665  # m s-2, standard
VON_KARMAN: Final = 0.41  # as used in FAO-56
