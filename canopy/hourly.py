"""From light and heat of one candidate to its hourly columns, and the closure of every budget."""

from __future__ import annotations

from dataclasses import fields

import numpy as np
from numpy.typing import NDArray

from canopy.bands import NIR_BANDS, SOLAR
from canopy.columns import BY_NAME, COLUMNS, GAINS, LOSSES, STORES
from canopy.degreedays import TABLE_BASE_C, below
from canopy.heatcase import HeatCase, HeatResult
from canopy.leaflight import leaf_light
from canopy.light import Light, SunBands
from canopy.run import Closure
from weather.constants import ZERO_C_K
from weather.psychro import dew_point, saturation_pressure
from weather.record import Weather

Floats = NDArray[np.float64]

UV, PAR = SOLAR.index("uv"), SOLAR.index("par")
NIR = [SOLAR.index(name) for name in NIR_BANDS]
BELOW_SETPOINT_K = 0.1  # K under the set-point before an hour counts as below it
OPEN_VENT = 1e-3  # share of full opening from which a vent counts as open


def blend(dry: Light, wet: Light, share: Floats) -> Light:
    """Return the light of hours that are wet by a share (N,) of the covering's inner face."""
    if not share.any():
        return dry
    parts = {
        f.name: getattr(dry, f.name) + share * (getattr(wet, f.name) - getattr(dry, f.name))
        for f in fields(Light)
    }
    return Light(**parts)


def photons_per_joule(sun: SunBands, weather: Weather) -> Floats:
    """Return (N,) µmol per joule of outside global PAR: beam and diffuse weighted by their energy."""
    beam = sun.direct[PAR] * np.maximum(np.cos(np.radians(weather.zenith)), 0.0)
    diffuse = sun.diffuse[PAR]
    total = beam + diffuse
    mixed = beam * sun.direct_umol_per_j + diffuse * sun.diffuse_umol_per_j
    return np.where(total > 0, mixed / np.where(total > 0, total, 1.0), sun.diffuse_umol_per_j)


def _light_columns(weather: Weather, sun: SunBands, light: Light, lai: Floats) -> dict[str, Floats]:
    per_joule = photons_per_joule(sun, weather)
    inside = light.inside_beam + light.inside_diffuse
    leaves = leaf_light(light, lai, per_joule)
    return {
        "outside_global_w_m2": light.outside_beam.sum(0) + light.outside_diffuse.sum(0),
        "outside_beam_w_m2": light.outside_beam.sum(0),
        "outside_par_umol_m2_s": (light.outside_beam[PAR] + light.outside_diffuse[PAR]) * per_joule,
        "inside_par_umol_m2_s": inside[PAR] * per_joule,
        "inside_par_diffuse_umol_m2_s": light.inside_diffuse[PAR] * per_joule,
        "inside_nir_w_m2": inside[NIR].sum(0),
        "crop_par_absorbed_umol_m2_s": light.crop[PAR] * per_joule,
        "crop_uv_absorbed_w_m2": light.crop[UV],
        "crop_par_absorbed_w_m2": light.crop[PAR],
        "crop_nir_absorbed_w_m2": light.crop[NIR].sum(0),
        "ground_solar_w_m2": light.ground.sum(0),
        "covering_solar_w_m2": light.covering.sum((0, 1)),
        "screen_solar_w_m2": light.screen.sum((0, 1)) if len(light.screen) else np.zeros(len(weather)),
        "structure_solar_w_m2": light.structure.sum(0),
        "sunlit_lai_m2_m2": light.sunlit_lai,
        "ppfd_sunlit_umol_m2_s": leaves.ppfd_sunlit,
        "ppfd_shaded_umol_m2_s": leaves.ppfd_shaded,
        "direct_sun_share": light.sunny,
    }


def _heat_columns(case: HeatCase, heat: HeatResult) -> dict[str, Floats]:
    night = ~case.outside.sun_up
    same = [
        "heat_delivered",
        "heat_for_humidity",
        "sky_loss",
        "through_loss",
        "skin_loss",
        "surroundings_loss",
        "convection_loss",
        "air_change_loss",
        "venting",
        "perimeter_loss",
        "deep_loss",
        "drain_loss",
        "soil_store",
        "air_store",
        "vapour_store",
        "crop_store",
        "pipe_store",
        "covering_store",
        "closure",
    ]
    columns = {f"{name}_w_m2": np.asarray(getattr(heat, name)) for name in same}
    columns["night_sky_loss_w_m2"] = np.where(night, heat.sky_loss, 0.0)
    return columns


