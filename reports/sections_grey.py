"""What one grey band would have said of the selective coverings."""

from __future__ import annotations

from collections.abc import Sequence

from canopy.run import Run
from reports import sentences as say
from reports.blocks import Row, Section, Table, Text
from reports.display import Display, number, percent
from reports.figures import marks_of
from reports.summary import Summary


def _off(grey: float, banded: float) -> str:
    return f"{'+' if grey >= banded else '−'}{percent(abs(grey / banded - 1.0), 1)}" if banded > 0 else "–"


def grey(run: Run, rows: Sequence[Summary], show: Display) -> Section | None:
    """Return the comparison of banded and grey long-wave; None when no covering is selective."""
    found = [
        (r, one.grey, mark)
        for r, one, mark in zip(rows, run.candidates, marks_of(run), strict=True)
        if one.grey is not None
    ]
    if not found:
        return None
    worst, g, _ = max(found, key=lambda item: abs(item[1].grey_heat_kwh - item[1].heat_kwh))
    lead = (
        "Some coverings pass long-wave radiation in some bands and stop it in others. A calculation with "
        "one mean value for all wavelengths, as U-values and plain emissivities are, gets these wrong.",
        f"With {worst.name} one grey band would have said {show.say(g.grey_heat_kwh, 'kWh/m2')} of heat "
        f"{say.period(run)} instead of {show.say(g.heat_kwh, 'kWh/m2')}: "
        f"{_off(g.grey_heat_kwh, g.heat_kwh)}.",
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
