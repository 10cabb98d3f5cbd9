"""The radiation budget band by band: where sunlight of each band ends, per m2 of floor."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.run import CandidateRun, Run
from reports.blocks import Figure, Mark, Row, Spec, Table
from reports.display import Display, number, percent
from reports.figures import (
    TO_BARS,
    TO_COVER,
    TO_CROP,
    TO_GROUND,
    TO_OUT,
    TO_SCREEN,
    axis,
    bar,
    layout,
)

Floats = NDArray[np.float64]

BAND_NAMES: Final = {
    "uv": "UV",
    "par": "PAR",
    "far_red": "far-red",
    "nir_1": "NIR-1",
    "nir_2": "NIR-2",
}


@dataclass(frozen=True)
class BandBudget:
    """Sunlight of the season by band, kWh/m2 floor, each (B,); what is left over went back out."""

    outside: Floats
    arrives: Floats  # at the top of the crop
    crop: Floats
    ground: Floats
    covering: Floats
    screen: Floats
    bars: Floats

    @property
    def out(self) -> Floats:
        """Sent back out; below zero where walls catch more than the roof sends back."""
        return self.outside - self.crop - self.ground - self.covering - self.screen - self.bars


def band_budget(run: Run, one: CandidateRun) -> BandBudget:
    """Return the budget of a candidate over the reported hours."""
    light, rows = one.light, run.hours
    scale = run.weather.step_s / 3.6e6  # W/m2 per step to kWh/m2

    def total(values: Floats) -> Floats:
        return np.asarray(values[..., rows].sum(-1) * scale)

    none = np.zeros(len(SOLAR))
    return BandBudget(
        outside=total(light.outside_beam) + total(light.outside_diffuse),
        arrives=total(light.inside_beam) + total(light.inside_diffuse),
        crop=total(light.crop),
        ground=total(light.ground),
        covering=total(light.covering).sum(0),
        screen=total(light.screen).sum(0) if len(light.screen) else none,
        bars=total(light.structure),
    )


def band_label(name: str) -> str:
    """Return "PAR .40-.70 µm"."""
    at = SOLAR.index(name)
    low, high = SOLAR.edges[at], SOLAR.edges[at + 1]
    return f"{BAND_NAMES.get(name, name)} {low:.2f}–{high:.2f} µm"


def _parts(b: BandBudget) -> list[tuple[Mark, Floats]]:
    parts = [
        (TO_CROP, b.crop),
        (TO_GROUND, b.ground),
        (TO_COVER, b.covering),
        (TO_SCREEN, b.screen),
        (TO_BARS, b.bars),
        (TO_OUT, b.out),
    ]
    return [(mark, values) for mark, values in parts if mark is not TO_SCREEN or values.any()]


def band_spec(b: BandBudget) -> Spec:
    """Return lying bars, one per band, in per cent of what that band brings outside."""
    labels = [band_label(name) for name in SOLAR.names]
    traces = [
        bar(mark, labels, 100.0 * values / np.maximum(b.outside, 1e-12), "% of this band outside", 1)
        for mark, values in _parts(b)
    ]
    return {
        "data": traces,
        "layout": layout(
            axis("% of what the band brings "
            "outside", range=[min(0.0, 1.05 * _lowest(b)), 100.5 - min(0.0, _lowest(b))]),
            axis("", autorange="reversed", ticklabelstandoff=6),
            barmode="relative",
            bargap=0.3,
        ),
    }  # fmt: skip


def _lowest(b: BandBudget) -> float:
    return float((100.0 * b.out / np.maximum(b.outside, 1e-12)).min())


def band_figure(budgets: tuple[BandBudget, ...]) -> Figure:
    """Return the figure with one spec per candidate."""
    shown = [TO_CROP, TO_GROUND, TO_COVER, TO_BARS, TO_OUT]
    if any(b.screen.any() for b in budgets):
        shown.insert(3, TO_SCREEN)
    return Figure(
        "bands",
        "Where the sunlight of each band ends",
        "One bar per band of sunlight, in per cent of what that band brings outside: absorbed by leaves, by "
        "the floor, by the covering, by screens, by gutters, ridges and bars, or sent back out.",
        tuple(band_spec(b) for b in budgets),
        tuple(shown),
        330,
        per_candidate=True,
        note="Below zero: walls and gable ends catch sunlight from beside the floor, more of this band than "
        "is sent back out."
        if any(_lowest(b) < 0 for b in budgets)
        else "",
    )


def band_table(b: BandBudget, name: str, show: Display) -> Table:
    """Return the numbers of one candidate."""
    parts = _parts(b)
    rows = []
    for at, band in enumerate(SOLAR.names):
        rows.append(
            Row(
                band_label(band),
                (
                    show.bare(b.outside[at], "kWh/m2", 1),
                    show.bare(b.arrives[at], "kWh/m2", 1),
                    percent(b.arrives[at] / max(b.outside[at], 1e-12), 1),
                    *(show.bare(values[at], "kWh/m2", 1) for _, values in parts),
                ),
            )
        )
    rows.append(
        Row(
            "all sunlight",
            (
                show.bare(b.outside.sum(), "kWh/m2", 1),
                show.bare(b.arrives.sum(), "kWh/m2", 1),
                percent(b.arrives.sum() / max(b.outside.sum(), 1e-12), 1),
                *(show.bare(values.sum(), "kWh/m2", 1) for _, values in parts),
            ),
            strong=True,
        )
    )
    unit = show.text("kWh/m2")
    return Table(
        f"Sunlight by band: {name}",
        ("band", "outside", "at the top of the crop", "of outside", *(mark.name for mark, _ in parts)),
        tuple(rows),
        ("", unit, unit, "", *(unit for _ in parts)),
    )


def band_words(b: BandBudget, name: str) -> str:
    """Return the budget in one sentence."""
    par, nir = SOLAR.index("par"), [SOLAR.index(n) for n in ("far_red", "nir_1", "nir_2")]
    to_leaves = b.crop[par] / max(b.outside[par], 1e-12)
    nir_leaves = b.crop[nir].sum() / max(b.outside[nir].sum(), 1e-12)
    heat = b.crop.sum() + b.ground.sum()
    return (
        f"Under {name}, leaves take up {percent(to_leaves)} of the outside PAR energy and "
        f"{percent(nir_leaves)} of the NIR (far-red included); of the sunlight that warms leaves and floor, "
        f"{number(100 * b.crop[nir].sum() / max(heat, 1e-12))}\u202f% is NIR in the leaves, which warms the "
        "crop and feeds hardly any photosynthesis."
    )
