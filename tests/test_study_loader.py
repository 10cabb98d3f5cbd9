"""The study loader: names, files, overrides, set-points, and the words of its messages."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from canopy.plans import make_house
from canopy.studyfile import Study, load_study
from reports.check_view import check_text
from reports.studyfiles import study_text
from weather.errors import UserError

STARTER = study_text("starter")
ONE = STARTER[: STARTER.index("[[candidate]]")]


def _load(tmp_path: Path, text: str) -> Study:
    path = tmp_path / "study.toml"
    path.write_text(text, encoding="utf-8")
    return load_study(path)


def _own(keys: str = "", name: str = '"own"', covering: str = "glass-clear-4") -> str:
    return f'{ONE}[[candidate]]\nname = {name}\ncovering = "{covering}"\n{keys}\n'


def _refused(tmp_path: Path, text: str) -> str:
    path = tmp_path / "study.toml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(UserError) as refused:
        check_text(path)
    said = str(refused.value)
    assert said.isprintable()
    assert len(said) < 420
    return said


@pytest.mark.parametrize("name", ["=1+1", "+x", "@SUM(A1)", "<script>", "naïve ☃ 名", "x" * 60, "a&b'c"])
def test_names_that_only_look_odd_are_kept(tmp_path: Path, name: str) -> None:
    assert _load(tmp_path, _own(name=f'"{name}"')).plans[0].name == name


@pytest.mark.parametrize(
    ("name", "part"),
    [
        ("a\\nb", "U+000A"),
        ("a\\u001b[31mb", "U+001B"),
        ("\\u202eb", "U+202E"),
        ("\\ufeffb", "U+FEFF"),
        ("a\\u2028b", "U+2028"),
        (" a", "space"),
        ("", "0 characters"),
        ("x" * 61, "61 characters; allowed is a text in quotes, 1 to 60 characters"),
    ],
)
def test_names_that_cannot_be_shown_are_refused(tmp_path: Path, name: str, part: str) -> None:
    said = _refused(tmp_path, _own(name=f'"{name}"'))
    assert "-> name: " in said
    assert part in said


def test_one_name_in_other_letters_is_the_same_name(tmp_path: Path) -> None:
    twin = '[[candidate]]\nname = "ＯＷＮ"\ncovering = "glass-clear-4"\n'  # full-width letters
    assert "two are called" in _refused(tmp_path, _own() + twin)


BAD = {
    "a key of another table": (
        "house.vent_at = 20",
        "house -> vent_at: unknown key; it belongs in [climate]",
    ),
    "an override typo": ("house.spanz = 3", '"own" -> house -> spanz: unknown key (did you mean "spans"?)'),
    "an inner override typo": ("heating.tariff.price = 3", "heating -> tariff -> price: unknown key"),
    "an override out of range": ("crop.height = 9", "crop -> height: found 9; allowed is above 0, up to 6 m"),
    "a choice": ('house.form = "arc"', 'found "arc"; allowed is "gable" or "arch" (did you mean "arch"?)'),
    "an arch without rise": ('house.form = "arch"', "an arch needs rise"),
    "a rise on a gable": ("house.rise = 1.0", "a gable has a pitch, not a rise"),
    "crossing roofs": ('house = { form = "arch", rise = 9.0 }', "-> house: rise = 9 m makes crossing roofs"),
    "crop above gutter": ("crop.height = 5", "house: the crop's height = 5 m"),
    "three screens": ('screens = ["a", "b", "c"]', "found 3 entries; allowed is a list of texts, 0 to 2"),
    "a screen twice": ('screens = ["night screen", "night screen"]', '"night screen" stands twice'),
    "vents at heating": (
        "climate.vent_at = 19.5",
        "vent_at: found 19.5 with heat_day 19; allowed is 1 K above",
    ),
    "vents by date": (
        'climate.heat_day = [["01-01", 10], ["06-01", 24.5]]',
        "found 25 with heat_day 24.5 from 06-01 on",
    ),
    "night above vents": ("climate.heat_night = 30", "vent_at: found 25 with heat_night 30"),
    "pipe above flow": (
        "heating.min_pipe_c = 80\nheating.flow_max_c = 50",
        "min_pipe_c 80 exceeds flow_max_c 50",
    ),
    "wall spectrum": ('house.wall_covering = "w.csv"', "house -> wall_covering: no such file"),
    "huge whole number": (f"crop.height = 1{'0' * 400}", "found a whole number of 401 digits; allowed"),
    "huge date value": (f'climate.vent_at = [["01-01", 1{"0" * 400}]]', "is outside -60 to 60"),
    "beyond any number": (f"crop.height = 1{'0' * 5000}", "a number of thousands of digits"),
    "a planting on another": (
        "[[candidate.crop.planting]]\nplanted = '01-01'\nremoved = '06-01'\nfinal_lai = 3\n"
        "[[candidate.crop.planting]]\nplanted = '05-01'\nremoved = '09-01'\nfinal_lai = 3",
        'candidate "own" -> crop.planting 2: planted 05-01 while planting 1',
    ),
}


@pytest.mark.parametrize("case", BAD)
def test_what_a_candidate_cannot_be(tmp_path: Path, case: str) -> None:
    keys, part = BAD[case]
    assert part in _refused(tmp_path, _own(keys))


def test_overrides_lie_over_the_study_key_by_key(tmp_path: Path) -> None:
    base = ONE.replace(
        'fuel = "natural-gas"', 'fuel = "natural-gas"\ntariff = { price_per_kwh = 0.05, contract_kw = 900 }'
    )
    own = _own("heating.tariff.contract_kw = 500\nhouse.spans = 3").replace(ONE, base)
    plan = _load(tmp_path, own).plans[0]
    assert plan.heating.tariff is not None
    assert (plan.heating.tariff.price_per_kwh, plan.heating.tariff.contract_kw) == (0.05, 500)
    assert (plan.house.spans, plan.house.span_width) == (3, 8.0)
    flat = _load(tmp_path, _own("heating.price_per_kwh = 0.1").replace(ONE, base)).plans[0]
    assert flat.heating.tariff is None
    assert flat.heating.price_per_kwh == 0.1


def test_a_change_of_form_drops_what_the_other_form_had(tmp_path: Path) -> None:
    arch = _load(tmp_path, _own('house = { form = "arch", rise = 1.9 }')).plans[0].house
    assert (arch.form, arch.rise, arch.pitch) == ("arch", 1.9, None)
    arches = ONE.replace('form = "gable"', 'form = "arch"\nrise = 1.9').replace("pitch = 24.0", "")
    gable = _load(tmp_path, _own('house.form = "gable"').replace(ONE, arches)).plans[0].house
    assert (gable.form, gable.rise) == ("gable", None)


def test_leaf_area_and_planting_take_each_others_place(tmp_path: Path) -> None:
    grown = "[[candidate.crop.planting]]\nplanted = '01-01'\nremoved = '06-01'\nfinal_lai = 3"
    assert _load(tmp_path, _own(grown)).plans[0].crop.leaf_area_index is None


def test_an_unheated_house_may_vent_at_any_temperature(tmp_path: Path) -> None:
    plan = _load(tmp_path, _own("climate.vent_at = 5\nheating.capacity_w_m2 = 0")).plans[0]
    assert plan.climate.vent_at.values == (5.0,)


def test_a_covering_of_the_study_may_be_called_like_a_file(tmp_path: Path) -> None:
    own = '[[covering]]\nname = "mine.csv"\nbased_on = "film-pe-plain"\n'
    path = tmp_path / "study.toml"
    path.write_text(_own(covering="mine.csv") + own, encoding="utf-8")
    assert "on the model of film-pe-plain" in check_text(path)


@pytest.mark.parametrize("count", [24, 25])
def test_up_to_24_candidates(tmp_path: Path, count: int) -> None:
    rows = "".join(f'[[candidate]]\nname = "c{k}"\ncovering = "glass-clear-4"\n' for k in range(count))
    if count == 24:
        assert len(_load(tmp_path, ONE + rows).plans) == 24
    else:
        assert "found 25 entries; allowed is [[...]] tables, 1 to 24" in _refused(tmp_path, ONE + rows)


def test_a_byte_order_mark_and_windows_lines_are_read(tmp_path: Path) -> None:
    path = tmp_path / "study.toml"
    path.write_bytes(b"\xef\xbb\xbf" + STARTER.replace("\n", "\r\n").encode())
    assert len(load_study(path).plans) == 3


@pytest.mark.parametrize("name", ["x" * 999, "../" * 200 + "none.epw", "no such.epw"])
def test_files_that_cannot_be_there(tmp_path: Path, name: str) -> None:
    said = _refused(tmp_path, STARTER.replace('shipped = "greensboro"', f'file = "{name}"'))
    assert "weather -> file: no such file" in said


def test_a_screen_that_is_never_drawn(tmp_path: Path) -> None:
    text = STARTER.replace("humidity_gap_pct = 4.0", "from_hour = 5\nuntil_hour = 5")
    assert "write 0 and 24" in _refused(tmp_path, text)


def test_check_says_what_each_candidate_is(tmp_path: Path) -> None:
    path = tmp_path / "study.toml"
    text = STARTER.replace("humidity_gap_pct", "first_day = '10-01'\nlast_day = '04-15'\nhumidity_gap_pct")
    text = re.sub("close_below_w_m2 = [0-9.]+", "close_below_w_m2 = 9.0", text)
    path.write_text(text.replace("# capacity_w_m2 = 150.0", "capacity_w_m2 = 150.0"), encoding="utf-8")
    said = check_text(path)
    for part in (
        "36.1° N, 79.95° W, clock of America/New_York",
        'typical year "greensboro"',
        "glass-clear-4: Clear float glass 4 mm",
        "10 gable spans of 8 m x 60 m = 4800 m2 of floor",
        "tomato, leaf area 0.5 to 3, rows of 1 m every 1.6 m, 2.5 m high, over mulch-woven-white",
        "heated to 19 °C by day (7 to 19 h), 17 °C by night, vents from 25 °C, humidity held to 88 %",
        "at most 150 W/m2, natural-gas",
        "drawn while outside light is below 9 W/m2 and outside air below 14 °C, ",
        ", from 10-01 to 04-15; opens up to 4 % for humidity",
        "single glass, night screen, as single glass but:",
    ):
        assert part in said, part


SPECTRA = {
    "covering": (
        'spectrum = "x.csv"',
        'covering "own" -> spectrum: x.csv, row 3: found -0.5; transmittance below',
    ),
    "leaf": ('crop.leaf = "x.csv"', 'candidate "own" -> crop -> leaf: leaf spectrum x.csv, row 3: '),
    "walls": (
        'house.wall_covering = "x.csv"',
        'candidate "own" -> house -> wall_covering: x.csv, row 3: found -0.5',
    ),
}


@pytest.mark.parametrize("case", SPECTRA)
def test_check_reads_the_spectra(tmp_path: Path, case: str) -> None:
    keys, part = SPECTRA[case]
    rows = "".join(f"{w},0.1,{-0.5 if w == 390 else 0.4}\n" for w in range(380, 2500, 10))
    (tmp_path / "x.csv").write_text(f"wavelength_nm,reflectance,transmittance\n{rows}", encoding="utf-8")
    lab = f'{ONE}[[covering]]\nname = "own"\n{keys}\n[[candidate]]\nname = "a"\ncovering = "own"\n'
    assert part in _refused(tmp_path, lab if case == "covering" else _own(keys))


def test_a_tunnel_from_the_ground_may_hold_a_crop(tmp_path: Path) -> None:
    arch = 'house = { form = "arch", rise = 3.0, gutter_height = 0.0, gutter_width = 0.0 }\ncrop.height = '
    study = _load(tmp_path, _own(f"{arch}2.0"))
    assert make_house(study.plans[0]).crop_plane_height == 0.0
    said = check_text(tmp_path / "study.toml")
    assert "light is taken at gutter height, 0 m" in said
    assert "the crop's height = 3.5 m" in _refused(tmp_path, _own(f"{arch}3.5"))
    low = 'house = { form = "arch", rise = 2.0, gutter_height = 2.0, gutter_depth = 0.25 }\ncrop.height = '
    assert make_house(_load(tmp_path, _own(f"{low}1.5")).plans[0]).crop_plane_height == 1.5
    assert make_house(_load(tmp_path, _own(f"{low}2.5")).plans[0]).crop_plane_height == 1.75


PLACES = {
    "swapped inside both ranges": ("latitude = 5.3\nlongitude = 52.1", "Europe/Amsterdam", "look swapped"),
    "another sea": ("latitude = 52.1\nlongitude = 5.3", "America/New_York", "does not fit the time zone"),
    "the other sign": ("latitude = 36.1\nlongitude = 79.95", "America/New_York", "sign of the longitude"),
}


@pytest.mark.parametrize("case", PLACES)
def test_a_place_that_does_not_fit_its_clock(tmp_path: Path, case: str) -> None:
    place, zone, part = PLACES[case]
    text = re.sub(r"latitude = .*\nlongitude = .*", place, STARTER).replace("America/New_York", zone)
    assert part in _refused(tmp_path, text)


def test_a_computed_year_needs_a_place(tmp_path: Path) -> None:
    text = re.sub(r"latitude = .*\nlongitude = .*", "", STARTER)
    text = text.replace('shipped = "greensboro"', "clear_sky = true")
    assert "weather -> clear_sky: needs latitude" in _refused(tmp_path, text)
    filed = STARTER.replace('shipped = "greensboro"', 'clear_sky = true\nlongwave = "file"')
    assert "a clear-sky year has none" in _refused(tmp_path, filed)
