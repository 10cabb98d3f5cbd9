"""The nights of a run: sky loss by hour of the night, on the clearest and the cloudiest third of nights."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.run import CandidateRun, Run
from weather.constants import STEFAN_BOLTZMANN, ZERO_C_K

Floats = NDArray[np.float64]

LEAST_NIGHTS = 10  # hours seen on fewer nights than this are not shown


@dataclass(frozen=True)
class Nights:
    """Which reported hours are dark, which night they belong to, and how clear that night is."""

    dark: NDArray[np.bool_]  # (H,)
    night: NDArray[np.int64]  # (H,) day on which the night begins, noon to noon
    clear: NDArray[np.bool_]  # (H,) dark hours of the clearest third
    cloudy: NDArray[np.bool_]  # (H,) dark hours of the cloudiest third
    hour: NDArray[np.int64]  # (H,) hour of the standard-time clock


@dataclass(frozen=True)
class NightPattern:
    """Mean sky loss by hour of the night, W/m2 floor: straight through, and from the skin."""

    labels: tuple[str, ...]  # hours of the clock, evening to morning
    clear_through: Floats
    clear_skin: Floats
    cloudy_through: Floats
    cloudy_skin: Floats
    clear_mean: float  # all dark hours of clear nights, W/m2
    cloudy_mean: float
    through_share: float  # of all night sky loss


def find_nights(run: Run) -> Nights:
    """Return the dark hours and the clearest and cloudiest third of nights.

    Clearness of a night: mean of black-body radiation at air temperature less what the sky sends, W/m2.
    """
    weather, rows = run.weather, run.hours
    dark = ~run.candidates[0].case.outside.sun_up[rows]
    offset = np.timedelta64(12, "h")
    night = (run.time - offset).astype("datetime64[D]").astype(np.int64)
    deficit = STEFAN_BOLTZMANN * (weather.temp_air[rows] + ZERO_C_K) ** 4 - weather.longwave_down[rows]
    which, at = np.unique(night, return_inverse=True)
    hours = np.bincount(at, weights=dark, minlength=len(which))
    total = np.bincount(at, weights=np.where(dark, deficit, 0.0), minlength=len(which))
    mean = np.divide(total, hours, out=np.full(len(which), np.nan), where=hours > 0)
    if np.isfinite(mean).any():
        low, high = np.nanquantile(mean, [1 / 3, 2 / 3])
    else:
        low = high = np.nan
    clear, cloudy = dark & (mean[at] >= high), dark & (mean[at] <= low)
    return Nights(dark, night, clear, cloudy, run.time.astype("datetime64[h]").astype(np.int64) % 24)


def _by_hour(values: Floats, chosen: NDArray[np.bool_], hours: NDArray[np.int64]) -> Floats:
    total = np.bincount(hours[chosen], weights=values[chosen], minlength=24)
    count = np.bincount(hours[chosen], minlength=24)
    return np.asarray(np.divide(total, count, out=np.full(24, np.nan), where=count >= 1))


def night_pattern(one: CandidateRun, nights: Nights) -> NightPattern | None:
    """Return a candidate's nights; None when the record has no dark hours (polar day)."""
    if not nights.dark.any():
        return None
    count = np.bincount(nights.hour[nights.dark], minlength=24)
    order = [h % 24 for h in range(12, 36) if count[h % 24] >= min(LEAST_NIGHTS, count.max())]
    through, skin = one.hourly["through_loss_w_m2"], one.hourly["skin_loss_w_m2"]
    sky = one.hourly["sky_loss_w_m2"]

    def mean(values: Floats, chosen: NDArray[np.bool_]) -> Floats:
        return _by_hour(values, chosen, nights.hour)[order]

    lost = float(sky[nights.dark].sum())
    return NightPattern(
        tuple(f"{h:02d}" for h in order),
        mean(through, nights.clear),
        mean(skin, nights.clear),
        mean(through, nights.cloudy),
        mean(skin, nights.cloudy),
        clear_mean=float(sky[nights.clear].mean()) if nights.clear.any() else float("nan"),
        cloudy_mean=float(sky[nights.cloudy].mean()) if nights.cloudy.any() else float("nan"),
        through_share=float(through[nights.dark].sum()) / lost if lost > 0 else float("nan"),
    )
