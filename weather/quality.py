"""Checks of the hourly values: limits, closure, frozen sensors, joints, and what cannot be true."""

from __future__ import annotations

from typing import Final, Literal

import numpy as np

from weather.errors import UserError
from weather.gaps import runs
from weather.psychro import STANDARD_PRESSURE_PA, relative_humidity, saturation_pressure, standard_pressure
from weather.radiation import SkySun
from weather.raw import TITLES, RawWeather
from weather.record import Bools, Finding, Floats, Site, Times

LIMITS: Final = {
    "temp_air": (-90.0, 60.0),
    "temp_dew": (-95.0, 40.0),
    "relative_humidity": (0.0, 110.0),
    "pressure": (30e3, 110e3),
    "wind_speed": (0.0, 60.0),
    "precipitable_water": (0.0, 12.0),
    "longwave_down": (40.0, 700.0),
    "albedo": (0.0, 1.0),
    "cloud_cover": (0.0, 1.0),
}
"""What is possible on earth; long-wave as BSRN (Long & Dutton 2002), records of the WMO for the others."""

NIGHT_OFFSET_W_M2: Final = -20.0  # thermal offsets of pyranometers reach this far below zero
DEW_SLACK_K: Final = 0.5  # rounding of two instruments
FROZEN_H: Final = {"temp_air": 36, "relative_humidity": 36, "wind_speed": 36, "temp_dew": 48}
FROZEN_SUN_H: Final = 5
LONGWAVE_OFF_W_M2: Final = 25.0  # a file's long-wave further off than this on the mean is suspect
HUMIDITY_PCT: Final = 5.0
SPIKE_K: Final = 12.0
JOINT_K: Final = 8.0  # a step of temperature at a month joint worth saying


def missing_codes(raw: RawWeather) -> tuple[Finding, ...]:
    """Count what each column of the file leaves out (missing codes, empty or unreadable fields)."""
    result = []
    for name, values in raw.columns.items():
        gaps = int((~np.isfinite(values)).sum())
        if 0 < gaps < len(values):
            text = f"{TITLES[name]}: {gaps} of {len(values)} rows without a value"
            result.append(Finding("missing", "note", text, gaps))
    return tuple(result)


def limits(columns: dict[str, Floats], sky: SkySun) -> tuple[dict[str, Floats], list[Finding]]:
    """Turn what is physically impossible into gaps, and say how often; small negative light becomes 0."""
    result = dict(columns)
    findings: list[Finding] = []
    highest = np.maximum(np.cos(np.radians(np.maximum(sky.sun.zenith - 7.5, 0.0))), 0.0)
    # BSRN "physically possible" (Long & Dutton 2002), at the hour's highest sun
    upper = {
        "ghi": 1.5 * sky.dni_extra * highest**1.2 + 100.0,
        "dni": sky.dni_extra,
        "dhi": 0.95 * sky.dni_extra * highest**1.2 + 50.0,
    }
    for name, values in columns.items():
        if name in upper:
            low, high = np.full(len(values), NIGHT_OFFSET_W_M2), upper[name]
        else:
            a, b = LIMITS[name]
            low, high = np.full(len(values), a), np.full(len(values), b)
        bad = (values < low) | (values > high)
        fixed = np.where(bad, np.nan, values)
        if bad.any():
            text = (
                f"{TITLES[name]}: {int(bad.sum())} hours outside what is physically possible, taken as gaps"
            )
            findings.append(Finding("limits", "corrected", text, int(bad.sum())))
        if name in upper:
            below = fixed < 0.0
            if (fixed[below] < -0.5).any():
                text = f"{TITLES[name]}: {int(below.sum())} hours slightly below zero set to 0"
                findings.append(Finding("negative", "corrected", text, int(below.sum())))
            fixed = np.where(below, 0.0, fixed)
        result[name] = fixed
    _empty_light(result, sky)
    return result, findings


def _empty_light(columns: dict[str, Floats], sky: SkySun) -> None:
    """Refuse a record without light; take beam and diffuse that are all zero as absent, in place."""
    ghi = columns.get("ghi")
    if ghi is None:
        return
    light = float(np.nansum(ghi))
    if light <= 0.0 and np.isfinite(ghi).any() and float(sky.clear.ghi.sum()) > 24.0 * 100.0:
        raise UserError("weather: global radiation is zero throughout although the sun rises")
    for name in ("dni", "dhi"):
        if name in columns and light > 0.0 and not (np.nan_to_num(columns[name]) > 0.0).any():
            columns[name] = np.full(len(ghi), np.nan)


