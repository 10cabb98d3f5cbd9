"""What one grey band would have said of the selective coverings."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from canopy.run import Run
from reports import sentences as say
from reports.blocks import Row, Section, Table, Text
from reports.display import NONE, Display, number, percent
from reports.figures import marks_of
from reports.summary import Summary

NOTHING_KWH: Final = 0.05  # kWh/m2: heat below this is none, and its share says nothing


def _off(grey: float, banded: float) -> str:
    if banded < NOTHING_KWH:
        return NONE
    return f"{'+' if grey >= banded else '−'}{percent(abs(grey / banded - 1.0), 1)}"


def grey(run: Run, rows: Sequence[Summary], show: Display) -> Section | None:
    """Return the comparison of banded and grey long-wave; None when no covering is selective."""
    found = [
        (r, one.grey, mark)
        for r, one, mark in zip(rows, run.candidates, marks_of(run), strict=True)
        if one.grey is not None
    ]
    if not found:
        return None
    heated = max(g.heat_kwh for _, g, _ in found) >= NOTHING_KWH
    sides = [(g.grey_heat_kwh, g.heat_kwh) if heated else (g.grey_sky_kwh, g.sky_kwh) for _, g, _ in found]
    at = max(range(len(found)), key=lambda k: abs(sides[k][0] - sides[k][1]))
    (worst, _, _), (said, banded) = found[at], sides[at]
    lead = (
        "Some coverings pass long-wave radiation in some bands and stop it in others. A calculation with "
        "one mean value for all wavelengths, as U-values and plain emissivities are, gets these wrong.",
        f"With {worst.name} one grey band would have said {show.say(said, 'kWh/m2')} "
        f"{'of heat' if heated else 'lost to the sky'} {say.period(run)} instead of "
        f"{show.say(banded, 'kWh/m2')}: {_off(said, banded)}.",
    )
    energy, load = show.text("kWh/m2"), show.text("W/m2")
    table = Table(
        "Three thermal bands, as this report computes, and one grey band",
        (
            "candidate",
            "clearest less darkest band",
            "heat, banded",
            "heat, grey",
            "off by",
            "largest hour, banded",
            "largest hour, grey",
            "sky loss, banded",
            "sky loss, grey",
        ),
        tuple(
            Row(
                r.name,
                (
                    f"{number(100 * x.spread)} points",
                    show.bare(x.heat_kwh, "kWh/m2"),
                    show.bare(x.grey_heat_kwh, "kWh/m2"),
                    _off(x.grey_heat_kwh, x.heat_kwh),
                    show.bare(x.peak_w, "W/m2"),
                    show.bare(x.grey_peak_w, "W/m2"),
                    show.bare(x.sky_kwh, "kWh/m2"),
                    show.bare(x.grey_sky_kwh, "kWh/m2"),
                ),
                mark,
            )
            for r, x, mark in found
        ),
        ("", "", energy, energy, "", load, load, energy, energy),
    )
    return Section(
        "grey", "One grey band", "What would one grey band have said?", (Text(lead, lead=True), table)
    )
