"""Figures of the stand: one day of light on the crop with all its parts, one hour down the canopy."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.hourly import photons_per_joule
from canopy.leaflight import LEAST_LEAF, Profile, profile
from canopy.rows import rows_of
from canopy.run import CandidateRun, Run
from canopy.stand import Stand
from reports.blocks import Figure, Mark, Spec
from reports.display import Display
from reports.figures import OUTSIDE, TO_GROUND, TO_OUT, axis, layout, line

Floats = NDArray[np.float64]

PAR: Final = SOLAR.index("par")

TOP: Final = Mark("top of the crop", "#2f86bd", "dash", "diamond")
LEAVES: Final = Mark("absorbed by leaves, per m² floor", "#1f3a6e", "solid", "triangle-up")
SUNLIT: Final = Mark("per m² of sunlit leaf", "#b98300", "solid", "circle")
SHADED: Final = Mark("per m² of shaded leaf", "#2f7d32", "solid", "square")
LEAF_PAR: Final = Mark("PAR absorbed by leaves", "#2f7d32", "solid", "square")
LEAF_NIR: Final = Mark("NIR absorbed by leaves", "#a3262a", "dash", "triangle-down")
FLOOR: Final = Mark("absorbed by the floor", TO_GROUND.colour, "dot", "cross")
BACK: Final = Mark("sent upwards by crop and floor", TO_OUT.colour, "dash", "star")
SHARE: Final = Mark("share of leaves in the sun", "#5a645e", "dot", "diamond")


def chosen_day(run: Run) -> np.datetime64:
    """Return the day that the study asks to see if it is among the reported ones, else the brightest."""
    wanted = run.study.keys.show_day
    if wanted is not None:
        hits = [day for day in run.days if str(day)[5:] == wanted]
        if hits:
            return np.datetime64(hits[0], "D")
    return brightest_day(run)


def chosen_hour(run: Run, day: np.datetime64) -> int:
    """Return the row of the hour of that day that is shown down the canopy."""
    of_day = np.flatnonzero(run.time.astype("datetime64[D]") == day)
    wanted = run.study.keys.show_hour
    if wanted is not None:
        hour = (run.time[of_day] - run.time[of_day].astype("datetime64[D]")).astype("timedelta64[h]")
        hits = of_day[hour.astype(int) == wanted]
        if len(hits):
            return int(hits[0])
    return int(of_day[np.argmax(run.candidates[0].hourly["outside_par_umol_m2_s"][of_day])])


def brightest_day(run: Run) -> np.datetime64:
    """Return the reported day with most PAR outside and, if there is one, a crop in every candidate."""
    crop = np.all([one.lai[run.hours] > LEAST_LEAF for one in run.candidates], axis=0)
    day_of = np.searchsorted(run.days, run.time.astype("datetime64[D]"))
    outside = run.candidates[0].hourly["outside_par_umol_m2_s"]
    light = np.bincount(day_of, weights=outside * (crop if crop.any() else 1.0), minlength=len(run.days))
    return np.datetime64(run.days[int(light.argmax())], "D")


def day_figure(run: Run, day: np.datetime64, show: Display) -> Figure:
    """Return one day of light, per candidate: photons above, energy below, hour by hour."""
    where = np.flatnonzero(run.time.astype("datetime64[D]") == day)
    if not len(where):
        raise ValueError(f"{day} is not among the reported days")
    drawn = [_day_spec(run, one, where, show) for one in run.candidates]
    specs = tuple(spec for spec, _ in drawn)
    for name, k in (("yaxis", 0), ("yaxis2", 1)):  # one scale for all candidates
        top = 1.08 * max(1.0, *(peaks[k] for _, peaks in drawn))
        for spec in specs:
            spec["layout"][name]["range"] = [0, top]
    marks = (OUTSIDE, TOP, LEAVES, SUNLIT, SHADED, LEAF_PAR, LEAF_NIR, FLOOR, BACK)
    return Figure(
        "stand-day",
        f"Light on the crop on {day}",
        f"Above: PAR photons outside, at the top of the crop, and absorbed by leaves on {day} by hour. "
        "Below: energy absorbed by leaves (PAR and NIR) and by the floor, and sent upwards.",
        specs,
        marks,
        520,
        per_candidate=True,
    )


def _day_spec(
    run: Run, one: CandidateRun, where: NDArray[np.intp], show: Display
) -> tuple[Spec, tuple[float, float]]:
    """Return the drawing of one candidate and the highest values of its two panels."""
    photons = {
        OUTSIDE: "outside_par_umol_m2_s",
        TOP: "inside_par_umol_m2_s",
        LEAVES: "crop_par_absorbed_umol_m2_s",
        SUNLIT: "ppfd_sunlit_umol_m2_s",
        SHADED: "ppfd_shaded_umol_m2_s",
    }
    up = one.light.crop_up[:, run.hours[where]].sum(0)
    energy = {
        LEAF_PAR: one.hourly["crop_par_absorbed_w_m2"][where],
        LEAF_NIR: one.hourly["crop_nir_absorbed_w_m2"][where],
        FLOOR: one.hourly["ground_solar_w_m2"][where],
        BACK: up,
    }
    hour = run.time[where].astype("datetime64[m]").astype(np.int64) % 1440
    labels = [f"{m // 60:02d}:{m % 60:02d}" for m in hour]
    rate, power = show.text("umol/m2/s"), show.text("W/m2")
    above = {mark: one.hourly[name][where] for mark, name in photons.items()}
    below = {mark: show.convert(values, "W/m2") for mark, values in energy.items()}
    traces = [line(mark, labels, values, rate, 0) for mark, values in above.items()]
    traces += [line(mark, labels, values, power, 0, yaxis="y2") for mark, values in below.items()]
    spec: Spec = {
        "data": traces,
        "layout": layout(
            axis("hour of the day (standard time of the record)", type="category", nticks=12, anchor="y2"),
            axis(f"PAR photons, {rate}", domain=[0.54, 1.0]),
            yaxis2=axis(f"energy, {power} of floor", domain=[0.0, 0.46]),
        ),
    }
    return spec, (float(np.max(list(above.values()))), float(np.max(list(below.values()))))


def hour_profile(run: Run, one: CandidateRun, hour: int, layers: int = 24) -> Profile | None:
    """Return light down the canopy of one candidate in a reported hour; None without a crop.

    hour: index into `Run.hours`.
    """
    at = int(run.hours[hour])
    crop = one.plan.crop
    if one.lai[at] <= LEAST_LEAF:
        return None
    ridge = one.plan.house.ridge_azimuth
    rows = rows_of(crop.row_width, crop.row_spacing, crop.height, crop.row_azimuth, ridge)
    return profile(
        Stand(one.lai[at : at + 1], crop.leaf_angle_chi, rows),
        one.leaf,
        one.ground,
        one.light.inside_beam[:, at],
        one.light.inside_diffuse[:, at],
        float(run.weather.zenith[at]),
        float(run.weather.azimuth[at]),
        layers,
    )


def profile_figure(run: Run, hour: int, show: Display) -> Figure:
    """Return light on leaves down the canopy in one reported hour (index into `Run.hours`), per candidate."""
    per_joule = float(photons_per_joule(run.sun, run.weather)[run.hours[hour]])
    found = [hour_profile(run, one, hour) for one in run.candidates]
    rate = show.text("umol/m2/s")
    specs = tuple(_profile_spec(one, per_joule, rate) for one in found)
    when = np.datetime_as_string(run.time[hour], unit="m").replace("T", " ")
    return Figure(
        "stand-profile",
        f"Light down the canopy, hour from {when}",
        "PAR absorbed per square metre of sunlit and of shaded leaf, and the share of leaves in the sun (top "
        "scale), from the top of the crop down; depth is counted in leaf area above.",
        specs,
        (SUNLIT, SHADED, SHARE),
        420,
        per_candidate=True,
        half=True,
        note="Sunlit leaves are drawn only where there are some; candidates without a crop show nothing.",
    )


def _profile_spec(found: Profile | None, per_joule: float, rate: str) -> Spec:
    traces = []
    if found is not None:
        there = found.sunlit_share > 1e-3
        sunlit = np.where(there, found.sunlit[PAR] * per_joule, np.nan)
        depth = np.round(found.depth, 3).tolist()
        for mark, values in ((SUNLIT, sunlit), (SHADED, found.shaded[PAR] * per_joule)):
            traces.append(_down(mark, values, depth, rate, 0))
        traces.append(_down(SHARE, 100.0 * found.sunlit_share, depth, "%", 0, xaxis="x2"))
    return {
        "data": traces,
        "layout": layout(
            axis(f"absorbed PAR, {rate} of leaf", rangemode="tozero"),
            axis("leaf area above, m² per m² of floor", autorange="reversed"),
            xaxis2=axis(
                "leaves in the sun, %", overlaying="x", side="top", range=[0, 105], showgrid=False, dtick=20
            ),
        ),
    }


def _down(mark: Mark, values: Floats, depth: list[float], unit: str, digits: int, **more: str) -> Spec:
    """Return a line that runs down: what `line` draws with its axes changed over."""
    trace = line(mark, depth, values, unit, digits, **more)
    trace["x"], trace["y"] = trace["y"], trace["x"]
    trace["hovertemplate"] = f"{mark.name}: %{{x:,.{digits}f}} {unit}<extra></extra>"
    return trace
