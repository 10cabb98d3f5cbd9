"""The house seen from the sky: what share of light passes from each direction, with the sun's paths on it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.houseview import PolarMap, SunPath, TurnTable, polar_map, sun_paths, turn_table
from canopy.run import Run
from reports.blocks import Figure, Mark, Row, Spec, Table
from reports.display import number, percent
from reports.figures import BODY_FONT, FAINT, INK, PAPER, QUIET, pack

Floats = NDArray[np.float64]

PATHS: Final = (
    Mark("sun on 21 December", "#a3262a", "solid", "none"),
    Mark("sun on 21 March", "#c2560c", "dash", "none"),
    Mark("sun on 21 June", "#6b3a1e", "dot", "none"),
)
RIDGE: Final = Mark("ridge", INK, "dash", "none")
LIGHT_SCALE: Final = ((0.0, "#16263f"), (0.35, "#2f6f8f"), (0.65, "#8fbfa8"), (1.0, "#fff6cf"))
"""Dark to bright in even steps of lightness: reads without telling hues apart."""

FINE_DEG, COARSE_DEG = 15.0, 30.0


def sky_figure(run: Run) -> Figure:
    """Return the map of every candidate, all on one scale, with the sun's paths of the place."""
    maps = [polar_map(one.house, one.covering.solar_dry) for one in run.candidates]
    paths = sun_paths(run.weather.site)
    shares = np.concatenate([100.0 * m.transmission.ravel() for m in maps])
    low, high = float(np.floor(shares.min() / 10) * 10), float(np.ceil(shares.max() / 10) * 10)
    specs = tuple(
        _map_spec(sky, paths, one.house.ridge_azimuth, low, high)
        for sky, one in zip(maps, run.candidates, strict=True)
    )
    return Figure(
        "sky-map",
        "Which parts of the sky light the crop",
        "A map of the sky, north up, zenith in the middle, horizon at the rim. Colour: share of the PAR "
        "from each direction that reaches the top of the crop. Lines: the sun's way on three days, and the "
        "ridge.",
        specs,
        (*PATHS, RIDGE),
        470,
        per_candidate=True,
        note="Share per unit of light on the horizontal, covering dry, screens stowed; straight and with one "
        "mirror reflection. Near the horizon the walls let light in as well.",
    )


def _map_spec(sky: PolarMap, paths: Sequence[SunPath], ridge: float, low: float, high: float) -> Spec:
    step = float(sky.azimuth_deg[1] - sky.azimuth_deg[0])
    ring = float(sky.zenith_deg[1] - sky.zenith_deg[0])
    zenith, azimuth = np.meshgrid(sky.zenith_deg, sky.azimuth_deg, indexing="ij")
    share = 100.0 * sky.transmission.ravel()
    cells: Spec = {
        "type": "barpolar",
        "r": pack(np.full(zenith.size, ring)),
        "base": pack((zenith - 0.5 * ring).ravel()),
        "theta": pack(azimuth.ravel()),
        "width": pack(np.full(zenith.size, step)),
        "marker": {
            "color": pack(share),
            "colorscale": [list(stop) for stop in LIGHT_SCALE],
            "cmin": low,
            "cmax": high,
            "line": {"width": 0},
            "colorbar": {"title": {"text": "% passed"}, "thickness": 12, "outlinewidth": 0, "len": 0.8},
        },
        "hovertemplate": "azimuth %{theta:.0f}°, height %{customdata:.0f}°: "
        "%{marker.color:.0f} %<extra></extra>",
        "customdata": pack(90.0 - zenith.ravel()),
    }
    lines = [
        _path(mark, path.zenith_deg, path.azimuth_deg)
        for mark, path in zip(PATHS, paths, strict=True)
        if len(path.zenith_deg)
    ]
    ends = np.array([ridge % 360.0, (ridge + 180.0) % 360.0])
    return {"data": [cells, *lines, _path(RIDGE, np.array([90.0, 90.0]), ends)], "layout": _layout()}


def _path(mark: Mark, zenith: Floats, azimuth: Floats) -> Spec:
    return {
        "type": "scatterpolar",
        "mode": "lines",
        "name": mark.name,
        "r": pack(zenith),
        "theta": pack(azimuth),
        "line": {"color": mark.colour, "width": 3 if mark is not RIDGE else 2, "dash": mark.dash},
        "hovertemplate": f"{mark.name}<extra></extra>",
    }


def _layout() -> Spec:
    return {
        "paper_bgcolor": PAPER,
        "font": {"family": BODY_FONT, "size": 13, "color": INK},
        "margin": {"l": 30, "r": 30, "t": 24, "b": 24},
        "showlegend": False,
        "dragmode": False,
        "hovermode": "closest",
        "polar": {
            "bgcolor": PAPER,
            "bargap": 0,
            "angularaxis": {
                "rotation": 90,
                "direction": "clockwise",
                "tickvals": [0, 90, 180, 270],
                "ticktext": ["N", "E", "S", "W"],
                "gridcolor": FAINT,
                "linecolor": QUIET,
            },
            "radialaxis": {
                "range": [0, 90],
                "tickvals": [30, 60, 90],
                "ticktext": ["60°", "30°", ""],
                "angle": 45,
                "gridcolor": FAINT,
                "linecolor": QUIET,
            },
        },
    }


def turned(run: Run) -> TurnTable:
    """Return what turning the ridge does, for the first candidate; arches among hills in coarser steps."""
    one = run.candidates[0]
    points = run.study.keys.site.horizon
    hills = tuple((p[0], p[1]) for p in points) if points else None
    step = COARSE_DEG if hills and one.house.form == "arch" else FINE_DEG
    return turn_table(one.house, one.covering.solar_dry, run.weather, step_deg=step, horizon=hills)


def turn_words(table: TurnTable, name: str, ridge: float) -> str:
    """Return what the best direction of the ridge would change in the darkest months."""
    now = float(np.interp(ridge % 180.0, table.ridge_azimuth_deg, table.winter, period=180.0))
    best = int(table.winter.argmax())
    gain = float(table.winter[best]) / now - 1.0
    if gain < 0.005:
        return f"No other direction of the ridge gives {name} more light in the darkest months."
    return (
        f"With the ridge turned to {number(float(table.ridge_azimuth_deg[best]))}° from north, {name} would "
        f"pass {percent(gain, 1)} more PAR in the three darkest months."
    )


def turn_rows(table: TurnTable, name: str) -> Table:
    """Return the table of ridge directions."""
    rows = tuple(
        Row(f"{number(float(a))}°", tuple(percent(float(v), 1) for v in values))
        for a, *values in zip(
            table.ridge_azimuth_deg, table.year, table.year_beam, table.winter, table.winter_beam, strict=True
        )
    )
    return Table(
        f"Turning the ridge: PAR that {name} passes to the top of the crop, screens stowed",
        ("ridge from north", "year", "of it direct sun", "three darkest months", "of it direct sun"),
        rows,
        folded=True,
    )
