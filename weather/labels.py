"""Where in time a file's radiation really stands: hour labels, instants, clocks of another zone."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from weather.raw import RawWeather
from weather.record import Bools, Finding, Floats, Times
from weather.site import solar_time
from weather.sun import declination

SCAN_MIN: Final = np.arange(-90, 91, 5)
SCAN_ROWS: Final = 9000  # a scan looks at no more rows than this, evenly spread
LOW_SUN_COS: Final = 0.17  # closure is judged with the sun above 10 degrees
ACT_MIN: Final = 8.0  # a smaller disagreement than this is left alone
CLOCK_H: Final = 0.75  # noon this far off means another clock


@dataclass(frozen=True)
class LabelScan:
    """What the closure GHI - DHI - DNI cos z says: minutes from the stamp to the radiation."""

    expected_min: float  # by the format or by what the user declared
    best_min: float  # least closure error
    rms_expected: float  # W/m2
    rms_best: float  # W/m2
    rows: int  # with beam and the sun above 10 degrees


@dataclass(frozen=True)
class Timing:
    """How stamps become hours: the radiation belongs to stamp + clock_s + sun_offset_s."""

    clock_s: float  # added to the stamps to put them on the declared offset
    sun_offset_s: float
    scan: LabelScan | None
    noon_off_h: float | None
    findings: tuple[Finding, ...]


def expected_offset_s(raw: RawWeather) -> float:
    """Return seconds from the stamp to the middle of the radiation's interval, or to its instant."""
    if raw.sun_offset_s is not None:
        return raw.sun_offset_s
    return {"end": -0.5, "start": 0.5, "middle": 0.0}[raw.label] * raw.step_s


