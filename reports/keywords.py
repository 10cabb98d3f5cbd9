"""Keys and values of the study in a reader's words: what an absent key means, how two candidates differ."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final

from pydantic import BaseModel

from canopy.seasonal import Seasonal
from reports.sentences import listed

KEY_WORDS: Final = {
    "house.form": "form",
    "house.spans": "spans",
    "house.span_width": "span width",
    "house.length": "length",
    "house.gutter_height": "gutter height",
    "house.pitch": "pitch",
    "house.pitch_other": "second pitch",
    "house.rise": "rise of the arch",
    "house.ridge_azimuth": "direction of the ridge",
    "house.gutter_width": "gutter width",
    "house.gutter_depth": "gutter depth",
    "house.ridge_width": "ridge width",
    "house.ridge_depth": "ridge depth",
    "house.bar_spacing": "distance of bars",
    "house.bar_width": "bar width",
    "house.bar_depth": "bar depth",
    "house.leakage_per_hour": "leakage per hour",
    "house.vent_area_fraction": "vent area",
    "house.insect_net": "insect net",
    "house.wind_exposure": "exposure to wind",
    "house.perimeter_loss": "loss of the foundation",
    "house.wall_covering": "covering of the walls",
    "house.gable_covering": "covering of the gables",
    "house.paint": "shading paint",
    "crop.leaf_area_index": "leaf area",
    "crop.height": "height of the crop",
    "climate.heat_day": "heating by day, °C,",
    "climate.heat_night": "heating by night, °C,",
    "climate.vent_at": "vents from, °C,",
    "climate.humidity_max_pct": "humidity limit, %,",
    "heating.capacity_w_m2": "limit of the heating, W/m²,",
    "heating.pipe_m_per_m2": "pipe per floor, m/m²,",
    "heating.flow_max_c": "hottest water, °C,",
}


ABSENT: Final = {
    "house.pitch": "24 if a gable",
    "house.pitch_other": "as pitch",
    "house.rise": "none",
    "house.leakage_per_hour": "by kind of covering",
    "house.wall_covering": "as the roof",
    "house.gable_covering": "as the roof",
    "crop.leaf_area_index": "3 unless planted",
    "crop.row_width": "closed stand",
    "crop.row_spacing": "closed stand",
    "crop.row_azimuth": "as the ridge",
    "heating.capacity_w_m2": "no limit",
    "heating.efficiency": "by fuel",
    "heating.co2_kg_per_kwh": "by fuel",
    "heating.store": "usual volumes",
}
"""What holds where a key is absent; "none" for any other."""


def value_words(value: Any, key: str = "") -> str:
    """Return a study value as a reader writes it; `key`, "table.key", tells what an absent one means."""
    if isinstance(value, Seasonal):
        if len(set(value.values)) == 1:
            return f"{value.values[0]:g}"
        return f"{min(value.values):g} to {max(value.values):g} by date"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float | int):
        return f"{value:g}"
    if value is None:
        return ABSENT.get(key, "none")
    if isinstance(value, BaseModel):
        return ", ".join(f"{name} {value_words(v)}" for name, v in value if v not in (None, ""))
    if isinstance(value, list):
        return f"{len(value)} entries" if value else "none"
    return str(value)


SHAPE_KEYS: Final = tuple(
    f"house.{key}"
    for key in (
        "gutter_height", "pitch", "pitch_other", "rise", "gutter_width", "gutter_depth",
        "ridge_width", "ridge_depth", "bar_spacing", "bar_width", "bar_depth",
    )
)  # fmt: skip
"""Keys that go with the form: a reader needs the form in a sentence, their numbers in the table of inputs."""


def difference_words(found: Sequence[tuple[str, Any, Any]], base: str) -> str:
    """Return how a candidate's house, crop, climate or heating differs from the first candidate's."""
    other_form = any(key == "house.form" for key, _, _ in found)
    shape = [key for key, _, _ in found if key in SHAPE_KEYS]
    parts = []
    for key, theirs, mine in found:
        if other_form and key in shape:
            continue
        name = KEY_WORDS.get(key, key.replace(".", " ").replace("_", " "))
        parts.append(f"{name} {value_words(mine, key)} instead of {value_words(theirs, key)}")
    if other_form and shape:
        parts.append("gutters, ridges and bars of its own (see inputs)")
    return f"{listed(parts)} (against {base})"
