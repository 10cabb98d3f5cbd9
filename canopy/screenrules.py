"""From the names in `candidate.screens` to library screens and the rules by which they are drawn."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Final, Literal

from canopy import library
from canopy.seasonal import day_number
from canopy.studykeys import ScreenKeys
from weather.errors import UserError

if TYPE_CHECKING:
    from canopy.control import ScreenRule
    from canopy.optics import Screen
    from canopy.studyfile import Plan, Study

Purpose = Literal["energy", "shade", "blackout"]

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
    own = {keys.name: keys for keys in study.keys.screen}
    screens, rules = [], []
    for name in plan.screens:
        keys = own.get(name)
        screen = library.screen(name if keys is None else keys.based_on)
        screens.append(screen)
        rules.append(_rule(keys, screen.kind))
    return tuple(screens), tuple(rules)


def _rule(keys: ScreenKeys | None, purpose: Purpose) -> ScreenRule:
    from canopy.control import ScreenRule

    given: dict[str, Any] = {"purpose": purpose}
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
