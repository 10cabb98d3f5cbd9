"""The `check` command: what a study will compute, in words. Light: nothing is computed here."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Final

from canopy.library_rows import names, table
from canopy.plans import DEFAULT_LAI, make_house
from canopy.screenrules import screen_rule
from canopy.seasonal import Seasonal, day_text
from canopy.studyfile import Plan, Study, load_study
from reports.studyfiles import check_files

if TYPE_CHECKING:
    from canopy.control import ScreenRule
    from canopy.studykeys import CoveringKeys

QUOTED: Final = ("par_normal", "par_hemispherical", "haze", "thermal_transmittance", "u_value")


def check_text(path: Path) -> str:
    """Return what a study will compute, in lines; reads everything but the weather.

    Errors: UserError as `load_study`, and for files that are not there.
    """
    study = load_study(path)
    check_files(study)
    count = "One candidate" if len(study.plans) == 1 else f"{len(study.plans)} candidates"
    lines = [
        f"{path}: in order. {study.keys.title}",
        f"Place: {_place(study)}. Weather: {_weather(study)}. Reported: {_season(study)}.",
        f"{count}, hour by hour: light by band to the crop, long-wave to the sky, heat, heating size.",
    ]
    if study.keys.units == "us":
        lines.append("Report and workbook in US units; this text, CSV and Parquet in SI.")
    before: list[tuple[str, str]] = []
    for at, plan in enumerate(study.plans):
        rows = _rows(plan, study)
        new = [row for row in rows if row not in before] or [("", "the same in every key")]
        like = f", as {study.plans[0].name} but" if at else ""
        lines.append(f"  {plan.name}{like}:")
        lines += [f"    {head:<9} {text}".rstrip() for head, text in new]
        before = before or rows
    return "\n".join(lines)


def _place(study: Study) -> str:
    site = study.keys.site
    if site.latitude is None or site.longitude is None:
        where = "as in the weather file"
    else:
        north, east = ("N" if site.latitude >= 0 else "S"), ("E" if site.longitude >= 0 else "W")
        where = f"{abs(site.latitude):g}° {north}, {abs(site.longitude):g}° {east}"
    parts = [where]
    if site.timezone is not None:
        parts.append(f"clock of {site.timezone}")
    if site.horizon:
        parts.append(f"horizon up to {max(point[1] for point in site.horizon):g}°")
    return ", ".join(parts)


def _weather(study: Study) -> str:
    keys = study.keys.weather
    if keys.shipped is not None:
        return f'typical year "{keys.shipped}", which comes with the program'
    if keys.clear_sky:
        return "a computed clear-sky year, an upper bound for light"
    if keys.file is not None:
        return f"{'folder of years' if (study.folder / keys.file).is_dir() else 'file'} {keys.file}"
    return f"{len(keys.files)} files or folders of years; the first is reported, all size the heating"


def _season(study: Study) -> str:
    keys = study.keys.weather
    return f"{keys.first_day} to {keys.last_day}" if keys.first_day else "the whole record"


def _rows(plan: Plan, study: Study) -> list[tuple[str, str]]:
    rows = [
        ("covering", _covering(plan.covering, study)),
        ("house", _house(plan)),
        ("walls", _walls(plan)),
        ("paint", ", ".join(f"{row[1]:g} from {row[0]}" for row in plan.house.paint)),
        ("crop", _crop(plan)),
        ("climate", _climate(plan)),
        ("heating", _heating(plan)),
    ]
    rows = [row for row in rows if row[1]]
    drawn = [_screen(name, study) for name in plan.screens] or ["none"]
    return rows + [("screen" if at == 0 else "and", text) for at, text in enumerate(drawn)]


def _covering(name: str, study: Study) -> str:
    own = next((keys for keys in study.keys.covering if keys.name == name), None)
    if own is not None:
        return f"{name}: {_own_covering(own)}"
    if name in names("covering"):
        return f"{name}: {table('covering', name)['title']}"
    return f"{name}: laboratory spectrum"


def _own_covering(keys: CoveringKeys) -> str:
    quoted = [f"{key} {value:g}" for key in QUOTED if (value := getattr(keys, key)) is not None]
    if keys.age_years:
        quoted.append(f"{keys.age_years:g} years old")
    base = f"spectrum {keys.spectrum}" if keys.spectrum is not None else f"on the model of {keys.based_on}"
    if keys.dirt_by_month:
        quoted.append(f"dirt up to {max(keys.dirt_by_month):g}, washed {len(keys.wash_days)} times a year")
    return ", ".join([base, *quoted])


def _house(plan: Plan) -> str:
    keys, house = plan.house, make_house(plan)
    if keys.form == "arch":
        roof = f"rise {house.rise:g} m"
    elif house.pitch == house.pitch_other:
        roof = f"pitch {house.pitch:g}°"
    else:
        roof = f"pitch {house.pitch:g}° and {house.pitch_other:g}°"
    spans = f"{keys.spans} {keys.form} span{'s' if keys.spans > 1 else ''}"
    leaks = "by covering" if keys.leakage_per_hour is None else f"{keys.leakage_per_hour:g} per h"
    return (
        f"{spans} of {keys.span_width:g} m x {keys.length:g} m = {house.floor_area:.0f} m2 of floor; gutter "
        f"{keys.gutter_height:g} m, {roof}, ridge towards {keys.ridge_azimuth:g}°; air changes {leaks}"
    )


def _walls(plan: Plan) -> str:
    sides = (("side walls", plan.house.wall_covering), ("gable ends", plan.house.gable_covering))
    return ", ".join(f"{side} of {name}" for side, name in sides if name is not None)


def _crop(plan: Plan) -> str:
    crop = plan.crop
    if crop.planting:
        times = ", ".join(f"{p.planted} to {p.removed} up to {p.final_lai:g}" for p in crop.planting)
        area = f"leaf area by planting: {times}"
    elif crop.leaf_area_index is None:
        area = f"leaf area {DEFAULT_LAI:g} all year (none given)"
    else:
        area = f"leaf area {_span(crop.leaf_area_index)}"
    rows = "closed stand"
    if crop.row_width is not None and crop.row_spacing is not None:
        rows = f"rows of {crop.row_width:g} m every {crop.row_spacing:g} m"
    text = f"{crop.leaf}, {area}, {rows}, {crop.height:g} m high, over {crop.ground_cover}"
    plane = make_house(plan).crop_plane_height
    return text if plane >= crop.height else f"{text}; light is taken at gutter height, {plane:g} m"


def _climate(plan: Plan) -> str:
    climate = plan.climate
    parts = [f"vents from {_span(climate.vent_at)} °C"]
    if plan.heating.capacity_w_m2 != 0.0:
        hours = f"{climate.day_from:g} to {climate.day_until:g} h"
        day, night = _span(climate.heat_day), _span(climate.heat_night)
        parts.insert(0, f"heated to {day} °C by day ({hours}), {night} °C by night")
    if climate.light_raise_k > 0:
        parts.append(f"up to {climate.light_raise_k:g} K more in light")
    if climate.humidity_max_pct < 100:
        parts.append(f"humidity held to {climate.humidity_max_pct:g} %")
    return ", ".join(parts)


def _heating(plan: Plan) -> str:
    keys = plan.heating
    if keys.capacity_w_m2 == 0.0:
        return "none: temperatures float"
    most = "as much as is needed" if keys.capacity_w_m2 is None else f"at most {keys.capacity_w_m2:g} W/m2"
    pump = f", heat pump ({keys.heat_pump.source}) before it" if keys.heat_pump is not None else ""
    pipe = f"{keys.pipe_m_per_m2:g} m of {1000 * keys.pipe_diameter:.0f} mm pipe per m2"
    return f"{most}, {keys.fuel}{pump}; {pipe}, up to {keys.flow_max_c:g} °C"


def _screen(name: str, study: Study) -> str:
    own = next((keys for keys in study.keys.screen if keys.name == name), None)
    based = name if own is None else own.based_on
    of = f"{name} ({table('screen', based)['title']})"
    return f"{of}: {rule_words(screen_rule(name, study))}"


def rule_words(rule: ScreenRule) -> str:
    """Return in words when a screen is drawn."""
    if rule.purpose == "energy":
        when = (
            f"drawn while outside light is below {rule.close_below_w_m2:g} W/m2 and outside air below "
            f"{rule.close_below_outside_c:g} °C"
        )
    elif rule.purpose == "shade":
        when = f"drawn while outside light is above {rule.close_above_w_m2:g} W/m2"
    else:
        when = "drawn whatever the weather"
    if rule.hours is not None:
        when += f", from {rule.hours[0]:g} to {rule.hours[1]:g} h"
    if rule.days is not None:
        when += f", from {day_text(rule.days[0])} to {day_text(rule.days[1])}"
    return f"{when}; opens up to {100 * rule.gap:g} % for humidity" if rule.gap > 0 else when


def _span(values: Seasonal | Sequence[float]) -> str:
    numbers = values.values if isinstance(values, Seasonal) else values
    low, high = min(numbers), max(numbers)
    return f"{low:g}" if low == high else f"{low:g} to {high:g}"
