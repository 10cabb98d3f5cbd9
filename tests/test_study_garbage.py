"""Anything that TOML can hold gives a study or one short message; laws of the loader."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Annotated, Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from pydantic import TypeAdapter

from canopy.studyfile import Study, build_study, read_toml
from canopy.studykeys import StudyKeys
from canopy.studyranges import model_at
from reports.studyfiles import study_text
from weather.errors import UserError

BASE = tomllib.loads(study_text("starter"))
QUICK = settings(max_examples=150, deadline=None, suppress_health_check=list(HealthCheck))

scalars = (
    st.none().map(lambda _: "2020-01-01")
    | st.booleans()
    | st.integers()
    | st.integers(-(10**300), 10**300)
    | st.floats(allow_nan=True, allow_infinity=True)
    | st.text(max_size=12)
    | st.dates()
    | st.times()
    | st.datetimes()
    | st.sampled_from(
        ["01-01", "12-31", "02-29", "gable", "arch", "glass-clear-4", "night screen", "x.csv", ""]
    )
)
values = st.recursive(
    scalars,
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=8), inner, max_size=4),
    max_leaves=8,
)


def _places() -> list[tuple[str, ...]]:
    """Return every table and key of the study, with its path."""
    found: list[tuple[str, ...]] = []

    def walk(above: tuple[str, ...]) -> None:
        model = model_at(StudyKeys, above)
        if model is None:
            return
        for key in model.model_fields:
            found.append((*above, key))
            walk((*above, key))

    walk(())
    return found


PLACES = _places()


def _load(raw: dict[str, Any]) -> Study | None:
    """Return the study, or None after a message that is one short line."""
    try:
        return build_study(raw, Path(), "study", b"")
    except UserError as error:
        said = str(error)
    assert said.isprintable(), said
    assert said.startswith("study: ")
    assert len(said) < 420, said
    return None


def _put(raw: dict[str, Any], place: tuple[str, ...], value: Any) -> dict[str, Any]:
    """Return a copy of the tables with a value at a place, in the first table of a list."""
    if len(place) == 1:
        return {**raw, place[0]: value}
    inner = raw.get(place[0], {})
    if isinstance(inner, list):
        first = inner[0] if inner and isinstance(inner[0], dict) else {}
        return {**raw, place[0]: [_put(first, place[1:], value), *inner[1:]]}
    return {**raw, place[0]: _put(inner if isinstance(inner, dict) else {}, place[1:], value)}


@QUICK
@given(
    st.dictionaries(st.sampled_from(list(StudyKeys.model_fields)) | st.text(max_size=8), values, max_size=6)
)
def test_any_tables_give_a_study_or_a_message(raw: dict[str, Any]) -> None:
    _load(raw)


@QUICK
@given(st.sampled_from(PLACES), values)
def test_any_value_of_any_key(place: tuple[str, ...], value: Any) -> None:
    _load(_put(BASE, place, value))


@QUICK
@given(
    st.sampled_from(["house", "crop", "climate", "heating"]),
    st.dictionaries(
        st.sampled_from(sorted({p[-1] for p in PLACES})) | st.text(max_size=8), values, max_size=3
    ),
)
def test_any_override_of_a_candidate(table: str, over: dict[str, Any]) -> None:
    _load(_put(BASE, ("candidate", table), over))


def _read(path: Path, blob: bytes) -> None:
    path.write_bytes(blob)
    try:
        raw, _ = read_toml(path)
    except UserError as error:
        raw, said = {}, str(error)
    else:
        said = ""
        _load(raw)
    assert said.isprintable(), said


@QUICK
@given(st.binary(max_size=200) | st.text(max_size=200).map(str.encode))
def test_any_bytes(tmp_path: Path, blob: bytes) -> None:
    path = tmp_path / "study"
    _read(path, bytes(blob))


@settings(max_examples=40, deadline=None, suppress_health_check=list(HealthCheck))
@given(st.integers(0, 6000), st.integers(0, 255))
def test_a_damaged_byte(tmp_path: Path, place: int, byte: int) -> None:
    blob = bytearray(study_text("starter").encode())
    blob[place % len(blob)] = byte
    path = tmp_path / "study"
    _read(path, bytes(blob))


FULL = tomllib.loads(
    study_text("starter").replace("leaf_area_index = ", "# ")
    + """
[heating.tariff]
price_per_kwh = 0.05
[heating.heat_pump]
source = "ground"
capacity_w_m2 = 60.0
[heating.heat_pump_tariff]
price_per_kwh = 0.15
[heating.store]
[[crop.planting]]
planted = "01-10"
removed = "06-01"
final_lai = 3.0
[[covering]]
name = "quoted"
based_on = "glass-clear-4"
"""
)


def _limits() -> list[tuple[tuple[str, ...], float, float, bool]]:
    """Return place, least, most and whether the least itself is refused, of every key with a range."""
    out = []
    for place in PLACES:
        model = model_at(StudyKeys, place[:-1])
        assert model is not None
        if "Seasonal" in str(model.model_fields[place[-1]].annotation):  # by date; see test_study_loader
            continue
        part: Any = model.model_fields[place[-1]]
        schema = TypeAdapter(Annotated[part.annotation, part]).json_schema()
        arm = next((a for a in (schema, *schema.get("anyOf", [])) if "maximum" in a), None)
        if arm is not None:
            least = arm.get("minimum", arm.get("exclusiveMinimum"))
            out.append((place, float(least), float(arm["maximum"]), "exclusiveMinimum" in arm))
    return out


def test_just_outside_every_range_is_refused_with_the_range() -> None:
    """The bounds come from the models' JSON schema (a general library), the words from `studyranges`."""
    assert build_study(FULL, Path(), "study", b"").plans
    limits = _limits()
    assert len(limits) > 60
    for place, least, most, open_low in limits:
        for value in (least if open_low else least - 1.0, most + 1.0):
            found = int(value) if place[-1] == "spans" else value
            with pytest.raises(UserError) as refused:
                build_study(_put(FULL, place, found), Path(), "study", b"")
            said = str(refused.value)
            assert f"{place[-1]}: found {value:.12g}; allowed is " in said, said
            assert (f"above {least:g}, up to {most:g}" if open_low else f"{least:g} to {most:g}") in said, (
                said
            )
