"""Read a study file: TOML to a checked, frozen `Study`, or one short message."""

from __future__ import annotations

import hashlib
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from canopy import library
from canopy.library_rows import table as library_table
from canopy.screenrules import check_rule
from canopy.study import ClimateKeys, CropKeys, HeatingKeys, HouseKeys
from canopy.studykeys import CandidateKeys, StudyKeys
from canopy.studymessage import say
from weather.errors import UserError, nearest

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
    if not path.exists():
        raise UserError(f"{path}: no such file")
    if not path.is_file():
        raise UserError(f"{path}: is no regular file")
    try:
        if path.stat().st_size > MAX_STUDY_BYTES:
            raise UserError(f"{path}: larger than {MAX_STUDY_BYTES} bytes; that is no study file")
        blob = path.read_bytes()
        return tomllib.loads(blob.decode("utf-8")), blob
    except OSError as error:
        raise UserError(f"{path}: cannot be read: {error.strerror}") from error
    except UnicodeDecodeError as error:
        raise UserError(f"{path}: byte {error.start} is not UTF-8 text") from error
    except tomllib.TOMLDecodeError as error:
        raise UserError(f"{path}: not valid TOML: {error}") from error
    except RecursionError as error:
        raise UserError(f"{path}: not valid TOML: brackets nested too deep") from error


def _merged(keys: StudyKeys, raw: Mapping[str, Any], entry: CandidateKeys, at: int, label: str) -> Plan:
    parts: dict[str, Any] = {}
    for table in OVERRIDES:
        over = getattr(entry, table)
        base = getattr(keys, table)
        if over:
            merged = {**raw.get(table, {}), **over}
            if table == "house" and over.get("form", base.form) != base.form:
                for key in ("pitch", "pitch_other") if over["form"] == "arch" else ("rise",):
                    if key not in over:
                        merged.pop(key, None)
            if table == "crop" and "planting" in over:
                merged.pop("leaf_area_index", None) if "leaf_area_index" not in over else None
            try:
                base = type(base).model_validate(merged)
            except ValidationError as error:
                raise say(error, label, raw, ("candidate", at, table)) from None
        parts[table] = base
    return Plan(entry.name, entry.covering, tuple(entry.screens), **parts)


def _check_names(study: StudyKeys, plans: tuple[Plan, ...], label: str) -> None:
    lists = {"candidate": study.candidate, "screen": study.screen, "covering": study.covering}
    for group, rows in lists.items():
        seen: set[str] = set()
        for name in (row.name for row in rows):  # type: ignore[attr-defined]
            if name.casefold() in seen:
                raise UserError(f'{label}: {group}: two are called "{name}"; every name stands once')
            seen.add(name.casefold())
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


def _check_plan(plan: Plan, coverings: tuple[str, ...], screens: tuple[str, ...], label: str) -> None:
    crumb = f'candidate "{plan.name}"'
    if not plan.covering.lower().endswith(".csv"):
        _known(label, f"{crumb} -> covering", plan.covering, coverings)
    for name in plan.screens:
        _known(label, f"{crumb} -> screens", name, screens)
    for key in ("wall_covering", "gable_covering"):
        if (value := getattr(plan.house, key)) is not None:
            _known(label, f"{crumb} -> house -> {key}", value, coverings)
    if not plan.crop.leaf.lower().endswith(".csv"):
        _known(label, f"{crumb} -> crop -> leaf", plan.crop.leaf, library.leaf_names())
    _known(label, f"{crumb} -> crop -> ground_cover", plan.crop.ground_cover, library.ground_names())


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
    plans = tuple(_merged(keys, raw, entry, at, label) for at, entry in enumerate(keys.candidate))
    _check_names(keys, plans, label)
    _check_shapes(plans, label)
    return Study(keys, plans, folder, label, hashlib.sha256(blob).hexdigest(), blob.decode("utf-8"))


def _check_shapes(plans: tuple[Plan, ...], label: str) -> None:
    from canopy.house import check_shape
    from canopy.plans import make_house

    for plan in plans:
        try:
            check_shape(make_house(plan))
        except UserError as error:
            raise UserError(f'{label}: candidate "{plan.name}" -> house: {error}') from None
