"""One candidate on one weather record: names to records, light, heat; then sizing and tables."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from canopy import library
from canopy.balance import solve
from canopy.choose import Chosen, choose_covering, choose_leaf
from canopy.control import SetPoints, schedule
from canopy.finer import Finer, make_finer
from canopy.growth import lai_series
from canopy.heatcase import Climate, CoveringHeat, CropHeat, HeatCase, HeatResult, Outside, SolarGain
from canopy.hourly import blend
from canopy.house import House
from canopy.houselight import inside
from canopy.light import HouseTransmission, Light, StandResponse, SunBands
from canopy.lightpath import Paths, trace, transmit
from canopy.optics import Covering, Ground, Leaf, Screen, SolarOptics
from canopy.plans import DEFAULT_LAI, make_heating, make_house, make_shell
from canopy.rows import Rows
from canopy.screenrules import screens_of
from canopy.seasonal import parse
from canopy.shading import Paint, paint_factor, paint_optics
from canopy.skybands import sky_bands
from canopy.soiling import dirt_left, soiled
from canopy.stand import Stand, respond
from canopy.studyfile import Plan, Study
from canopy.sunlight import split
from weather.record import Weather
from weather.site import civil_hours, day_of_year

Floats = NDArray[np.float64]

WATER_KG_PER_LAI = 2.0  # kg water per m2 leaf, stems and fruit included: tall fruit crops 4-8 kg/m2 at LAI 3


@dataclass
class Place:
    """One weather record and everything that the candidates share on it; caches fill as they come."""

    study: Study
    weather: Weather
    sun: SunBands
    civil_hour: Floats
    day_of_year: Floats
    outside: Outside
    finer: Finer | None = None  # the record in finer bands, where the study asks for them
    paths: dict[House, Paths] = field(default_factory=dict)
    transmissions: dict[Any, tuple[HouseTransmission, HouseTransmission]] = field(default_factory=dict)
    stands: dict[Any, StandResponse] = field(default_factory=dict)
    coverings: dict[str, Chosen] = field(default_factory=dict)
    warm: dict[tuple[int, int], HeatResult] = field(default_factory=dict)

    def chosen(self, name: str) -> Chosen:
        """Return a covering, built once."""
        if name not in self.coverings:
            self.coverings[name] = choose_covering(name, self.study)
        return self.coverings[name]

    def traced(self, house: House) -> Paths:
        """Return the light paths of a house, traced once."""
        if house not in self.paths:
            points = self.study.keys.site.horizon
            hills = tuple((p[0], p[1]) for p in points) if points else None
            self.paths[house] = trace(house, self.weather.zenith, self.weather.azimuth, horizon=hills)
        return self.paths[house]


@dataclass(frozen=True)
class Budget:
    """Light and heat of one candidate on one record."""

    plan: Plan
    chosen: Chosen
    screens: tuple[Screen, ...]
    leaf: Leaf
    ground: Ground
    house: House
    transmission: HouseTransmission
    stand: StandResponse
    light: Light
    case: HeatCase
    heat: HeatResult
    notes: tuple[str, ...]

    @property
    def covering(self) -> Covering:
        """The covering of the roof."""
        return self.chosen.covering


def make_place(study: Study, weather: Weather) -> Place:
    """Return a record ready for candidates: sunlight by band, schedules, sky by band."""
    outside = Outside(
        step_s=weather.step_s,
        temp_air=weather.temp_air,
        vapour_pressure=weather.vapour_pressure,
        pressure=weather.pressure,
        wind_speed=weather.wind_speed,
        sky_bands=sky_bands(weather.longwave_down, weather.temp_air, weather.vapour_pressure),
        sun_up=weather.zenith < 90.0,
    )
    day = np.asarray(day_of_year(weather), float)
    finer = make_finer(study, weather)
    return Place(study, weather, split(weather), civil_hours(weather), day, outside, finer)


def _climate(plan: Plan, place: Place, rules: tuple[Any, ...]) -> Climate:
    keys, weather = plan.climate, place.weather
    heated = plan.heating.capacity_w_m2 is None or plan.heating.capacity_w_m2 > 0.0
    cold = np.full(len(weather), -np.inf)
    points = SetPoints(
        heat_day=keys.heat_day.steps(place.day_of_year) if heated else cold,
        heat_night=keys.heat_night.steps(place.day_of_year) if heated else cold,
        vent_at=keys.vent_at.steps(place.day_of_year),
        day_from=keys.day_from,
        day_until=keys.day_until,
        ramp_k_per_h=keys.ramp_k_per_h,
        light_addition_k=keys.light_raise_k,
        light_full_w_m2=keys.light_raise_full_w_m2,
    )
    return schedule(
        place.civil_hour,
        place.day_of_year,
        weather.ghi,
        weather.temp_air,
        points,
        rules,
        humidity_max_pct=keys.humidity_max_pct,
        min_pipe_c=plan.heating.min_pipe_c if plan.heating.min_pipe_c is not None else -np.inf,
        limit_c=keys.crop_limit_c,
    )


def _stand(plan: Plan, place: Place, leaf: Leaf, ground: Ground, lai: Floats) -> StandResponse:
    crop = plan.crop
    key = (
        crop.model_dump_json(exclude={"leaf_area_index"}),
        str(crop.leaf_area_index),
        plan.house.ridge_azimuth,
    )
    if key not in place.stands:
        rows = None
        if crop.row_width is not None and crop.row_spacing is not None:
            along = crop.row_azimuth if crop.row_azimuth is not None else plan.house.ridge_azimuth
            rows = Rows(crop.row_width, crop.row_spacing, crop.height, along)
        stand = Stand(lai, crop.leaf_angle_chi, rows)
        weather = place.weather
        place.stands[key] = respond(stand, leaf, ground, weather.zenith, weather.azimuth)
    return place.stands[key]


def _transmissions(
    plan: Plan, place: Place, house: House, chosen: Chosen, finer: Finer | None = None
) -> tuple[HouseTransmission, ...]:
    """Return the transmission with a dry and with a wet covering, in finer bands or in the usual ones."""
    keys = plan.house
    sides = (keys.wall_covering, keys.gable_covering)
    key = (house, plan.covering, *sides, finer is not None)
    if key not in place.transmissions:
        paths = place.traced(house)
        left = dirt_left(chosen.keys, place.weather.time)

        def state(wet: bool) -> HouseTransmission:
            def optics(name: str) -> SolarOptics:
                covering = place.chosen(name).covering
                covering = covering if finer is None else finer.covering(name, covering)
                return covering.solar_wet if wet else covering.solar_dry

            walls, gables = (None if name is None else optics(name) for name in sides)
            return soiled(
                transmit(paths, optics(plan.covering), place.weather, walls=walls, gables=gables), left
            )

        place.transmissions[key] = state(False), state(True)
    return place.transmissions[key]


def _gain(light: Light) -> SolarGain:
    return SolarGain(
        crop=light.crop.sum(0),
        crop_sunlit=light.crop_sunlit.sum(0),
        ground=light.ground.sum(0),
        covering=light.covering.sum(1),
        screen=light.screen.sum(1),
        air=light.structure.sum(0),
    )


def _heat(case: HeatCase, place: Place, plan: Plan, warm: HeatResult | None) -> HeatResult:
    finer = place.finer
    if finer is None:
        return solve(case, warm)
    covering = finer.covering(plan.covering, place.chosen(plan.covering).covering)
    return solve(finer.case(case, covering), warm, finer.thermal)


def leaf_area(plan: Plan, place: Place) -> Floats:
    """Return leaf area per floor area, (N,)."""
    if plan.crop.planting:
        return lai_series(plan.crop.planting, place.day_of_year)
    return lai_series(plan.crop.leaf_area_index or parse(DEFAULT_LAI, 0, 10), place.day_of_year)


def budget(plan: Plan, place: Place) -> Budget:
    """Compute light and heat of one candidate on one record.

    Errors: UserError for what the user can mend, OpenHourError for an hour that will not close.
    """
    chosen = place.chosen(plan.covering)
    covering = chosen.covering
    screens, rules = screens_of(plan, place.study)
    leaf, leaf_notes = choose_leaf(plan, place.study)
    ground = library.ground(plan.crop.ground_cover)
    house = make_house(plan)
    climate = _climate(plan, place, rules)
    lai = leaf_area(plan, place)
    stand = _stand(plan, place, leaf, ground, lai)
    paint: Paint | None = None
    if plan.house.paint:
        paint = paint_optics(paint_factor(place.weather, plan.house.paint))
    finer, drawn = place.finer, climate.screen_drawn
    dry, wet = (
        inside(place.sun, t, place.weather, screens, drawn, stand, paint)
        if finer is None
        else finer.inside(t, place.weather, screens, drawn, stand, paint)
        for t in _transmissions(plan, place, house, chosen, finer)
    )
    case = HeatCase(
        outside=place.outside,
        shell=make_shell(plan, house, covering),
        covering=CoveringHeat(
            covering.thermal_dry,
            covering.thermal_wet,
            covering.heat_capacity,
            covering.resistance,
            covering.gaps,
        ),
        screens=screens,
        crop=CropHeat(lai, stand.diffuse_gap, leaf.emissivity, WATER_KG_PER_LAI, dry.sunlit_lai),
        ground=ground,
        climate=climate,
        heating=make_heating(plan),
        gain_dry=_gain(dry),
        gain_wet=_gain(wet),
    )
    like = (covering.layers, len(screens))
    heat = _heat(case, place, plan, place.warm.get(like))
    place.warm[like] = heat
    return Budget(
        plan,
        chosen,
        screens,
        leaf,
        ground,
        house,
        _transmissions(plan, place, house, chosen)[0],
        stand,
        blend(dry, wet, heat.wet),
        case,
        heat,
        (*_notes(plan, place, chosen, house), *leaf_notes),
    )


def _notes(plan: Plan, place: Place, chosen: Chosen, house: House) -> tuple[str, ...]:
    notes = list(chosen.notes)
    keys = plan.house
    if house.crop_plane_height < plan.crop.height:
        notes.append(
            f"light is taken at gutter height, {house.crop_plane_height:g} m, where the crop is taller "
            f"({plan.crop.height:g} m)"
        )
    if keys.wall_covering is not None or keys.gable_covering is not None:
        notes.append(
            "walls or gable ends carry their own covering for light; "
            "the heat side takes the roof's covering all round"
        )
    for name in (keys.wall_covering, keys.gable_covering):
        if name is not None:
            notes += place.chosen(name).notes
    if place.finer is not None:
        names = dict.fromkeys((plan.covering, keys.wall_covering, keys.gable_covering))
        notes += [place.finer.note(name) for name in names if name is not None]
    return tuple(notes)