def scan_labels(raw: RawWeather, latitude: float, longitude: float, utc_offset_h: float) -> LabelScan | None:
    """Return the best offset between stamp and sun, None where the file lacks one of the three components."""
    if not all(
        np.isfinite(raw.columns.get(name, np.array([np.nan]))).any() for name in ("ghi", "dni", "dhi")
    ):
        return None
    every = max(1, -(-len(raw.stamp) // SCAN_ROWS))
    ghi, dni, dhi = (raw.columns[name][::every] for name in ("ghi", "dni", "dhi"))
    use = np.isfinite(ghi) & np.isfinite(dni) & np.isfinite(dhi) & (dni > 5.0) & (ghi > 20.0)
    if use.sum() < 20:
        return None
    utc = _utc(raw.stamp[::every][use], utc_offset_h)
    beam = (ghi - dhi)[use]
    offsets = np.append(SCAN_MIN, expected_offset_s(raw) / 60.0)
    rms = [_closure(utc, beam, dni[use], latitude, longitude, minutes) for minutes in offsets]
    best = int(np.argmin(rms[:-1]))
    minutes = float(SCAN_MIN[best])
    if (
        0 < best < len(SCAN_MIN) - 1
    ):  # vertex of the parabola through the three squared errors around the least
        left, least, right = (rms[k] ** 2 for k in (best - 1, best, best + 1))
        bend = left - 2.0 * least + right
        minutes += 5.0 * 0.5 * (left - right) / bend if bend > 0.0 else 0.0
    return LabelScan(offsets[-1], minutes, rms[-1], rms[best], int(use.sum()))


def _utc(stamp: Times, offset_h: float) -> Times:
    return stamp - np.timedelta64(round(3600.0 * offset_h), "s")


def _cos_zenith(utc: Times, latitude: float, longitude: float) -> Floats:
    """Cosine of the sun's zenith angle to .001 (Spencer 1971 declination and equation of time), (N,)."""
    decl = declination(utc)
    angle = np.radians(15.0 * (solar_time(utc, longitude) - 12.0))
    phi = np.radians(latitude)
    return np.asarray(np.sin(phi) * np.sin(decl) + np.cos(phi) * np.cos(decl) * np.cos(angle))


def _closure(
    utc: Times, beam: Floats, dni: Floats, latitude: float, longitude: float, minutes: float
) -> float:
    cosz = _cos_zenith(utc + np.timedelta64(round(60.0 * minutes), "s"), latitude, longitude)
    residual = np.where(cosz > LOW_SUN_COS, beam - dni * cosz, beam - dni * LOW_SUN_COS)
    # low sun counts as if at 10 degrees, so that a shift into the night does not look like agreement
    return float(np.sqrt(np.mean(residual**2)))


def noon_offset_h(raw: RawWeather, longitude: float, utc_offset_h: float) -> float | None:
    """Return how late the file's radiation is against the sun, hours -12..12 (None without enough light).

    The radiation-weighted mean of true solar time (as an angle) over the brighter half of the days lies at
    noon when clock, longitude and label agree.
    """
    ghi = raw.columns.get("ghi", raw.columns.get("dni"))
    if ghi is None:
        return None
    every = max(1, -(-len(raw.stamp) // SCAN_ROWS))
    light = np.nan_to_num(ghi[::every], nan=0.0)
    utc = _utc(raw.stamp[::every], utc_offset_h) + np.timedelta64(round(expected_offset_s(raw)), "s")
    day = np.floor((utc.astype(np.int64) / 3600.0 + longitude / 15.0) / 24.0).astype(np.int64)
    day -= day.min()
    total = np.bincount(day, weights=light)
    lit = total > 0.0
    if not lit.any():
        return None
    use: Bools = total[day] >= np.median(total[lit])
    angle = 2.0 * np.pi * solar_time(utc, longitude) / 24.0
    vector = np.sum(np.where(use, light, 0.0) * np.exp(1j * angle))
    if abs(vector) < 1e-9 or light.sum() <= 0.0 or abs(vector) < 0.1 * light[use].sum():
        return None
    return float((np.angle(vector) / (2.0 * np.pi) * 24.0 - 12.0 + 12.0) % 24.0 - 12.0)


def settle(raw: RawWeather, latitude: float, longitude: float, utc_offset_h: float, declared: bool) -> Timing:
    """Return how the stamps are read, after the solar-noon check and the label scan, with findings in words.

    A clock that is off by whole hours is set right, a label that contradicts the closure is replaced by what
    the closure says; both only where the user declared neither label nor offset (`declared`), else it is a
    warning.
    """
    findings: list[Finding] = []
    noon = noon_offset_h(raw, longitude, utc_offset_h)
    coarse = 0.0
    # a positive noon offset means that the light comes late by the clock: the stamps stand too late
    if noon is not None and abs(noon) >= CLOCK_H:
        coarse = -float(round(noon))
    scan = scan_labels(raw, latitude, longitude, utc_offset_h - coarse)
    if scan is not None and coarse:
        straight = scan_labels(raw, latitude, longitude, utc_offset_h)
        if straight is not None and straight.rms_best <= 1.2 * scan.rms_best:
            coarse, scan = 0.0, straight  # the sun's own shading is lopsided, the clock is right
    clock, offset = _decide(raw, scan, coarse, utc_offset_h)
    expected = expected_offset_s(raw)
    text = _words(raw, scan, noon, clock, offset, expected, utc_offset_h)
    changed = abs(clock) > 1.0 or abs(offset - expected) > 1.0
    if changed and declared:
        text += "; kept as declared in the study"
        findings.append(Finding("label-shift", "warning", text))
        return Timing(0.0, expected, scan, noon, tuple(findings))
    findings.append(Finding("label-shift", "corrected" if changed else "note", text))
    return Timing(clock, offset, scan, noon, tuple(findings))


def _decide(
    raw: RawWeather, scan: LabelScan | None, coarse_h: float, utc_offset_h: float
) -> tuple[float, float]:
    """Return clock correction and sun offset, s."""
    expected = expected_offset_s(raw)
    if scan is None:
        return 3600.0 * coarse_h, expected
    off = scan.best_min - scan.expected_min
    worse = scan.rms_expected > 1.3 * scan.rms_best + 2.0
    if abs(off) < ACT_MIN or not worse:
        return 3600.0 * coarse_h, expected
    format_label = (
        raw.format != "logger"
    )  # the format fixes the label, so a whole zone off is the clock's fault
    for hours in (utc_offset_h, -utc_offset_h):
        if format_label and hours and abs(off - 60.0 * hours) <= ACT_MIN:
            return 3600.0 * (coarse_h + hours), expected
    half = raw.step_s / 120.0
    for minutes in (-half, 0.0, half):
        if abs(scan.best_min - minutes) <= 0.2 * half:
            return 3600.0 * coarse_h, 60.0 * minutes
    for hours in (utc_offset_h, -utc_offset_h, 1.0, -1.0):
        rest = off - 60.0 * hours
        if hours and abs(off) > 30.0 and abs(rest) <= 35.0:
            return 3600.0 * (coarse_h + hours), expected if abs(rest) < ACT_MIN else expected + 60.0 * rest
    return 3600.0 * coarse_h, 60.0 * scan.best_min


def _words(
    raw: RawWeather,
    scan: LabelScan | None,
    noon: float | None,
    clock: float,
    offset: float,
    expected: float,
    utc_offset_h: float,
) -> str:
    parts = []
    if scan is not None:
        parts.append(
            f"radiation fits the sun best {scan.best_min:+.0f} min from the stamp (closure error "
            f"{scan.rms_best:.1f} W/m2; {scan.rms_expected:.1f} at the expected {scan.expected_min:+.0f} min)"
        )
    if noon is not None:
        parts.append(f"solar noon comes {abs(noon) * 60.0:.0f} min {'late' if noon > 0 else 'early'}")
    if not parts:
        parts.append("too little light in the record to check its clock against the sun")
    if abs(clock) > 1.0:
        hours = clock / 3600.0
        utc = abs(hours - utc_offset_h) < 1e-6 and utc_offset_h != 0.0
        clue = f"declares UTC{utc_offset_h:+g} h but is written in UTC" if utc else "runs on another clock"
        parts.append(f"the file {clue}: moved by {hours:+g} h")
    if abs(offset - expected) > 1.0:
        parts.append(f"sun taken {offset / 60.0:+.0f} min from the stamp")
    return "; ".join(parts)
