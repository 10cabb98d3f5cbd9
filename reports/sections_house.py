"""What the house does to the light: by sun height, by month, direct and diffuse."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.run import CandidateRun, Run
from reports import sentences as say
from reports.blocks import Block, Chooser, Each, Figure, Row, Section, Table, Text
from reports.display import NONE, Display, number, percent
from reports.figures import axis, layout, line, marks_of, month_labels
from reports.figures_floor import floor_blocks
from reports.figures_sky import sky_figure, turn_rows, turn_words, turned
from reports.summary import Summary

Floats = NDArray[np.float64]

PAR = SOLAR.index("par")
STEP_DEG = 10.0
LEAST_HOURS = 5  # sun heights seen in fewer hours are not shown


def sun_heights(run: Run) -> tuple[list[str], NDArray[np.int64]]:
    """Return labels of sun-height steps and each reported hour's step (-1: no beam)."""
    height = 90.0 - run.weather.zenith[run.hours]
    beam = run.candidates[0].hourly["outside_beam_w_m2"]
    step = np.where((height > 0) & (beam > 1.0), np.floor(height / STEP_DEG), -1).astype(np.int64)
    top = int(step.max()) if len(step) else -1
    labels = [f"{k * STEP_DEG:g}–{(k + 1) * STEP_DEG:g}°" for k in range(top + 1)]
    return labels, step


def beam_by_height(run: Run, one: CandidateRun, step: NDArray[np.int64], count: int) -> Floats:
    """Return the share of beam PAR that arrives, by sun height, weighted by the beam outside."""
    t, rows = one.transmission, run.hours
    share = (t.beam[PAR] + t.beam_scattered[PAR])[rows]
    weight = one.hourly["outside_beam_w_m2"]
    lit = step >= 0
    total = np.bincount(step[lit], weights=weight[lit], minlength=count)
    got = np.bincount(step[lit], weights=(share * weight)[lit], minlength=count)
    seen = np.bincount(step[lit], minlength=count) >= LEAST_HOURS
    return np.asarray(np.divide(got, total, out=np.full(count, np.nan), where=seen & (total > 0)))


def height_figure(run: Run, labels: Sequence[str], shares: Sequence[Floats]) -> Figure:
    """Return beam transmission of the house over sun height."""
    marks = marks_of(run)
    traces = [line(m, list(labels), 100.0 * v, "%") for m, v in zip(marks, shares, strict=True)]
    return Figure(
        "sun-height",
        "Direct sunlight that arrives, by height of the sun",
        "Share of the direct PAR outside that reaches the top of the crop, by the height of the sun, for "
        "each candidate; the table below has the numbers.",
        (
            {
                "data": traces,
                "layout": layout(axis("height of the sun", showgrid=False), axis("% of the beam")),
            },
        ),
        marks,
        340,
        toggles=True,
    )


def house_light(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return what shape, structure and covering together do to light."""
    labels, step = sun_heights(run)
    shares = [beam_by_height(run, one, step, len(labels)) for one in run.candidates]
    lead = [_lead(rows)]
    if labels:
        low, high = shares[0][0], shares[0][-1]
        if np.isfinite([low, high]).all():
            lead.append(
                f"With {rows[0].name}, {percent(float(low))} of the direct light arrives when the sun stands "
                f"below {STEP_DEG:g}°, {percent(float(high))} at {labels[-1]}."
            )
    blocks: list[Block | Each | Chooser] = [Text(tuple(lead), lead=True)]
    if labels:
        blocks += [height_figure(run, labels, shares), _height_table(run, rows, labels, shares)]
    blocks.append(_month_table(run, rows))
    table = turned(run)
    ridge = run.candidates[0].house.ridge_azimuth
    blocks += [
        Chooser("Sky over"),
        sky_figure(run),
        Text((turn_words(table, rows[0].name, ridge),)),
        turn_rows(table, rows[0].name),
        *floor_blocks(run, show),
    ]
    return Section("house", "Light in the house", "What does the house do to the light?", tuple(blocks))


def _lead(rows: Sequence[Summary]) -> str:
    best, worst = max(rows, key=lambda r: r.house_par), min(rows, key=lambda r: r.house_par)
    text = (
        f"Under an evenly bright sky {percent(best.house_par)} of the PAR reaches the crop with {best.name}"
    )
    return f"{text}." if len(rows) == 1 else f"{text}, {percent(worst.house_par)} with {worst.name}."


def _height_table(
    run: Run, rows: Sequence[Summary], labels: Sequence[str], shares: Sequence[Floats]
) -> Table:
    return Table(
        "PAR that reaches the top of the crop: even sky, and direct sunlight by height of the sun",
        ("candidate", "even sky", *labels),
        tuple(
            Row(r.name, (percent(r.house_par, 1), *(percent(float(v), 1) for v in values)), mark)
            for r, values, mark in zip(rows, shares, marks_of(run), strict=True)
        ),
        folded=True,
    )


def _month_table(run: Run, rows: Sequence[Summary]) -> Table:
    body = []
    for r, one, mark in zip(rows, run.candidates, marks_of(run), strict=True):
        par, soft = one.monthly["inside_par_mol_m2"], one.monthly["inside_par_diffuse_mol_m2"]
        shares = [percent(float(d / p)) if p > 0 else NONE for d, p in zip(soft, par, strict=True)]
        body.append(Row(f"{r.name}: diffuse share", tuple(shares), mark))
        hours = one.monthly["direct_sun_h"]
        body.append(Row(f"{r.name}: direct sun on the crop, h", tuple(number(float(h)) for h in hours), mark))
    return Table(
        f"Diffuse share of the PAR at the crop, and hours of direct sun on it, {say.period(run)}",
        ("by month", *month_labels(run.months)),
        tuple(body),
        folded=True,
    )
