"""Read a study file: TOML to a checked, frozen `Study`, or one short message."""

from __future__ import annotations

import hashlib
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import Field, ValidationError, model_validator

from canopy import library
from canopy.study import (
    ClimateKeys,
    CropKeys,
    Day,
    HeatingKeys,
    Hour,
    HouseKeys,
    Name,
    Section,
    SiteKeys,
    WeatherKeys,
)
from weather.errors import UserError, nearest

MAX_STUDY_BYTES = 1_000_000
OVERRIDES = ("house", "crop", "climate", "heating")
Share = Annotated[float, Field(ge=0, le=1)]


class ScreenKeys(Section):
    """[[screen]]: a library screen with a drawing rule of its own."""

    name: Name
    based_on: Name
    close_below_w_m2: Annotated[float, Field(ge=0, le=1500)] | None = None
    close_above_w_m2: Annotated[float, Field(ge=0, le=1500)] | None = None
    close_below_outside_c: Annotated[float, Field(ge=-40, le=40)] | None = None
    from_hour: Hour | None = None
    until_hour: Hour | None = None
    first_day: Day = None
    last_day: Day = None
    humidity_gap_pct: Annotated[float, Field(ge=0, le=50)] = 0.0

    @model_validator(mode="after")
    def _pairs(self) -> ScreenKeys:
        if (self.from_hour is None) != (self.until_hour is None):
            raise ValueError("from_hour and until_hour stand together or not at all")
        if (self.first_day is None) != (self.last_day is None):
            raise ValueError("first_day and last_day stand together or not at all")
        return self


class CoveringKeys(Section):
    """[[covering]]: figures from a quotation, or a laboratory spectrum."""

    name: Name
    based_on: Name | None = None
    par_normal: Share | None = None
    par_hemispherical: Share | None = None
    haze: Share | None = None
    thermal_transmittance: Share | None = None
    u_value: Annotated[float, Field(gt=0.2, le=10)] | None = None
    spectrum: str | None = None
    thickness_mm: Annotated[float, Field(gt=0.005, le=100)] | None = None
    age_years: Annotated[float, Field(ge=0, le=40)] = 0.0
    wet: Literal["film", "drops", "none"] | None = None
    dirt_pct_by_month: list[Share] = []
    wash_days: list[str] = []

    @model_validator(mode="after")
    def _one_kind(self) -> CoveringKeys:
        if (self.spectrum is None) == (self.based_on is None):
            raise ValueError("write based_on (a library covering) or spectrum (a CSV), one of the two")
        return self


class CandidateKeys(Section):
    """[[candidate]]: a covering, its screens, and overrides of house, crop, climate, heating."""

    name: Name
    covering: Name
    screens: list[Name] = Field(default=[], max_length=2)
    house: dict[str, Any] = {}
    crop: dict[str, Any] = {}
    climate: dict[str, Any] = {}
    heating: dict[str, Any] = {}


class StudyKeys(Section):
    """The whole file."""

    title: Annotated[str, Field(min_length=1, max_length=120)] = "Study"
    units: Literal["si", "us"] = "si"
    site: SiteKeys = SiteKeys()
    weather: WeatherKeys
    house: HouseKeys
    crop: CropKeys = CropKeys()
    climate: ClimateKeys = ClimateKeys()
    heating: HeatingKeys = HeatingKeys()
    screen: list[ScreenKeys] = []
    covering: list[CoveringKeys] = []
    candidate: list[CandidateKeys] = Field(min_length=1, max_length=24)


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


def _known_keys(where: tuple[str | int, ...]) -> tuple[str, ...]:
    model: Any = StudyKeys
    for part in where:
        if isinstance(part, int):
            continue
        info = getattr(model, "model_fields", {}).get(part)
        if info is None:
            return ()
        args = [info.annotation, *getattr(info.annotation, "__args__", ())]
        model = next((a for a in args if isinstance(a, type) and issubclass(a, Section)), None)
        if model is None:
            return ()
    return tuple(model.model_fields)


