"""The floor map on the page: asked for by a key, in words and in the figure."""

from __future__ import annotations

import base64
import json
import re
from dataclasses import replace

import numpy as np
import pytest

from canopy.run import Run
from canopy.studykeys import StudyKeys
from reports.display import Display
from reports.figures_floor import floor_blocks, side_name
from reports.page import page_text
from tests.reportcase import fakes, make_run


def asking(run: Run, which: tuple[int, ...]) -> Run:
    """The same run with the map asked for by some candidates."""
    done = []
    for k, one in enumerate(run.candidates):
        house = one.plan.house.model_copy(update={"floor_map": k in which})
        done.append(replace(one, plan=replace(one.plan, house=house)))
    return replace(run, candidates=tuple(done))


def test_only_who_asks_gets_a_map() -> None:
    run = make_run(fakes(2))
    assert floor_blocks(run, Display("si")) == []
    assert len(floor_blocks(asking(run, (1,)), Display("si"))) == 2


def test_the_page_carries_the_map_and_its_numbers() -> None:
    page = page_text(asking(make_run(fakes(2)), (0,)))
    assert "Light over the floor: single glass<" in page
    words = re.search(r"<p>single glass: (\d+)\u202f% of the PAR outside arrives straight.*?</p>", page)
    assert words is not None
    for side in ("west wall", "east wall", "south gable end", "north gable end"):
        assert f"along the {side}" in words[0]
    found = re.search(r'id="d-floor-map-0">(.*?)</script>', page, re.S)
    assert found is not None
    cells = json.loads(found[1])[0]["data"][0]
    rows, columns = (int(n) for n in cells["z"]["shape"].split(","))
    z = np.frombuffer(base64.b64decode(cells["z"]["bdata"]), dtype="<f4").reshape(rows, columns)
    third = z[rows // 3 : rows - rows // 3, columns // 3 : columns - columns // 3]
    assert int(words[1]) == round(float(third.mean()))
    assert cells["zmin"] <= z.min() < z.max() <= cells["zmax"]
    assert "Light over the floor" not in page_text(make_run(fakes(1)))


def test_the_key_is_a_key_of_the_house() -> None:
    plain = {
        "weather": {"shipped": "greensboro"},
        "house": {},
        "candidate": [{"name": "glass", "covering": "clear_glass_4mm"}],
    }
    assert StudyKeys.model_validate(plain).house.floor_map is False
    assert StudyKeys.model_validate({**plain, "house": {"floor_map": True}}).house.floor_map is True


@pytest.mark.parametrize(
    ("azimuth", "name"), [(0.0, "north"), (-90.0, "west"), (180.0, "south"), (350, "north")]
)
def test_sides_are_named_by_the_wind(azimuth: float, name: str) -> None:
    assert side_name(azimuth) == name
