"""Where each band of radiation goes, what the house does to light, what the crop absorbs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise

import numpy as np

from canopy.bands import THERMAL
from canopy.coveringfigures import whole_thermal
from canopy.longwave import band_emission
from canopy.run import CandidateRun, Run
from reports import sentences as say
from reports.blocks import Block, Chooser, Each, Row, Section, Table, Text
from reports.display import Display, number, percent
from reports.figures import marks_of, month_labels
from reports.figures_bands import band_budget, band_figure, band_table, band_words
from reports.figures_crop import absorbed_figure, leaf_light_figure
from reports.stand_figures import chosen_day, chosen_hour, day_figure, profile_figure
from reports.summary import Summary


def bands(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return the radiation budget of one candidate, band by band."""
    budgets = tuple(band_budget(run, one) for one in run.candidates)
    each = tuple(
        (
            Text((band_words(b, r.name),)),
            band_table(b, r.name, show),
            Text((thermal_words(one),)),
            thermal_table(run, one, show),
        )
        for b, r, one in zip(budgets, rows, run.candidates, strict=True)
    )
    return Section(
        "bands",
        "Radiation, band by band",
        "Where does each band of radiation end?",
        (Chooser("Budget of"), band_figure(budgets), Each(each)),
    )


def _band_names() -> list[str]:
    cuts = THERMAL.edges[1:-1]
    between = [f"{low:g}–{high:g} µm" for low, high in pairwise(cuts)]
    return [f"below {cuts[0]:g} µm", *between, f"above {cuts[-1]:g} µm"]


def thermal_table(run: Run, one: CandidateRun, show: Display) -> Table:
    """Return what the covering does in each thermal band, and what sky and leaves send there by night."""
    dark = run.hours[~one.case.outside.sun_up[run.hours]]
    where = dark if len(dark) else run.hours
    sky = one.case.outside.sky_bands[:, where].mean(1)
    black = band_emission(one.heat.temp_leaf[where])[0].mean(1)
    dry, wet = whole_thermal(one.covering.thermal_dry), whole_thermal(one.covering.thermal_wet)
    columns = (
        dry.transmit,
        wet.transmit,
        dry.emissivity_outside,
        dry.emissivity_inside,
        wet.emissivity_inside,
    )
    rows = tuple(
        Row(
            name,
            (
                show.bare(float(sky[at]), "W/m2", 1),
                show.bare(float(black[at]), "W/m2", 1),
                *(percent(float(values[at]), 1) for values in columns),
            ),
        )
        for at, name in enumerate(_band_names())
    )
    unit = show.text("W/m2")
    return Table(
        f"Long-wave by band, mean of the {'nights' if len(dark) else 'hours'}: {one.plan.name}",
        (
            "band",
            "sky sends down",
            "black leaves send up",
            "covering passes, dry",
            "passes, wet inside",
            "emissivity to the sky",
            "to the crop, dry",
            "to the crop, wet",
        ),
        rows,
        ("", unit, unit, "", "", "", "", ""),
    )


def thermal_words(one: CandidateRun) -> str:
    """Return in a sentence what the covering does in the window of the sky."""
    at = THERMAL.names.index("8-14")
    dry, wet = whole_thermal(one.covering.thermal_dry), whole_thermal(one.covering.thermal_wet)
    in_dry, in_wet = (_some(float(heat.transmit[at])) for heat in (dry, wet))
    return (
        f"In the window of the sky (8–14 µm), where a clear night is coldest, this covering passes {in_dry} "
        f"of the long-wave when dry and {in_wet} when wet inside."
    )


def _some(share: float) -> str:
    return percent(share) if share >= 0.005 else "nothing"


def crop(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return what the crop absorbs."""
    kept = [r for r in rows if r.crop_mol > 0]
    if not kept:
        text = Text(("No candidate has a crop in the reported season.",), lead=True)
        return Section("crop", "The crop", "What does the crop absorb?", (text,))
    top = max(kept, key=lambda r: r.crop_mol)
    lead = [
        f"Under {top.name} leaves absorb {show.say(top.crop_mol, 'mol/m2')} of PAR {say.period(run)}: "
        f"{percent(top.crop_mol / top.outside_mol)} of what falls outside and "
        f"{percent(top.crop_mol / top.inside_mol)} of what reaches the top of the crop. The rest meets the "
        "floor, goes back up, or comes while leaves are few."
    ]
    labels = month_labels(run.months)
    table = Table(
        "Share of the outside PAR that leaves absorb",
        ("candidate", *labels, "all"),
        tuple(
            Row(
                r.name,
                (*(percent(float(v)) for v in absorbed_share(one)), percent(r.crop_mol / r.outside_mol)),
                mark,
            )
            for r, one, mark in zip(rows, run.candidates, marks_of(run), strict=True)
        ),
        folded=True,
    )
    leaves = Table(
        "Leaves in sun and shade, mean of hours with more than 50 W/m² outside",
        (
            "candidate",
            "leaf area",
            "of it sunlit",
            "light on sunlit leaves",
            "light on shaded leaves",
            "diffuse share at the crop",
        ),
        tuple(
            Row(r.name, _leaf_cells(run, one, show), mark)
            for r, one, mark in zip(rows, run.candidates, marks_of(run), strict=True)
        ),
        ("", "m²/m²", "", show.text("umol/m2/s"), show.text("umol/m2/s"), ""),
    )
    blocks: list[Block | Chooser | Each] = [
        Text(tuple(lead), lead=True),
        absorbed_figure(run),
        table,
        Chooser("Leaves under"),
        *_day(run, show),
        leaf_light_figure(run, show),
        leaves,
    ]
    return Section("crop", "The crop", "What does the crop absorb?", tuple(blocks))


def _day(run: Run, show: Display) -> list[Block]:
    """Return one day hour by hour, and one hour of it down the canopy: the study's, else the brightest."""
    day = chosen_day(run)
    hour = chosen_hour(run, day)
    kind = "The brightest day" if run.study.keys.show_day is None else "One day"
    return [
        replace(day_figure(run, day, show), title=f"{kind}, {say.day_words(day)}"),
        replace(profile_figure(run, hour, show), title=f"Down the canopy, {say.hour_words(run.time[hour])}"),
    ]


def absorbed_share(one: CandidateRun) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """Return absorbed over outside PAR by month."""
    outside = np.maximum(one.monthly["outside_par_mol_m2"], 1e-12)
    return np.asarray(one.monthly["crop_par_absorbed_mol_m2"] / outside)


def _leaf_cells(run: Run, one: CandidateRun, show: Display) -> tuple[str, ...]:
    h = one.hourly
    lit = (h["outside_global_w_m2"] > 50.0) & (one.lai[run.hours] > 0)
    if not lit.any():
        return ("–",) * 5
    lai = float(one.lai[run.hours][lit].mean())
    par, diffuse = h["inside_par_umol_m2_s"][lit].sum(), h["inside_par_diffuse_umol_m2_s"][lit].sum()
    return (
        number(lai, 1),
        percent(float(h["sunlit_lai_m2_m2"][lit].mean()) / lai),
        show.bare(float(h["ppfd_sunlit_umol_m2_s"][lit].mean()), "umol/m2/s"),
        show.bare(float(h["ppfd_shaded_umol_m2_s"][lit].mean()), "umol/m2/s"),
        percent(float(diffuse / par)) if par > 0 else "–",
    )
