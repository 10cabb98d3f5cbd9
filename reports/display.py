"""Numbers as the report shows them: SI, or US customary units when the study asks for them."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Unit:
    """How a quantity is shown: unit text, factor and offset from SI, decimals."""

    text: str
    factor: float = 1.0
    offset: float = 0.0
    digits: int = 0


_BTU_KWH: Final = 3412.142  # Btu (IT) per kWh, exact ratio of definitions
_FT_M: Final = 1.0 / 0.3048  # international foot
_FT2_M2: Final = _FT_M**2
_LB_KG: Final = 1.0 / 0.45359237  # international pound

SI: Final[dict[str, Unit]] = {
    "kWh/m2": Unit("kWh/m²"),
    "kWh/m2/d": Unit("kWh/m² a day", digits=2),
    "W/m2": Unit("W/m²"),
    "mol/m2": Unit("mol/m²"),
    "mol/m2/d": Unit("mol/m² a day", digits=1),
    "umol/m2/s": Unit("µmol m⁻² s⁻¹"),
    "kWh/mol": Unit("kWh", digits=2),
    "degC": Unit("°C", digits=1),
    "K": Unit("K", digits=1),
    "kW": Unit("kW"),
    "m": Unit("m", digits=1),
    "m2": Unit("m²"),
    "kg/m2": Unit("kg/m²"),
    "W/m2/K": Unit("W m⁻² K⁻¹", digits=2),
    "W/m/K": Unit("W m⁻¹ K⁻¹", digits=2),
    "m/s": Unit("m/s", digits=1),
}

US: Final[dict[str, Unit]] = {
    **SI,
    "kWh/m2": Unit("kBtu/ft²", _BTU_KWH / 1000.0 / _FT2_M2, digits=1),
    "kWh/m2/d": Unit("kBtu/ft² a day", _BTU_KWH / 1000.0 / _FT2_M2, digits=2),
    "W/m2": Unit("Btu/h ft²", _BTU_KWH / 1000.0 / _FT2_M2, digits=1),
    "kWh/mol": Unit("kBtu", _BTU_KWH / 1000.0, digits=2),
    "degC": Unit("°F", 1.8, 32.0, 1),
    "K": Unit("°F", 1.8, digits=1),
    "kW": Unit("kBtu/h", _BTU_KWH / 1000.0),
    "m": Unit("ft", _FT_M, digits=1),
    "m2": Unit("ft²", _FT2_M2),
    "kg/m2": Unit("lb/ft²", _LB_KG / _FT2_M2, digits=1),
    "W/m2/K": Unit("Btu/h ft² °F", _BTU_KWH / 1000.0 / _FT2_M2 / 1.8, digits=2),
    "W/m/K": Unit("Btu/h ft °F", _BTU_KWH / 1000.0 / _FT_M / 1.8, digits=2),
    "m/s": Unit("mph", 3600.0 / 1609.344, digits=1),
}

NONE: Final = "–"


def number(value: float, digits: int = 0) -> str:
    """Return a number with thin spaces between thousands; an en dash when there is none."""
    if not np.isfinite(value):
        return NONE
    text = f"{value:,.{digits}f}".replace(",", "\u202f")
    if text.strip("-0.\u202f") == "":
        text = text.lstrip("-")
    return text.replace("-", "−")


def percent(share: float, digits: int = 0) -> str:
    """Return a share as "12 %"."""
    return f"{number(100.0 * share, digits)}\u202f%" if np.isfinite(share) else NONE


def pretty(text: str) -> str:
    """Return a sentence from another module with raised figures in its units and true minus signs."""
    text = re.sub(r"(?<![\w.])-(?= ?[\d−-])", "−", text.replace(" x ", " × "))
    return re.sub(r"\bm2(?=K|\b)", "m²", re.sub(r"\bm3(?=K|\b)", "m³", text))


def place_words(latitude: float, longitude: float) -> str:
    """Return "36.1° N, 79.95° W"."""
    north, east = "N" if latitude >= 0 else "S", "E" if longitude >= 0 else "W"
    return f"{abs(latitude):g}° {north}, {abs(longitude):g}° {east}"


@dataclass(frozen=True)
class Display:
    """One way of showing quantities."""

    system: Literal["si", "us"]

    def unit(self, kind: str) -> Unit:
        """Return how a kind of quantity (SI unit name) is shown."""
        return (US if self.system == "us" else SI)[kind]

    def text(self, kind: str) -> str:
        """Return the unit as text."""
        return self.unit(kind).text

    def convert(self, values: Floats | float, kind: str) -> Floats:
        """Return SI values in the shown unit."""
        unit = self.unit(kind)
        return np.asarray(values, float) * unit.factor + unit.offset

    def bare(self, value: float, kind: str, more: int = 0) -> str:
        """Return a number without its unit, with some more decimals than usual."""
        return number(float(self.convert(value, kind)), self.unit(kind).digits + more)

    def say(self, value: float, kind: str, more: int = 0) -> str:
        """Return a number with its unit; a small energy with one decimal more."""
        small = kind == "kWh/m2" and not more and 0.0 < abs(value) < 9.95
        return f"{self.bare(value, kind, 1 if small else more)}\u00a0{self.text(kind)}"
