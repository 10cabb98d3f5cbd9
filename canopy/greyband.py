"""What one grey band would have said: the same year with every long-wave property taken as its mean.

A covering that is dark in some thermal bands and clear in others is mistaken by a single mean value; this
computes by how much, for one candidate, with the same solver.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.balance import grey, solve
from canopy.coveringfigures import whole_thermal
from canopy.heatcase import HeatCase, HeatResult

Floats = NDArray[np.float64]
Indices = NDArray[np.intp]

SELECTIVE: Final = 0.05  # transmittance of the dry covering differs by more than this from band to band
J_PER_KWH: Final = 3.6e6


@dataclass(frozen=True)
class GreyBand:
    """Banded against grey over the reported hours; heat kWh/m2 floor, load W/m2 floor."""

    spread: float  # transmittance of the dry covering: clearest band less darkest
    heat_kwh: float  # banded
    grey_heat_kwh: float
    peak_w: float
    grey_peak_w: float
    sky_kwh: float  # sky loss, banded
    grey_sky_kwh: float


def selectivity(case: HeatCase) -> float:
    """Return how far the dry covering's long-wave transmittance differs between bands."""
    passes = whole_thermal(case.covering.dry).transmit
    return float(passes.max() - passes.min())


def grey_band(case: HeatCase, heat: HeatResult, hours: Indices) -> GreyBand | None:
    """Return the comparison for a selective covering, None for one that is alike in all bands.

    `heat` is the banded result of `case`, `hours` the rows that are reported. Solves the year once more.
    Errors: OpenHourError as `solve`.
    """
    spread = selectivity(case)
    if spread <= SELECTIVE:
        return None
    other = solve(grey(case), heat)
    scale = case.outside.step_s / J_PER_KWH

    def total(values: Floats) -> float:
        return float(values[hours].sum()) * scale

    return GreyBand(
        spread=spread,
        heat_kwh=total(heat.heat_delivered),
        grey_heat_kwh=total(other.heat_delivered),
        peak_w=float(heat.heat_delivered[hours].max()),
        grey_peak_w=float(other.heat_delivered[hours].max()),
        sky_kwh=total(heat.sky_loss),
        grey_sky_kwh=total(other.sky_loss),
    )
