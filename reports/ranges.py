"""How far the figures of the coverings can be off, as far as the library says so."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

from canopy import library
from canopy.library_rows import Figure
from canopy.run import Run
from reports.blocks import Row, Table
from reports.display import Display, number, percent

QUOTED: Final = (
    "par_normal", "par_hemispherical", "haze", "thermal_transmittance", "u_value", "spectrum",
)  # fmt: skip


def covering_ranges(run: Run) -> dict[str, tuple[str, Mapping[str, Figure]]]:
    """Return title and figures with ranges of every library covering in a run, by name."""
    known = set(library.covering_names())
    own = {keys.name: keys for keys in run.study.keys.covering}
    found = {}
    for one in run.candidates:
        keys = own.get(one.plan.covering)
        name = one.covering.name
        if keys is not None:  # the library's figures hold where the study quotes none of its own
            name = "" if any(getattr(keys, key) is not None for key in QUOTED) else str(keys.based_on)
        if name in known:
            found[name] = (one.covering.title, library.row(name).figures)
    return found


def range_words(run: Run) -> str | None:
    """Return how much makers and products differ, in one sentence; None without library coverings."""
    found = covering_ranges(run)
    if not found:
        return None
    half = [50.0 * (f["par_hemispherical"].high - f["par_hemispherical"].low) for _, f in found.values()]
    low, high = number(min(half), 1), number(max(half), 1)
    points = f"±{low}" if low == high else f"±{low} to ±{high}"
    return (
        f"From product to product, the diffuse PAR of the coverings compared here lies {points} points "
        "around the figure used. Smaller differences in light are no differences. The ranges stand under "
        "inputs; they were not carried through the year."
    )


def range_table(run: Run, show: Display) -> Table | None:
    """Return the figures of the library coverings with their plausible ranges; None without any."""
    rows = []
    for title, figures in covering_ranges(run).values():
        shares = [
            f"{percent(f.value, 1)} ({number(100 * f.low, 1)} to {number(100 * f.high, 1)})"
            for f in (figures[key] for key in ("par_normal", "par_hemispherical", "thermal_transmittance"))
        ]
        u = figures["u_value_w_m2_cover_k"]
        kind = "W/m2/K"
        cells = (
            *shares,
            f"{show.bare(u.value, kind)} ({show.bare(u.low, kind)} to {show.bare(u.high, kind)})",
        )
        rows.append(Row(title, cells))
    if not rows:
        return None
    return Table(
        "Coverings as the library has them, new and dry, with the range between products",
        ("covering", "PAR, straight", "PAR, diffuse", "long-wave passed", "U-value"),
        tuple(rows),
        ("", "", "", "", show.text("W/m2/K")),
        words=True,
    )
