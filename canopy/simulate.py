"""The pipeline: study to `Run`. It calls the rooms in order and knows no physics of its own."""

from __future__ import annotations

import hashlib
import platform
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from importlib.metadata import version

import numpy as np
from numpy.typing import NDArray

from canopy.balance import solve
from canopy.candidate import Budget, Place, budget, make_place
from canopy.finer import Finer
from canopy.glazing_u import u_value
from canopy.greyband import grey_band
from canopy.hourly import closures, hourly_columns
from canopy.ledger import by_group, groups
from canopy.returns import ManyYears, combine, year_load
from canopy.run import CandidateRun, Closure, Run
from canopy.sizecase import SizingShared, size_candidate, sized_load, sizing_shared
from canopy.studyfile import Study
from weather.errors import OpenHourError
from weather.load import WeatherRequest, load_many, load_weather
from weather.record import Weather

Floats = NDArray[np.float64]
Indices = NDArray[np.intp]
Progress = Callable[[str], None]
PACKAGES = ("canopy-budget", "numpy", "scipy", "pandas", "pvlib", "plotly")
OPEN_W_M2 = 0.1  # widest gap of any budget in any hour, per m2 floor
WHOLE_YEAR_H = 8600  # hours from which a record counts as a whole year


@dataclass
class Clock:
    """Wall time by stage, seconds."""

    seconds: dict[str, float] = field(default_factory=dict)

    @contextmanager
    def stage(self, name: str) -> Iterator[None]:
        """Add the time spent inside to a stage."""
        start = time.perf_counter()
        try:
            yield
        finally:
            self.seconds[name] = self.seconds.get(name, 0.0) + time.perf_counter() - start


@dataclass(frozen=True)
class Calendar:
    """The reported hours and how they fall into days and months."""

    hours: Indices
    first_day: Indices
    first_month: Indices
    days: NDArray[np.datetime64]
    months: tuple[str, ...]


def weather_request(study: Study) -> WeatherRequest:
    """Return what the weather room is asked for."""
    site, keys = study.keys.site, study.keys.weather
    return WeatherRequest(
        latitude=site.latitude,
        longitude=site.longitude,
        elevation=site.elevation,
        timezone=site.timezone,
        file=study.folder / keys.file if keys.file is not None else None,
        files=tuple(study.folder / name for name in keys.files),
        shipped=keys.shipped,
        clear_sky=keys.clear_sky,
        longwave=keys.longwave,
        first_day=keys.first_day,
        last_day=keys.last_day,
        allow_long_gaps=keys.allow_long_gaps,
        columns=keys.columns or None,
        units=keys.units or None,
        utc_offset=keys.utc_offset,
        label=keys.label,
        albedo=keys.albedo,
    )


def weather_hash(weather: Weather) -> str:
    """Return a SHA-256 over the arrays that the budget uses."""
    digest = hashlib.sha256()
    for name in (
        "ghi",
        "dni",
        "dhi",
        "temp_air",
        "vapour_pressure",
        "pressure",
        "wind_speed",
        "longwave_down",
    ):
        digest.update(np.ascontiguousarray(getattr(weather, name)).tobytes())
    return digest.hexdigest()


def _records(study: Study) -> tuple[Weather, tuple[Weather, ...]]:
    """Return the record that is reported and the further years that only size the heating."""
    request = weather_request(study)
    several = bool(request.files) or (request.file is not None and request.file.is_dir())
    if not several:
        return load_weather(request), ()
    first, *others = load_many(request)
    return first, tuple(others)


def _calendar(weather: Weather) -> Calendar:
    hours = np.flatnonzero(weather.in_season)
    days, first_day = groups(weather.time[hours], "D")
    months, first_month = groups(weather.time[hours], "M")
    return Calendar(hours, first_day, first_month, days, tuple(str(month) for month in months))


