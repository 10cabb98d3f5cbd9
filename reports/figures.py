"""How figures look, and the few traces they are made of: plain dicts; nothing here imports a plotter."""

from __future__ import annotations

import base64
import html
from collections.abc import Sequence
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.run import Run
from reports.blocks import Mark, Spec

Floats = NDArray[np.float64]

PAPER: Final = "#fbfaf6"
INK: Final = "#1d2421"
FAINT: Final = "#dedace"
QUIET: Final = "#5a645e"
BODY_FONT: Final = "Seravek, 'Gill Sans Nova', Ubuntu, Calibri, 'DejaVu Sans', sans-serif"

COLOURS: Final = ("#1f3a6e", "#c2560c", "#178068", "#a8327e", "#7a6a00", "#2f86bd", "#6b3a1e", "#6a7078")
DASHES: Final = ("solid", "dash", "dot")
SYMBOLS: Final = ("circle", "square", "diamond", "triangle-up", "cross", "star", "triangle-down", "hexagon")
SYMBOL_SIGNS: Final = {
    "circle": "●", "square": "■", "diamond": "◆", "triangle-up": "▲", "cross": "✚", "star": "★",
    "triangle-down": "▼", "hexagon": "⬢", "none": "",
}  # fmt: skip

HATCHES: Final = {"/": "slash", "\\": "back", ".": "dots", "x": "cross", "+": "plus", "-": "dash"}

OUTSIDE: Final = Mark("outside", QUIET, "dot", "circle-open")

THROUGH: Final = Mark("to the sky, straight through the covering", "#27307f", kind="block")
SKIN: Final = Mark("to the sky, from the covering's skin", "#6676c8", pattern="/", kind="block")
AROUND: Final = Mark("long-wave to ground and neighbours", "#7f858c", pattern=".", kind="block")
WIND: Final = Mark("convection to the wind", "#a3561a", kind="block")
LEAK: Final = Mark("leakage", "#c97f1e", pattern="\\", kind="block")
VENT: Final = Mark("vents", "#2f8482", kind="block")
SOIL: Final = Mark("ground, foundation and run-off", "#6b4f3a", pattern="x", kind="block")
SUN: Final = Mark("sunlight absorbed", "#b98300", pattern="+", kind="block")
HEATING: Final = Mark("heating", "#a3262a", kind="block")

TO_CROP: Final = Mark("leaves", "#2f7d32", kind="block")
TO_GROUND: Final = Mark("floor", "#7a5c3e", pattern="x", kind="block")
TO_COVER: Final = Mark("covering", "#4f74a8", pattern="/", kind="block")
TO_SCREEN: Final = Mark("screens", "#8a5a9c", pattern="\\", kind="block")
TO_BARS: Final = Mark("gutters, ridges, bars", "#5f666d", pattern=".", kind="block")
TO_OUT: Final = Mark("sent back out", "#8f8a78", pattern="-", kind="block")


def candidate_marks(names: Sequence[str]) -> tuple[Mark, ...]:
    """Return one mark per candidate: eight colours and symbols, then the same with other dashes."""
    count = len(COLOURS)
    return tuple(
        Mark(name, COLOURS[k % count], DASHES[(k // count) % len(DASHES)], SYMBOLS[(k + k // count) % count])
        for k, name in enumerate(names)
    )


def marks_of(run: Run) -> tuple[Mark, ...]:
    """Return the marks of a run's candidates."""
    return candidate_marks([one.plan.name for one in run.candidates])


def pack(values: Floats, digits: int = 4) -> dict[str, str] | list[float | None]:
    """Return numbers as the browser takes them: base64 float32, or a short list."""
    flat = np.asarray(values, dtype="<f4")
    if flat.size <= 16:
        return [None if np.isnan(v) else round(float(v), digits) for v in np.asarray(values, float)]
    return {"dtype": "f4", "bdata": base64.b64encode(flat.tobytes()).decode("ascii")}


def safe(text: str) -> str:
    """Return a user's text as the plotter may draw it: it reads markup, so that is escaped."""
    return html.escape(text, quote=False)


def axis(title: str, **more: Any) -> Spec:
    """Return one axis in the report's look."""
    return {
        "title": {"text": title, "font": {"size": 13, "color": QUIET}, "standoff": 8},
        "gridcolor": FAINT,
        "zerolinecolor": QUIET,
        "zerolinewidth": 1,
        "linecolor": QUIET,
        "tickfont": {"size": 12, "color": INK},
        "automargin": True,
        "fixedrange": True,
        **more,
    }


def layout(x: Spec, y: Spec, **more: Any) -> Spec:
    """Return a layout in the report's look: paper ground, no box, no plotter's own legend."""
    return {
        "paper_bgcolor": PAPER,
        "plot_bgcolor": PAPER,
        "font": {"family": BODY_FONT, "size": 13, "color": INK},
        "margin": {"l": 12, "r": 14, "t": 12, "b": 12},
        "showlegend": False,
        "hoverlabel": {"bgcolor": "#ffffff", "bordercolor": QUIET, "font": {"color": INK, "size": 13}},
        "hovermode": "closest",
        "dragmode": False,
        "xaxis": x,
        "yaxis": y,
        **more,
    }


def line(mark: Mark, x: Any, values: Floats, unit: str, digits: int = 1, **more: Any) -> Spec:
    """Return a line with markers in a candidate's look."""
    name = safe(mark.name)
    trace: Spec = {
        "type": "scatter",
        "mode": "lines+markers",
        "name": name,
        "x": x,
        "y": pack(values),
        "line": {"color": mark.colour, "dash": mark.dash, "width": 2},
        "marker": {"color": mark.colour, "symbol": mark.symbol, "size": 8},
        "hovertemplate": f"{name}<br>%{{x}}: %{{y:,.{digits}f}} {unit}<extra></extra>",
    }
    trace.update(more)
    return trace


def hatching(mark: Mark) -> Spec:
    """Return a mark's hatching: paper-coloured lines over its colour."""
    return {
        "shape": mark.pattern,
        "fillmode": "overlay",
        "fgcolor": PAPER,
        "fgopacity": 0.75,
        "size": 7,
        "solidity": 0.22,
    }


def bar(mark: Mark, labels: Sequence[str], values: Floats, unit: str, digits: int = 0, **more: Any) -> Spec:
    """Return one piece of lying stacked bars, told apart by colour and hatching."""
    trace: Spec = {
        "type": "bar",
        "orientation": "h",
        "name": safe(mark.name),
        "y": [safe(text) for text in labels],
        "x": pack(values),
        "marker": {
            "color": mark.colour,
            "line": {"color": PAPER, "width": 1},
            "pattern": hatching(mark),
        },
        "hovertemplate": f"{safe(mark.name)}<br>%{{y}}: %{{x:,.{digits}f}} {unit}<extra></extra>",
    }
    trace.update(more)
    return trace


def month_labels(months: Sequence[str]) -> list[str]:
    """Return "Jan", or "Jan 91" when a month comes more than once."""
    names = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
    tail = len({month[5:7] for month in months}) < len(months)
    return [names[int(m[5:7]) - 1] + (f" {m[2:4]}" if tail else "") for m in months]


def day_axis(run: Run) -> Spec:
    """Return where daily values stand: start and step, or every day when days are left out."""
    days = run.days
    if len(days) > 1 and (np.diff(days.astype(int)) == 1).all():
        return {"x0": str(days[0]), "dx": 86_400_000}
    return {"x": np.datetime_as_string(days, unit="D").tolist()}
