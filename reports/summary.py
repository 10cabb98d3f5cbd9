"""The few numbers per candidate that sentences and comparison tables are made of."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.bands import SOLAR
from canopy.energy import Energy
from canopy.ledger import season
from canopy.loadcurve import heating_only
from canopy.run import CandidateRun, Run
from canopy.soiling import dirt_left
from reports.csvtables import mean_dli

Floats = NDArray[np.float64]

FULL_YEAR_DAYS: Final = 360
DARK_MONTHS: Final = 3
PAR: Final = SOLAR.index("par")


@dataclass(frozen=True)
class Summary:
    """One candidate over the reported season, SI, per m2 of floor."""

    name: str
    total: Mapping[str, float]  # every daily column over the season
    heat_kwh: float
    peak_w: float  # largest hour
    peak_at: np.datetime64
    outside_mol: float
    inside_mol: float
    crop_mol: float
    dark_dli: float  # mean daily light at the crop in the darkest months, mol m-2 d-1; nan without a crop
    dark_inside_mol: float  # PAR at the crop over the darkest months
    sheet_par: float  # PAR, diffuse, through the covering alone (dry)
    house_par: float  # PAR, isotropic, whole house (dry), under the dirt of the season
    dirt: float  # share of the PAR that dirt on the covering takes, weighted by the light outside
    cost: float | None  # fuel and power of the whole house over the record; None without a price
    currency: str

    @property
    def shape_share(self) -> float:
        """Share of the diffuse PAR behind the covering that shape and structure let through to the crop."""
        behind = self.sheet_par * (1.0 - self.dirt)
        return self.house_par / behind if behind > 0 else float("nan")

    @property
    def light_share(self) -> float:
        """Share of the outside PAR that reaches the top of the crop."""
        return self.inside_mol / self.outside_mol if self.outside_mol > 0 else float("nan")


def dark_months(run: Run) -> Floats:
    """Return True for the months with the least light outside (three, or all when there are fewer)."""
    outside = mean_dli(run, run.candidates[0])[0]
    order = np.argsort(outside, kind="stable")
    dark = np.zeros(len(outside), bool)
    dark[order[:DARK_MONTHS]] = True
    return dark


def dirt_share(run: Run, one: CandidateRun) -> float:
    """Return the share of the season's PAR that dirt on the covering takes; 0 where the study names none."""
    own = next((c for c in run.study.keys.covering if c.name == one.plan.covering), None)
    left = dirt_left(own, run.weather.time)
    if left is None:
        return 0.0
    lost, light = 1.0 - left[run.hours], one.hourly["outside_par_umol_m2_s"]
    return float(np.average(lost, weights=light if light.any() else None))


def peaks_as_screens_open(one: CandidateRun) -> bool:
    """Return whether the largest hour is one in which the screens open."""
    load, drawn = one.hourly["heat_delivered_w_m2"], one.hourly["screen_drawn_share"]
    at = int(load.argmax())
    return bool(one.screens and at > 0 and load[at] > 0 and drawn[at] < drawn[at - 1] - 0.5)


def notes_of(run: Run) -> tuple[str, ...]:
    """Return what a reader must know of a run and its candidates, each note once with all it holds for."""
    holds: dict[str, list[str]] = {}
    for one in run.candidates:
        for note in dict.fromkeys((*one.notes, *one.heat.notes)):
            holds.setdefault(note, []).append(one.plan.name)
    every = len(run.candidates)
    own = [
        f"{'all candidates' if len(names) == every > 1 else '; '.join(names)}: {note}"
        for note, names in holds.items()
    ]
    return (*run.notes, *own)


def summarise(run: Run, one: CandidateRun) -> Summary:
    """Return the numbers of one candidate."""
    total = season(one.hourly, run.weather.step_s)
    load = heating_only(one.hourly["heat_delivered_w_m2"])
    dark = dark_months(run)
    days = run.days.astype("datetime64[M]").astype(str)
    inside = one.daily["inside_par_mol_m2"]
    in_dark = np.isin(days, np.array(run.months)[dark])
    dli = mean_dli(run, one)[1][dark]
    energy: Energy | None = one.sizing.energy
    dirt = dirt_share(run, one)
    return Summary(
        name=one.plan.name,
        total=total,
        heat_kwh=total["heat_delivered_kwh_m2"] if load.any() else 0.0,
        peak_w=float(load.max()),
        peak_at=run.time[int(load.argmax())],
        outside_mol=total["outside_par_mol_m2"],
        inside_mol=total["inside_par_mol_m2"],
        crop_mol=total["crop_par_absorbed_mol_m2"],
        dark_dli=float(np.nanmean(dli)) if np.isfinite(dli).any() else float("nan"),
        dark_inside_mol=float(inside[in_dark].sum()),
        sheet_par=float(one.covering.solar_dry.diffuse_in[PAR]),
        house_par=float(one.transmission.isotropic[PAR]) * (1.0 - dirt),
        dirt=dirt,
        cost=None if energy is None else energy.total_cost,
        currency="" if energy is None else _currency(energy),
    )


def _currency(energy: Energy) -> str:
    costs = (energy.boiler_cost, energy.electricity_cost)
    return next((c.currency for c in costs if c is not None and c.currency), "")


def summaries(run: Run) -> tuple[Summary, ...]:
    """Return the numbers of every candidate, in the study's order."""
    return tuple(summarise(run, one) for one in run.candidates)


def beaten(rows: tuple[Summary, ...]) -> list[tuple[Summary, Summary]]:
    """Return (worse, better) pairs: better in light, in heat and in peak at once."""
    pairs = []
    for worse in rows:
        for better in rows:
            gains = (
                better.inside_mol > worse.inside_mol * 1.002,
                better.heat_kwh < worse.heat_kwh * 0.998,
                better.peak_w < worse.peak_w * 0.998,
            )
            if all(gains):
                pairs.append((worse, better))
                break
    return pairs


def house_differences(run: Run, at: int) -> list[tuple[str, Any, Any]]:
    """Return (table.key, first candidate's value, this one's) of every key that differs."""
    first, other = run.candidates[0].plan, run.candidates[at].plan
    found = []
    for table in ("house", "crop", "climate", "heating"):
        mine, base = getattr(other, table), getattr(first, table)
        for key in type(base).model_fields:
            a, b = getattr(base, key), getattr(mine, key)
            if a != b:
                found.append((f"{table}.{key}", a, b))
    return found
