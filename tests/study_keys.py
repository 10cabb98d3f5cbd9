"""All keys of the study file as a Markdown table, read off the models: python -m tests.study_keys"""

from __future__ import annotations

from typing import Any

from canopy.seasonal import Seasonal
from canopy.section import Section
from canopy.studyglossary import entry
from canopy.studykeys import StudyKeys
from canopy.studyranges import allowed_at, section_of

HEAD = ("table", "key", "unit", "allowed", "default", "meaning")


def _default(info: Any) -> str:
    if info.is_required():
        return "required"
    value = info.default
    if isinstance(value, Seasonal):
        value = value.values[0]
    if value is None or value == [] or value == {} or isinstance(value, Section):
        return "–"
    if isinstance(value, bool):
        return "true" if value else "false"
    return (
        f'"{value}"' if isinstance(value, str) else f"{value:g}" if isinstance(value, float) else str(value)
    )


def _title(model: type[Section], above: tuple[str, ...]) -> str:
    """Return how a table is headed in the file: [house], [[candidate]], top for the keys before any table."""
    if not above:
        return "(top)"
    many = above[-1] in ("planting", "screen", "covering", "candidate")
    return f"[[{'.'.join(above)}]]" if many else f"[{'.'.join(above)}]"


def rows(model: type[Section] = StudyKeys, above: tuple[str, ...] = ()) -> list[tuple[str, ...]]:
    """Return one row per key: table, key, unit, allowed, default, meaning; inner tables after their table."""
    found, inner = [], []
    for key, info in model.model_fields.items():
        place = (*above, key)
        part = section_of(info.annotation)
        if part is not None:
            inner += rows(part, place)
        else:
            unit, meaning = entry(place)
            allowed = allowed_at(StudyKeys, place)
            found.append((_title(model, above), key, unit, allowed, _default(info), meaning))
    return found + inner


def markdown() -> str:
    """Return the table; a vertical bar inside a cell is escaped."""
    lines = [HEAD, tuple("---" for _ in HEAD)]
    lines += [(f"`{row[0]}`", f"`{row[1]}`", *row[2:]) for row in rows()]
    return "\n".join("| " + " | ".join(cell.replace("|", "\\|") for cell in line) + " |" for line in lines)


if __name__ == "__main__":
    print(markdown())
