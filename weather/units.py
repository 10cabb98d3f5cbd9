"""Names and units that a logger's columns may have."""

from __future__ import annotations

import re
from typing import Final

import numpy as np

from weather.errors import UserError, nearest
from weather.record import Floats

UMOL_PER_J_GLOBAL: Final = 2.02  # µmol PAR per J of global radiation, mean of clear and cloudy sky: published
# hourly values run from 1.97 (clear) to 2.10 (overcast), Theor. Appl. Climatol. 74:227

PER_STEP: Final = {  # energies of one step: W/m2 = value * factor / step in s
    "j/cm2": 1e4,
    "kj/m2": 1e3,
    "j/m2": 1.0,
    "mj/m2": 1e6,
    "wh/m2": 3600.0,
    "kwh/m2": 3.6e6,
}
RADIATION: Final = {
    "w/m2": 1.0,
    "kw/m2": 1e3,
    "j/cm2/h": 1e4 / 3600.0,
    "kj/m2/h": 1e3 / 3600.0,
    "mj/m2/h": 1e6 / 3600.0,
}
PHOTONS: Final = {"umol/m2/s": 1.0 / UMOL_PER_J_GLOBAL}
LINEAR: Final[dict[str, dict[str, float]]] = {
    "relative_humidity": {"%": 1.0, "fraction": 100.0},
    "vapour_pressure": {"pa": 1.0, "hpa": 100.0, "mbar": 100.0, "kpa": 1e3},
    "pressure": {"pa": 1.0, "hpa": 100.0, "mbar": 100.0, "kpa": 1e3, "mmhg": 133.322, "inhg": 3386.39},
    "wind_speed": {"m/s": 1.0, "km/h": 1.0 / 3.6, "mph": 0.44704, "kn": 0.514444},
    "precipitable_water": {"cm": 1.0, "mm": 0.1},
    "albedo": {"fraction": 1.0, "%": 0.01},
    "cloud_cover": {"fraction": 1.0, "%": 0.01, "tenths": 0.1, "oktas": 0.125},
}
TEMPERATURES: Final = ("degc", "degf", "k")

NAMES: Final[dict[str, tuple[str, ...]]] = {
    "time": (
        "stamp",
        "time",
        "timestamp",
        "datetime",
        "date time",
        "date/time",
        "date",
        "zeit",
        "datum",
        "tijd",
    ),
    "ghi": (
        "ghi",
        "global",
        "global radiation",
        "globalradiation",
        "solar",
        "solar radiation",
        "sw in",
        "rg",
    ),
    "dni": ("dni", "direct normal", "beam", "direct normal radiation"),
    "dhi": ("dhi", "diffuse", "diffuse radiation", "diffuse horizontal"),
    "temp_air": (
        "temp air",
        "air temperature",
        "temperature",
        "temp",
        "ta",
        "tair",
        "t2m",
        "t out",
        "outside temperature",
    ),
    "temp_dew": ("temp dew", "dew point", "dewpoint", "td"),
    "relative_humidity": ("relative humidity", "rh", "humidity"),
    "vapour_pressure": ("vapour pressure", "vapor pressure", "ea"),
    "pressure": ("pressure", "air pressure", "station pressure"),
    "wind_speed": ("wind speed", "windspeed", "wind", "ws", "ws10m"),
    "precipitable_water": ("precipitable water", "pwat"),
    "longwave_down": ("longwave down", "long-wave down", "longwave", "lw in", "lwd", "ir(h)"),
    "albedo": ("albedo", "surface albedo"),
    "cloud_cover": ("cloud cover", "cloudiness"),
}
"""Column names taken for a quantity without a mapping: lower case, blanks for underscores, no unit."""

