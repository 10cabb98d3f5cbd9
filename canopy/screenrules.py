"""From the names in `candidate.screens` to library screens and the rules by which they are drawn."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Final, Literal

from canopy import library
from canopy.library_rows import table
from canopy.seasonal import day_number
from canopy.studykeys import ScreenKeys
from weather.errors import UserError

if TYPE_CHECKING:
    from canopy.control import ScreenRule
    from canopy.optics import Screen
    from canopy.studyfile import Plan, Study

Purpose = Literal["energy", "shade", "blackout"]

CLOSED_SHARE: Final = 0.98  # of an energy screen at its best; seams and edges stay open: common practice
BLACKOUT_HOURS: Final = (18.0, 8.0)  # civil time, for a short day: common practice
USED_BY: Final[dict[str, Purpose]] = {
    "close_below_w_m2": "energy",
    "close_below_outside_c": "energy",
    "close_above_w_m2": "shade",
}


def check_rule(keys: ScreenKeys, purpose: str, where: str) -> None:
    """Refuse a rule key that a screen of this purpose does not use (UserError)."""
    for key, owner in USED_BY.items():
        if getattr(keys, key) is not None and purpose != owner:
            raise UserError(
                f'{where}: screen "{keys.name}" -> {key}: "{keys.based_on}" is for {purpose}, '
                f"this key goes with {owner} screens"
            )


def screens_of(plan: Plan, study: Study) -> tuple[tuple[Screen, ...], tuple[ScreenRule, ...]]:
    """Return the screens of a candidate, outermost first, with their rules."""
    screens = tuple(library.screen(_based_on(name, study)) for name in plan.screens)
    return screens, tuple(screen_rule(name, study) for name in plan.screens)


def _based_on(name: str, study: Study) -> str:
    keys = next((keys for keys in study.keys.screen if keys.name == name), None)
    return name if keys is None else keys.based_on


def screen_rule(name: str, study: Study) -> ScreenRule:
    """Return the rule by which a screen of the study, or one of the library, is drawn (light to import)."""
    keys = next((keys for keys in study.keys.screen if keys.name == name), None)
    return _rule(keys, table("screen", _based_on(name, study))["kind"])


def _rule(keys: ScreenKeys | None, purpose: Purpose) -> ScreenRule:
    from canopy.control import ScreenRule

    given: dict[str, Any] = {"purpose": purpose}
    if purpose == "energy":
        given["share"] = CLOSED_SHARE
    if purpose == "blackout":
        given["hours"] = BLACKOUT_HOURS
    if keys is not None:
        given |= {key: value for key in USED_BY if (value := getattr(keys, key)) is not None}
        if keys.from_hour is not None and keys.until_hour is not None:
            given["hours"] = (keys.from_hour, keys.until_hour)
        if keys.first_day is not None and keys.last_day is not None:
            given["days"] = (day_number(keys.first_day), day_number(keys.last_day))
        if keys.humidity_gap_pct is not None:
            given["gap"] = keys.humidity_gap_pct / 100.0
    return ScreenRule(**given)
