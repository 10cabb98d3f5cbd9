"""The sky map and the table of ridge directions, on a real house."""

from __future__ import annotations

import numpy as np
import pytest

from canopy.houseview import TurnTable
from reports.figures_sky import PATHS, RIDGE, sky_figure, turn_rows, turn_words, turned
from tests.reportcase import fakes, make_run


def test_the_map_shows_every_candidate_on_one_scale() -> None:
    figure = sky_figure(make_run(fakes(2)))
    scales = {(s["data"][0]["marker"]["cmin"], s["data"][0]["marker"]["cmax"]) for s in figure.specs}
    assert len(figure.specs) == 2
    assert len(scales) == 1
    names = [trace.get("name") for trace in figure.specs[0]["data"][1:]]
    assert names == [mark.name for mark in (*PATHS, RIDGE)]


def test_the_best_direction_of_the_ridge_is_said_with_its_gain() -> None:
    ridge = np.arange(0.0, 180.0, 15.0)
    winter = np.where(ridge == 90.0, 0.77, 0.70)
    table = TurnTable(ridge, np.full(12, 0.75), winter, np.full(12, 0.7), winter)
    assert "turned to 90° from north, glass would pass 10.0\u202f% more" in turn_words(table, "glass", 0.0)
    assert turn_words(table, "glass", 90.0).startswith("No other direction")
    assert turn_words(table, "glass", 270.0).startswith("No other direction")
    rows = turn_rows(table, "glass").rows
    assert [row.label for row in rows[:3]] == ["0°", "15°", "30°"]
    assert rows[6].cells[2] == "77.0\u202f%"


def test_turning_follows_the_sun_of_the_record() -> None:
    table = turned(make_run(fakes(1)))
    assert table.ridge_azimuth_deg.tolist() == [15.0 * k for k in range(12)]
    assert ((table.winter > 0.3) & (table.winter < 1.0)).all()
    assert table.year == pytest.approx(table.year.mean(), rel=0.2)