MAPPABLE: Final = tuple(NAMES)
UNIT_IN_NAME: Final = re.compile(r"\s*[\[(]\s*([^\])]*?)\s*[\])]\s*$")
SPELLINGS: Final = {
    "w m-2": "w/m2", "wm-2": "w/m2", "w/m^2": "w/m2", "w/sqm": "w/m2", "w m2": "w/m2",
    "kw/m^2": "kw/m2", "c": "degc", "°c": "degc", "deg c": "degc", "celsius": "degc", "oc": "degc",
    "f": "degf", "°f": "degf", "deg f": "degf", "fahrenheit": "degf", "kelvin": "k",
    "pct": "%", "percent": "%", "ratio": "fraction", "-": "fraction", "1": "fraction",
    "ms-1": "m/s", "m s-1": "m/s", "kmh": "km/h", "kph": "km/h", "knots": "kn", "kt": "kn", "mi/h": "mph",
    "millibar": "mbar", "mb": "mbar", "j/cm^2": "j/cm2", "j/cm2 per hour": "j/cm2/h", "j/cm2h": "j/cm2/h",
    "j/cm2 h": "j/cm2/h", "j/(cm2 h)": "j/cm2/h", "j/cm2/hr": "j/cm2/h", "kj/m^2": "kj/m2", "mj/m^2": "mj/m2",
    "wh/m^2": "wh/m2", "kwh/m^2": "kwh/m2", "umol": "umol/m2/s", "umol m-2 s-1": "umol/m2/s",
    "umol/(m2 s)": "umol/m2/s", "umol/m2s": "umol/m2/s", "umol/m^2/s": "umol/m2/s", "ppfd": "umol/m2/s",
}  # fmt: skip


def plain_name(header: str) -> tuple[str, str | None]:
    """Split a column title into its name (lower case, blanks) and the unit in its brackets, if any."""
    text = header.strip().strip('"').strip()
    found = UNIT_IN_NAME.search(text)
    unit = found[1] if found else None
    if found and text.lower() not in ("time(utc)", "ir(h)"):
        text = text[: found.start()]
    return re.sub(r"[\s_]+", " ", text).strip().lower(), unit


def plain_unit(unit: str) -> str:
    """Return a unit in this module's spelling (lower case, plain digits, u for µ)."""
    text = unit.strip().lower()
    for sign, plain in (("²", "2"), ("³", "3"), ("⁻¹", "-1"), ("⁻", "-"), ("µ", "u"), ("μ", "u"), ("·", " ")):
        text = text.replace(sign, plain)
    text = re.sub(r"\s+", " ", text)
    return SPELLINGS.get(text, text)


def allowed_units(quantity: str) -> tuple[str, ...]:
    """Return the units a quantity may come in; the first is the one taken when none is given."""
    if quantity == "ghi":
        return (*RADIATION, *PER_STEP, *PHOTONS)
    if quantity in ("dni", "dhi", "longwave_down"):
        return (*RADIATION, *PER_STEP)
    if quantity in ("temp_air", "temp_dew"):
        return TEMPERATURES
    return tuple(LINEAR[quantity])


def to_si(quantity: str, values: Floats, unit: str, step_s: float, where: str) -> Floats:
    """Return a column in W/m2, degC, %, Pa, m/s, cm or as a fraction; UserError for a unit it cannot have."""
    name = plain_unit(unit)
    allowed = allowed_units(quantity)
    if name not in allowed:
        listed = ", ".join(allowed)
        raise UserError(f'{where}: {quantity} in "{unit}", allowed {listed}{nearest(name, allowed)}')
    if quantity in ("temp_air", "temp_dew"):
        if name == "degf":
            return np.asarray((values - 32.0) / 1.8)
        return np.asarray(values - 273.15 if name == "k" else values)
    if name in PER_STEP:
        return np.asarray(values * (PER_STEP[name] / step_s))
    if name in RADIATION:
        return np.asarray(values * RADIATION[name])
    if name in PHOTONS:
        return np.asarray(values * PHOTONS[name])
    return np.asarray(values * LINEAR[quantity][name])
