"""The page as text: sections, escaping, one file, headings in order, size."""

from __future__ import annotations

import json
import re
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise

import numpy as np
import pytest

from canopy import library
from canopy.columns import LOSSES
from reports.page import json_for_script, page_text
from tests.reportcase import Fake, fakes, make_run, make_sizing

EVIL = (
    "<img src=x onerror=hit()>",
    "</script><script>hit()</script>",
    "{{ 7*7 }} {% raw %} <!--",
    '"><b onclick="hit()">&lt;i&gt;',
)


class Reader(HTMLParser):
    """Collects what the tests ask about."""

    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.headings: list[tuple[int, str]] = []
        self.data: dict[str, str] = {}
        self.words: list[str] = []
        self._in: str = ""
        self._script: str | None = None

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))
        self._in = tag
        if re.fullmatch("h[1-6]", tag):
            self.headings.append((int(tag[1]), ""))
        self._script = dict(attrs).get("id") if tag == "script" else None
        if tag == "script" and self._script:
            self.data[self._script] = ""

    def handle_endtag(self, tag: str) -> None:
        self._in, self._script = "", None

    def handle_data(self, data: str) -> None:
        if self._script:
            self.data[self._script] += data
        elif self._in not in ("script", "style"):
            self.words.append(data)
        if re.fullmatch("h[1-6]", self._in):
            level, text = self.headings[-1]
            self.headings[-1] = (level, text + data)


def read(text: str) -> Reader:
    reader = Reader()
    reader.feed(text)
    return reader


@pytest.fixture(scope="module")
def page() -> str:
    return page_text(make_run())


@pytest.fixture(scope="module")
def evil() -> str:
    return page_text(make_run(tuple(Fake(name) for name in EVIL), title=EVIL[1]))


def test_sections_stand_in_the_order_a_grower_asks(page: str) -> None:
    sections = [a["id"] for tag, a in read(page).tags if tag == "section"]
    expected = [
        "which",
        "light",
        "heat",
        "nights",
        "size",
        "bands",
        "house",
        "crop",
        "climate",
        "inputs",
        "weather",
    ]
    assert [s for s in sections if s in expected] == expected
    assert sections[-2:] == ["cautions", "closure"]


def test_headings_step_down_one_level_at_a_time(page: str) -> None:
    levels = [level for level, _ in read(page).headings]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(b - a <= 1 for a, b in pairwise(levels))


def test_nothing_is_fetched_and_ids_are_unique(page: str) -> None:
    reader = read(page)
    for _, attrs in reader.tags:
        for name in ("src", "href", "action", "data", "poster", "srcset"):
            value = attrs.get(name)
            assert value is None or value.startswith(("#", "data:")), (name, value)
    ids = [a["id"] for _, a in reader.tags if "id" in a]
    assert len(ids) == len(set(ids))
    links = {a["href"] for tag, a in reader.tags if tag == "a"}
    assert {link for link in links if link is not None and link[1:] not in ids} == set()
    assert "url(" not in page[: page.index("</style>")]
    policy = next(a["content"] for tag, a in reader.tags if tag == "meta" and a.get("http-equiv"))
    assert policy is not None
    assert policy.startswith("default-src 'none'")


def test_every_figure_has_words_and_data(page: str) -> None:
    reader = read(page)
    plots = [a for _, a in reader.tags if a.get("class") == "plot"]
    assert len(plots) >= 10
    for plot in plots:
        assert plot["role"] == "img"
        assert len(plot["aria-label"] or "") > 40
        specs = json.loads(reader.data[f"d-{(plot['id'] or '')[2:]}"])
        assert len(specs) == (4 if plot.get("data-each") else 1)
        assert all(spec["data"] for spec in specs)


def test_names_that_users_type_stay_text(evil: str) -> None:
    reader = read(evil)
    tags = {tag for tag, _ in reader.tags}
    assert not tags & {"img", "b", "i"}
    assert (
        sum(tag == "script" for tag, _ in reader.tags)
        == sum("application/json" in str(a) for _, a in reader.tags) + 2
    )
    assert not any(name.startswith("on") for _, attrs in reader.tags for name in attrs)
    words = "".join(reader.words)
    for name in EVIL:
        assert name in words
    assert (1, EVIL[1]) in reader.headings


def test_the_plotter_gets_no_markup_from_names(evil: str) -> None:
    reader = read(evil)

    def strings(value: object) -> list[str]:
        if isinstance(value, str):
            return [value]
        items = value.values() if isinstance(value, dict) else value if isinstance(value, list) else ()
        return [text for item in items for text in strings(item)]

    for name, text in reader.data.items():
        if name.startswith("d-"):
            for piece in strings(json.loads(text)):
                assert "<" not in re.sub(r"<br>|<extra></extra>", "", piece), piece


