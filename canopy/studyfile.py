"""Read a study file: TOML to a checked, frozen `Study`, or one short message."""

from __future__ import annotations

import hashlib
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from unicodedata import normalize

import numpy as np
from pydantic import ValidationError

from canopy import library
from canopy.growth import check_plantings
from canopy.library_rows import table as library_table
from canopy.screenrules import check_rule
from canopy.seasonal import day_text
from canopy.study import ClimateKeys, CropKeys, HeatingKeys, HouseKeys
from canopy.studykeys import CandidateKeys, StudyKeys
from canopy.studymessage import one_line, say
from weather.errors import UserError, nearest
from weather.site import check_coordinates, standard_offset_h

MAX_STUDY_BYTES = 1_000_000
OVERRIDES = ("house", "crop", "climate", "heating")


@dataclass(frozen=True)
class Plan:
    """One candidate with every override applied."""

    name: str
    covering: str
    screens: tuple[str, ...]
    house: HouseKeys
    crop: CropKeys
    climate: ClimateKeys
    heating: HeatingKeys


@dataclass(frozen=True)
class Study:
    """A checked study: the file's sections, the candidates resolved, where it lives, its hash."""

    keys: StudyKeys
    plans: tuple[Plan, ...]
    folder: Path
    label: str
    sha256: str
    text: str


def read_toml(path: Path) -> tuple[dict[str, Any], bytes]:
    """Read a TOML file and return its tables and bytes.

    Errors: UserError for a missing, special, oversized, badly encoded or malformed file.
    """
    try:
        if not path.exists():
            raise UserError(f"{path}: no such file")
        if not path.is_file():
            raise UserError(f"{path}: is no regular file")
        if path.stat().st_size > MAX_STUDY_BYTES:
            raise UserError(f"{path}: larger than {MAX_STUDY_BYTES} bytes; that is no study file")
        blob = path.read_bytes()
        return tomllib.loads(blob.decode("utf-8-sig")), blob
    except OSError as error:
        raise UserError(f"{path}: cannot be read: {error.strerror}") from error
    except UnicodeDecodeError as error:
        raise UserError(f"{path}: byte {error.start} is not UTF-8 text; save it as UTF-8") from error
    except tomllib.TOMLDecodeError as error:
        raise UserError(f"{path}: not valid TOML: {one_line(str(error), 120)}") from error
    except ValueError as error:  # Python refuses whole numbers of more than 4300 digits
        raise UserError(f"{path}: not valid TOML: a number of thousands of digits") from error
    except RecursionError as error:
        raise UserError(f"{path}: not valid TOML: brackets nested too deep") from error


EXCLUSIVE = {
    "house": {},
    "crop": {"planting": ("leaf_area_index",), "leaf_area_index": ("planting",)},
    "climate": {},
    "heating": {"tariff": ("price_per_kwh",), "price_per_kwh": ("tariff",)},
}
"""By table: a key that a candidate gives takes the place of these keys of the study."""


def _over(base: Mapping[str, Any], over: Mapping[str, Any]) -> dict[str, Any]:
    """Return tables laid over each other, inner tables too; lists and values are replaced whole."""
    merged = dict(base)
    for key, value in over.items():
        below = merged.get(key)
        merged[key] = _over(below, value) if isinstance(below, dict) and isinstance(value, dict) else value
    return merged


def _overridden(table: str, base: Mapping[str, Any], over: Mapping[str, Any]) -> dict[str, Any]:
    """Return the keys of a table for one candidate: what its own keys exclude goes out first."""
    gone = {other for key in over for other in EXCLUSIVE[table].get(key, ())}
    if table == "house" and over.get("form", base.get("form", "gable")) != base.get("form", "gable"):
        gone = {"pitch", "pitch_other"} if over["form"] == "arch" else {"rise"}
    return _over({key: value for key, value in base.items() if key not in gone}, over)


def _merged(keys: StudyKeys, raw: Mapping[str, Any], entry: CandidateKeys, at: int, label: str) -> Plan:
    parts: dict[str, Any] = {}
    for table in OVERRIDES:
        over, base = getattr(entry, table), getattr(keys, table)
        if over:
            try:
                base = type(base).model_validate(_overridden(table, raw.get(table, {}), over))
            except ValidationError as error:
                raise say(error, label, raw, ("candidate", at, table)) from None
        parts[table] = base
    return Plan(entry.name, entry.covering, tuple(entry.screens), **parts)


def _check_names(study: StudyKeys, plans: tuple[Plan, ...], label: str) -> None:
    lists = {"candidate": study.candidate, "screen": study.screen, "covering": study.covering}
    for group, rows in lists.items():
        seen: set[str] = set()
        for name in (row.name for row in rows):  # type: ignore[attr-defined]
            same = normalize("NFKC", name).casefold()
            if same in seen:
                raise UserError(f'{label}: {group}: two are called "{name}"; every name stands once')
            seen.add(same)
    own_coverings = tuple(c.name for c in study.covering)
    own_screens = tuple(s.name for s in study.screen)
    _own(label, "covering", own_coverings, library.covering_names())
    _own(label, "screen", own_screens, library.screen_names())
    for cover in study.covering:
        if cover.based_on is not None:
            crumb = f'covering "{cover.name}" -> based_on'
            _known(label, crumb, cover.based_on, library.covering_names())
    for screen in study.screen:
        _known(label, f'screen "{screen.name}" -> based_on', screen.based_on, library.screen_names())
        check_rule(screen, str(library_table("screen", screen.based_on)["kind"]), label)
    coverings = own_coverings + library.covering_names()
    for plan in plans:
        _check_plan(plan, coverings, own_screens + library.screen_names(), label)


