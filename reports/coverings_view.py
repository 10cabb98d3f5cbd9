"""The `coverings` command: the library as a table, as JSON, and one covering in full."""

from __future__ import annotations

import textwrap
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

from canopy import library_rows

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from canopy.optics import Covering, SolarOptics

    Floats = NDArray[np.float64]

KEYS: Final = (
    "name",
    "title",
    "kind",
    "par_normal",
    "par_hemispherical",
    "nir_normal",
    "nir_hemispherical",
    "uv_hemispherical",
    "haze",
    "thermal_transmittance",
    "thermal_emissivity_sky_side",
    "thermal_emissivity_crop_side",
    "thermal_8_14_transmittance",
    "u_value_w_m2_cover_k",
    "source",
)

_KNOWN: Final = {
    "computed": "computed",
    "published": "published",
    "common practice": "practice",
    "from memory": "memory",
}
_COLUMNS: Final = (
    ("PAR", "straight", "par_normal"),
    ("PAR", "diffuse", "par_hemispherical"),
    ("NIR", "diffuse", "nir_hemispherical"),
    ("UV", "diffuse", "uv_hemispherical"),
    ("haze", "", "haze"),
    ("long-", "wave", "thermal_transmittance"),
    ("8-14", "µm", "thermal_8_14_transmittance"),
    ("ε sky", "side", "thermal_emissivity_sky_side"),
    ("ε crop", "side", "thermal_emissivity_crop_side"),
    ("U", "W/m²K", "u_value_w_m2_cover_k"),
)
_LEGEND: Final = (
    "Shares of what falls on the sheet, new, clean and dry. PAR 400-700, NIR 700-2800, UV 280-400 nm, "
    "weighted by ASTM G173 sunlight; straight: normal incidence; diffuse: isotropic light. Long-wave: all of "
    "a 283 K blackbody, isotropic, straight through every layer; ε: what either side of the whole covering "
    "emits. U: W per m² of sheet and K under EN 673's conditions (he 25, hi 7.7, upright), long-wave through "
    "films included; a heated house under a clear sky loses more. The last column says how the figures are "
    "known: computed from open constants, published, common practice, or from memory. One covering in full, "
    "with ranges and sources: canopy-budget coverings NAME"
)


def coverings_json() -> list[dict[str, Any]]:
    """Return the library with the keys of `coverings --json`, in library order."""
    return [{key: row[key] for key in KEYS} for row in library_rows.summary()]


def coverings_table() -> str:
    """Return the library as a table for a terminal."""
    rows = library_rows.summary()
    wide = max(len(row["name"]) for row in rows)
    lines = [
        " " * wide + "".join(f"{top:>9}" for top, _, _ in _COLUMNS),
        f"{'covering':<{wide}}" + "".join(f"{low:>9}" for _, low, _ in _COLUMNS) + "  known",
    ]
    kind = ""
    for row in rows:
        if row["kind"] != kind:
            kind = row["kind"]
            lines += ["", kind]
        known = _KNOWN[library_rows.table("covering", row["name"])["provenance"]]
        cells = "".join(f"{row[key]:>9.2f}" for _, _, key in _COLUMNS)
        lines.append(f"{row['name']:<{wide}}{cells}  {known}")
    return "\n".join([*lines, "", *textwrap.wrap(_LEGEND, 110)])


def covering_detail(name: str) -> str:
    """Return one covering in full: per band and angle, dry and wet, layers, U, ranges, sources.

    Raises UserError for an unknown name.
    """
    from canopy import library

    entry = library_rows.table("covering", name)
    covering = library.covering(name)
    lines = [f"{name}: {covering.title} ({covering.kind})", ""]
    lines += _light_lines("Light, dry", covering.solar_dry)
    wet = {"film": "a flat film of water", "drops": "drops"}[entry["wetting"]]
    lines += _light_lines(f"Light, wet ({wet} on the inner face)", covering.solar_wet)
    lines += _thermal_lines(covering)
    lines += _layer_lines(covering)
    lines += _figure_lines(name)
    return "\n".join(lines + _source_lines(name, covering))


