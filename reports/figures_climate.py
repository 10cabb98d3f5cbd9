"""Figures of the climate inside: air temperature and humidity day by day."""

from __future__ import annotations

import numpy as np

from canopy.run import CandidateRun, Run
from reports.blocks import Figure, Mark, Spec
from reports.display import Display
from reports.figures import axis, day_axis, layout, pack

INSIDE = Mark("house air, lowest to highest of the day", "#c97f1e")
MEAN = Mark("house air, mean", "#8a3d0a")
AIR_OUT = Mark("outside air, mean", "#27307f", "dash")
HUMID = Mark("highest relative humidity of the day", "#178068")


def _edge(values: dict[str, object] | object, place: Spec, fill: str | None) -> Spec:
    trace: Spec = {
        "type": "scatter",
        "mode": "lines",
        **place,
        "y": values,
        "line": {"color": INSIDE.colour, "width": 0.6},
        "hoverinfo": "skip",
    }
    if fill:
        trace |= {"fill": fill, "fillcolor": "rgba(201,127,30,.28)"}
    return trace


def _spec(run: Run, one: CandidateRun, show: Display, low: float, high: float) -> Spec:
    place, unit = day_axis(run), show.text("degC")
    shown = {
        name: pack(show.convert(one.daily[f"{name}_c"], "degC"))
        for name in ("temp_air_min", "temp_air_max", "temp_air_mean", "outside_temp_mean")
    }
    traces: list[Spec] = [
        _edge(shown["temp_air_min"], place, None),
        _edge(shown["temp_air_max"], place, "tonexty"),
    ]
    for mark, name in ((MEAN, "temp_air_mean"), (AIR_OUT, "outside_temp_mean")):
        traces.append(
            {
                "type": "scatter",
                "mode": "lines",
                "name": mark.name,
                **place,
                "y": shown[name],
                "line": {"color": mark.colour, "width": 1.4, "dash": mark.dash},
                "hovertemplate": f"{mark.name}<br>%{{x|%d %b}}: %{{y:.1f}} {unit}<extra></extra>",
            }
        )
    traces.append(
        {
            "type": "scatter",
            "mode": "lines",
            "name": HUMID.name,
            **place,
            "y": pack(one.daily["rh_max_pct"]),
            "yaxis": "y2",
            "line": {"color": HUMID.colour, "width": 1.2},
            "hovertemplate": f"{HUMID.name}<br>%{{x|%d %b}}: %{{y:.0f}} %<extra></extra>",
        }
    )
    x = axis("", type="date", tickformat="%b", hoverformat="%d %b", anchor="y2", showgrid=False)
    y = axis(unit, domain=[0.36, 1.0], range=[low, high])
    y2 = axis("% humidity", domain=[0.0, 0.28], range=[0, 104])
    return {"data": traces, "layout": layout(x, y, yaxis2=y2)}


def climate_figure(run: Run, show: Display) -> Figure:
    """Return air temperature and humidity by day, one spec per candidate, on one scale."""
    lows = [
        min(c.daily["temp_air_min_c"].min(), c.daily["outside_temp_mean_c"].min()) for c in run.candidates
    ]
    highs = [
        max(c.daily["temp_air_max_c"].max(), c.daily["outside_temp_mean_c"].max()) for c in run.candidates
    ]
    low = float(show.convert(np.floor(min(lows)) - 1, "degC"))
    high = float(show.convert(np.ceil(max(highs)) + 1, "degC"))
    return Figure(
        "climate",
        "Temperature and humidity, day by day",
        "Upper part: the span between lowest and highest house air temperature of each day, its mean, and "
        "the mean outside. Lower part: the highest relative humidity of the day.",
        tuple(_spec(run, one, show, low, high) for one in run.candidates),
        (INSIDE, MEAN, AIR_OUT, HUMID),
        430,
        per_candidate=True,
    )
