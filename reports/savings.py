"""Where the heat that one candidate saves against another stays: path by path, over the heated hours."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from canopy.columns import GAINS, STORES
from canopy.run import CandidateRun, Run

LOSS_PATHS: Final[tuple[tuple[str, tuple[str, ...]], ...]] = (
    ("to the sky", ("sky_loss_w_m2",)),
    ("to ground and neighbours", ("surroundings_loss_w_m2",)),
    ("to the wind", ("convection_loss_w_m2",)),
    ("leakage", ("air_change_loss_w_m2",)),
    ("vents", ("venting_w_m2",)),
    ("into the ground", ("perimeter_loss_w_m2", "deep_loss_w_m2", "drain_loss_w_m2", *STORES)),
)
"""Paths out of the house and the hourly columns that add up to each; stores stand with the ground."""

SUN_GAINS: Final = tuple(name for name in GAINS if name != "heat_delivered_w_m2")


@dataclass(frozen=True)
class Saving:
    """Heat saved against the first candidate over the hours in which either is heated, kWh/m2 floor."""

    heat: float  # what the heating delivers less
    paths: tuple[float, ...]  # less lost, by `LOSS_PATHS`
    sun: float  # sunlight gained more (negative: lost)

    @property
    def open(self) -> float:
        """What the paths leave unexplained: the closure of the balance, summed."""
        return self.heat - sum(self.paths) - self.sun


def saving(run: Run, base: CandidateRun, one: CandidateRun) -> Saving:
    """Return what a candidate saves against another, and where it stays."""
    heated = (base.hourly["heat_delivered_w_m2"] > 0) | (one.hourly["heat_delivered_w_m2"] > 0)
    scale = run.weather.step_s / 3.6e6  # W/m2 per step to kWh/m2

    def less(*names: str) -> float:
        return scale * sum(float(np.sum((base.hourly[n] - one.hourly[n])[heated])) for n in names)

    return Saving(
        heat=less("heat_delivered_w_m2"),
        paths=tuple(less(*names) for _, names in LOSS_PATHS),
        sun=-less(*SUN_GAINS),
    )
