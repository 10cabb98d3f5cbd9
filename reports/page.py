"""report.html: one self-contained page. Nothing is fetched; the plotter travels packed inside."""

from __future__ import annotations

import base64
import gzip
import json
from functools import cache
from importlib.metadata import version
from importlib.util import find_spec
from pathlib import Path
from typing import Any

from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup

from canopy.run import Run
from reports import (
    sections_choice,
    sections_end,
    sections_grey,
    sections_house,
    sections_night,
    sections_radiation,
    sections_size,
    sections_warmth,
)
from reports.blocks import Section
from reports.display import Display
from reports.figures import HATCHES, SYMBOL_SIGNS, marks_of
from reports.season import in_order
from reports.sentences import period
from reports.summary import summaries

PACK_LEVEL = 6  # gzip: .12 s; level 9 takes half as long again and saves a thousandth


@cache
def packed_plotly() -> str:
    """Return the plotter's script, gzipped and in base64 (about 2 MB), from the installed package."""
    found = find_spec("plotly")
    if found is None or not found.submodule_search_locations:
        raise RuntimeError("plotly is not installed")
    script = Path(found.submodule_search_locations[0]) / "package_data" / "plotly.min.js"
    return base64.b64encode(gzip.compress(script.read_bytes(), PACK_LEVEL, mtime=0)).decode("ascii")


def json_for_script(value: Any) -> Markup:
    """Return JSON that may stand inside a script element whatever texts it holds."""
    text = json.dumps(value, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    for sign in "<>&\u2028\u2029":
        text = text.replace(sign, f"\\u{ord(sign):04x}")
    return Markup(text)


def sections_of(run: Run) -> tuple[Section, ...]:
    """Return every section of the report, in order."""
    run = in_order(run)
    rows, show = summaries(run), Display(run.study.keys.units)
    found = (
        sections_choice.which(run, rows, show),
        sections_choice.light(run, rows, show),
        sections_warmth.heat(run, rows, show),
        sections_night.nights(run, rows, show),
        sections_size.size(run, rows, show),
        sections_radiation.bands(run, rows, show),
        sections_house.house_light(run, rows, show),
        sections_radiation.crop(run, rows, show),
        sections_grey.grey(run, rows, show),
        sections_end.climate(run, rows, show),
        sections_end.inputs(run, rows, show),
        sections_end.weather(run),
        sections_end.cautions(),
        sections_end.closing(run),
    )
    return tuple(section for section in found if section is not None)


def environment() -> Environment:
    """Return the templates, everything escaped unless it says otherwise."""
    made = Environment(
        loader=PackageLoader("reports", "templates"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    made.filters["script_json"] = json_for_script
    made.globals["signs"] = SYMBOL_SIGNS
    made.globals["hatches"] = HATCHES
    return made


def single_text(title: str, over: str, under: str, sections: tuple[Section, ...]) -> str:
    """Return a page about one thing (a covering, a weather record): sections of text, tables, figures."""
    templates = environment()
    loader = templates.loader
    assert loader is not None
    return templates.get_template("single.html").render(
        title=title,
        over=over,
        under=under,
        sections=sections,
        version=version("canopy-budget"),
        css=Markup(loader.get_source(templates, "page.css")[0]),
        js=Markup(loader.get_source(templates, "page.js")[0]),
        plotter=Markup(packed_plotly()),
    )


def page_text(run: Run) -> str:
    """Return the whole page."""
    templates = environment()
    source = templates.loader
    assert source is not None
    raw = {name: Markup(source.get_source(templates, name)[0]) for name in ("page.css", "page.js")}
    return templates.get_template("page.html").render(
        title=run.study.keys.title,
        place=run.weather.title,
        span=period(run),
        version=run.versions.get("canopy-budget", ""),
        marks=marks_of(run),
        sections=sections_of(run),
        css=raw["page.css"],
        js=raw["page.js"],
        plotter=Markup(packed_plotly()),
    )


def write_page(run: Run, path: Path) -> None:
    """Write the report."""
    path.write_text(page_text(run), encoding="utf-8")