def _breadcrumb(where: tuple[str | int, ...], raw: Mapping[str, Any]) -> str:
    crumbs: list[str] = []
    here: Any = raw
    for part in where:
        if isinstance(part, int):
            here = here[part] if isinstance(here, list) and part < len(here) else None
            label = here.get("name") if isinstance(here, dict) else None
            crumbs[-1:] = [f'{crumbs[-1]} "{label}"' if isinstance(label, str) else f"{crumbs[-1]} {part + 1}"]
        else:
            here = here.get(part) if isinstance(here, dict) else None
            crumbs.append(part)
    return " -> ".join(crumbs)


def _swap_hint(where: tuple[str | int, ...], raw: Mapping[str, Any]) -> str:
    site = raw.get("site")
    if where[:2] == ("site", "latitude") and isinstance(site, dict):
        lat, lon = site.get("latitude"), site.get("longitude")
        if isinstance(lat, int | float) and isinstance(lon, int | float) and abs(lat) > 72 and abs(lon) <= 72:
            return "; latitude and longitude look swapped"
    return ""


def _say(error: ValidationError, label: str, raw: Mapping[str, Any], above: tuple[str | int, ...] = ()) -> UserError:
    first = error.errors(include_url=False)[0]
    where = above + tuple(first["loc"])
    kind, found = first["type"], first.get("input")
    text = first["msg"].removeprefix("Value error, ")
    text = text[0].lower() + text[1:]
    crumb = _breadcrumb(where, raw)
    if kind == "extra_forbidden":
        known = _known_keys(where[:-1])
        text = f"unknown key{nearest(str(where[-1]), known)}"
        text += "" if "did you mean" in text else f"; known here: {', '.join(known)}"
    elif kind == "missing":
        text = "is missing"
    elif isinstance(found, str | int | float | bool) and kind != "value_error":
        text = f"found {found!r}, {text.replace('input should be', 'allowed is')}"
    more = error.error_count() - 1
    tail = f" (and {more} more)" if more else ""
    return UserError(f"{label}: {crumb or 'study'}: {text}{_swap_hint(where, raw)}{tail}")


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
                raise _say(error, label, raw, ("candidate", at, table)) from None
        parts[table] = base
    return Plan(entry.name, entry.covering, tuple(entry.screens), **parts)


def _check_names(study: StudyKeys, plans: tuple[Plan, ...], label: str) -> None:
    for table, rows in (("candidate", study.candidate), ("screen", study.screen), ("covering", study.covering)):
        seen: set[str] = set()
        for row in rows:
            if row.name.casefold() in seen:
                raise UserError(f'{label}: {table}: two are called "{row.name}"; every name stands once')
            seen.add(row.name.casefold())
    own_coverings = tuple(c.name for c in study.covering)
    own_screens = tuple(s.name for s in study.screen)
    coverings, screens = library.covering_names(), library.screen_names()
    _own(label, "covering", own_coverings, coverings)
    _own(label, "screen", own_screens, screens)
    for cover in study.covering:
        if cover.based_on is not None:
            _known(label, f'covering "{cover.name}" -> based_on', cover.based_on, coverings)
    for screen in study.screen:
        _known(label, f'screen "{screen.name}" -> based_on', screen.based_on, screens)
    for plan in plans:
        crumb = f'candidate "{plan.name}"'
        if not plan.covering.lower().endswith(".csv"):
            _known(label, f"{crumb} -> covering", plan.covering, own_coverings + coverings)
        for name in plan.screens:
            _known(label, f"{crumb} -> screens", name, own_screens + screens)
        for key in ("wall_covering", "gable_covering"):
            if (value := getattr(plan.house, key)) is not None:
                _known(label, f"{crumb} -> house -> {key}", value, own_coverings + coverings)
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
        raise _say(error, label, raw) from None
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