def closure(columns: dict[str, Floats], sky: SkySun) -> list[Finding]:
    """Say how far GHI = DHI + DNI cos z holds in the file, sun above 15 degrees (BSRN: within 8 %)."""
    if not all(name in columns for name in ("ghi", "dni", "dhi")):
        return []
    cosz = sky.cos_zenith
    made = columns["dhi"] + columns["dni"] * cosz
    use = np.isfinite(made) & np.isfinite(columns["ghi"]) & (cosz > 0.26) & (made > 50.0)
    if not use.any():
        return []
    off = columns["ghi"][use] - made[use]
    wide = int((np.abs(off) > 0.08 * made[use]).sum())
    text = (
        f"global less diffuse and beam: {off.mean():+.1f} W/m2 on the mean, rms {np.std(off):.1f}, "
        f"beyond 8 % in {wide} of {int(use.sum())} hours; global kept, diffuse (then beam) made to fit"
    )
    return [Finding("closure", "warning" if wide > 0.1 * use.sum() else "note", text, wide)]


def plausibility(
    columns: dict[str, Floats], sky: SkySun, time: Times, site: Site, typical: bool
) -> tuple[dict[str, Floats], list[Finding]]:
    """Dew point, pressure and wind sense, frozen sensors, month joints; pressure at sea level is reduced."""
    result = dict(columns)
    findings = _dew(result) + _humidity(result) + _frozen(result, sky) + _spikes(result)
    if typical and "temp_air" in result:
        findings += _joints(result["temp_air"], time)
    if "wind_speed" in result:
        findings += _wind(result["wind_speed"])
    if "pressure" in result and np.isfinite(result["pressure"]).any():
        mean = float(np.nanmean(result["pressure"]))
        here = float(standard_pressure(site.elevation))
        if abs(mean - here) > 4e3 and abs(mean - STANDARD_PRESSURE_PA) < 2.5e3:
            result["pressure"] = result["pressure"] * (here / STANDARD_PRESSURE_PA)
            text = (
                f"pressure is reduced to sea level (mean {mean / 100:.0f} hPa at {site.elevation:.0f} m): "
                f"set to the place, mean {np.nanmean(result['pressure']) / 100:.0f} hPa"
            )
            findings.append(Finding("pressure", "corrected", text))
        elif abs(mean - here) > 5e3:
            text = (
                f"mean pressure {mean / 100:.0f} hPa does not fit {site.elevation:.0f} m above the sea "
                f"({here / 100:.0f} hPa)"
            )
            findings.append(Finding("pressure", "warning", text))
    return result, findings


def _dew(columns: dict[str, Floats]) -> list[Finding]:
    if "temp_dew" not in columns or "temp_air" not in columns:
        return []
    above = columns["temp_dew"] > columns["temp_air"] + DEW_SLACK_K
    count = int(above.sum())
    if not count:
        return []
    text = f"dew point above air temperature in {count} hours; taken as saturated"
    return [Finding("dew-point", "corrected", text, count)]


def _humidity(columns: dict[str, Floats]) -> list[Finding]:
    """Compare the file's relative humidity with the one its dew point gives."""
    if not all(name in columns for name in ("temp_air", "temp_dew", "relative_humidity")):
        return []
    temp, dew = columns["temp_air"], columns["temp_dew"]
    both = np.isfinite(temp) & np.isfinite(dew) & np.isfinite(columns["relative_humidity"])
    if not both.any():
        return []
    made = relative_humidity(temp[both], saturation_pressure(dew[both], "water"), "water")
    off = float(np.mean(np.abs(made - columns["relative_humidity"][both])))
    if off <= HUMIDITY_PCT:
        return []
    text = f"relative humidity and dew point disagree by {off:.0f} % on the mean; the dew point is used"
    return [Finding("humidity-pair", "warning", text)]