def _many(done: Budget, place: Place, others: tuple[Place, ...]) -> ManyYears | None:
    """Run a candidate through the further years and return their spread."""
    if not others:
        return None
    runs = [(place, done.heat)] + [(other, budget(done.plan, other).heat) for other in others]
    return combine(
        [
            year_load(p.weather.time, h.heat_delivered, p.weather.temp_air, p.weather.step_s, sized_load(h))
            for p, h in runs
        ]
    )


def must_close(name: str, closed: tuple[Closure, ...]) -> None:
    """Refuse a result with a budget that stays open in some hour (OpenHourError)."""
    for one in closed:
        if not one.worst_w_m2 <= OPEN_W_M2:
            raise OpenHourError(
                f'candidate "{name}", {one.at}: {one.worst_w_m2:.3g} W/m2 stay open in the budget '
                f'"{one.budget}"; allowed is {OPEN_W_M2:g}'
            )


def _finish(
    done: Budget, place: Place, calendar: Calendar, sizes: SizingShared, many: ManyYears | None
) -> CandidateRun:
    weather = place.weather
    hourly = hourly_columns(weather, place.sun, done.light, done.case, done.heat)
    closed = closures(weather, hourly, done.light, done.heat)
    must_close(done.plan.name, closed)
    cover = done.covering
    nominal = u_value(cover.thermal_dry, cover.resistance, cover.gaps)
    sizing, design = size_candidate(done.plan.heating, done.case, done.heat, sizes, nominal, solve, many)
    reported = {name: values[calendar.hours] for name, values in hourly.items()}
    return CandidateRun(
        plan=done.plan,
        covering=done.covering,
        screens=done.screens,
        leaf=done.leaf,
        ground=done.ground,
        house=done.house,
        shell=done.case.shell,
        transmission=done.transmission,
        light=done.light,
        heat=done.heat,
        case=done.case,
        lai=done.case.crop.lai,
        hourly=reported,
        daily=by_group(reported, calendar.first_day, weather.step_s),
        monthly=by_group(reported, calendar.first_month, weather.step_s),
        closures=closed,
        sizing=sizing,
        design=design,
        notes=done.notes,
        grey=grey_band(done.case, done.heat, calendar.hours),
    )


def _run_notes(weather: Weather, finer: Finer | None) -> tuple[str, ...]:
    notes = [finer.said] if finer is not None else []
    if weather.clear_sky:
        notes.append("computed clear-sky year: light is an upper bound, nights are the coldest skies")
    if len(weather) * weather.step_s / 3600.0 < WHOLE_YEAR_H:
        notes.append(
            "the record is shorter than a year: soil and stores start as if the record repeated itself, "
            "and yearly figures cover the record only"
        )
    return tuple(notes)


def simulate(study: Study, progress: Progress | None = None) -> Run:
    """Compute a study.

    Errors: UserError for anything the user can mend; OpenHourError for an hour that will not close.
    """
    say = progress or (lambda text: None)
    clock = Clock()
    with clock.stage("weather"):
        say("weather")
        weather, further = _records(study)
    with clock.stage("sunlight and sky"):
        place = make_place(study, weather)
        others = tuple(make_place(study, one) for one in further)
        sizes = sizing_shared(weather, further)
    calendar = _calendar(weather)
    done: list[CandidateRun] = []
    for at, plan in enumerate(study.plans, start=1):
        say(f"{plan.name} ({at} of {len(study.plans)})")
        with clock.stage("light and heat"):
            found = budget(plan, place)
        with clock.stage("further years"):
            many = _many(found, place, others)
        with clock.stage("sizing and tables"):
            done.append(_finish(found, place, calendar, sizes, many))
    return Run(
        study=study,
        weather=weather,
        sun=place.sun,
        hours=calendar.hours,
        time=weather.time[calendar.hours],
        days=calendar.days,
        months=calendar.months,
        candidates=tuple(done),
        wall_s=clock.seconds,
        versions={"python": platform.python_version(), **{name: version(name) for name in PACKAGES}},
        weather_sha256=weather_hash(weather),
        notes=_run_notes(weather, place.finer),
    )
