"""The nights: what the sky takes, hour by hour, clear and cloudy."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from canopy.run import Run
from reports import sentences as say
from reports.blocks import Chooser, Figure, Row, Section, Table, Text
from reports.display import Display, percent
from reports.figures import SKIN, THROUGH, marks_of
from reports.figures_heat import night_specs
from reports.nights import LEAST_NIGHTS, NightPattern, find_nights, night_pattern
from reports.summary import Summary


def nights(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return what the night sky takes."""
    found = find_nights(run)
    patterns = [night_pattern(one, found) for one in run.candidates]
    kept = [p for p in patterns if p is not None]
    if len(kept) < len(patterns):
        text = Text(("The reported season has no hour with the sun below the horizon.",), lead=True)
        return Section("nights", "The nights", "What does the night sky take?", (text,))
    unit = show.text("W/m2")
    figure = Figure(
        "nights",
        "Sky loss by hour of the night",
        "Mean net long-wave loss to the sky by hour of the night, clearest third of nights on the left, "
        "cloudiest third on the right; the dark part passes straight through the covering, the hatched part "
        "leaves its outer skin.",
        night_specs(run, kept, show),
        (THROUGH, SKIN),
        340,
        per_candidate=True,
        note="Hours of the weather file's standard time; only hours with the sun below the horizon count. "
        "Clearness: what a black surface at air temperature sends up, less what the sky sends down.",
    )
    table = Table(
        "What the night sky takes",
        (
            "candidate",
            "lost to the night sky",
            "of it straight through",
            "clearest nights, mean",
            "cloudiest nights, mean",
        ),
        tuple(
            Row(
                r.name,
                (
                    show.bare(r.total["night_sky_loss_kwh_m2"], "kWh/m2"),
                    percent(p.through_share),
                    show.bare(p.clear_mean, "W/m2", 1),
                    show.bare(p.cloudy_mean, "W/m2", 1),
                ),
                mark,
            )
            for r, p, mark in zip(rows, kept, marks_of(run), strict=True)
        ),
        ("", show.text("kWh/m2"), "", unit, unit),
    )
    return Section(
        "nights",
        "The nights",
        "What does the night sky take?",
        (Text(_night_words(rows, kept, show, run), lead=True), table, Chooser("Nights of"), figure),
    )


def _night_words(
    rows: Sequence[Summary], patterns: Sequence[NightPattern], show: Display, run: Run
) -> tuple[str, ...]:
    order = sorted(range(len(rows)), key=lambda k: rows[k].total["night_sky_loss_kwh_m2"])
    low, high = order[0], order[-1]
    span = say.period(run)
    low_said, high_said = (show.say(rows[k].total["night_sky_loss_kwh_m2"], "kWh/m2") for k in (low, high))
    most = "Most is lost by " if low_said != high_said else ""
    lines = [
        f"{most}{rows[high].name}: {high_said} to the night sky "
        f"{span}, {percent(patterns[high].through_share)} of it straight through the covering from leaves, "
        "floor and screens."
    ]
    if low_said != high_said:
        lines.append(
            f"Least is lost by {rows[low].name}: {low_said}, "
            f"{percent(patterns[low].through_share)} straight through."
        )
    clear, cloudy = patterns[high].clear_mean, patterns[high].cloudy_mean
    if len(run.days) >= LEAST_NIGHTS and np.isfinite(clear) and np.isfinite(cloudy):
        lines.append(
            f"On the clearest third of nights the sky takes {show.say(clear, 'W/m2')} from "
            f"{rows[high].name}, on the cloudiest third {show.say(cloudy, 'W/m2')}."
        )
    return tuple(lines)
