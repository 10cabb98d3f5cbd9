"""A walk-in tunnel, an arch from the ground without heating, end to end on the shipped Greensboro year."""

from __future__ import annotations

import math
import tomllib
from pathlib import Path

import numpy as np
import pytest

from canopy.run import CandidateRun, Run
from canopy.simulate import simulate
from canopy.studyfile import build_study
from reports.page import page_text
from reports.summary import notes_of

STUDY = """
title = "A tunnel"
[weather]
shipped = "greensboro"
[house]
form = "arch"
spans = 1
span_width = 8.0
length = 40.0
gutter_height = 0.0
gutter_width = 0.0
rise = 3.0
[crop]
leaf = "tomato"
leaf_area_index = 3.0
height = 2.0
[heating]
capacity_w_m2 = 0.0
[[candidate]]
name = "tunnel"
covering = "film-pe-plain"
"""


@pytest.fixture(scope="module")
def run() -> Run:
    return simulate(build_study(tomllib.loads(STUDY), Path(), "tunnel", STUDY.encode()))


@pytest.fixture(scope="module")
def tunnel(run: Run) -> CandidateRun:
    return run.candidates[0]


def test_walls_and_air_are_those_of_a_circle(tunnel: CandidateRun) -> None:
    """Circular segment of chord 8 m and sagitta 3 m: Bronshtein & Semendyayev, plane geometry."""
    radius = (4.0**2 + 3.0**2) / (2.0 * 3.0)
    half = math.asin(4.0 / radius)
    segment = 0.5 * radius**2 * (2.0 * half - math.sin(2.0 * half))
    assert tunnel.shell.mean_height_m == pytest.approx(segment / 8.0)
    assert tunnel.shell.roof_ratio == pytest.approx(2.0 * half * radius / 8.0)
    assert tunnel.shell.wall_ratio == pytest.approx(2.0 * segment / (8.0 * 40.0))  # gable ends alone


def test_a_tunnel_runs_through(run: Run, tunnel: CandidateRun) -> None:
    for name, values in tunnel.hourly.items():
        if name != "heat_at_c":  # an unheated house has no heating set-point
            assert np.isfinite(values).all(), name
    assert tunnel.hourly["heat_delivered_w_m2"].max() < 1e-3
    inside, outside = (tunnel.hourly[f"{side}_par_umol_m2_s"].sum() for side in ("inside", "outside"))
    # film tunnels: 70-80 % of the light outside is common practice, new and clean up to 85 %
    assert 0.65 < inside / outside < 0.90
    assert max(c.worst_w_m2 for c in tunnel.closures) < 0.1
    assert any("light is taken at gutter height, 0 m, where the crop is taller" in n for n in notes_of(run))
    page = page_text(run)
    assert "It takes no heat" in page
    assert "lost to the sky a year instead of" in page  # one grey band, where no heat can be compared
