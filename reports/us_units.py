"""Units of the workbook: SI as the tables carry them, or US customary units beside the same names."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from reports.display import US

Floats = NDArray[np.float64]
System = Literal["si", "us"]

KWH_PER_THERM: Final = 29.307107  # 1e5 Btu (IT)
L_PER_GALLON: Final = 3.785411784  # US liquid gallon, definition
T_PER_SHORT_TON: Final = 0.90718474  # 2000 lb


@dataclass(frozen=True)
class Shown:
    """How a quantity is shown: unit text, factor and offset from SI, Excel number format."""

    text: str
    factor: float = 1.0
    offset: float = 0.0
    number_format: str = "0.00"

    def convert(self, values: Floats | float) -> Floats:
        """Return SI values in the shown unit."""
        return np.asarray(values, float) * self.factor + self.offset


FORMATS: Final = {
    "kWh/m2": "0.000",
    "kWh": "#,##0",
    "MWh": "#,##0.0",
    "W/m2": "0.0",
    "kW": "#,##0",
    "mol/m2": "0.00",
    "mol m-2 d-1": "0.0",
    "kg m-2": "0.000",
    "kg": "#,##0",
    "°C": "0.0",
    "K": "0.0",
    "K d": "0.00",
    "h": "0.0",
    "%": "0.0",
    "kPa": "0.000",
    "1/h": "0.00",
    "m2": "#,##0",
    "m3": "#,##0",
    "m3/1000 m2": "#,##0",
    "l": "#,##0",
    "t": "#,##0.0",
    "Wh/m2K": "0.00",
    "W/m2K": "0.00",
    "m/s": "0.0",
    "share": "0.0%",
    "": "0.00",
}
"""Excel number formats by SI unit."""

_FT2_GALLONS: Final = (
    1000.0 / L_PER_GALLON / (1000.0 * US["m2"].factor) * 1000.0
)  # gal/1000 ft2 per m3/1000 m2

_US: Final[dict[str, Shown]] = {
    "kWh/m2": Shown("kBtu/ft2", US["kWh/m2"].factor, 0.0, "0.000"),
    "kWh": Shown("therm", 1.0 / KWH_PER_THERM, 0.0, "#,##0"),
    "MWh": Shown("therm", 1000.0 / KWH_PER_THERM, 0.0, "#,##0"),
    "W/m2": Shown("Btu/h ft2", US["W/m2"].factor, 0.0, "0.0"),
    "kW": Shown("kBtu/h", US["kW"].factor, 0.0, "#,##0"),
    "kg m-2": Shown("lb/ft2", US["kg/m2"].factor, 0.0, "0.0000"),
    "kg": Shown("lb", 1.0 / 0.45359237, 0.0, "#,##0"),
    "°C": Shown("°F", 1.8, 32.0, "0.0"),
    "K": Shown("°F", 1.8, 0.0, "0.0"),
    "K d": Shown("°F d", 1.8, 0.0, "0.00"),
    "m2": Shown("ft2", US["m2"].factor, 0.0, "#,##0"),
    "m3/1000 m2": Shown("gal/1000 ft2", _FT2_GALLONS, 0.0, "#,##0"),
    "l": Shown("gal", 1.0 / L_PER_GALLON, 0.0, "#,##0"),
    "t": Shown("short ton", 1.0 / T_PER_SHORT_TON, 0.0, "#,##0.0"),
    "Wh/m2K": Shown("Btu/ft2 °F", US["W/m2/K"].factor, 0.0, "0.000"),
    "W/m2K": Shown("Btu/h ft2 °F", US["W/m2/K"].factor, 0.0, "0.00"),
    "m/s": Shown("mph", US["m/s"].factor, 0.0, "0.0"),
}
"""Units that differ; photons, hours, kPa and shares are the same in the trade on both sides."""


def shown(unit: str, system: System) -> Shown:
    """Return how an SI unit is shown in a system of units."""
    if system == "us" and unit in _US:
        return _US[unit]
    text = "" if unit == "share" else unit
    return Shown(text, 1.0, 0.0, FORMATS.get(unit, "0.00"))
