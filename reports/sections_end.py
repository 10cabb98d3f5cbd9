"""Climate inside, inputs, method, weather findings, cautions, and whether every budget closes."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from canopy.cautions import CAUTIONS
from canopy.run import Run
from reports import sentences as say
from reports.blocks import Block, Chooser, Each, Listing, Points, Row, Section, Table, Text
from reports.csvtables import zone_offset
from reports.display import Display, number, place_words
from reports.figures import marks_of
from reports.figures_climate import climate_figure
from reports.keywords import value_words
from reports.method import METHOD
from reports.ranges import range_table
from reports.summary import Summary, notes_of

TEMPERATURES = ("temp_air_min_c", "temp_air_mean_c", "temp_air_max_c", "leaf_min_c", "leaf_sunlit_max_c")
HOURS = (
    ("below_setpoint_h", "below the set-point"),
    ("below_limit_h", "below the crop's limit"),
    ("frost_h", "leaf frost"),
    ("leaf_wet_h", "leaves wet"),
    ("wet_covering_h", "covering wet inside"),
    ("vent_open_h", "vents open"),
    ("screen_drawn_h", "screen drawn"),
)


def _climate_words(rows: Sequence[Summary], show: Display) -> list[str]:
    hot = max(rows, key=lambda r: r.total["temp_air_max_c"])
    lead = [
        f"The warmest hour of all candidates is {show.say(hot.total['temp_air_max_c'], 'degC')} with "
        f"{hot.name}."
    ]
    wet = max(rows, key=lambda r: r.total["leaf_wet_h"])
    if wet.total["leaf_wet_h"] >= 1:
        lead.append(
            f"Leaves are at or below the dew point for up to {number(wet.total['leaf_wet_h'])} hours "
            f"({wet.name}): a sign of where leaf disease starts."
        )
    frost = [r for r in rows if r.total["frost_h"] > 0]
    if frost:
        lead.append(
            say.listed([f"{r.name}: {number(r.total['frost_h'])} hours of leaf frost" for r in frost]) + "."
        )
    return lead


def climate(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return what climate results."""
    marks = marks_of(run)
    table = Table(
        f"Temperatures and humidity inside, {say.period(run)}",
        (
            "candidate",
            "air, lowest",
            "air, mean",
            "air, highest",
            "leaves, lowest",
            "sunlit leaves, highest",
            "vapour deficit, mean",
            "water transpired",
        ),
        tuple(
            Row(
                r.name,
                (
                    *(show.bare(r.total[name], "degC") for name in TEMPERATURES),
                    number(r.total["vpd_mean_kpa"], 2),
                    show.bare(r.total["transpiration_kg_m2"], "kg/m2"),
                ),
                mark,
            )
            for r, mark in zip(rows, marks, strict=True)
        ),
        ("", *((show.text("degC"),) * len(TEMPERATURES)), "kPa", show.text("kg/m2")),
    )
    hours = Table(
        f"Hours of note, {say.period(run)}",
        ("candidate", *(title for _, title in HOURS)),
        tuple(
            Row(r.name, tuple(number(r.total[name]) for name, _ in HOURS), mark)
            for r, mark in zip(rows, marks, strict=True)
        ),
        ("", *(("h",) * len(HOURS))),
    )
    lead = _climate_words(rows, show)
    return Section(
        "climate",
        "Climate inside",
        "What climate does the crop live in?",
        (Text(tuple(lead), lead=True), table, hours, Chooser("Days of"), climate_figure(run, show)),
    )


INPUT_TABLES = (("house", "House"), ("crop", "Crop"), ("climate", "Climate"), ("heating", "Heating"))


def _input_table(run: Run) -> Table:
    rows = []
    for table, title in INPUT_TABLES:
        for key in type(getattr(run.candidates[0].plan, table)).model_fields:
            values = [
                value_words(getattr(getattr(one.plan, table), key), f"{table}.{key}")
                for one in run.candidates
            ]
            same = len(set(values)) == 1
            rows.append(
                Row(f"{title}: {key}", (values[0],) * len(values) if same else tuple(values), strong=not same)
            )
    return Table(
        "Inputs of every candidate, defaults included (bold: not the same for all)",
        ("key", *(one.plan.name for one in run.candidates)),
        tuple(rows),
        folded=True,
        words=True,
    )


