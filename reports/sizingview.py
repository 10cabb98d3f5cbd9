"""What the report takes from a candidate's sizing and design night."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Final

import numpy as np

from canopy.run import CandidateRun

COLUMNS: Final = (
    "peak_w_m2",
    "peak_at",
    "load_exceeded_35_h_w_m2",
    "load_exceeded_88_h_w_m2",
    "design_night_w_m2",
    "design_outside_c",
    "annual_heat_kwh_m2",
    "full_load_hours",
    "design_heat_kw",
    "margin_pct",
    "boiler_kw",
)
"""The columns of sizing.csv after the candidate's name."""

DIGITS: Final = {"full_load_hours": 1, "annual_heat_kwh_m2": 3}


def sizing_row(one: CandidateRun, utc_offset: str) -> Mapping[str, Any]:
    """Return one row of sizing.csv, rounded as printed; the peak's hour carries the file's zone offset."""
    row: dict[str, Any] = {"candidate": one.plan.name}
    for name in COLUMNS:
        value = getattr(one.sizing, name)
        if name == "peak_at" and one.sizing.peak_w_m2 <= 0:
            row[name] = None  # a house without heat has no peak
        elif isinstance(value, np.datetime64):
            row[name] = str(value.astype("datetime64[s]")) + utc_offset
        else:
            row[name] = round(float(value), DIGITS.get(name, 2))
    return row
