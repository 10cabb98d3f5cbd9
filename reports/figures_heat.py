"""Figures of heat: by month, where it comes from and goes, the nights, the load in order of size."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy.run import Run
from reports.blocks import Figure, Mark, Spec
from reports.display import Display
from reports.figures import (
    AROUND,
    HEATING,
    LEAK,
    SKIN,
    SOIL,
    SUN,
    THROUGH,
    VENT,
    WIND,
    axis,
    bar,
    hatching,
    layout,
    line,
    marks_of,
    month_labels,
    pack,
    safe,
)
from reports.nights import NightPattern
from reports.summary import Summary

Floats = NDArray[np.float64]

SUN_COLUMNS: Final = (
    "crop_uv_absorbed_kwh_m2",
    "crop_par_absorbed_kwh_m2",
    "crop_nir_absorbed_kwh_m2",
    "ground_solar_kwh_m2",
    "covering_solar_kwh_m2",
    "screen_solar_kwh_m2",
    "structure_solar_kwh_m2",
)
SOIL_COLUMNS: Final = ("perimeter_loss_kwh_m2", "deep_loss_kwh_m2", "drain_loss_kwh_m2")

FLOWS: Final[tuple[tuple[Mark, tuple[str, ...], Literal["in", "out"]], ...]] = (
    (SUN, SUN_COLUMNS, "in"),
    (HEATING, ("heat_delivered_kwh_m2",), "in"),
    (THROUGH, ("through_loss_kwh_m2",), "out"),
    (SKIN, ("skin_loss_kwh_m2",), "out"),
    (AROUND, ("surroundings_loss_kwh_m2",), "out"),
    (WIND, ("convection_loss_kwh_m2",), "out"),
    (LEAK, ("air_change_loss_kwh_m2",), "out"),
    (VENT, ("venting_kwh_m2",), "out"),
    (SOIL, SOIL_COLUMNS, "out"),
)
"""Paths of energy: mark, daily columns that add up to it, direction."""


def month_heat_figure(run: Run, show: Display) -> Figure:
    """Return heat delivered by month."""
    labels, marks, unit = month_labels(run.months), marks_of(run), show.text("kWh/m2")
    traces = [
        line(mark, labels, show.convert(one.monthly["heat_delivered_kwh_m2"], "kWh/m2"), unit)
        for mark, one in zip(marks, run.candidates, strict=True)
    ]
    return Figure(
        "month-heat",
        "Heat delivered by month",
        "Heat that the heating delivers in each month under each candidate; the table below has the numbers.",
        ({"data": traces, "layout": layout(axis("", showgrid=False), axis(unit, rangemode="tozero"))},),
        marks,
        360,
        toggles=True,
    )


def balance_figure(run: Run, rows: Sequence[Summary], show: Display) -> Figure:
    """Return two lying bars per candidate: what comes in above, what goes out below."""
    unit = show.text("kWh/m2")
    names = [r.name for r in rows]
    traces: list[Spec] = []
    for mark, columns, way in FLOWS:
        amount = show.convert(np.array([sum(r.total[c] for c in columns) for r in rows]), "kWh/m2")
        traces.append(
            bar(mark, names, amount, unit, offsetgroup=way, alignmentgroup="a", legendgroup=mark.name)
        )
    y = axis("", autorange="reversed", type="category", ticklabelstandoff=6)
    spec = {
        "data": traces,
        "layout": layout(
            axis(unit), y, barmode="relative", bargap=0.28, bargroupgap=0.05,
        ),
    }  # fmt: skip
    return Figure(
        "balance",
        "Where the warmth comes from and where it goes",
        "Two bars per candidate. The upper one adds sunlight absorbed and heating, the lower one adds every "
        "loss; both are equally long but for what the ground keeps.",
        (spec,),
        tuple(mark for mark, _, _ in FLOWS),
        110 + 62 * len(rows),
    )


def night_specs(run: Run, patterns: Sequence[NightPattern], show: Display) -> tuple[Spec, ...]:
    """Return one spec per candidate: sky loss by hour of the night, clear nights beside cloudy ones."""
    unit = show.text("W/m2")
    top = (
        max(
            float(np.nanmax([p.clear_through + p.clear_skin, p.cloudy_through + p.cloudy_skin]))
            for p in patterns
        )
        if patterns
        else 1.0
    )
    high = float(show.convert(top, "W/m2")) * 1.08
    specs = []
    for p in patterns:
        traces = []
        for column, (through, skin) in enumerate(
            ((p.clear_through, p.clear_skin), (p.cloudy_through, p.cloudy_skin)), start=1
        ):
            for mark, values in ((THROUGH, through), (SKIN, skin)):
                traces.append(
                    {
                        "type": "bar",
                        "name": mark.name,
                        "x": list(p.labels),
                        "y": pack(show.convert(values, "W/m2")),
                        "xaxis": f"x{column}",
                        "yaxis": "y",
                        "marker": {
                            "color": mark.colour,
                            "pattern": hatching(mark),
                        },
                        "hovertemplate": f"{mark.name}<br>%{{x}} h: %{{y:,.1f}} {unit}<extra></extra>",
                    }
                )
        x = axis("clearest third of nights, hour", domain=[0.0, 0.485], type="category", showgrid=False)
        x2 = axis("cloudiest third, hour", domain=[0.515, 1.0], type="category", anchor="y", showgrid=False)
        specs.append(
            {
                "data": traces,
                "layout": layout(
                    x,
                    axis(unit, range=[min(0.0, -0.02 * high), high]),
                    xaxis2=x2,
                    barmode="relative",
                    bargap=0.12,
                ),
            }
        )
    return tuple(specs)


def duration_figure(run: Run, show: Display) -> Figure:
    """Return the heating load in order of size, on a scale that opens up the few coldest hours."""
    marks, unit = marks_of(run), show.text("W/m2")
    step_h = run.weather.step_s / 3600.0
    count = len(run.time)
    pick = np.unique(np.round(np.geomspace(1, count, 240)).astype(int)) - 1
    traces = []
    for mark, one in zip(marks, run.candidates, strict=True):
        load = np.sort(one.hourly["heat_delivered_w_m2"])[::-1]
        name = safe(mark.name)
        traces.append(
            {
                "type": "scatter",
                "mode": "lines",
                "name": name,
                "x": pack((pick + 1) * step_h),
                "y": pack(show.convert(load[pick], "W/m2")),
                "line": {"color": mark.colour, "dash": mark.dash, "width": 2.4},
                "hovertemplate": f"{name}<br>%{{x:,.0f}} h at or above %{{y:,.0f}} {unit}<extra></extra>",
            }
        )
    ticks = [t for t in (1, 10, 35, 88, 300, 1000, 3000, 8760) if t <= count * step_h * 1.01]
    rule = [
        {"type": "line", "x0": h, "x1": h, "y0": 0, "y1": 1, "yref": "paper",
         "line": {"color": "#5a645e", "width": 1, "dash": "dot"}}
        for h in (35, 88)
    ]  # fmt: skip
    return Figure(
        "duration",
        "How many hours need how much heat",
        "Heating load in order of size. Across: hours of the record with at least that load, on a scale "
        "that widens the few coldest hours; dotted lines at 35 and 88 hours.",
        (
            {
                "data": traces,
                "layout": layout(
                    axis(
                        "hours with at least this load",
                        type="log",
                        tickvals=ticks,
                        ticktext=[f"{t:,}" for t in ticks],
                    ),
                    axis(unit, rangemode="tozero"),
                    shapes=rule,
                ),
            },
        ),
        marks,
        380,
        toggles=True,
    )
