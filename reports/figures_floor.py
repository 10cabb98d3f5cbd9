"""Edge against middle: light over the floor of the candidates that ask for a map."""

from __future__ import annotations

import base64
from typing import Final

import numpy as np

from canopy.floormap import FloorMap, Side, floor_map, season_light
from canopy.run import CandidateRun, Run
from reports.blocks import Block, Figure, Text
from reports.display import Display, percent
from reports.figures import axis, layout, pack
from reports.figures_sky import LIGHT_SCALE

POINTS_ACROSS, POINTS_ALONG, MOST_ACROSS = 60, 20, 200
STRIP_M: Final = 3.0
WINDS: Final = ("north", "north-east", "east", "south-east", "south", "south-west", "west", "north-west")
SIDES: Final[tuple[tuple[Side, float, str], ...]] = (
    ("low_x", -90.0, "wall"),
    ("high_x", 90.0, "wall"),
    ("low_y", 180.0, "gable end"),
    ("high_y", 0.0, "gable end"),
)


def floor_blocks(run: Run, show: Display) -> list[Block]:
    """Return a map and its numbers in words for every candidate whose house asks for one."""
    asking = [k for k, one in enumerate(run.candidates) if one.plan.house.floor_map]
    if not asking:
        return []
    points = run.study.keys.site.horizon
    light = season_light(run.weather, run.hours, horizon=tuple((p[0], p[1]) for p in points) or None)
    maps = {}
    for k in asking:
        one = run.candidates[k]
        spans = one.house.spans
        each = max(round(POINTS_ACROSS / spans), 2 if 2 * spans <= MOST_ACROSS else 1)
        across = each * spans
        maps[k] = floor_map(one.house, one.covering.solar_dry, *light, across=across, along=POINTS_ALONG)
    values = [100.0 * m.transmission for m in maps.values()]
    low = float(np.floor(min(v.min() for v in values) / 5.0) * 5.0)
    high = float(np.ceil(max(v.max() for v in values) / 5.0) * 5.0)
    blocks: list[Block] = []
    for k, found in maps.items():
        one = run.candidates[k]
        blocks += [_figure(k, one, found, (low, high), show), Text((floor_words(one, found, show),))]
    return blocks


def side_name(azimuth_deg: float) -> str:
    """Return the wind that a side faces, to the nearest of eight."""
    return WINDS[round((azimuth_deg % 360.0) / 45.0) % 8]


def floor_words(one: CandidateRun, found: FloorMap, show: Display) -> str:
    """Return the middle of the house beside its four sides."""
    sides = []
    for side, turn, what in SIDES:
        share, wide = found.edge(side, STRIP_M)
        wind = side_name(one.house.ridge_azimuth + turn)
        sides.append(f"{percent(share)} in the {show.say(wide, 'm')} along the {wind} {what}")
    least, most = float(found.transmission.min()), float(found.transmission.max())
    return (
        f"{one.plan.name}: {percent(found.middle)} of the PAR outside arrives straight in the middle "
        f"third of the house; {', '.join(sides[:-1])} and {sides[-1]}. From point to point it lies between "
        f"{percent(least)} and {percent(most)}."
    )


def _figure(k: int, one: CandidateRun, found: FloorMap, scale: tuple[float, float], show: Display) -> Figure:
    ridge = one.house.ridge_azimuth
    unit = show.text("m")
    cells = {
        "type": "heatmap",
        "x": pack(show.convert(found.x_m, "m")),
        "y": pack(show.convert(found.y_m, "m")),
        "z": {
            "dtype": "f4",
            "bdata": base64.b64encode((100.0 * found.transmission).astype("<f4").tobytes()).decode("ascii"),
            "shape": f"{len(found.y_m)}, {len(found.x_m)}",
        },
        "zmin": scale[0],
        "zmax": scale[1],
        "colorscale": [list(stop) for stop in LIGHT_SCALE],
        "colorbar": {"title": {"text": "% arrives"}, "thickness": 12, "outlinewidth": 0, "len": 0.8},
        "hovertemplate": f"%{{x:.0f}} {unit} across, %{{y:.0f}} {unit} along: %{{z:.0f}} %<extra></extra>",
    }
    other = one.plan.house.wall_covering is not None or one.plan.house.gable_covering is not None
    return Figure(
        f"floor-map-{k}",
        f"Light over the floor: {one.plan.name}",
        "A plan of the house at the height of the crop. Colour: share of the PAR outside, over the reported "
        "time, that arrives straight at each point. The numbers stand in words below.",
        (
            {
                "data": [cells],
                "layout": layout(
                    axis(f"{unit} from the {side_name(ridge - 90.0)} wall"),
                    axis(f"{unit} from the {side_name(ridge + 180.0)} gable end"),
                ),
            },
        ),
        (),
        360,
        note="Sun and sky as they were in the reported time; straight light only (mirrored light adds a few "
        "per cent), covering dry, no paint, dirt or screens. Width and length are not to one scale."
        + (" Walls and gable ends are taken with the roof's covering here." if other else ""),
    )
