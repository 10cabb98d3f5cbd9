"""run.json: what was computed, from what, with what, and how well every budget closes."""

from __future__ import annotations

import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np

from canopy.run import CandidateRun, Run
from reports.csvtables import DAILY_DIGITS, HOURLY_DIGITS, zone_offset


def _weather(run: Run) -> dict[str, Any]:
    weather = run.weather
    return {
        "title": weather.title,
        "source": weather.source,
        "sha256": run.weather_sha256,
        "latitude": weather.site.latitude,
        "longitude": weather.site.longitude,
        "elevation_m": weather.site.elevation,
        "timezone": weather.site.timezone,
        "utc_offset": zone_offset(weather.utc_offset_h),
        "step_s": weather.step_s,
        "typical_year": weather.typical,
        "clear_sky": weather.clear_sky,
        "hours_in_record": len(weather),
        "hours_reported": len(run.hours),
        "hours_filled": int(np.count_nonzero(weather.filled[run.hours])),
        "hours_longwave_modelled": int(np.count_nonzero(weather.longwave_modelled[run.hours])),
        "findings": [
            {"check": f.check, "level": f.level, "text": f.text, "count": f.count} for f in weather.findings
        ],
    }


def _candidate(one: CandidateRun) -> dict[str, Any]:
    return {
        "name": one.plan.name,
        "covering": one.covering.name,
        "screens": [screen.name for screen in one.screens],
        "closure": [{"budget": c.budget, "worst_w_m2": c.worst_w_m2, "at": c.at} for c in one.closures],
        "solver": {
            "iterations": one.heat.iterations,
            "retried_hours": one.heat.retried_hours,
            "worst": one.heat.worst,
        },
        "notes": [*one.notes, *one.heat.notes],
    }


def run_record(run: Run, files: list[str], wall_s: Mapping[str, float]) -> dict[str, Any]:
    """Return what run.json holds, as plain numbers, texts, lists and tables."""
    return {
        "title": run.study.keys.title,
        "versions": dict(run.versions),
        "study": {"file": Path(run.study.label).name, "sha256": run.study.sha256},
        "weather": _weather(run),
        "closure_worst_w_m2": max(c.worst_w_m2 for one in run.candidates for c in one.closures),
        "candidates": [_candidate(one) for one in run.candidates],
        "wall_s": {stage: round(seconds, 4) for stage, seconds in wall_s.items()},
        "notes": list(run.notes),
        "files": files,
        "decimals": {"hourly": HOURLY_DIGITS, "daily": DAILY_DIGITS},
    }


def write_run_json(run: Run, path: Path, files: list[str], wall_s: Mapping[str, float]) -> None:
    """Write run.json; a number that JSON cannot carry is a fault, not a null."""
    text = json.dumps(run_record(run, files, wall_s), indent=1, ensure_ascii=False, allow_nan=False)
    path.write_text(text + "\n", encoding="utf-8")
