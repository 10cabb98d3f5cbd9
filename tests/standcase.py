"""Leaves, floors and reference tables for the tests of the stand."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np

from canopy.optics import Ground, Leaf
from canopy.rows import Rows
from canopy.stand import Stand, respond

FOLDER = Path(__file__).parent / "reference"
Case = dict[str, float]


def plain_leaf(reflect: float, transmit: float) -> Leaf:
    """Return a leaf of one band."""
    return Leaf(
        "test", "test", "computed", "test", np.array([reflect]), np.array([transmit]), np.full(3, 0.97)
    )


def floor(reflect: float, bands: int = 1) -> Ground:
    """Return a floor."""
    return Ground(
        "test", "test", "computed", "test", np.full(bands, reflect), np.full(3, 0.95), 1.0, 2e6, 0.0, 0.0
    )


def reference(name: str) -> tuple[list[Case], np.ndarray]:
    """Return cases of a table and what photon tracing found: crop, ground, up, sunlit."""
    with (FOLDER / name).open(encoding="utf-8") as file:
        cases = [{key: float(value) for key, value in row.items()} for row in csv.DictReader(file)]
    return cases, np.array([[case[key] for key in ("crop", "ground", "up", "sunlit")] for case in cases])


def traced(case: Case, rows: bool = False) -> list[float]:
    """Return the planner's answer to one case."""
    shape = Rows(case["width"], case["spacing"], case["height"], 0.0) if rows else None
    answer = respond(
        Stand(np.array([case["lai"]]), case["chi"], shape),
        plain_leaf(case["reflect"], case["transmit"]),
        floor(case["floor"]),
        np.array([case["zenith"]]),
        np.array([case["across"]]),
    )
    kind = "diffuse" if case["diffuse"] else "beam"
    return [float(getattr(answer, f"{kind}_{key}")[0, 0]) for key in ("crop", "ground", "up", "crop_sunlit")]
