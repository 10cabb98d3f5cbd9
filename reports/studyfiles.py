"""The `new` and `check` commands: a starter study, and what a study will compute, in words."""

from __future__ import annotations

import os
from importlib import resources
from pathlib import Path

from canopy.study import WeatherKeys
from canopy.studyfile import Plan, Study, load_study
from weather.errors import UserError, nearest


def study_text(name: str) -> str:
    """Return the text of a study that ships with the package: "starter" or "demo"."""
    return resources.files("reports").joinpath("studies", f"{name}.toml").read_text("utf-8")


def write_starter(path: Path) -> None:
    """Write the starter study; an existing file stays as it is.

    Errors: UserError when the file exists or cannot be written.
    """
    try:
        handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o644)
    except FileExistsError:
        raise UserError(f"{path}: exists already and stays as it is; choose another name") from None
    except OSError as error:
        raise UserError(f"{path}: cannot be written: {error.strerror}") from None
    with os.fdopen(handle, "w", encoding="utf-8") as file:
        file.write(study_text("starter"))


def _weather_line(keys: WeatherKeys, study: Study) -> str:
    if keys.shipped is not None:
        text = f"shipped typical year {keys.shipped!r}"
    elif keys.clear_sky:
        text = "a computed clear-sky year: an upper bound for light"
    elif keys.file is not None:
        text = f"file {keys.file}"
    else:
        text = f"{len(keys.files)} file(s) or folders of years"
    if keys.first_day:
        text += f", reported from {keys.first_day} to {keys.last_day}"
    return text


def check_files(study: Study) -> None:
    """Refuse a study that names files that are not there (UserError)."""
    from weather.typical import shipped_names

    keys = study.keys.weather
    if keys.shipped is not None and keys.shipped not in shipped_names():
        hint = nearest(keys.shipped, shipped_names()) or f"; known: {', '.join(shipped_names())}"
        raise UserError(f'{study.label}: weather -> shipped: unknown year "{keys.shipped}"{hint}')
    names = [("weather -> file", keys.file)] + [("weather -> files", f) for f in keys.files]
    names += [(f'covering "{c.name}" -> spectrum', c.spectrum) for c in study.keys.covering]
    for plan in study.plans:
        names += [
            (f'candidate "{plan.name}" -> {key}', value)
            for key, value in (("covering", plan.covering), ("crop -> leaf", plan.crop.leaf))
            if value.lower().endswith(".csv")
        ]
    for crumb, name in names:
        if name is not None and not (study.folder / name).exists():
            raise UserError(f"{study.label}: {crumb}: no such file: {study.folder / name}")


def _plan_line(plan: Plan) -> str:
    house = plan.house
    roof = f"rise {house.rise:g} m" if house.form == "arch" else f"pitch {house.pitch or 24:g}°"
    screens = f" with {', '.join(plan.screens)}" if plan.screens else ""
    return (
        f"  {plan.name}: {plan.covering}{screens}; {house.spans} {house.form} spans of "
        f"{house.span_width:g} m x {house.length:g} m, gutter {house.gutter_height:g} m, {roof}, "
        f"ridge {house.ridge_azimuth:g}°"
    )


def check_text(path: Path) -> str:
    """Return what a study will compute, in a few lines; reads everything but the weather itself.

    Errors: UserError as `load_study`, and for files that are not there.
    """
    study = load_study(path)
    check_files(study)
    keys = study.keys
    site = keys.site
    place = (
        f"{site.latitude:g}°, {site.longitude:g}°" if site.latitude is not None else "as in the weather file"
    )
    crop, climate = study.plans[0].crop, study.plans[0].climate
    lines = [
        f"{path}: in order. {keys.title}",
        f"Site: {place}. Weather: {_weather_line(keys.weather, study)}.",
        f"Crop: {crop.leaf} over {crop.ground_cover}. Heated to {_span(climate.heat_day.values)} by day, "
        f"{_span(climate.heat_night.values)} by night, vents at {_span(climate.vent_at.values)}.",
        f"{len(study.plans)} candidate(s), each hour by hour: light by band, crop, long-wave, heat:",
        *(_plan_line(plan) for plan in study.plans),
    ]
    return "\n".join(lines)


def _span(values: tuple[float, ...]) -> str:
    low, high = min(values), max(values)
    return f"{low:g} °C" if low == high else f"{low:g} to {high:g} °C"