def _light_lines(title: str, light: SolarOptics) -> list[str]:
    import numpy as np

    from canopy.bands import SOLAR

    degrees = (0, 30, 45, 60, 75, 85)
    through = light.beam_beam + light.beam_diffuse
    head = "".join(f"{d:>6}°" for d in degrees)
    lines = [title, f"{'':<22}{head}{'diffuse':>9}{'scattered':>11}{'reflected':>11}{'absorbed':>10}"]
    for b, (band, low, high) in enumerate(zip(SOLAR.names, SOLAR.lower, SOLAR.upper, strict=True)):
        cells = "".join(f"{np.interp(np.radians(d), light.angles, through[b]):>7.3f}" for d in degrees)
        scattered = light.beam_diffuse[b, 0] / max(through[b, 0], 1e-12)
        absorbed = light.absorbed_from_outside[:, b].sum()
        label = f"{band.replace('_', '-')} {low:.2f}-{high:.2f} µm"
        lines.append(
            f"  {label:<20}{cells}{light.diffuse_in[b]:>9.3f}{scattered:>11.3f}"
            f"{light.reflect_outside[b]:>11.3f}{absorbed:>10.3f}"
        )
    return [*lines, ""]


def _thermal_lines(covering: Covering) -> list[str]:
    from canopy.bands import THERMAL
    from canopy.coveringfigures import thermal_weights, whole_thermal
    from canopy.glazing_u import covering_u_value

    lines = [
        "Long-wave, isotropic",
        f"{'':<22}{'through':>9}{'ε sky side':>12}{'ε crop side':>13}"
        f"{'wet: through':>15}{'ε sky side':>12}{'ε crop side':>13}",
    ]
    states = [whole_thermal(covering.thermal_dry), whole_thermal(covering.thermal_wet)]
    weights = thermal_weights()
    rows = [(f"{name} µm", i) for i, name in enumerate(THERMAL.names)]
    for label, i in [*rows, ("all, 283 K", -1)]:
        cells = ""
        for place, state in enumerate(states):
            parts = (state.transmit, state.emissivity_outside, state.emissivity_inside)
            values = [float(p @ weights) if i < 0 else float(p[i]) for p in parts]
            first = 15 if place else 9
            cells += f"{values[0]:>{first}.3f}{values[1]:>12.3f}{values[2]:>13.3f}"
        lines.append(f"  {label:<20}{cells}")
    dry, wet = covering_u_value(covering), covering_u_value(covering, wet=True)
    lines.append(
        f"U-value (EN 673 conditions: he 25, hi 7.7, upright): dry {dry:.2f}, wet {wet:.2f} W/m²K of sheet"
    )
    return [*lines, ""]


def _layer_lines(covering: Covering) -> list[str]:
    lines = ["Layers from outside"]
    for i, title in enumerate(covering.layer_titles):
        store = covering.heat_capacity[i] / 1000.0
        lines.append(f"  {title}: stores {store:.2f} kJ/m²K, resists {covering.resistance[i]:.4f} m²K/W")
        if i < len(covering.gaps):
            gap = covering.gaps[i]
            webs = f", webs and seams {gap.web_conductance:.2f} W/m²K" if gap.web_conductance else ""
            lines.append(f"  gap {1000 * gap.thickness_m:.1f} mm {gap.gas}{webs}")
    return [*lines, ""]


def _figure_lines(name: str) -> list[str]:
    row = library_rows.row(name)
    lines = [f"{'Figures and ranges':<34}{'value':>8}{'low':>8}{'high':>8}"]
    for key, figure in row.figures.items():
        lines.append(f"  {key:<32}{figure.value:>8.3f}{figure.low:>8.3f}{figure.high:>8.3f}")
    return [*lines, ""]


def _source_lines(name: str, covering: Covering) -> list[str]:
    from canopy.coats import coat
    from canopy.materials import material

    row = library_rows.row(name)
    texts = [f"How known: {row.provenance}. {row.source}."]
    seen: set[str] = set()
    for layer in row.table["layers"]:
        if "measured" in layer and layer["measured"] not in seen:
            seen.add(layer["measured"])
            sheet = library_rows.table("sheet", layer["measured"])
            texts.append(f"Sheet {sheet['name']} ({sheet['provenance']}): {sheet['source']}.")
        if "material" in layer and layer["material"] not in seen:
            seen.add(layer["material"])
            solid = material(layer["material"])
            texts.append(
                f"Constants {solid.title}: {solid.source} ({solid.licence}). {solid.bridged}".strip()
            )
        for face in ("outer", "inner"):
            if face in layer and layer[face] not in seen:
                seen.add(layer[face])
                texts.append(f"Coat {layer[face]}: {coat(layer[face]).source}.")
    texts.append(f"Ranges: {row.range_source}.")
    if covering.kind != "glass" or covering.layers > 1:
        texts.append(
            "Better insulated roofs melt snow late: structure and covering must carry the snow load of the "
            "place (local code, licensed design)."
        )
    return [line for text in texts for line in textwrap.wrap(text, 110, subsequent_indent="  ")]


def covering_plot(name: str, path: Path) -> None:
    """Write the interactive page of a covering's spectrum. UserError for name or file."""
    from reports.covering_page import write_covering_page

    write_covering_page(name, path)