def _sources(run: Run) -> Table:
    rows: dict[tuple[str, str], Row] = {}
    for one in run.candidates:
        parts = [
            ("covering", one.covering),
            *(("screen", s) for s in one.screens),
            ("leaf", one.leaf),
            ("floor", one.ground),
        ]
        for what, part in parts:
            rows[what, part.name] = Row(f"{what}: {part.title}", (part.name, part.provenance, part.source))  # type: ignore[attr-defined]
    return Table(
        "Optical figures: where they come from",
        ("part", "name in the study", "how known", "source"),
        tuple(rows.values()),
        words=True,
    )


def inputs(run: Run, rows: Sequence[Summary], show: Display) -> Section:
    """Return what was computed and how."""
    del rows
    weather, site = run.weather, run.weather.site
    lead = (
        f"{weather.title}: {place_words(site.latitude, site.longitude)}, {show.say(site.elevation, 'm')} "
        f"above the sea, clock of the weather file UTC{zone_offset(weather.utc_offset_h)}, schedules in "
        f"{site.timezone} time. {number(len(run.hours))} hours are reported. Source: {weather.source}.",
    )
    notes = notes_of(run)
    blocks: list[Block | Each | Chooser] = [Text(lead, lead=True), _input_table(run), _sources(run)]
    ranges = range_table(run, show)
    if ranges is not None:
        blocks.append(ranges)
    if notes:
        blocks.append(Text(("Assumptions made on the way:",)))
        blocks.append(Points(notes))
    blocks.append(
        Table(
            "Method, stage by stage",
            ("stage", "how it is computed", "after"),
            tuple(Row(stage, (how, source)) for stage, how, source in METHOD),
            words=True,
        )
    )
    blocks.append(Listing(f"The study as read: {Path(run.study.label).name}", run.study.text))
    return Section("inputs", "Inputs and method", "What was computed, and how?", tuple(blocks))


LEVELS = {"note": "noted", "corrected": "corrected", "warning": "look at this"}


def weather(run: Run) -> Section:
    """Return what the checks of the weather record found."""
    found = run.weather.findings
    filled = int(run.weather.filled[run.hours].sum())
    lead = (
        f"{number(filled)} of {number(len(run.hours))} reported hours hold a filled value; each is marked in "
        "hourly.csv."
        if filled
        else "No reported hour holds a filled value."
    )
    if not found:
        blocks: tuple[Block, ...] = (Text((lead, "The checks found nothing to report."), lead=True),)
    else:
        table = Table(
            "What the checks of the weather record found",
            ("check", "how it was dealt with", "finding", "hours"),
            tuple(
                Row(
                    f.check,
                    (LEVELS[f.level], f.text, number(f.count) if f.count else "–"),
                    strong=f.level == "warning",
                )
                for f in found
            ),
            words=True,
        )
        blocks = (Text((lead,), lead=True), table)
    return Section("weather", "Weather quality", "Can the weather record be trusted?", blocks)


def cautions() -> Section:
    """Return the usual cautions."""
    return Section("cautions", "Cautions", "What must be kept in mind?", (Points(CAUTIONS),))


def closing(run: Run) -> Section:
    """Return how well every budget closes: the last page."""
    worst = max(c.worst_w_m2 for one in run.candidates for c in one.closures)
    rows = []
    for one, mark in zip(run.candidates, marks_of(run), strict=True):
        for c in one.closures:
            rows.append(
                Row(one.plan.name, (c.budget, f"{c.worst_w_m2:.1e}", c.at.replace("T", " ")[:16]), mark)
            )
    gap = "less than a thousandth of a W/m²" if worst < 1e-3 else f"{number(worst, 3)} W/m²"
    lead = (
        f"Every budget of every candidate closes: the largest gap in any hour is {gap}. A run with an hour "
        "that stays open above 0.1 W/m² ends without a report."
    )
    retried = sum(one.heat.retried_hours for one in run.candidates)
    again = say.count(retried, "hour was", "hours were")
    extra = (f"{again} solved by a second route.",) if retried else ()
    return Section(
        "closure",
        "Closure",
        "Does it all add up?",
        (
            Text((lead, *extra), lead=True),
            Table(
                "Largest gap of every budget",
                ("candidate", "budget", "largest gap, W/m²", "hour"),
                tuple(rows),
                words=True,
            ),
        ),
    )
