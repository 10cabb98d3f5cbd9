"""A failed check of the study file, said in one line."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from pydantic import ValidationError

from canopy.study import Section
from canopy.studykeys import StudyKeys
from weather.errors import UserError, nearest


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
            crumbs[-1] += f' "{label}"' if isinstance(label, str) else f" {part + 1}"
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


def say(
    error: ValidationError, label: str, raw: Mapping[str, Any], above: tuple[str | int, ...] = ()
) -> UserError:
    """Return the one-line message for a failed check: file, table -> key, what was found, what is allowed."""
    found_errors = error.errors(include_url=False)
    first = next((e for e in found_errors if e["type"] == "extra_forbidden"), found_errors[0])
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
