"""The glossary names every key of the models and no other; starter and demo use keys that exist."""

from __future__ import annotations

import re

from canopy.section import Section
from canopy.studyglossary import KEYS, entry
from canopy.studykeys import StudyKeys
from canopy.studyranges import section_of
from reports.studyfiles import study_text
from tests.study_keys import markdown, rows


def _keys(model: type[Section], above: tuple[str, ...] = ()) -> set[str]:
    out = set()
    for key, info in model.model_fields.items():
        part = section_of(info.annotation)
        if part is not None:
            out |= _keys(part, (*above, key))
        else:
            out.add(".".join((*above, key)))
    return out


def test_every_key_has_a_meaning_and_every_meaning_a_key() -> None:
    known = {name.replace("heat_pump_tariff.", "tariff.") for name in _keys(StudyKeys)}
    tables = {"heating.tariff", "heating.heat_pump", "heating.heat_pump_tariff", "heating.store"}
    assert set(KEYS) - tables == known
    assert all(meaning for _, meaning in KEYS.values())
    assert entry(("candidate", "house", "spans")) == entry(("house", "spans"))


def test_the_table_has_a_range_for_every_key() -> None:
    table = rows()
    assert len(table) > 110
    for row in table:
        assert row[3] not in ("", "a value"), row
        assert "a text in quotes or" not in row[3], row
    text = markdown()
    assert "| `[house]` | `gutter_height` | m | 0 to 12 | 4.5 |" in text
    assert '| `[house]` | `form` |  | "gable" or "arch" | "gable" |' in text
    assert "| `[[candidate]]` | `name` |  | a text in quotes, 1 to 60 characters | required |" in text
    assert '| `[climate]` | `vent_at` | °C | -60 to 60, or [["MM-DD", number], ...] | 24 |' in text


def test_commented_keys_of_the_starter_exist() -> None:
    """A line that a reader uncomments is a key of its table."""
    table, seen = "", 0
    for line in study_text("starter").splitlines():
        if head := re.match(r"#? ?\[+([\w.]+)\]+", line):
            table = head[1]
        elif key := re.match(r"#? ?(\w+) = ", line):
            place = (*table.split("."), key[1]) if table else (key[1],)
            assert entry(tuple(place))[1], line
            seen += 1
    assert seen > 50