def test_json_in_a_script_cannot_end_it() -> None:
    value = {"name": "</script><!-- & \u2028"}
    text = str(json_for_script(value))
    assert not set("<>&\u2028") & set(text)
    assert json.loads(text) == value


def test_the_opening_carries_the_numbers(page: str) -> None:
    words = "".join(read(page).words)
    run = make_run()
    least = min(one.daily["heat_delivered_kwh_m2"].sum() for one in run.candidates)
    assert f"Least heat: double infrared film, {least:.0f}\u00a0kWh/m² a year" in words
    assert "Most light: single glass" in words
    assert "Each budget" not in words
    assert "Every budget of every candidate closes" in words


def test_weather_findings_cautions_and_study_sources_are_shown(page: str) -> None:
    words = " ".join(read(page).words)
    assert "3 hours of wind were missing and were filled <b>linearly</b>" in words
    for word in ("Snow:", "Combustion:", "Local codes", "licensed"):
        assert word in words
    assert "from memory" in words
    assert "common practice" in words


def test_us_units_on_request() -> None:
    words = " ".join(read(page_text(make_run(units="us"))).words)
    for unit in ("kBtu/ft²", "Btu/h ft²", "°F", "kBtu/h"):
        assert unit in words
    assert "°C" not in words.replace("60 °C scalds", "")
    assert "kWh/m²" not in words


def test_twelve_candidates_stay_below_eight_megabytes() -> None:
    assert len(page_text(make_run(fakes(12))).encode()) < 8_000_000


@pytest.mark.parametrize("months", [(7,), (1, 2, 11, 12), (3, 4, 5)])
def test_a_season_is_reported_as_a_season(months: tuple[int, ...]) -> None:
    words = "".join(read(page_text(make_run(fakes(2), months=months))).words)
    assert "totals from 1 " in words
    assert (
        "a year" not in words.split("Cautions")[0].replace("h a year", "").replace("35 h a year", "")[:2000]
    )


def test_one_candidate_without_a_crop() -> None:
    reader = read(page_text(make_run(fakes(1), lai=0.0)))
    assert not any(tag == "select" for tag, _ in reader.tags)
    assert "Light: 75\u202f% of the outside PAR" in "".join(reader.words)


def test_ranges_of_library_coverings_are_said() -> None:
    run = make_run(fakes(2))
    named = replace(run.candidates[0].covering, name="glass-clear-4", title="Clear float glass 4 mm")
    first = replace(run.candidates[0], covering=named)
    words = "".join(read(page_text(replace(run, candidates=(first, run.candidates[1])))).words)
    assert "points around the figure used" in words
    figure = library.row("glass-clear-4").figures["par_hemispherical"]
    assert f"{100 * figure.value:.1f}\u202f% ({100 * figure.low:.1f} to {100 * figure.high:.1f})" in words
    assert "points around the figure used" not in "".join(read(page_text(run)).words)


def test_the_share_of_the_sky_is_of_all_that_leaves(page: str) -> None:
    daily = make_run().candidates[0].daily
    losses = [daily[name.replace("_w_m2", "_kwh_m2")].sum() for name in LOSSES]
    share = daily["sky_loss_kwh_m2"].sum() / sum(losses)
    assert f"{100 * share:.0f}\u202f% goes to the sky as long-wave radiation" in "".join(read(page).words)


def test_a_polar_day_has_a_page_too() -> None:
    run = make_run(fakes(1))
    one = run.candidates[0]
    bright = replace(one.case, outside=replace(one.case.outside, sun_up=np.ones(8760, bool)))
    words = "".join(read(page_text(replace(run, candidates=(replace(one, case=bright),)))).words)
    assert "no hour with the sun below the horizon" in words


def test_an_unheated_tunnel_has_a_page_too() -> None:
    run = make_run(fakes(2))
    cold = []
    for one in run.candidates:
        none = {name: 0.0 * one.hourly[name] for name in ("heat_delivered_w_m2", "heat_for_humidity_w_m2")}
        days = {name: 0.0 * one.daily[name] for name in ("heat_delivered_kwh_m2", "heat_for_humidity_kwh_m2")}
        months = {name: 0.0 * one.monthly[name] for name in days}
        heat = replace(one.heat, heat_delivered=np.zeros(8760))
        cold.append(
            replace(
                one,
                hourly={**one.hourly, **none},
                daily={**one.daily, **days},
                monthly={**one.monthly, **months},
                heat=heat,
                design=None,
                sizing=make_sizing(run.weather, heat, None),
            )
        )
    words = "".join(read(page_text(replace(run, candidates=tuple(cold)))).words)
    assert "No candidate takes heat: temperatures float." in words
    coldest = min(one.daily["leaf_min_c"].min() for one in cold)
    assert f"Coldest leaves: {coldest:.1f}\u00a0°C with single glass (0 hours of leaf frost" in words
    assert "no heat is asked for" in words
    assert "nan" not in re.sub(r"[a-z]*nan[a-z]+", "", words.lower())
