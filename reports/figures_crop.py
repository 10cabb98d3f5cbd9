"""Figures of the crop: share of outside PAR absorbed by month, light on sunlit and shaded leaves by hour."""

from __future__ import annotations

import numpy as np

from canopy.run import Run
from reports.blocks import Figure, Mark, Spec
from reports.display import Display
from reports.figures import axis, layout, line, marks_of, month_labels

SUNLIT = Mark("sunlit leaves", "#b98300", "solid", "circle")
SHADED = Mark("shaded leaves", "#2f7d32", "solid", "square")


def absorbed_figure(run: Run) -> Figure:
    """Return absorbed PAR as a share of outside PAR by month."""
    marks, labels = marks_of(run), month_labels(run.months)
    traces = []
    for mark, one in zip(marks, run.candidates, strict=True):
        outside = np.maximum(one.monthly["outside_par_mol_m2"], 1e-12)
        traces.append(line(mark, labels, 100.0 * one.monthly["crop_par_absorbed_mol_m2"] / outside, "%"))
    return Figure(
        "absorbed",
        "Share of the outside PAR that leaves absorb",
        "PAR absorbed by leaves as a percentage of PAR outside, by month and candidate; the table below has "
        "the numbers.",
        (
            {
                "data": traces,
                "layout": layout(axis("", showgrid=False), axis("% of outside PAR", rangemode="tozero")),
            },
        ),
        marks,
        340,
        toggles=True,
    )


def leaf_light_figure(run: Run, show: Display) -> Figure:
    """Return mean PAR absorbed per m2 of sunlit and shaded leaf by hour of the day, for one candidate."""
    hour = run.time.astype("datetime64[h]").astype(np.int64) % 24
    labels = [f"{h:02d}" for h in range(24)]
    unit = show.text("umol/m2/s")
    specs: list[Spec] = []
    high = 1.0
    for one in run.candidates:
        traces = []
        with_crop = one.lai[run.hours] > 0
        count = np.maximum(np.bincount(hour[with_crop], minlength=24), 1)
        for mark, name in ((SUNLIT, "ppfd_sunlit_umol_m2_s"), (SHADED, "ppfd_shaded_umol_m2_s")):
            mean = np.bincount(hour[with_crop], weights=one.hourly[name][with_crop], minlength=24) / count
            high = max(high, float(mean.max()) * 1.08)
            traces.append(line(mark, labels, mean, unit, 0))
        specs.append(
            {
                "data": traces,
                "layout": layout(axis("hour of the day", type="category", nticks=12), axis(unit)),
            }
        )
    for spec in specs:
        spec["layout"]["yaxis"]["range"] = [0, high]
    return Figure(
        "leaf-light",
        "Sunlit and shaded leaves, mean day",
        "Mean PAR absorbed per square metre of sunlit and of shaded leaf, by hour of the day over the "
        "season.",
        tuple(specs),
        (SUNLIT, SHADED),
        340,
        per_candidate=True,
        half=True,
    )