def _spikes(columns: dict[str, Floats]) -> list[Finding]:
    """Take single hours of air temperature that stand out from both neighbours as gaps, in place."""
    temp = columns.get("temp_air")
    if temp is None or len(temp) < 3:
        return []
    rise, fall = temp[1:-1] - temp[:-2], temp[1:-1] - temp[2:]
    out = (np.minimum(np.abs(rise), np.abs(fall)) > SPIKE_K) & (rise * fall > 0.0)
    if not out.any():
        return []
    columns["temp_air"] = temp.copy()
    columns["temp_air"][1:-1][out] = np.nan
    count = int(out.sum())
    text = f"air temperature: {count} single hours more than {SPIKE_K:g} K off both neighbours, taken as gaps"
    return [Finding("spikes", "corrected", text, count)]


def _frozen(columns: dict[str, Floats], sky: SkySun) -> list[Finding]:
    findings = []
    for name, hours in FROZEN_H.items():
        if name not in columns or not np.isfinite(columns[name]).any():
            continue
        values = columns[name]
        varies = np.isfinite(values)
        if name == "relative_humidity":
            varies &= values < 99.5
        if name == "wind_speed":
            varies &= values > 0.3
        count = _stuck(values, varies, hours)
        if count:
            text = (
                f"{TITLES[name]} stands still for {hours} h or more, {count} hours in all: a frozen sensor?"
            )
            findings.append(Finding("frozen", "warning", text, count))
    if "ghi" in columns:
        lit = np.isfinite(columns["ghi"]) & (columns["ghi"] > 20.0) & (sky.cos_zenith > 0.1)
        count = _stuck(columns["ghi"], lit, FROZEN_SUN_H)
        if count:
            text = f"global radiation stands still for {FROZEN_SUN_H} h or more by day, {count} hours in all"
            findings.append(Finding("frozen", "warning", text, count))
    return findings


def _stuck(values: Floats, counts: Bools, hours: int) -> int:
    same = np.zeros(len(values), dtype=bool)
    same[1:] = (np.diff(values) == 0.0) & counts[1:] & counts[:-1]
    _, length = runs(same)
    return int((length[length >= hours - 1] + 1).sum())


def _joints(temp: Floats, time: Times) -> list[Finding]:
    month = time.astype("datetime64[M]").astype(np.int64)
    at = np.flatnonzero(np.diff(month) != 0)
    jump = np.abs(temp[at + 1] - temp[at])
    jump = np.append(jump, abs(temp[0] - temp[-1]))
    wide = int((jump > JOINT_K).sum())
    largest = float(np.nanmax(jump)) if np.isfinite(jump).any() else 0.0
    text = (
        f"months of different years are joined; the largest step of temperature at a joint is {largest:.1f} K"
    )
    return [Finding("month-joints", "warning" if wide else "note", text, wide)]


def _wind(wind: Floats) -> list[Finding]:
    if not np.isfinite(wind).any():
        return []
    mean, most = float(np.nanmean(wind)), float(np.nanmax(wind))
    if mean > 12.0 or most > 45.0:
        text = (
            f"wind of {mean:.1f} m/s on the mean and {most:.0f} at most is unusual: is it in km/h or knots?"
        )
        return [Finding("wind", "warning", text)]
    if mean < 0.5:
        text = f"wind of {mean:.2f} m/s on the mean is unusually low for 10 m in the open: a sheltered mast?"
        return [Finding("wind", "warning", text)]
    return []


def longwave_findings(read: Floats, model: Floats, modelled: Bools) -> tuple[Finding, ...]:
    """Say how many hours of sky radiation are computed, and how the others compare with the model."""
    result: list[Finding] = []
    made = int(modelled.sum())
    if made:
        text = (
            f"long-wave from the sky computed in {made} hours (Prata 1996, clouds by clearness, "
            "night inversion; RMSE 10-13 W/m2 on the two measured records it was fitted on)"
        )
        result.append(Finding("longwave", "note", text, made))
    if made < len(modelled):
        kept = ~modelled
        off = float((read[kept] - model[kept]).mean())
        text = f"long-wave from the sky read in {int(kept.sum())} hours, {off:+.0f} W/m2 against the model"
        level: Literal["note", "warning"] = "warning" if abs(off) > LONGWAVE_OFF_W_M2 else "note"
        result.append(Finding("longwave-file", level, text, int(kept.sum())))
    return tuple(result)
