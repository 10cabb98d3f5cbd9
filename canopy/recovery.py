"""Recovery after a rise of the set-point: what must be warmed besides holding the temperature."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from canopy.emitters import pipes
from canopy.heatcase import HeatCase
from weather.constants import CP_AIR, CP_WATER

AIR_DENSITY: Final = 1.2  # kg/m3 near 20 degC


@dataclass(frozen=True)
class Recovery:
    """Warming up after the night set-point."""

    rise_k: float
    ramp_k_per_h: float  # as the set-points ask for it
    stores_wh_m2_k: float  # air, crop, pipes and covering, per K of house air
    extra_w_m2: float  # on top of holding the temperature, at that ramp
    text: str


def recovery(case: HeatCase, covering_c: float, outside_c: float, row: int, inside_c: float) -> Recovery:
    """Return what the morning rise of the set-point takes, W/m2 floor, on top of holding it.

    Stores per K of house air: the air itself, crop water, pipe water and steel, and the covering, which
    follows by (its mean `covering_c` - outside) / (inside - outside). Soil and structure are slower and left
    out. Rise and ramp are those of the set-points within a day around `row`.
    """
    day = round(24.0 * 3600.0 / case.outside.step_s)
    heat_at = case.climate.heat_at[max(0, row - day) : row + day]
    heated = np.isfinite(heat_at)
    rises = np.diff(heat_at[heated]) if np.count_nonzero(heated) > 1 else np.zeros(1)
    per_h = 3600.0 / case.outside.step_s
    ramp = max(float(rises.max(initial=0.0)) * per_h, 0.0)
    rise = max(0.0, inside_c - float(heat_at[heated].min())) if heated.any() else 0.0
    follows = np.clip((covering_c - outside_c) / max(inside_c - outside_c, 1.0), 0.0, 1.0)
    shell = case.shell
    air = AIR_DENSITY * CP_AIR * shell.mean_height_m
    crop = float(case.crop.lai[row]) * case.crop.water_kg_per_lai * CP_WATER
    pipe = pipes(case.heating).capacity
    cover = sum(case.covering.heat_capacity) * (shell.roof_ratio + shell.wall_ratio) * float(follows)
    stores = (air + crop + pipe + cover) / 3600.0
    extra = stores * ramp
    text = (
        f"air {air / 3600:.2f}, crop {crop / 3600:.2f}, pipes {pipe / 3600:.2f}, covering {cover / 3600:.2f} "
        f"Wh/m2K; at {ramp:.1f} K/h: {extra:.0f} W/m2 more while the set-point rises by {rise:.1f} K"
    )
    return Recovery(rise, ramp, stores, extra, text)
