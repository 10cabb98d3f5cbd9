"""A made-up run for tests of the report's mechanics: smooth arrays that keep the identities, no physics."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np

from canopy.bands import SOLAR, THERMAL
from canopy.designnight import Component, DesignNight, NightLoad
from canopy.designoutside import DesignOutside
from canopy.energy import Supply, energy
from canopy.handcheck import HandCheck
from canopy.heatcase import (
    Climate,
    CoveringHeat,
    CropHeat,
    HeatCase,
    Heating,
    HeatResult,
    Outside,
    Shell,
    SolarGain,
)
from canopy.hourly import closures, hourly_columns
from canopy.house import House
from canopy.ledger import by_group, groups
from canopy.light import HouseTransmission, Light, SunBands
from canopy.optics import Covering, Gap, Ground, Leaf, SolarOptics, ThermalOptics
from canopy.recovery import Recovery
from canopy.run import CandidateRun, Run
from canopy.sizing import Sizing, size
from canopy.studyfile import Plan, Study
from canopy.studykeys import StudyKeys
from weather.record import DesignConditions, Finding, Site, Weather

B, T = len(SOLAR), len(THERMAL)
SHARES = np.array([0.05, 0.45, 0.06, 0.30, 0.14])
FOUR = ("single glass", "single glass, night screen", "twin-wall polycarbonate", "double infrared film")


@dataclass(frozen=True)
class Fake:
    """How one made-up candidate differs."""

    name: str
    par: float = 0.70
    loss: float = 6.0
    layers: int = 1


def fakes(count: int) -> tuple[Fake, ...]:
    """Return candidates with falling light and heat."""
    names = [*FOUR, *(f"candidate {k}" for k in range(5, count + 1))][:count]
    return tuple(Fake(name, 0.72 - 0.02 * k, 6.2 - 0.3 * k, 1 + (k % 3 == 2)) for k, name in enumerate(names))


def make_weather(hours: int = 8760) -> Weather:
    """Return a smooth year with cold winters and every fourth day clouded."""
    at = np.arange(hours)
    day, hour = at // 24, at % 24
    season = -np.cos(2 * np.pi * (day - 10) / 365)
    height = np.sin(np.pi * (hour - 6) / 12) * (0.6 + 0.3 * season)
    up = (hour >= 6) & (hour < 18)
    cosine = np.where(up, np.maximum(height, 0.02), -0.2)
    cloud = np.where(day % 4 == 0, 0.7, 0.1)
    dni = np.where(up, 800 * (1 - cloud), 0.0)
    dhi = np.where(up, (90 + 150 * cloud) * np.maximum(height, 0.02), 0.0)
    temp = 12 + 13 * season + 5 * np.sin(2 * np.pi * (hour - 9) / 24) - 3 * np.sin(day / 3.0)
    full, zero = np.full(hours, 1.0), np.zeros(hours)
    ghi = dhi + dni * np.maximum(cosine, 0)
    findings = (
        Finding(
            "label-shift", "corrected", "hours are labelled at their end; the sun is moved by -30 min", 0
        ),
        Finding("missing", "note", "3 hours of wind were missing and were filled <b>linearly</b>", 3),
    )
    return Weather(
        site=Site(36.1, -79.95, 270.0, "America/New_York"),
        title="Made-up year",
        source="tests: sines",
        utc_offset_h=-5.0,
        step_s=3600.0,
        typical=True,
        clear_sky=False,
        time=np.datetime64("1990-01-01T00:00:00") + at * np.timedelta64(3600, "s"),
        ghi=ghi,
        dni=dni,
        dhi=dhi,
        dni_extra=1361 * full,
        ghi_clear=np.where(up, 900 * np.maximum(height, 0.02), 0.0),
        temp_air=temp,
        temp_dew=temp - 4,
        relative_humidity=75 * full,
        vapour_pressure=900 * full,
        pressure=98000 * full,
        wind_speed=3 * full,
        precipitable_water=1.5 * full,
        longwave_down=5.67e-8 * (temp + 273.15) ** 4 * (0.76 + 0.2 * cloud),
        longwave_modelled=np.ones(hours, bool),
        albedo=0.2 * full,
        zenith=np.degrees(np.arccos(cosine)),
        azimuth=15.0 * hour + zero,
        filled=at < 3,
        in_season=np.ones(hours, bool),
        findings=findings,
        design=DesignConditions(-8.1, -5.6, "header of the file"),
    )


def _solar(par: float, layers: int) -> SolarOptics:
    angles = np.radians(np.array([0.0, 30.0, 60.0, 80.0, 90.0]))
    fall = np.array([1.0, 0.99, 0.92, 0.5, 0.0])
    through = np.full((B, 1), par) * fall
    absorbed = np.full((layers, B, 5), 0.04 / layers) * fall
    back = 1 - through - absorbed.sum(0)
    diffuse = np.full(B, 0.92 * par)
    soaked = np.full((layers, B), 0.05 / layers)
    return SolarOptics(
        angles, through, 0 * through, back, back, absorbed, diffuse, diffuse,
        1 - diffuse - 0.05, 1 - diffuse - 0.05, soaked, soaked,
    )  # fmt: skip


def make_covering(fake: Fake) -> Covering:
    """Return a covering with round numbers."""
    shape = (fake.layers, T)
    thermal = ThermalOptics(np.full(shape, 0.1), np.full(shape, 0.1), np.full(shape, 0.1))
    wet = ThermalOptics(np.full(shape, 0.02), np.full(shape, 0.1), np.full(shape, 0.06))
    solar = _solar(0.87, fake.layers)
    return Covering(
        "made-up", "Made-up sheet", "glass", "from memory", "tests", 0.02, solar, solar, thermal, wet,
        (8400.0,) * fake.layers, (0.004,) * fake.layers, (Gap(0.016),) * (fake.layers - 1),
        tuple(f"layer {k + 1}" for k in range(fake.layers)),
    )  # fmt: skip


def _light(weather: Weather, fake: Fake) -> Light:
    up = np.maximum(np.cos(np.radians(weather.zenith)), 0)
    beam = SHARES[:, None] * (weather.dni * up)
    diffuse = SHARES[:, None] * weather.dhi
    in_beam, in_diffuse = fake.par * beam, 0.9 * fake.par * diffuse + 0.05 * beam
    down = in_beam + in_diffuse
    absorb = np.array([0.9, 0.85, 0.3, 0.2, 0.6])[:, None]
    crop, ground = absorb * down, 0.6 * (1 - absorb) * down
    covering = np.repeat(0.06 * (beam + diffuse)[None], fake.layers, 0) / fake.layers
    hours = len(weather)
    return Light(
        beam, diffuse, in_beam, in_diffuse, crop, 0.6 * crop, ground, down - crop - ground, covering,
        np.zeros((0, B, hours)), 0.03 * (beam + diffuse), np.full(hours, 1.2), (up > 0).astype(float),
    )  # fmt: skip


def _heat(weather: Weather, fake: Fake, light: Light, shape: tuple[int, int]) -> HeatResult:
    hours = len(weather)
    zero = np.zeros(hours)
    solar = light.crop.sum(0) + light.ground.sum(0) + light.covering.sum((0, 1)) + light.structure.sum(0)
    air = np.maximum(18.0, np.minimum(weather.temp_air + 6, 26.0))
    gap = np.maximum(air - weather.temp_air, 0.0)
    clear = np.maximum(380 - weather.longwave_down, 0.0)
    sky, through = 0.08 * fake.loss * clear, 0.02 * fake.loss * clear
    store = 4 * np.sin(2 * np.pi * np.arange(hours) / 24)
    fixed = sky + 0.75 * fake.loss * gap + 2.1 * gap + 0.2 * gap + 1.0 + store
    delivered, venting = np.maximum(fixed - solar, 0.0), np.maximum(solar - fixed, 0.0)
    wet = (gap > 20).astype(float)
    return HeatResult(
        temp_air=air,
        temp_leaf=air - 0.5,
        temp_leaf_sunlit=air + 0.5,
        temp_floor=air - 1,
        temp_covering=np.tile((air + weather.temp_air) / 2, (shape[0], 1)),
        temp_screen=np.zeros((0, hours)),
        temp_pipe=air + delivered / 3,
        vapour_pressure=1500 + zero,
        relative_humidity=80 + zero,
        wet=wet,
        solar=solar,
        heat_delivered=delivered,
        heat_for_humidity=0.05 * delivered,
        sky_loss=sky,
        through_loss=through,
        skin_loss=sky - through,
        surroundings_loss=0.05 * fake.loss * gap,
        convection_loss=0.7 * fake.loss * gap,
        air_change_loss=2.1 * gap,
        venting=venting,
        perimeter_loss=0.2 * gap,
        deep_loss=1.0 + zero,
        soil_store=store,
        air_store=zero,
        vapour_store=zero,
        crop_store=zero,
        pipe_store=zero,
        covering_store=zero,
        drain_loss=zero,
        transpiration=0.0004 * solar,
        floor_evaporation=0.00005 * solar,
        condensation=0.01 * wet,
        vent_open=np.minimum(venting / 300, 1.0),
        screen_drawn=np.zeros((0, hours)),
        air_changes_per_h=1 + venting / 20,
        closure=zero,
        iterations=9,
        retried_hours=0,
        worst="hour 12, air",
    )


def _shell() -> Shell:
    return Shell("gable", 4800.0, 1.09, 0.27, 0.93, 0.45, 24.0, 5.4, 6.3, 0.058, 0.8, 0.7, 1.0, 0.2, 1.0)


def _house() -> House:
    return House(
        "gable", 10, 8.0, 60.0, 4.5, 24.0, 24.0, 0.0, 0.0, 0.2, 0.15, 0.06, 0.08, 1.1, 0.03, 0.04, 2.5
    )


def _case(weather: Weather, covering: Covering, light: Light, sky: Any, lai: float) -> HeatCase:
    hours = len(weather)
    full = np.ones(hours)
    gain = SolarGain(
        light.crop.sum(0), light.crop_sunlit.sum(0), light.ground.sum(0), light.covering.sum(1),
        np.zeros((0, hours)), light.structure.sum(0),
    )  # fmt: skip
    heat = CoveringHeat(
        covering.thermal_dry, covering.thermal_wet, covering.heat_capacity, covering.resistance, covering.gaps
    )
    return HeatCase(
        Outside(3600.0, weather.temp_air, weather.vapour_pressure, weather.pressure, weather.wind_speed,
                sky, weather.zenith < 90),
        _shell(), heat, (), CropHeat(lai * full, 0.2 * full, np.full(T, 0.97), 1.0, 1.2 * full),
        make_ground(),
        Climate(18 * full, 25 * full, 88 * full, np.zeros((0, hours)), -np.inf * full, 5 * full),
        Heating(np.inf, 0.051, 2.5, 90.0), gain, gain,
    )  # fmt: skip


def make_ground() -> Ground:
    """Return a white mulch."""
    return Ground(
        "mulch",
        "White mulch",
        "common practice",
        "tests",
        np.full(B, 0.5),
        np.full(T, 0.9),
        1.0,
        2e6,
        0.1,
        0.1,
    )


def make_leaf() -> Leaf:
    """Return a green leaf."""
    return Leaf("tomato", "Tomato", "published", "tests", np.full(B, 0.1), np.full(B, 0.05), np.full(T, 0.97))


def _transmission(weather: Weather, fake: Fake) -> HouseTransmission:
    n, layers = len(weather), fake.layers
    par = np.full((B, n), fake.par)
    soaked = np.full((layers, B, n), 0.06 / layers)
    bars = np.full((B, n), 0.03)
    return HouseTransmission(
        par, 0 * par, par, np.full(B, fake.par), soaked, soaked, bars, bars, np.full(B, 0.1), np.ones(n)
    )


def _load(watts: float, screens: str) -> NightLoad:
    parts = (
        Component("covering: convection to the wind", 0.7 * watts, 3.36 * watts, "alpha x area x difference"),
        Component("leakage", 0.3 * watts, 1.44 * watts, "1.0 per h x volume"),
    )
    return NightLoad(screens, parts, watts, 4.8 * watts, -4.0, -2.0, 16.0, 60.0, 85.0, 0.0)


def make_night(watts: float) -> DesignNight:
    """Return a design night with screens open and drawn."""
    outside = DesignOutside(
        -8.1, "header of the file", -7.9, 4.0, "common practice", 80.0, 250.0, 98000.0, 210.0,
        np.array([40.0, 60.0, 110.0]), np.arange(80),
    )  # fmt: skip
    hand = HandCheck(
        5.8, 1.36, 26.1, 0.8 * watts, 0.05 * watts, 1.0, 0.2 * watts, 0.01 * watts, 1.06 * watts, "U x A x dT"
    )
    rise = Recovery(2.0, 1.0, 8.0, 8.0, "2 K in 2 h take 8 W/m2")
    return DesignNight(
        outside, 18.0, "set-point", _load(watts, "open"), _load(0.7 * watts, "drawn"), rise, hand, -14.0
    )


def make_sizing(weather: Weather, heat: HeatResult, night: DesignNight | None) -> Sizing:
    """Return the sizing that the project itself works out from made-up hours."""
    q, floor = heat.heat_delivered, 4800.0
    found = size(q, weather.time, weather.temp_air, floor, night, 15.0, weather.typical)
    hours = (np.arange(len(weather)) % 24).astype(float)
    supply = Supply("natural-gas", 0.9, 0.05)
    used = energy(q, heat.temp_pipe, weather.temp_air, weather.relative_humidity, hours, floor, supply)
    return replace(found, energy=used)


def make_study(fake: tuple[Fake, ...], units: str = "si", title: str = "Made-up study") -> Study:
    """Return a study with one plan per made-up candidate; the second one has another ridge direction."""
    raw: dict[str, Any] = {
        "title": title,
        "units": units,
        "weather": {"shipped": "greensboro"},
        "house": {},
        "candidate": [{"name": f.name, "covering": "made-up"} for f in fake],
    }
    keys = StudyKeys.model_validate(raw)
    turned = keys.house.model_copy(update={"ridge_azimuth": 90.0, "leakage_per_hour": 0.7})
    plans = tuple(
        Plan(f.name, "made-up", (), turned if at == 1 else keys.house, keys.crop, keys.climate, keys.heating)
        for at, f in enumerate(fake)
    )
    text = repr(raw)
    return Study(keys, plans, Path("."), "made-up.toml", hashlib.sha256(text.encode()).hexdigest(), text)


def make_run(
    fake: tuple[Fake, ...] | None = None,
    units: str = "si",
    title: str = "Made-up study",
    months: tuple[int, ...] = tuple(range(1, 13)),
    lai: float = 3.0,
    first_days: int | None = None,
    dark: bool = False,
    heated: bool = True,
) -> Run:
    """Return a whole made-up run that reports some months of its year.

    `first_days`: only the first ones of these months; `dark`: no sunlight in them; not `heated`: no heat is
    delivered.
    """
    fake = fakes(4) if fake is None else fake
    weather = make_weather()
    reported = np.isin(weather.time.astype("datetime64[M]").astype(int) % 12 + 1, months)
    if dark:
        lit = {name: getattr(weather, name) * ~reported for name in ("ghi", "dni", "dhi", "ghi_clear")}
        weather = replace(weather, **lit)
    hours = np.flatnonzero(reported)
    hours = hours if first_days is None else hours[: 24 * first_days]
    time = weather.time[hours]
    study = make_study(fake, units, title)
    sun = SunBands(
        SHARES[:, None] * weather.dni, SHARES[:, None] * weather.dhi, np.full(8760, 4.6), np.full(8760, 4.5)
    )
    days, first_day = groups(time, "D")
    labels, first_month = groups(time, "M")
    sky = np.array([0.2, 0.3, 0.5])[:, None] * weather.longwave_down
    done = []
    for f, plan in zip(fake, study.plans, strict=True):
        covering = make_covering(f)
        light = _light(weather, f)
        heat = _heat(weather, f, light, (f.layers, 8760))
        if not heated:
            none = np.zeros(len(weather))
            heat = replace(heat, heat_delivered=none, heat_for_humidity=none)
        case = _case(weather, covering, light, sky, lai)
        night = make_night(1.1 * float(heat.heat_delivered.max()))
        whole = hourly_columns(weather, sun, light, case, heat)
        hourly = {name: values[hours] for name, values in whole.items()}
        done.append(
            CandidateRun(
                plan=plan, covering=covering, screens=(), leaf=make_leaf(), ground=make_ground(),
                house=_house(),
                shell=_shell(), transmission=_transmission(weather, f), light=light, heat=heat, case=case,
                lai=case.crop.lai, hourly=hourly, daily=by_group(hourly, first_day, 3600.0),
                monthly=by_group(hourly, first_month, 3600.0),
                closures=closures(weather, whole, light, heat),
                sizing=make_sizing(weather, heat, night), design=night,
            )
        )  # fmt: skip
    return Run(
        study=study, weather=weather, sun=sun, hours=hours, time=time, days=days,
        months=tuple(str(m) for m in labels), candidates=tuple(done), wall_s={"weather": 0.1, "heat": 0.3},
        versions={"python": "3.11", "canopy-budget": "0.1.0"}, weather_sha256="0" * 64,
    )  # fmt: skip
