"""A house's light in figures and small tables: sky map with sun paths, turning the ridge, floor map."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import plotly.graph_objects as go

from canopy.floormap import FloorMap
from canopy.houseview import HeightLight, PolarMap, SunPath, TurnTable

Rows = list[list[str]]
PATH_COLOURS = ("#1f4e79", "#2e7d32", "#b35900")
SCALE = "Cividis"  # even steps of lightness, also for colour-blind readers


def polar_figure(sky: PolarMap, paths: Sequence[SunPath], ridge_azimuth_deg: float) -> go.Figure:
    """Draw a house's transmission over the sky, north up, zenith in the middle, with sun paths and ridge."""
    step = float(sky.azimuth_deg[1] - sky.azimuth_deg[0])
    ring = float(sky.zenith_deg[1] - sky.zenith_deg[0])
    zenith, azimuth = np.meshgrid(sky.zenith_deg, sky.azimuth_deg, indexing="ij")
    percent = 100.0 * sky.transmission.ravel()
    low, high = float(np.floor(percent.min() / 5.0) * 5.0), float(np.ceil(percent.max() / 5.0) * 5.0)
    figure = go.Figure()
    figure.add_trace(
        go.Barpolar(
            r=np.full(zenith.size, ring),
            base=(zenith - 0.5 * ring).ravel(),
            theta=azimuth.ravel(),
            width=np.full(zenith.size, step),
            marker={
                "color": percent,
                "colorscale": SCALE,
                "cmin": low,
                "cmax": high,
                "line": {"width": 0},
                "colorbar": {"title": {"text": "PAR passed, %"}},
            },
            customdata=np.stack([90.0 - zenith.ravel(), percent], axis=1),
            hovertemplate="azimuth %{theta:.0f}°, height %{customdata[0]:.0f}°: "
            "%{customdata[1]:.0f} %<extra></extra>",
            showlegend=False,
        )
    )
    for path, colour in zip(paths, PATH_COLOURS, strict=False):
        figure.add_trace(
            go.Scatterpolar(
                r=path.zenith_deg,
                theta=path.azimuth_deg,
                mode="lines",
                line={"color": colour, "width": 3},
                name=path.title,
            )
        )
    ends = [ridge_azimuth_deg % 360.0, (ridge_azimuth_deg + 180.0) % 360.0]
    figure.add_trace(
        go.Scatterpolar(
            r=[90.0, 90.0],
            theta=ends,
            mode="lines",
            line={"color": "#444444", "width": 2, "dash": "dash"},
            name="ridge",
        )
    )
    figure.update_layout(polar=_polar_axes(), legend={"orientation": "h"}, margin={"t": 30, "b": 20})
    return figure


def _polar_axes() -> dict[str, Any]:
    """Return axes with north up and the sun's height on the rings."""
    return {
        "angularaxis": {
            "rotation": 90,
            "direction": "clockwise",
            "tickvals": [0, 90, 180, 270],
            "ticktext": ["N", "E", "S", "W"],
        },
        "radialaxis": {
            "range": [0, 90],
            "tickvals": [30, 60, 90],
            "ticktext": ["60°", "30°", "0°"],
            "angle": 45,
        },
    }


def turn_figure(table: TurnTable) -> go.Figure:
    """Draw PAR transmission against the direction of the ridge, year and winter."""
    figure = go.Figure()
    for name, values in (("year", table.year), ("darkest three months", table.winter)):
        figure.add_trace(
            go.Scatter(x=table.ridge_azimuth_deg, y=100.0 * values, mode="lines+markers", name=name)
        )
    figure.update_layout(
        xaxis={"title": {"text": "ridge direction, degrees from north"}, "dtick": 30},
        yaxis={"title": {"text": "PAR at the crop plane, % of outside"}},
        margin={"t": 30},
    )
    return figure


def turn_rows(table: TurnTable) -> Rows:
    """Return the table of ridge directions: header first, percentages with one decimal."""
    rows = [["ridge, ° from north", "year, %", "darkest 3 months, %", "beam in these, %"]]
    for values in zip(table.ridge_azimuth_deg, table.year, table.winter, table.winter_beam, strict=True):
        rows.append([f"{values[0]:.0f}", *(f"{100.0 * v:.1f}" for v in values[1:])])
    return rows


def height_rows(light: HeightLight) -> Rows:
    """Return transmission by sun height: header first, a dash where the sun never stands."""
    rows = [["sun height, °", "hours", "beam, %", "all light, %"]]
    for low, high, hours, beam, every in zip(
        light.low_deg, light.high_deg, light.hours, light.transmission_beam, light.transmission, strict=True
    ):
        shares = ["–" if np.isnan(v) else f"{100.0 * v:.1f}" for v in (beam, every)]
        rows.append([f"{low:.0f}–{high:.0f}", f"{hours:.0f}", *shares])
    return rows


def floor_figure(floor: FloorMap) -> go.Figure:
    """Draw light over the floor, edge against middle."""
    figure = go.Figure(
        go.Heatmap(
            x=floor.x_m,
            y=floor.y_m,
            z=100.0 * floor.transmission,
            colorscale=SCALE,
            colorbar={"title": {"text": "PAR passed, %"}},
            hovertemplate="%{x:.1f} m across, %{y:.1f} m along: %{z:.0f} %<extra></extra>",
        )
    )
    figure.update_layout(
        xaxis={"title": {"text": "across the spans, m"}},
        yaxis={"title": {"text": "along the ridge, m"}, "scaleanchor": "x"},
        margin={"t": 30},
    )
    return figure
