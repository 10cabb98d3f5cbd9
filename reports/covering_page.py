"""One covering's spectrum as a self-contained page: sunlight, what comes through, and heat at 283 K."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from canopy import library_rows
from canopy.bands import SOLAR
from canopy.coveringspectrum import Spectrum, spectrum_of
from reports.blocks import Figure, Mark, Row, Section, Spec, Table, Text
from reports.figures import axis, layout, pack, safe
from reports.weather_page import write_whole

THROUGH = Mark("through, dry", "#27307f")
WET = Mark("through, wet inner face", "#2a7fb8", "dash")
BACK = Mark("sent back", "#8a3d0a", "dot")
SUN = Mark("sunlight (ASTM G173), 1 at its peak", "#e8b93d", kind="block")
BODY = Mark("blackbody at 283 K, 1 at its peak", "#c9a0a0", kind="block")

_TICKS = (0.3, 0.4, 0.5, 0.7, 1, 2, 3, 5, 8, 14, 20, 30, 50)


def _trace(mark: Mark, x: Any, values: Any, filled: bool) -> Spec:
    made: Spec = {
        "type": "scatter",
        "mode": "lines",
        "name": safe(mark.name),
        "x": x,
        "y": pack(values),
        "hovertemplate": f"%{{x:.3g}} µm: %{{y:.3f}}<extra>{safe(mark.name)}</extra>",
    }
    if filled:
        return {**made, "fill": "tozeroy", "line": {"width": 0}, "fillcolor": mark.colour + "77"}
    return {**made, "line": {"color": mark.colour, "width": 2, "dash": mark.dash}}


def _figure(name: str, found: Spectrum) -> Figure:
    x = pack(found.wavelength_um)
    data = [
        _trace(SUN, x, found.sunlight, True),
        _trace(BODY, x, found.blackbody, True),
        _trace(BACK, x, found.reflect, False),
        _trace(WET, x, found.transmit_wet, False),
        _trace(THROUGH, x, found.transmit, False),
    ]
    log = axis(
        "wavelength, µm",
        type="log",
        tickvals=list(_TICKS),
        ticktext=[f"{t:g}" for t in _TICKS],
        range=[-0.5528, 1.699],
    )
    return Figure(
        "spectrum",
        "What the covering does, wavelength by wavelength",
        f"Share of light and heat that {name} lets through and sends back at normal incidence, .28 to 50 µm, "
        "over the shapes of sunlight and of the radiation of a surface at 10 °C.",
        ({"data": data, "layout": layout(log, axis("share", range=[0, 1.02]), hovermode="x")},),
        (SUN, BODY, THROUGH, WET, BACK),
        460,
        note="Normal incidence, straight and scattered light together; wet: 50 µm of water. Measured sheets "
        "are known by band only and show as steps. Webs of multi-wall sheets are left out here.",
    )


def _table(name: str) -> Table:
    row = library_rows.row(name)
    rows = tuple(
        Row(key.replace("_", " "), tuple(f"{value:.3f}" for value in (f.value, f.low, f.high)))
        for key, f in row.figures.items()
    )
    return Table("Figures with their ranges", ("figure", "value", "low", "high"), rows, ("", "", "", ""))


def _words(name: str) -> tuple[str, ...]:
    row = library_rows.row(name)
    f = {key: figure.value for key, figure in row.figures.items()}
    return (
        f"Of straight PAR {100 * f['par_normal']:.0f} % comes through, of diffuse PAR "
        f"{100 * f['par_hemispherical']:.0f} %, of diffuse NIR {100 * f['nir_hemispherical']:.0f} %.",
        f"Of the heat that a surface at 10 °C radiates, {100 * f['thermal_transmittance']:.0f} % goes "
        f"straight through when dry; U under EN 673's conditions is "
        f"{f['u_value_w_m2_cover_k']:.2f} W/m²K of sheet.",
    )


def write_covering_page(name: str, path: Path) -> None:
    """Write the page. UserError for an unknown covering or a file that cannot be written."""
    from reports.page import single_text

    row_table = library_rows.table("covering", name)
    row = library_rows.row(name)
    section = Section(
        "spectrum-part",
        "Spectrum",
        "What comes through, what does not?",
        (Text(_words(name), lead=True), _figure(name, spectrum_of(name)), _table(name)),
    )
    bands = "; ".join(
        f"{band.replace('_', '-')} {low:g}-{high:g} µm"
        for band, low, high in zip(SOLAR.names, SOLAR.lower, SOLAR.upper, strict=True)
    )
    sources = Section(
        "sources",
        "Sources",
        "How is it known?",
        (Text((f"{row.provenance}: {row.source}", f"Ranges: {row.range_source}", f"Bands: {bands}.")),),
    )
    under = f"{name}, {row_table['kind']}"
    text = single_text(row_table["title"], "Covering of the library", under, (section, sources))
    write_whole(text, path)
