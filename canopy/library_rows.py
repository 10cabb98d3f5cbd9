"""Rows of the library as read from its tables: what a thing is called, what it is, how sure that is.

Light on purpose: standard library only, since `check` looks names up here. Nothing is computed.
"""

from __future__ import annotations

import json
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any, Literal, cast, get_args

from weather.errors import UserError, nearest

Provenance = Literal["computed", "published", "common practice", "from memory"]
RowKind = Literal["covering", "screen", "ground"]

_HALF_RANGES = {
    "par_normal": "par",
    "par_hemispherical": "par",
    "nir_normal": "nir",
    "nir_hemispherical": "nir",
    "uv_hemispherical": "uv",
    "haze": "haze",
    "thermal_transmittance": "thermal",
    "thermal_emissivity_sky_side": "emissivity",
    "thermal_emissivity_crop_side": "emissivity",
    "thermal_8_14_transmittance": "thermal",
    "u_value_w_m2_cover_k": "u_value",
}
"""Figure of a covering -> key of its family's half range."""

_GROUND_SCALARS = ("conductivity", "volumetric_heat", "surface_resistance", "wetness")
_SCREEN_SCALARS = ("openness", "air_permeability", "parked_shade")


@dataclass(frozen=True)
class Figure:
    """One number with the range that product, maker and measurement leave open."""

    value: float
    low: float
    high: float


@dataclass(frozen=True)
class Row:
    """One row: provenance and source, figures with ranges, and the table as written in the file."""

    name: str
    title: str
    group: RowKind
    kind: str  # glass, rigid plastic, film; energy, shade, blackout; "" for grounds
    provenance: Provenance
    source: str
    range_source: str
    figures: Mapping[str, Figure]
    table: Mapping[str, Any]


@cache
def _read(file: str) -> Mapping[str, Any]:
    text = files("canopy").joinpath("data", "library", file).read_text(encoding="utf-8")
    return tomllib.loads(text)


@cache
def _by_name(group: str) -> Mapping[str, Mapping[str, Any]]:
    """Return the rows of one table by name, in file order."""
    file = {"ground": "grounds", "screen": "screens", "strip": "screens"}.get(group, "coverings")
    return {entry["name"]: entry for entry in _read(f"{file}.toml")[group]}


@cache
def summary() -> tuple[Mapping[str, Any], ...]:
    """Return the shipped summary of the coverings, in library order (built by `canopy.library_build`)."""
    text = files("canopy").joinpath("data", "library", "summary.json").read_text(encoding="utf-8")
    return tuple(json.loads(text))


def names(group: RowKind) -> tuple[str, ...]:
    """Return the names of one group, in library order."""
    return tuple(_by_name(group))


def table(group: Literal["covering", "screen", "ground", "sheet", "strip"], name: str) -> Mapping[str, Any]:
    """Return a row as written in its file; UserError for an unknown name."""
    rows = _by_name(group)
    if name not in rows:
        raise UserError(f'{group} "{name}": not in the library{nearest(name, tuple(rows))}')
    return rows[name]


def family(name: str) -> Mapping[str, Any]:
    """Return the half ranges of one family of coverings, with their source."""
    return cast(Mapping[str, Any], _read("coverings.toml")["family"][name])


def row(name: str) -> Row:
    """Return one covering, screen or ground with its figures; UserError for an unknown name."""
    for group in get_args(RowKind):
        if name in _by_name(group):
            return _row(group, name)
    known = names("covering") + names("screen") + names("ground")
    raise UserError(f'"{name}": not in the library{nearest(name, known)}')


@cache
def _row(group: RowKind, name: str) -> Row:
    entry = _by_name(group)[name]
    figures, range_source = _FIGURES[group](entry)
    return Row(
        name,
        entry["title"],
        group,
        entry.get("kind", ""),
        entry["provenance"],
        entry["source"],
        range_source,
        figures,
        entry,
    )


def _around(value: float, half: float, top: float = 1.0) -> Figure:
    return Figure(value, max(0.0, value - half), min(top, value + half))


def _covering_figures(entry: Mapping[str, Any]) -> tuple[dict[str, Figure], str]:
    """Computed values from the summary, ranges from the family or the row's own."""
    built = {item["name"]: item for item in summary()}[entry["name"]]
    half = {**family(entry["family"]), **entry.get("range", {})}
    figures = {
        key: _around(built[key], half[short], 20.0 if short == "u_value" else 1.0)
        for key, short in _HALF_RANGES.items()
    }
    figures["par_loss_per_year"] = Figure(*entry["ageing"])
    return figures, str(half["source"])


def _ground_figures(entry: Mapping[str, Any]) -> tuple[dict[str, Figure], str]:
    from canopy.bands import SOLAR, THERMAL

    half = entry["range"]
    figures = {
        f"reflect_{band}": _around(value, half["reflect"])
        for band, value in zip(SOLAR.names, entry["reflect"], strict=True)
    }
    for band, value in zip(THERMAL.names, entry["emissivity"], strict=True):
        figures[f"emissivity_{band}"] = _around(value, half["emissivity"])
    for key in _GROUND_SCALARS:
        figures[key] = Figure(*entry[key])
    return figures, str(entry["source"])


def _screen_figures(entry: Mapping[str, Any]) -> tuple[dict[str, Figure], str]:
    """Strip by strip; band values of one strip move together by the half ranges given with it."""
    figures = {key: Figure(*entry[key]) for key in _SCREEN_SCALARS}
    sources = []
    for name in entry["strips"]:
        strip = _by_name("strip")[name]
        half = strip["range"]
        window = 1  # 8-14 µm
        figures[f"{name}: reflect_par_outside"] = _around(strip["reflect_outside"][1], half["reflect"])
        figures[f"{name}: transmit_par"] = _around(strip["transmit"][1], half["reflect"])
        figures[f"{name}: thermal_transmit_8-14"] = _around(
            strip["thermal_transmit"][window], half["thermal_transmit"]
        )
        figures[f"{name}: emissivity_8-14_outside"] = _around(
            strip["emissivity_outside"][window], half["emissivity"]
        )
        figures[f"{name}: emissivity_8-14_inside"] = _around(
            strip["emissivity_inside"][window], half["emissivity"]
        )
        sources.append(f"{name} ({strip['provenance']}): {strip['source']}")
    return figures, "; ".join(sources)


_FIGURES = {"covering": _covering_figures, "screen": _screen_figures, "ground": _ground_figures}
