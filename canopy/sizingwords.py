"""The sizing in sentences: where the peak comes from, the two answers side by side, what the boiler does."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.designnight import DesignNight
from canopy.loadcurve import EXCEEDED_99_6_H, YEAR_H
from canopy.returns import ManyYears

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
Times = NDArray[np.datetime64]

WHOLE_YEAR_SHARE: Final = 0.95
SAME_W_M2: Final = 0.5  # closer than this both are printed alike
S_PER_H: Final = 3600.0


@dataclass(frozen=True)
class Told:
    """What the sentences are made of."""

    load: Floats  # (N,) W/m2 floor
    time: Times  # (N,)
    exceeded: tuple[float, float]  # in 35 h and in 88 h a year, W/m2
    calm: float  # exceeded in 35 h a year without the pulse of opening screens
    night: DesignNight | None
    basis: str
    many: ManyYears | None
    typical: bool
    years: float
    capped: bool
    pipes_short_h: float
    opening: Bools | None
    step_s: float


def hour_words(at: np.datetime64) -> str:
    """Return "1990-12-25 07:00"."""
    return str(at.astype("datetime64[m]")).replace("T", " ")


def hours_words(hours: float) -> str:
    """Return "1 hour" or "5 hours"."""
    return f"{hours:.0f} hour" + ("" if round(hours) == 1 else "s")


def explain(told: Told) -> tuple[str, ...]:
    """Return the comparison of simulated hours and design night in sentences."""
    peak = int(np.argmax(told.load))
    said = ["No simulated hour takes heat."]
    if told.load[peak] > 0.0:
        said = [
            f"Highest simulated hour {told.load[peak]:.0f} W/m2 ({hour_words(told.time[peak])}); exceeded in "
            f"35 h a year {told.exceeded[0]:.0f}, in 88 h {told.exceeded[1]:.0f} W/m2."
        ]
    if told.typical:
        said.append("The record is no measured year: extremes are not in it, a colder year neither.")
    if told.years < WHOLE_YEAR_SHARE:
        said.append(f"The record is {told.years:.2f} years long: percentiles are scaled to its length.")
    if told.capped and told.load[peak] > 0.0:
        said.append("The study limits the heating: simulated loads are cut off at that limit.")
    if told.night is not None:
        said += _night(told.night)
        opens = told.opening is not None and bool(told.opening[peak])
        said += _why(float(told.load[peak]), told.night, opens)
    if told.many is not None:
        peaks = told.many.peak_w_m2
        said.append(
            f"{len(told.many.years)} years: peak {peaks.min():.0f}-{peaks.max():.0f} W/m2; {told.many.note}."
        )
    said += _opening(told)
    if told.pipes_short_h > 0.0:
        said.append(
            f"In {hours_words(told.pipes_short_h)} the pipes at their highest flow temperature cannot hold "
            "the set-point: simulated loads are cut off there; more pipe or hotter water is needed."
        )
    said.append(
        "There is no design heat."
        if told.basis == "none"
        else f"The design heat is taken from: {told.basis}."
    )
    return tuple(said)


def _screens(night: DesignNight) -> str:
    return "no screen" if night.design.screens == "none" else f"screens {night.design.screens}"


def _night(night: DesignNight) -> list[str]:
    """Return the design night in sentences."""
    said = [
        f"Design night {night.design_w_m2:.0f} W/m2 at {night.outside.temp_c:.1f} °C outside, "
        f"{night.inside_c:.1f} °C inside, {night.outside.wind_m_s:.1f} m/s, clear and dark, covering dry, "
        f"{_screens(night)}; on paper (U x area) {night.hand.total_w_m2:.0f} W/m2 without a screen."
    ]
    if night.drawn is not None:
        opened = f"The same night with screens open takes {night.open.total_w_m2:.0f} W/m2"
        if night.hold_open_c is not None:
            opened += (
                "; with the heat of the drawn screen an open house holds its set-point down to "
                f"{night.hold_open_c:.1f} °C outside"
            )
        said.append(f"{opened}.")
    said.append(f"Recovery: {night.recovery.text}.")
    if night.pipes_note:
        said.append(f"On the design night the pipes fall short: {night.pipes_note}.")
    return said


def _why(peak: float, night: DesignNight, opens: bool) -> list[str]:
    """Return why the two answers differ, if they do."""
    if abs(peak - night.design_w_m2) < SAME_W_M2:
        return []
    if peak > night.design_w_m2 and opens:
        return [
            "The simulated peak is higher than the design night: it falls on an hour in which a screen opens."
        ]
    if peak > night.design_w_m2:
        return [
            "The simulated peak is higher than the design night: it falls on a colder or windier hour, or on "
            "the rise of the set-point, when air, crop and pipes take up heat as well."
        ]
    return [
        "The design night is higher than the simulated peak: it holds wind, clear sky and cold together for "
        "a whole night and takes nothing from the soil, which in a real night gives heat back."
    ]


def _opening(told: Told) -> list[str]:
    """Return how many of the highest hours are hours in which a screen opens."""
    if told.opening is None:
        return []
    count = max(1, round(EXCEEDED_99_6_H / YEAR_H * len(told.load)))
    highest = np.argsort(told.load, kind="stable")[::-1][:count]
    pulses = int(np.count_nonzero(told.opening[highest] & (told.load[highest] > 0.0)))
    if pulses == 0:
        return []
    of, step_h = count * told.step_s / S_PER_H, told.step_s / S_PER_H
    return [
        f"In {pulses * step_h:.0f} of the {of:.0f} highest hours a screen opens: cold air comes down and the "
        f"pipes heat up within the hour. Without that pulse {told.calm:.0f} W/m2 are exceeded in 35 h a "
        "year, and the size counts these; open screens later and in steps on cold mornings."
    ]


def boiler_words(
    boiler_kw: float, deficit_h: float, lowest_air_c: float, at: np.datetime64, pipes_short_h: float = 0.0
) -> str:
    """Return in words what the proposed boiler does in the record."""
    with_it = f"With the proposed {boiler_kw:.0f} kW the house"
    if deficit_h == 0.0:
        return f"{with_it} holds its set-point in every hour of this record."
    pipes = ", for want of pipe and not of boiler" if deficit_h <= pipes_short_h else ""
    return (
        f"{with_it} stays more than .1 K below its set-point in {hours_words(deficit_h)} of this "
        f"record{pipes}; the lowest air temperature is {lowest_air_c:.1f} °C ({hour_words(at)})."
    )
