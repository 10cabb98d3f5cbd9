"""Figures of light: heat against light, daily light by month, share of the outside light."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from canopy.run import Run
from reports.blocks import Figure
from reports.display import Display, number
from reports.figures import OUTSIDE, axis, layout, line, marks_of, month_labels, pack, safe
from reports.summary import Summary

Floats = NDArray[np.float64]


def trade_figure(run: Run, rows: Sequence[Summary], show: Display) -> Figure:
    """Return heat (across) against light at the crop (up), one mark per candidate."""
    marks = marks_of(run)
    unit = show.text("kWh/m2")
    traces = []
    for one, mark in zip(rows, marks, strict=True):
        name = safe(one.name)
        traces.append(
            {
                "type": "scatter",
                "mode": "markers",
                "name": name,
                "x": pack(show.convert(np.array([one.heat_kwh]), "kWh/m2")),
                "y": pack(np.array([100 * one.light_share])),
                "marker": {"color": mark.colour, "symbol": mark.symbol, "size": 15},
                "hovertemplate": f"{name}<br>heat %{{x:,.0f}} {unit}<br>light %{{y:.1f}} %<extra></extra>",
            }
        )
    corner = {
        "x": 0.0, "y": 1.0, "xref": "paper", "yref": "paper", "xanchor": "left", "yanchor": "top",
        "text": "◤ more light, less heat", "showarrow": False, "font": {"size": 12, "color": "#5a645e"},
    }  # fmt: skip
    return Figure(
        "trade",
        "Light gained against heat spent",
        "Each mark is one candidate: the further up, the more light at the crop; the further left, the less "
        "heat. "
        + "; ".join(
            f"{r.name}: {number(100 * r.light_share, 1)} % of the outside light, "
            f"{show.say(r.heat_kwh, 'kWh/m2')}"
            for r in rows
        ),
        (
            {
                "data": traces,
                "layout": layout(
                    axis(f"heat, {unit}", showgrid=True),
                    axis("PAR at the crop, % of outside"),
                    annotations=[corner],
                ),
            },
        ),
        tuple(replace(mark, kind="point") for mark in marks),
        330,
    )


def month_light_figures(run: Run, outside: Floats, inside: Sequence[Floats]) -> tuple[Figure, Figure]:
    """Return daily light by month, and its share of the outside light over the same days' months."""
    marks, labels = marks_of(run), month_labels(run.months)
    traces = [line(OUTSIDE, labels, outside, "mol/m² a day")]
    traces += [line(mark, labels, values, "mol/m² a day") for mark, values in zip(marks, inside, strict=True)]
    shares = [
        100.0 * one.monthly["inside_par_mol_m2"] / np.maximum(one.monthly["outside_par_mol_m2"], 1e-9)
        for one in run.candidates
    ]
    share_traces = [line(mark, labels, values, "%") for mark, values in zip(marks, shares, strict=True)]
    y = axis("mol/m² a day", rangemode="tozero")
    return (
        Figure(
            "dli",
            "Daily light (DLI) at the top of the crop",
            "Mean daily PAR light by month, outside and at the top of the crop under each candidate; the "
            "table below has the numbers.",
            ({"data": traces, "layout": layout(axis("", showgrid=False), y)},),
            (OUTSIDE, *marks),
            360,
            half=True,
            toggles=True,
        ),
        Figure(
            "share",
            "Share of the outside PAR that arrives",
            "PAR at the top of the crop as a percentage of PAR outside, by month and candidate.",
            ({"data": share_traces, "layout": layout(axis("", showgrid=False), axis("% of outside PAR"))},),
            marks,
            360,
            half=True,
            toggles=True,
        ),
    )
