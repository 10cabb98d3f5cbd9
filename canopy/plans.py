"""From a candidate's keys to the records that light and heat take: house, shell, heating."""

from __future__ import annotations

from typing import Final, Literal

from canopy.heatcase import Heating, Shell
from canopy.house import House
from canopy.optics import Covering
from canopy.studyfile import Plan

DEFAULT_LAI: Final = 3.0  # a grown, trained crop: common practice
DEFAULT_PITCH_DEG: Final = 24.0  # common practice for multi-span glasshouses (22-26)

LEAKAGE_PER_H: Final[dict[tuple[str, bool], float]] = {
    # air changes per h of a house in good repair: inside the ranges of ASABE EP406 (new glass .75-1.5, new
    # double film .5-1); the rest common practice. Key: kind of covering, more than one layer
    ("glass", False): 1.0,
    ("glass", True): 0.9,
    ("rigid plastic", False): 1.0,
    ("rigid plastic", True): 0.8,
    ("film", False): 1.0,
    ("film", True): 0.7,
}

INSECT_NET_FACTOR: Final = 0.5  # discharge left by a fine net: common practice (.4-.6)

# ASHRAE Fundamentals ch. 24 "Airflow around buildings", table 1: terrain exponent and layer thickness, m
_TERRAIN: Final[dict[Literal["open", "normal", "sheltered"], tuple[float, float]]] = {
    "open": (0.14, 270.0),  # category 3, open country
    "normal": (0.22, 370.0),  # category 2, hedges, trees, scattered buildings
    "sheltered": (0.33, 460.0),  # category 1, surrounded by obstacles
}


def make_house(plan: Plan) -> House:
    """Return the house of a candidate; the crop plane is the top of the crop.

    Under an arch, where a crop may be taller than the gutter (a tunnel from the ground), the plane lies at
    the lower edge of the gutter. A crop above the crown keeps its height, and the house is refused.
    """
    keys = plan.house
    pitch = keys.pitch if keys.pitch is not None else DEFAULT_PITCH_DEG
    return House(
        form=keys.form,
        spans=keys.spans,
        span_width=keys.span_width,
        length=keys.length,
        gutter_height=keys.gutter_height,
        pitch=pitch,
        pitch_other=keys.pitch_other if keys.pitch_other is not None else pitch,
        rise=keys.rise if keys.rise is not None else 0.0,
        ridge_azimuth=keys.ridge_azimuth,
        gutter_width=keys.gutter_width,
        gutter_depth=keys.gutter_depth,
        ridge_width=keys.ridge_width,
        ridge_depth=keys.ridge_depth,
        bar_spacing=keys.bar_spacing,
        bar_width=keys.bar_width,
        bar_depth=keys.bar_depth,
        crop_plane_height=_crop_plane(plan),
    )


def _crop_plane(plan: Plan) -> float:
    """Return the height, m, at which light is taken."""
    keys, height = plan.house, plan.crop.height
    if keys.form != "arch" or height > keys.gutter_height + (keys.rise or 0.0):
        return height
    depth = keys.gutter_depth if keys.gutter_width > 0.0 else 0.0
    return max(0.0, min(height, keys.gutter_height - depth))


def wind_factor(exposure: Literal["open", "normal", "sheltered"], height_m: float) -> float:
    """Return wind at a house of some height per wind at 10 m in the open.

    ASHRAE Fundamentals ch. 24 eq. 4: U_H = U_met (d_met / 10)^a_met (H / d)^a.
    """
    exponent, layer = _TERRAIN[exposure]
    a_met, d_met = _TERRAIN["open"]
    return float((d_met / 10.0) ** a_met * (height_m / layer) ** exponent)


def leakage(plan: Plan, covering: Covering) -> float:
    """Return air changes per h: the study's figure, else by kind of covering."""
    if plan.house.leakage_per_hour is not None:
        return plan.house.leakage_per_hour
    return LEAKAGE_PER_H[covering.kind, covering.layers > 1]


def make_shell(plan: Plan, house: House, covering: Covering) -> Shell:
    """Return the house as heat sees it, per m2 of floor."""
    floor = house.floor_area
    return Shell(
        form=house.form,
        floor_area_m2=floor,
        roof_ratio=house.roof_area / floor,
        wall_ratio=house.wall_area / floor,
        roof_sky_view=house.roof_sky_view,
        wall_sky_view=house.wall_sky_view,
        roof_slope_deg=house.roof_slope_deg,
        mean_height_m=house.volume / floor,
        ridge_height_m=house.ridge_height,
        perimeter_per_floor=house.perimeter / floor,
        perimeter_loss=plan.house.perimeter_loss,
        wind_factor=wind_factor(plan.house.wind_exposure, house.ridge_height),
        leakage_per_hour=leakage(plan, covering),
        vent_area_ratio=plan.house.vent_area_fraction,
        vent_factor=INSECT_NET_FACTOR if plan.house.insect_net else 1.0,
        walls_screened=plan.house.screened_walls,
    )


def make_heating(plan: Plan) -> Heating:
    """Return the emitters; no capacity key means unlimited, 0 means no heating."""
    keys = plan.heating
    return Heating(
        capacity_w_m2=keys.capacity_w_m2 if keys.capacity_w_m2 is not None else float("inf"),
        pipe_diameter_m=keys.pipe_diameter,
        pipe_m_per_m2=keys.pipe_m_per_m2,
        flow_max_c=keys.flow_max_c,
    )
