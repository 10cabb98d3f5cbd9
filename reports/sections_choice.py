"""The first questions: which candidate, how much light by month, how much heat by month."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import Final

import numpy as np

from canopy.coveringfigures import figures
from canopy.run import CandidateRun, Run
from reports import sentences as say
from reports.blocks import Figure, Points, Row, Section, Table, Text
from reports.csvtables import mean_dli
from reports.display import Display, number, percent
from reports.figures import marks_of, month_labels
from reports.figures_light import month_light_figures, trade_figure
from reports.keywords import difference_words
from reports.summary import Summary, house_differences

DIRTY: Final = (
    "Dirt is counted in every total of light and heat. The map of the sky and the turned ridge show the "
    "house with a clean covering."
)
UNLIKE: Final = (
    "Not every candidate has the same house, crop, climate and heating. Where they differ, part of the "
    "difference in light, leakage and heat comes from there and not from the covering:"
)


def which(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return the opening section: the answer, the comparison, what is covering and what is house."""
    blocks: list[Text | Points | Table | Figure] = [Text(say.answer(run, rows, show), lead=True)]
    blocks.append(comparison(run, rows, show))
    if len(rows) > 1:
        blocks.append(trade_figure(run, rows, show))
        blocks.append(Points((*say.trades(run, rows, show), *say.verdicts(rows))))
    blocks += covering_and_house(run, rows, show)
    notes = say.doubts(run, rows)
    if notes:
        blocks.append(Points(notes))
    return Section("which", "The choice", "Which covering gives what, and costs what?", tuple(blocks))


def comparison(run: Run, rows: Sequence[Summary], show: Display) -> Table:
    """Return the table that opens the report."""
    priced = any(one.cost is not None for one in rows)
    columns: list[tuple[str, str, Callable[[Summary, CandidateRun], str]]] = [
        ("PAR at the crop, of outside", "", lambda r, c: percent(r.light_share, 1)),
        (
            f"daily light, {say.dark_words(run, short=True)}",
            "mol/m² a day",
            lambda r, c: number(r.dark_dli, 1),
        ),
        ("PAR the leaves absorb", show.text("mol/m2"), lambda r, c: show.bare(r.crop_mol, "mol/m2")),
        ("heat", show.text("kWh/m2"), lambda r, c: show.bare(r.heat_kwh, "kWh/m2")),
        (
            "lost to the night sky",
            show.text("kWh/m2"),
            lambda r, c: show.bare(r.total["night_sky_loss_kwh_m2"], "kWh/m2"),
        ),
        ("largest hour", show.text("W/m2"), lambda r, c: show.bare(r.peak_w, "W/m2")),
        ("design night", show.text("W/m2"), lambda r, c: show.bare(c.sizing.design_night_w_m2, "W/m2")),
        ("boiler", show.text("kW"), lambda r, c: show.bare(c.sizing.boiler_kw, "kW")),
    ]
    if priced:
        what = "fuel, whole house" + ("" if len(run.hours) == len(run.weather) else " and record")
        columns.append((what, rows[0].currency, lambda r, c: say.money(replace(r, currency=""))))
    body = tuple(
        Row(one.name, tuple(cell(one, cand) for _, _, cell in columns), mark)
        for one, mark, cand in zip(rows, marks_of(run), run.candidates, strict=True)
    )
    return Table(
        f"What each candidate gives and takes, {say.period(run)}",
        ("candidate", *(head for head, _, _ in columns)),
        body,
        ("", *(unit for _, unit, _ in columns)),
    )


def covering_and_house(run: Run, rows: Sequence[Summary], show: Display) -> list[Text | Table | Points]:
    """Return the table that keeps apart what comes from the covering and what from the house."""
    body, lines = [], []
    dirty = any(one.dirt > 0 for one in rows)
    for at, (one, cand, mark) in enumerate(zip(rows, run.candidates, marks_of(run), strict=True)):
        shell, sheet = cand.shell, figures(cand.covering)
        body.append(
            Row(
                one.name,
                (
                    percent(sheet.par_hemispherical, 1),
                    *((percent(one.dirt, 1),) if dirty else ()),
                    percent(sheet.haze),
                    percent(sheet.thermal_transmittance),
                    show.bare(sheet.u_value_w_m2_cover_k, "W/m2/K"),
                    percent(one.shape_share, 1),
                    number(shell.roof_ratio + shell.wall_ratio, 2),
                    number(shell.leakage_per_hour, 2),
                    show.bare(one.total["air_change_loss_kwh_m2"], "kWh/m2"),
                ),
                mark,
            )
        )
        found = [item for item in house_differences(run, at) if at]
        if found:
            lines.append(f"With {one.name}: {difference_words(found, rows[0].name)}.")
    table = Table(
        "What comes from the covering, what from the house",
        (
            "candidate",
            "covering: passes PAR, diffuse" + (", clean" if dirty else ""),
            *(("of that, dirt takes",) if dirty else ()),
            "haze",
            "passes long-wave",
            "U-value",
            "house: lets through",
            "covering per floor",
            "leakage",
            "heat lost by leakage",
        ),
        tuple(body),
        ("",) * (5 if dirty else 4) + (show.text("W/m2/K"), "", "m²/m²", "per hour", show.text("kWh/m2")),
    )
    blocks: list[Text | Table | Points] = [table]
    if dirty:
        blocks.append(Text((DIRTY,)))
    if lines:
        blocks += [Text((UNLIKE,)), Points(tuple(lines))]
    return blocks


def light(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return light by month."""
    outside = mean_dli(run, run.candidates[0])[0]
    inside = [mean_dli(run, one)[1] for one in run.candidates]
    best, worst = int(np.argmin(outside)), int(np.argmax(outside))
    months = [say.MONTHS[int(m[5:7]) - 1] for m in run.months]
    alike = number(outside[best], 1) == number(outside[worst], 1)
    most = "" if alike else f" and {number(outside[worst], 1)} in {months[worst]}"
    lead = [f"Outside, the mean day brings {number(outside[best], 1)} mol/m² of PAR in {months[best]}{most}."]
    at_best = [values[best] for values in inside]
    top, low = int(np.argmax(at_best)), int(np.argmin(at_best))
    if all(np.isfinite(at_best)) and number(at_best[top], 1) != number(at_best[low], 1):
        lead.append(
            f"In {months[best]} the crop gets {number(at_best[top], 1)} mol/m² a day under {rows[top].name} "
            f"and {number(at_best[low], 1)} under {rows[low].name}."
        )
    elif np.isfinite(at_best[0]):
        under = "" if len(rows) == 1 else " under every candidate"
        lead.append(f"In {months[best]} the crop gets {number(at_best[0], 1)} mol/m² a day{under}.")
    if not all(np.isfinite(values).all() for values in inside):
        lead.append("Months without a crop have no daily light at the crop.")
    head = ("candidate", *month_labels(run.months))
    table = Table(
        "Daily light (DLI): outside, and at the top of the crop (mean of the days with a crop), mol/m² a day",
        head,
        (
            Row("outside", tuple(number(v, 1) for v in outside)),
            *(
                Row(r.name, tuple(number(v, 1) for v in values), mark)
                for r, values, mark in zip(rows, inside, marks_of(run), strict=True)
            ),
        ),
        folded=True,
    )
    figures = month_light_figures(run, outside, inside)
    return Section(
        "light",
        "Light by month",
        "How much light reaches the crop?",
        (Text(tuple(lead), lead=True), *figures, table),
    )
