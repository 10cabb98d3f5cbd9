"""Coverings from their rows: stacks of sheets, gaps and webs handed to `layers`, aged on request."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from functools import cache
from pathlib import Path
from typing import Any, Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy import library, library_rows
from canopy.bands import SOLAR, THERMAL
from canopy.coats import coat
from canopy.coveringfigures import figures
from canopy.layers import (
    GLASS_DROPS,
    PLASTIC_DROPS,
    Drops,
    Webs,
    Wetness,
    build_solar,
    build_thermal,
)
from canopy.optics import Covering, Gap, SolarOptics, ThermalOptics
from canopy.reshape import haze_of, scale_light, set_haze
from canopy.sheets import EquivalentSheet, MaterialSheet, SpectralLayer, crossing_of, from_normal

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Solid:
    """Bulk properties of a sheet: density kg/m3, specific heat J kg-1 K-1, conductivity W m-1 K-1."""

    density: float
    specific_heat: float
    conductivity: float


SOLIDS: Final[Mapping[str, Solid]] = {
    "soda-lime-clear": Solid(2500.0, 720.0, 1.00),  # EN 572-1
    "soda-lime-low-iron": Solid(2500.0, 720.0, 1.00),  # EN 572-1
    "pmma": Solid(1190.0, 1470.0, 0.19),  # EN ISO 7823 data sheets, common practice
    "polycarbonate": Solid(1200.0, 1200.0, 0.20),  # EN ISO 10456:2007 table 3
    "pet": Solid(1390.0, 1170.0, 0.24),  # plastics handbooks, common practice
    "polyethylene": Solid(925.0, 2300.0, 0.33),  # EN ISO 10456:2007 table 3 (low density .33)
}

_BAND_EDGES: Final = np.array([*SOLAR.edges[:-1], 2.9, *THERMAL.edges[1:-1], 200.0])
"""Edges (µm) of the band steps of a measured sheet: solar bands, then thermal ones to the end."""


@dataclass(frozen=True)
class LayerSpec:
    """One layer of a stack: its optics, its name, its thickness (m) and what it is made of."""

    optics: SpectralLayer
    title: str
    thickness_m: float
    solid: Solid


@dataclass(frozen=True)
class StackSpec:
    """A whole covering before its optics are computed."""

    layers: tuple[LayerSpec, ...]
    gaps: tuple[Gap, ...]
    webs: tuple[Webs | None, ...]
    haze: float | None  # of the whole, set afterwards where the layers do not carry it
    drops: Drops


def measured_sheet(name: str) -> EquivalentSheet:
    """Return the optics of a sheet with tabled normal-incidence band values: one Fresnel slab per band."""
    entry = library_rows.table("sheet", name)
    transmit = np.array([*entry["transmit"], *entry["thermal_transmit"]])
    index = np.full(transmit.size, float(entry["n"]))
    index[len(SOLAR) :] = float(entry.get("thermal_n", entry["n"]))
    reflect = ((index - 1.0) / (index + 1.0)) ** 2
    crossing = crossing_of(transmit, reflect, reflect)
    given = np.full(transmit.size, np.nan)
    if "reflect" in entry:
        given[: len(SOLAR)] = entry["reflect"]
    if "thermal_reflect" in entry:
        given[len(SOLAR) :] = entry["thermal_reflect"]
    known = ~np.isnan(given)
    if known.any():
        slab = from_normal(transmit[known], reflect_outer=given[known], edges_um=np.zeros(1))
        index[known], crossing[known] = slab.index_outer, slab.crossing
    return EquivalentSheet(index, index, crossing, edges_um=_BAND_EDGES, haze=float(entry["haze"]))


def _layer(spec: Mapping[str, Any]) -> LayerSpec:
    if "measured" in spec:
        entry = library_rows.table("sheet", spec["measured"])
        solid = Solid(entry["density"], entry["specific_heat"], entry["conductivity"])
        return LayerSpec(
            measured_sheet(spec["measured"]), entry["title"], entry["thickness_mm"] / 1000.0, solid
        )
    name, thickness = spec["material"], spec["mm"] / 1000.0
    sheet = MaterialSheet(
        name,
        thickness,
        coat(spec["outer"]) if "outer" in spec else None,
        coat(spec["inner"]) if "inner" in spec else None,
        spec.get("haze", 0.0),
        spec.get("uv_transmit"),
    )
    return LayerSpec(sheet, f"{name} {spec['mm']:g} mm", thickness, SOLIDS[name])


def stack_of(entry: Mapping[str, Any]) -> StackSpec:
    """Return the stack that a row of the library describes."""
    layers = tuple(_layer(spec) for spec in entry["layers"])
    gaps, webs = [], []
    for above, spec in zip(layers, entry.get("gaps", ()), strict=False):
        web = None
        if "web_mm" in spec:
            web = Webs(
                spec["web_spacing_mm"] / 1000.0,
                spec["web_mm"] / 1000.0,
                spec["mm"] / 1000.0,
                above.optics.constants.name if isinstance(above.optics, MaterialSheet) else "polycarbonate",
            )
        through = web.conductance(above.solid.conductivity) if web else 0.0
        gaps.append(Gap(spec["mm"] / 1000.0, spec["gas"], through))
        webs.append(web)
    carried = any(layer.optics.haze > 0.0 for layer in layers)
    haze = None if carried else entry.get("haze")
    drops = GLASS_DROPS if entry["kind"] == "glass" else PLASTIC_DROPS
    return StackSpec(layers, tuple(gaps), tuple(webs), haze, drops)


def optics_of(
    stack: StackSpec, wetness: Literal["dry", "film", "drops"]
) -> tuple[SolarOptics, ThermalOptics]:
    """Return solar and thermal optics of a stack, its inner face dry or wet."""
    sheets: Sequence[SpectralLayer] = [layer.optics for layer in stack.layers]
    state: Wetness = wetness
    solar = build_solar(sheets, webs=stack.webs or None, wetness=state, drops=stack.drops)
    if stack.haze is not None:
        clear = solar if wetness == "dry" else build_solar(sheets, webs=stack.webs or None)
        extra = max(0.0, 1.0 - (1.0 - stack.haze) / (1.0 - haze_of(clear)))
        solar = set_haze(solar, 1.0 - (1.0 - extra) * (1.0 - haze_of(solar)))
    return solar, build_thermal(sheets, wetness=state, drops=stack.drops)


@cache
def _stack_optics(name: str, wetness: Literal["dry", "film", "drops"]) -> tuple[SolarOptics, ThermalOptics]:
    return optics_of(stack_of(library_rows.table("covering", name)), wetness)


def build_covering(
    entry: Mapping[str, Any], wet: Literal["film", "drops", "none"], age_years: float
) -> Covering:
    """Return the covering of a row, with water on its inner face as `wet` says, aged by years of use."""
    stack = stack_of(entry)
    dry = _stack_optics(entry["name"], "dry")
    moist = dry if wet == "none" else _stack_optics(entry["name"], wet)
    covering = assemble(entry, stack, dry, moist)
    return aged(covering, entry["ageing"][0], age_years)


def assemble(
    entry: Mapping[str, Any],
    stack: StackSpec,
    dry: tuple[SolarOptics, ThermalOptics],
    wet: tuple[SolarOptics, ThermalOptics],
) -> Covering:
    """Return the record of a stack with its optics."""
    layers = stack.layers
    return Covering(
        name=entry["name"],
        title=entry["title"],
        kind=entry["kind"],
        provenance=entry["provenance"],
        source=entry["source"],
        haze=haze_of(dry[0]),
        solar_dry=dry[0],
        solar_wet=wet[0],
        thermal_dry=dry[1],
        thermal_wet=wet[1],
        heat_capacity=tuple(x.thickness_m * x.solid.density * x.solid.specific_heat for x in layers),
        resistance=tuple(x.thickness_m / x.solid.conductivity for x in layers),
        gaps=stack.gaps,
        layer_titles=tuple(x.title for x in layers),
    )


def aged(covering: Covering, loss_per_year: float, years: float) -> Covering:
    """Return the covering after years in use: solar transmission times (1 - loss per year)^years.

    What is lost is absorbed in the outer layer (yellowing and dirt that washing leaves); common practice.
    """
    if years <= 0.0 or loss_per_year == 0.0:
        return covering
    kept = (1.0 - loss_per_year) ** years
    return replace(
        covering,
        solar_dry=scale_light(covering.solar_dry, kept, 0.0),
        solar_wet=scale_light(covering.solar_wet, kept, 0.0),
    )


def summary_rows() -> list[dict[str, Any]]:
    """Compute the library's summary: one row per covering with the keys of `coverings --json`."""
    rows: list[dict[str, Any]] = []
    for name in library.covering_names():
        covering = library.covering(name)
        numbers = {key: round(value, 4) for key, value in asdict(figures(covering)).items()}
        rows.append(
            {
                "name": name,
                "title": covering.title,
                "kind": covering.kind,
                **numbers,
                "source": f"{covering.provenance}: {covering.source}",
            }
        )
    return rows


def write_summary(path: Path) -> None:
    """Write the summary that the package ships (canopy/data/library/summary.json)."""
    text = json.dumps(summary_rows(), ensure_ascii=False, indent=1)
    path.write_text(text + "\n", encoding="utf-8")
