"""Figures of the stand: they are valid for the plotter and show what was computed."""

from __future__ import annotations

import base64

import numpy as np
import plotly.graph_objects as go
import pytest

from canopy.run import Run
from reports.display import Display
from reports.stand_figures import brightest_day, day_figure, hour_profile, profile_figure
from tests.reportcase import fakes, make_run


@pytest.fixture(scope="module")
def run() -> Run:
    return make_run(fakes(2), months=(6,))


def _values(packed: object) -> np.ndarray:
    if isinstance(packed, dict):
        return np.frombuffer(base64.b64decode(packed["bdata"]), dtype="<f4")
    return np.array(packed, dtype=float)


@pytest.mark.parametrize("units", ["si", "us"])
def test_day(run: Run, units: str) -> None:
    day = brightest_day(run)
    drawn = day_figure(run, day, Display(units))
    assert len(drawn.specs) == len(run.candidates)
    where = run.time.astype("datetime64[D]") == day
    for spec, one in zip(drawn.specs, run.candidates, strict=True):
        assert len(go.Figure(spec).data) == len(drawn.key) == 9
        shown = {trace["name"]: _values(trace["y"]) for trace in spec["data"]}
        assert shown["outside"] == pytest.approx(one.hourly["outside_par_umol_m2_s"][where], rel=1e-5)
        upwards = one.light.crop_up[:, run.hours[where]].sum(0)
        factor = 1.0 if units == "si" else 1.0 / 3.15459  # BTU h-1 ft-2 per W/m2
        assert shown["sent upwards by crop and floor"] == pytest.approx(factor * upwards, rel=1e-4)
        assert all(values.max() <= spec["layout"]["yaxis"]["range"][1] for values in shown.values())
    outside = run.candidates[0].hourly["outside_par_umol_m2_s"]
    days = run.time.astype("datetime64[D]")
    assert outside[where].sum() == max(outside[days == one].sum() for one in run.days)


def test_a_day_that_is_not_there(run: Run) -> None:
    with pytest.raises(ValueError, match="not among the reported days"):
        day_figure(run, np.datetime64("1890-01-01"), Display("si"))


def test_profile_shows_what_leaves_absorb(run: Run) -> None:
    noon = int(np.argmax(run.candidates[0].hourly["outside_par_umol_m2_s"]))
    drawn = profile_figure(run, noon, Display("si"))
    for spec, one in zip(drawn.specs, run.candidates, strict=True):
        assert len(go.Figure(spec).data) == 3
        course = hour_profile(run, one, noon)
        assert course is not None
        depth = np.array(spec["data"][0]["y"])
        assert (np.diff(depth) > 0).all()
        assert depth[-1] < one.lai[run.hours[noon]]
        share = _values(spec["data"][2]["x"])
        assert share == pytest.approx(100 * course.sunlit_share, rel=1e-4)
        assert (np.diff(share) < 0).all()
