"""Global, beam and diffuse made one: gaps filled by clearness, missing parts computed, the closure kept."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from weather.gaps import fill
from weather.record import Bools, Finding, Floats, Times
from weather.sky import ClearSky, diffuse_of_global
from weather.sun import Sun

TWILIGHT_ZENITH_DEG: Final = 96.0  # no light counts below civil twilight
CLEAR_ENOUGH_W_M2: Final = 20.0  # clear-sky global needed to speak of clearness
YIELD_SHARE: Final = 0.5  # diffuse gives way by at most this share of itself, then beam does


@dataclass(frozen=True)
class Solar:
    """Radiation that closes, (N,) W/m2, the hours that were filled, and findings."""

    ghi: Floats
    dni: Floats
    dhi: Floats
    filled: Bools
    findings: tuple[Finding, ...]


@dataclass(frozen=True)
class SkySun:
    """Sun and clear sky of every hour, and the half step that says how far the sun moves within it."""

    sun: Sun
    clear: ClearSky
    dni_extra: Floats
    latitude: float

    @property
    def cos_zenith(self) -> Floats:
        """Cosine of the apparent zenith, not below 0, (N,)."""
        return np.asarray(np.maximum(np.cos(np.radians(self.sun.apparent_zenith)), 0.0))

    @property
    def dark(self) -> Bools:
        """Hours in which the sun stays below civil twilight throughout, (N,)."""
        highest = self.sun.zenith - 7.5 * np.cos(np.radians(self.latitude))
        return np.asarray(highest > TWILIGHT_ZENITH_DEG)


def complete(columns: dict[str, Floats], sky: SkySun, time: Times, periodic: bool, allow_long: bool) -> Solar:
    """Return global, beam and diffuse without gaps that close at the mid-hour sun.

    Global comes from the file, else from diffuse and beam. Its gaps are filled by the clearness GHI/GHI_clear
    (weather.gaps). Beam and diffuse that are missing are computed from what is there, by Erbs-Driesse where
    only global is. UserError where there is neither global nor beam with diffuse, or a gap is too long.
    """
    n = len(time)
    none = np.full(n, np.nan)
    ghi, dni, dhi = (columns.get(name, none).copy() for name in ("ghi", "dni", "dhi"))
    findings: list[Finding] = []
    cosz = sky.cos_zenith
    made = ~np.isfinite(ghi) & np.isfinite(dni) & np.isfinite(dhi)
    ghi[made] = dhi[made] + dni[made] * cosz[made]
    ghi, filled, found = _fill_global(ghi, sky, time, periodic, allow_long)
    findings += found
    ghi = np.where(sky.dark, 0.0, np.maximum(ghi, 0.0))
    day = ghi > 0.0
    lacking = day & ~np.isfinite(dni) & ~np.isfinite(dhi)
    if lacking.any():
        dhi[lacking] = diffuse_of_global(ghi[lacking], sky.sun.zenith[lacking], sky.dni_extra[lacking])
        text = f"beam and diffuse of {int(lacking.sum())} hours computed from global (Erbs-Driesse)"
        findings.append(Finding("decomposed", "note", text, int(lacking.sum())))
    _halves(ghi, dni, dhi, day, cosz, findings)
    dni, dhi = close(ghi, np.where(day, dni, 0.0), np.where(day, dhi, 0.0), cosz, sky.dni_extra)
    return Solar(ghi, dni, dhi, filled, tuple(findings))


def _fill_global(
    ghi: Floats, sky: SkySun, time: Times, periodic: bool, allow_long: bool
) -> tuple[Floats, Bools, list[Finding]]:
    day = (sky.clear.ghi > CLEAR_ENOUGH_W_M2) & ~sky.dark
    ratio = np.where(day, ghi / np.where(day, sky.clear.ghi, 1.0), np.nan)
    known = np.flatnonzero(day & np.isfinite(ratio))
    if len(known) and len(known) < day.sum():
        # a night counts as part of a gap only between two missing days
        rows = np.flatnonzero(day)
        after = np.minimum(np.searchsorted(rows, np.arange(len(ghi))), len(rows) - 1)
        before = np.maximum(np.searchsorted(rows, np.arange(len(ghi)), side="right") - 1, 0)
        quiet = ~day & (np.isfinite(ratio[rows[after]]) | np.isfinite(ratio[rows[before]]))
        ratio[quiet] = np.interp(np.flatnonzero(quiet), known, ratio[known])
        done = fill(ratio, time, "global radiation", periodic, allow_long, wanted=day)
        gaps = done.filled
        ghi = np.where(gaps, done.values * sky.clear.ghi, ghi)
        found = [done.finding] if done.finding else []
    else:
        gaps = np.zeros(len(ghi), dtype=bool)
        found = []
        if day.any() and not len(known):
            fill(ratio, time, "global radiation", periodic, allow_long, wanted=day)
    return np.where(np.isfinite(ghi), ghi, 0.0), gaps, found


def _halves(ghi: Floats, dni: Floats, dhi: Floats, day: Bools, cosz: Floats, findings: list[Finding]) -> None:
    """Compute beam from diffuse, or diffuse from beam, in place, where one of them is missing."""
    need = day & ~np.isfinite(dhi) & np.isfinite(dni)
    dhi[need] = np.clip(ghi[need] - dni[need] * cosz[need], 0.0, ghi[need])
    if need.any():
        text = f"diffuse of {int(need.sum())} hours computed as global less beam"
        findings.append(Finding("diffuse-computed", "note", text, int(need.sum())))
    want = day & ~np.isfinite(dni) & np.isfinite(dhi)
    dni[want] = np.maximum(ghi[want] - dhi[want], 0.0) / np.maximum(cosz[want], 0.02)


def close(ghi: Floats, dni: Floats, dhi: Floats, cosz: Floats, dni_extra: Floats) -> tuple[Floats, Floats]:
    """Return beam and diffuse with ghi == dhi + dni * cosz to rounding.

    Global stays. Diffuse takes what is left of it after the file's beam at the mid-hour sun, but gives way by
    no more than half of itself; where that is not enough beam gives way. So beam never exceeds the file's,
    nor the sun outside the atmosphere, and no beam is left where the mid-hour sun is down.
    """
    beam = np.clip(dni, 0.0, dni_extra) * cosz
    least = YIELD_SHARE * np.minimum(np.maximum(dhi, 0.0), ghi)
    diffuse = np.clip(ghi - beam, least, ghi)
    up = cosz > 1e-6
    beam_normal = np.where(up, (ghi - diffuse) / np.where(up, cosz, 1.0), 0.0)
    beam_normal = np.clip(beam_normal, 0.0, dni_extra)
    return beam_normal, np.asarray(ghi - beam_normal * cosz)
