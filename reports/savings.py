"""Where the heat that one candidate saves against another stays: path by path in the dark, all paths by day.

By day the sun that the covering itself absorbs goes out again by the same paths, so that single paths say
little; in the dark they add up to the heat saved.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from canopy.columns import STORES
from canopy.loadcurve import IDLE_W_M2
from canopy.run import CandidateRun, Run

LOSS_PATHS: Final[tuple[tuple[str, tuple[str, ...]], ...]] = (
    ("to the sky", ("sky_loss_w_m2",)),
    ("to ground and neighbours", ("surroundings_loss_w_m2",)),
    ("to the wind", ("convection_loss_w_m2",)),
    ("by leakage", ("air_change_loss_w_m2",)),
    ("by vents", ("venting_w_m2",)),
    ("into ground and stores", ("perimeter_loss_w_m2", "deep_loss_w_m2", "drain_loss_w_m2", *STORES)),
)
"""Paths out of the house and the hourly columns that add up to each; stores stand with the ground."""


@dataclass(frozen=True)
class Saving:
    """Heat saved against the first candidate, kWh/m2 floor."""

    heat: float  # what the heating delivers less, all hours
    paths: tuple[float, ...]  # less lost in dark heated hours, by `LOSS_PATHS`
    by_day: float  # heat saved in hours with light, all paths and the sun together

    @property
    def open(self) -> float:
        """What the paths leave unexplained: the closure of the balance, summed over the dark hours."""
        return self.heat - self.by_day - sum(self.paths)


def saving(run: Run, base: CandidateRun, one: CandidateRun) -> Saving:
    """Return what a candidate saves against another, and where it stays."""
    heated = np.maximum(base.hourly["heat_delivered_w_m2"], one.hourly["heat_delivered_w_m2"]) >= IDLE_W_M2
    dark = base.hourly["outside_global_w_m2"] <= 0
    scale = run.weather.step_s / 3.6e6  # W/m2 per step to kWh/m2
    night = heated & dark

    def less(*names: str) -> float:
        return scale * sum(float(np.sum((base.hourly[n] - one.hourly[n])[night])) for n in names)

    delivered = base.hourly["heat_delivered_w_m2"] - one.hourly["heat_delivered_w_m2"]
    return Saving(
        heat=scale * float(delivered.sum()),
        paths=tuple(less(*names) for _, names in LOSS_PATHS),
        by_day=scale * float(delivered[~dark].sum()),
    )