def is_file_name(name: str) -> bool:
    """Say whether a name of a covering or leaf means a CSV beside the study."""
    return name.lower().endswith(".csv")


def _check_plan(plan: Plan, coverings: tuple[str, ...], screens: tuple[str, ...], label: str) -> None:
    crumb = f'candidate "{plan.name}"'
    if plan.covering in coverings or not is_file_name(plan.covering):
        _known(label, f"{crumb} -> covering", plan.covering, coverings)
    for at, name in enumerate(plan.screens):
        _known(label, f"{crumb} -> screens", name, screens)
        if name in plan.screens[:at]:
            raise UserError(f'{label}: {crumb} -> screens: "{name}" stands twice; each screen once')
    for key in ("wall_covering", "gable_covering"):
        value = getattr(plan.house, key)
        if value is not None and not is_file_name(value):
            _known(label, f"{crumb} -> house -> {key}", value, coverings)
    if not is_file_name(plan.crop.leaf):
        _known(label, f"{crumb} -> crop -> leaf", plan.crop.leaf, library.leaf_names())
    _known(label, f"{crumb} -> crop -> ground_cover", plan.crop.ground_cover, library.ground_names())
    _check_setpoints(plan, label)
    try:
        check_plantings(plan.crop.planting)
    except UserError as error:
        raise UserError(f"{label}: {crumb} -> {error}") from None


VENT_ABOVE_HEAT_K = 1.0
"""Vents open at least this far above heating, so that heating and vents never fight."""


def _check_setpoints(plan: Plan, label: str) -> None:
    """Refuse vents that open below the heating set-point of the same date (UserError)."""
    climate = plan.climate
    if plan.heating.capacity_w_m2 == 0.0:
        return
    for key in ("heat_day", "heat_night"):
        heat = getattr(climate, key)
        days = np.array(sorted({*heat.days, *climate.vent_at.days}), dtype=float)
        warm, vent = heat.steps(days), climate.vent_at.steps(days)
        bad = np.flatnonzero(vent < warm + VENT_ABOVE_HEAT_K)
        if bad.size:
            at = int(bad[0])
            since = f" from {day_text(int(days[at]))} on" if len(days) > 1 else ""
            raise UserError(
                f'{label}: candidate "{plan.name}" -> climate -> vent_at: found {vent[at]:g} with {key} '
                f"{warm[at]:g}{since}; allowed is {VENT_ABOVE_HEAT_K:g} K above it or more"
            )


def _own(label: str, table: str, own: tuple[str, ...], known: tuple[str, ...]) -> None:
    for name in own:
        if name in known:
            raise UserError(f'{label}: {table} "{name}": a library {table} has this name; choose another')


def _known(label: str, crumb: str, name: str, known: tuple[str, ...]) -> None:
    if name not in known:
        hint = nearest(name, known)
        listed = ", ".join(known[:6]) + (", ..." if len(known) > 6 else "")
        raise UserError(f'{label}: {crumb}: unknown name "{name}"{hint or f"; known: {listed}"}')


def load_study(path: Path) -> Study:
    """Read and check a study file.

    Errors: UserError, one line with file, table, key, what was found and what is allowed.
    """
    raw, blob = read_toml(path)
    return build_study(raw, path.parent, str(path), blob)


def build_study(raw: dict[str, Any], folder: Path, label: str, blob: bytes) -> Study:
    """Check parsed tables and return the `Study`.

    Errors: UserError as `load_study`.
    """
    try:
        keys = StudyKeys.model_validate(raw)
    except ValidationError as error:
        raise say(error, label, raw) from None
    _check_site(keys, label)
    plans = tuple(_merged(keys, raw, entry, at, label) for at, entry in enumerate(keys.candidate))
    _check_names(keys, plans, label)
    _check_shapes(plans, label)
    return Study(keys, plans, folder, label, hashlib.sha256(blob).hexdigest(), blob.decode("utf-8-sig"))


def _check_site(keys: StudyKeys, label: str) -> None:
    """Refuse a place that does not fit its clock, and a computed year without a place (UserError)."""
    site = keys.site
    if keys.weather.clear_sky and (site.latitude is None or site.timezone is None):
        raise UserError(f"{label}: weather -> clear_sky: needs latitude, longitude and timezone in [site]")
    if site.latitude is not None and site.longitude is not None:
        offset = standard_offset_h(site.timezone) if site.timezone is not None else None
        try:
            check_coordinates(site.latitude, site.longitude, offset)
        except UserError as error:
            raise UserError(f"{label}: {error}") from None


def _check_shapes(plans: tuple[Plan, ...], label: str) -> None:
    from canopy.house import check_shape
    from canopy.plans import make_house

    for plan in plans:
        try:
            check_shape(make_house(plan))
        except UserError as error:
            said = str(error).removeprefix("house: ").replace("crop_plane_height", "the crop's height")
            raise UserError(f'{label}: candidate "{plan.name}" -> house: {said}') from None
