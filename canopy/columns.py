"""The one table of output columns: what an hour carries, in which unit, and how hours become a day.

Units stand at the end of every name. Every m2 is a m2 of FLOOR.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

How = Literal["kwh", "mol", "sum", "mean", "min", "max", "hours", "degree_days"]
"""kwh: W/m2 to kWh/m2; mol: µmol m-2 s-1 to mol/m2; sum: a rate per h; hours: a share of the hour;
degree_days: K to K d."""

Part = Literal["gain", "loss", "store", ""]


@dataclass(frozen=True)
class Column:
    """One hourly quantity: its name, unit, meaning, place in the heat balance and daily columns."""

    name: str
    unit: str
    title: str
    part: Part = ""  # role in the identity gains - losses - stores = 0
    days: tuple[tuple[str, How], ...] = ()


def _energy(stem: str, title: str, part: Part = "") -> Column:
    return Column(f"{stem}_w_m2", "W/m2", title, part, ((f"{stem}_kwh_m2", "kwh"),))


def _photons(stem: str, title: str) -> Column:
    return Column(f"{stem}_umol_m2_s", "µmol m-2 s-1", title, "", ((f"{stem}_mol_m2", "mol"),))


def _water(stem: str, title: str) -> Column:
    return Column(f"{stem}_kg_m2_h", "kg m-2 h-1", title, "", ((f"{stem}_kg_m2", "sum"),))


def _hours(stem: str, title: str) -> Column:
    return Column(f"{stem}_share", "1", title, "", ((f"{stem}_h", "hours"),))


def _temp(stem: str, title: str, *days: tuple[str, How]) -> Column:
    return Column(f"{stem}_c", "°C", title, "", days)


LIGHT: Final = (
    _energy("outside_global", "global sunlight outside, on the horizontal"),
    _energy("outside_beam", "direct sunlight outside, on the horizontal"),
    _photons("outside_par", "PAR photons outside"),
    _photons("inside_par", "PAR photons at the top of the crop"),
    _photons("inside_par_diffuse", "diffuse part of the PAR photons at the top of the crop"),
    _energy("inside_nir", "NIR (.70-2.80 µm) at the top of the crop"),
    _photons("crop_par_absorbed", "PAR photons absorbed by leaves"),
    _energy("crop_uv_absorbed", "UV absorbed by leaves", "gain"),
    _energy("crop_par_absorbed", "PAR absorbed by leaves", "gain"),
    _energy("crop_nir_absorbed", "NIR absorbed by leaves", "gain"),
    _energy("ground_solar", "sunlight absorbed under the crop", "gain"),
    _energy("covering_solar", "sunlight absorbed by the covering", "gain"),
    _energy("screen_solar", "sunlight absorbed by screens", "gain"),
    _energy("structure_solar", "sunlight absorbed by gutters, ridges and bars", "gain"),
    Column("sunlit_lai_m2_m2", "m2/m2", "sunlit leaf area", "", ()),
    Column("ppfd_sunlit_umol_m2_s", "µmol m-2 s-1", "PAR photons absorbed per m2 of sunlit leaf", "", ()),
    Column("ppfd_shaded_umol_m2_s", "µmol m-2 s-1", "PAR photons absorbed per m2 of shaded leaf", "", ()),
    _hours("direct_sun", "share of the crop plane in straight sun"),
)

HEAT: Final = (
    _energy("heat_delivered", "heat that the heating delivers", "gain"),
    _energy("heat_for_humidity", "part of the heat delivered that humidity venting costs"),
    _energy("sky_loss", "net long-wave lost to the sky", "loss"),
    _energy("through_loss", "part of sky loss that passes straight through the covering"),
    _energy("skin_loss", "part of sky loss that leaves the covering's outer face"),
    _energy("night_sky_loss", "sky loss while the sun is below the horizon"),
    _energy("surroundings_loss", "net long-wave lost to ground and neighbours outside", "loss"),
    _energy("convection_loss", "convection from covering to outside air", "loss"),
    _energy("air_change_loss", "leakage, sensible and latent", "loss"),
    _energy("venting", "heat carried out by vents, sensible and latent", "loss"),
    _energy("perimeter_loss", "loss through the foundation", "loss"),
    _energy("deep_loss", "loss to the deep ground", "loss"),
    _energy("drain_loss", "heat carried off by run-off water", "loss"),
    _energy("soil_store", "taken up by the soil column", "store"),
    _energy("air_store", "taken up by the house air", "store"),
    _energy("vapour_store", "latent heat taken up by the house air", "store"),
    _energy("crop_store", "taken up by crop water", "store"),
    _energy("pipe_store", "taken up by pipe water", "store"),
    _energy("covering_store", "taken up by covering and screens", "store"),
    Column("closure_w_m2", "W/m2", "gains - losses - stores", "", ()),
)

CLIMATE: Final = (
    _temp("outside_temp", "outside air", ("outside_temp_mean_c", "mean")),
    Column(
        "outside_below_18_k",
        "K",
        "outside air below 18 °C",
        "",
        (("degree_days_18_k_d", "degree_days"),),
    ),
    _temp(
        "temp_air",
        "house air",
        ("temp_air_min_c", "min"),
        ("temp_air_mean_c", "mean"),
        ("temp_air_max_c", "max"),
    ),
    _temp("heat_at", "heating set-point after ramps"),
    _temp("leaf", "leaves, mean", ("leaf_min_c", "min")),
    _temp("leaf_sunlit", "sunlit leaves", ("leaf_sunlit_max_c", "max")),
    _temp("floor", "floor surface"),
    _temp("covering_outer", "outer layer of the covering"),
    _temp("covering_inner", "inner layer of the covering"),
    _temp("pipe", "pipe surface", ("pipe_max_c", "max")),
    Column("relative_humidity_pct", "%", "relative humidity of the house air", "", (("rh_max_pct", "max"),)),
    Column("vpd_kpa", "kPa", "vapour pressure deficit of the house air", "", (("vpd_mean_kpa", "mean"),)),
    _water("transpiration", "water transpired by the crop"),
    _water("floor_evaporation", "water evaporated from the floor"),
    _water("condensation", "water condensed on covering and screens"),
    Column("air_changes_per_h", "1/h", "leakage and vents", "", (("air_changes_mean_per_h", "mean"),)),
    _hours("wet_covering", "inner face of the covering wet"),
    _hours("leaf_wet", "leaves at or below the dew point"),
    _hours("frost", "leaves at or below 0 °C"),
    _hours("screen_drawn", "at least one screen drawn"),
    _hours("vent_open", "vents open"),
    _hours("below_setpoint", "house air more than .1 K below the heating set-point"),
    _hours("below_limit", "house air below the crop's lower limit"),
    _hours("filled_weather", "hours with a filled weather value"),
)

COLUMNS: Final = LIGHT + HEAT + CLIMATE
BY_NAME: Final = {c.name: c for c in COLUMNS}
DAILY: Final = tuple((day, column, how) for column in COLUMNS for day, how in column.days)
"""Daily columns in order: (daily name, hourly column, how)."""

GAINS: Final = tuple(c.name for c in COLUMNS if c.part == "gain")
LOSSES: Final = tuple(c.name for c in COLUMNS if c.part == "loss")
STORES: Final = tuple(c.name for c in COLUMNS if c.part == "store")

DAY_UNITS: Final = {"kwh": "kWh/m2", "mol": "mol/m2", "hours": "h", "degree_days": "K d"}


def day_unit(column: Column, how: How) -> str:
    """Return the unit of a daily column."""
    if how == "sum":
        return column.unit.replace(" h-1", "")
    return DAY_UNITS.get(how, column.unit)
