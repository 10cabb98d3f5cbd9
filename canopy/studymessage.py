"""A failed check of the study file, said in one line."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Final

from pydantic import ValidationError

from canopy.studyglossary import entry
from canopy.studykeys import StudyKeys
from canopy.studyranges import allowed_at, choices_at, model_at
from weather.errors import UserError, nearest

LONGEST_FOUND: Final = 48
LONGEST_NAME: Final = 60
LISTED: Final = 12
COUNTED: Final = {"too_long", "too_short"}
TEXTUAL: Final = {"string_too_long", "string_too_short"}


def one_line(text: str, longest: int) -> str:
    """Return printable text of one line; control and direction signs show as escapes, the rest is cut off."""
    clean = "".join(c if c.isprintable() else c.encode("unicode_escape").decode() for c in text)
    return clean if len(clean) <= longest else clean[: longest - 1] + "…"


def _found(value: object) -> str:
    """Return what stood there: as written for a number or text, by kind for anything long or nested."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int) and abs(value) >= 10**20:
        return f"a whole number of {len(str(abs(value)))} digits"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return one_line(f"the list {value}", LONGEST_FOUND) if value else "an empty list"
    if isinstance(value, str):
        return f'"{one_line(value, LONGEST_FOUND)}"'
    if isinstance(value, float):
        return f"{value:.12g}"
    return one_line(str(value), LONGEST_FOUND)


def _breadcrumb(where: tuple[str | int, ...], raw: Mapping[str, Any]) -> str:
    crumbs: list[str] = []
    here: Any = raw
    for part in where:
        if isinstance(part, int):
            here = here[part] if isinstance(here, list) and part < len(here) else None
            label = here.get("name") if isinstance(here, dict) else None
            named = isinstance(label, str) and label.strip()
            crumbs[-1] += f' "{one_line(str(label), LONGEST_NAME)}"' if named else f" {part + 1}"
        else:
            here = here.get(part) if isinstance(here, dict) else None
            crumbs.append(one_line(part, LONGEST_NAME))
    return " -> ".join(crumbs)


def _swap_hint(where: tuple[str | int, ...], raw: Mapping[str, Any]) -> str:
    site = raw.get("site")
    if where[:2] == ("site", "latitude") and isinstance(site, dict):
        lat, lon = site.get("latitude"), site.get("longitude")
        if isinstance(lat, int | float) and isinstance(lon, int | float) and abs(lat) > 72 and abs(lon) <= 72:
            return "; latitude and longitude look swapped"
    return ""


def _allowed(where: tuple[str | int, ...]) -> str:
    text, unit = allowed_at(StudyKeys, where), entry(where)[0]
    unit = {"%": "percent", "1/h": "per h"}.get(unit, unit)
    return f"{text} {unit}" if text and text[-1].isdigit() and unit else text


def _unknown(key: str, where: tuple[str | int, ...]) -> str:
    """Say that a key is unknown: another table that has it, else the nearest one here, else what is here."""
    model = model_at(StudyKeys, where)
    known = tuple(model.model_fields) if model is not None else ()
    home = next((table for table in StudyKeys.model_fields if _has(table, key)), "")
    if home:
        return f"unknown key; it belongs in [{home}]"
    if hint := nearest(key, known):
        return f"unknown key{hint}"
    more = ", ..." if len(known) > LISTED else ""
    return f"unknown key; known here: {', '.join(known[:LISTED])}{more}"


def _has(table: str, key: str) -> bool:
    model = model_at(StudyKeys, (table,))
    return model is not None and key in model.model_fields


def _reason(first: Any, where: tuple[str | int, ...]) -> str:
    kind, found = first["type"], first.get("input")
    if kind == "extra_forbidden":
        return _unknown(str(where[-1]), where[:-1])
    allowed = _allowed(where)
    if kind == "missing":
        return f"is missing; allowed is {allowed}" if allowed else "is missing"
    if kind == "value_error" or not allowed:
        text = first["msg"].removeprefix("Value error, ")
        return one_line(text[0].lower() + text[1:], 240)
    if kind in COUNTED:
        return f"found {len(found)} entries; allowed is {allowed}"
    if kind in TEXTUAL:
        return f"found {len(found)} characters; allowed is {allowed}"
    hint = nearest(found, choices_at(StudyKeys, where)) if isinstance(found, str) else ""
    return f"found {_found(found)}; allowed is {allowed}{hint}"


def say(
    error: ValidationError, label: str, raw: Mapping[str, Any], above: tuple[str | int, ...] = ()
) -> UserError:
    """Return the one-line message for a failed check: file, table -> key, what was found, what is allowed.

    `above` is ("candidate", number, table) when the table of one candidate was checked on its own.
    """
    found_errors = error.errors(include_url=False)
    first = next((e for e in found_errors if e["type"] == "extra_forbidden"), found_errors[0])
    loc = tuple(first["loc"])
    crumb = _breadcrumb(above + loc, raw)
    where = above[2:] + loc  # the keys of a candidate's table are those of the study's table
    more = error.error_count() - 1
    tail = f" (and {more} more)" if more else ""
    return UserError(f"{label}: {crumb or 'study'}: {_reason(first, where)}{_swap_hint(where, raw)}{tail}")