def _climate_columns(weather: Weather, case: HeatCase, heat: HeatResult) -> dict[str, Floats]:
    no_crop = case.crop.lai <= 0
    saturation = saturation_pressure(heat.temp_air)
    dew = dew_point(np.maximum(heat.vapour_pressure, 1.0))
    coldest = np.minimum(heat.temp_leaf, heat.temp_leaf_sunlit)
    heated = case.climate.heat_at > -ZERO_C_K
    drawn = heat.screen_drawn.max(0) if len(heat.screen_drawn) else np.zeros(len(weather))
    cold = heated & (heat.temp_air < case.climate.heat_at - BELOW_SETPOINT_K)
    return {
        "outside_temp_c": weather.temp_air,
        "outside_below_18_k": below(weather.temp_air, TABLE_BASE_C),
        "temp_air_c": heat.temp_air,
        "heat_at_c": np.where(heated, case.climate.heat_at, np.nan),
        "leaf_c": heat.temp_leaf,
        "leaf_sunlit_c": heat.temp_leaf_sunlit,
        "floor_c": heat.temp_floor,
        "covering_outer_c": heat.temp_covering[0],
        "covering_inner_c": heat.temp_covering[-1],
        "pipe_c": heat.temp_pipe,
        "relative_humidity_pct": heat.relative_humidity,
        "vpd_kpa": np.maximum(saturation - heat.vapour_pressure, 0.0) / 1000.0,
        "transpiration_kg_m2_h": heat.transpiration,
        "floor_evaporation_kg_m2_h": heat.floor_evaporation,
        "condensation_kg_m2_h": heat.condensation,
        "air_changes_per_h": heat.air_changes_per_h,
        "wet_covering_share": heat.wet,
        "leaf_wet_share": np.where(no_crop, 0.0, 1.0 * (coldest <= dew)),
        "frost_share": np.where(no_crop, 0.0, 1.0 * (coldest <= 0.0)),
        "screen_drawn_share": drawn,
        "vent_open_share": 1.0 * (heat.vent_open > OPEN_VENT),
        "below_setpoint_share": 1.0 * cold,
        "below_limit_share": 1.0 * (heat.temp_air < case.climate.limit_c),
        "filled_weather_share": 1.0 * weather.filled,
    }


def hourly_columns(
    weather: Weather, sun: SunBands, light: Light, case: HeatCase, heat: HeatResult
) -> dict[str, Floats]:
    """Return every column of `columns.COLUMNS`, (N,) over the whole record, in table order."""
    columns = {
        **_light_columns(weather, sun, light, case.crop.lai),
        **_heat_columns(case, heat),
        **_climate_columns(weather, case, heat),
    }
    if columns.keys() != BY_NAME.keys():
        raise RuntimeError(f"columns differ from the table: {columns.keys() ^ BY_NAME.keys()}")
    return {c.name: np.ascontiguousarray(columns[c.name], dtype=np.float64) for c in COLUMNS}


def _worst(budget: str, gap: Floats, weather: Weather) -> Closure:
    at = int(np.argmax(np.abs(gap)))
    return Closure(budget, float(abs(gap[at])), str(weather.time[at]))


def closures(
    weather: Weather, hourly: dict[str, Floats], light: Light, heat: HeatResult
) -> tuple[Closure, ...]:
    """Return the largest hourly gap of every budget, W/m2 of floor, from the columns themselves."""
    total = np.zeros(len(weather))
    for sign, names in ((1.0, GAINS), (-1.0, LOSSES), (-1.0, STORES)):
        for name in names:
            total = total + sign * hourly[name]
    bands = hourly["outside_global_w_m2"] - weather.ghi
    solar = light.crop.sum(0) + light.ground.sum(0) + light.covering.sum((0, 1)) + light.structure.sum(0)
    if len(light.screen):
        solar = solar + light.screen.sum((0, 1))
    sky = heat.sky_loss - heat.through_loss - heat.skin_loss
    down = (light.inside_beam + light.inside_diffuse).sum(0)
    crop_level = down - light.crop.sum(0) - light.ground.sum(0) - light.crop_up.sum(0)
    return (
        _worst("heat of the house: gains - losses - stores", total, weather),
        _worst("sunlight outside: bands - global", bands, weather),
        _worst("sunlight at the crop: down - absorbed - up", crop_level, weather),
        _worst("sunlight absorbed - sunlight in the heat balance", solar - heat.solar, weather),
        _worst("sky loss - through-loss - skin loss", sky, weather),
    )
