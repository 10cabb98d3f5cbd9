"""Builds tests/reference/stand_closed.csv and stand_rows.csv by photon tracing (`tests.photons`).

Run from the project root: python -m tests.build_stand_reference [closed|rows]
"""

from __future__ import annotations

import csv
import itertools
import sys
from collections.abc import Iterator
from pathlib import Path

from tests.photons import inclination_table, mean_projection, trace, travel

FOLDER = Path(__file__).parent / "reference"
HEAD = ["width", "spacing", "height", "lai", "chi", "reflect", "transmit", "floor", "zenith", "across"]
HEAD += ["diffuse", "crop", "ground", "up", "sunlit"]
LEAVES = ((0.08, 0.06), (0.44, 0.44))
FLOORS = (0.15, 0.70)
CLOSED_PHOTONS, ROW_PHOTONS = 1_000_000, 500_000


def closed_cases() -> Iterator[tuple[float, ...]]:
    suns = [(z, 0.0, 0) for z in (0.001, 30.0, 60.0, 75.0, 80.0)] + [(45.0, 0.0, 1)]
    kinds = itertools.product((0.5, 1.0, 2.0, 3.0, 5.0), (0.5, 1.0, 2.0))
    for (lai, chi), leaf, floor, sun in itertools.product(kinds, LEAVES, FLOORS, suns):
        yield 1.0, 1.0, 2.0, lai, chi, *leaf, floor, *sun


def row_cases() -> Iterator[tuple[float, ...]]:
    suns = [(20.0, 0.0, 0), (45.0, 0.0, 0), (70.0, 0.0, 0), (30.0, 45.0, 0), (60.0, 45.0, 0)]
    suns += [(30.0, 90.0, 0), (60.0, 90.0, 0), (75.0, 90.0, 0), (45.0, 60.0, 1)]
    boxes = [(0.8, 1.6, 2.0), (1.0, 1.6, 2.5), (0.5, 1.0, 0.5), (0.3, 0.9, 0.25)]
    kinds = [(box, lai, 1.0) for box in boxes for lai in (1.0, 3.0, 5.0)]
    kinds += [(boxes[0], 3.0, 0.5), (boxes[0], 3.0, 2.0)]
    for (box, lai, chi), leaf, floor, sun in itertools.product(kinds, LEAVES, FLOORS, suns):
        yield *box, lai, chi, *leaf, floor, *sun


def build(name: str, cases: Iterator[tuple[float, ...]], photons: int) -> None:
    """Trace every case and write one table."""
    angles = {chi: (inclination_table(chi), mean_projection(chi)) for chi in (0.5, 1.0, 2.0)}
    with (FOLDER / name).open("w", encoding="utf-8", newline="") as file:
        out = csv.writer(file, lineterminator="\n")
        out.writerow(HEAD)
        for seed, case in enumerate(cases, start=1):
            width, spacing, height, lai, chi, reflect, transmit, floor, zenith, across, diffuse = case
            found = trace(
                *angles[chi], lai, (width, spacing, height), reflect, transmit, floor,
                travel(zenith, across), bool(diffuse), photons, seed,
            )  # fmt: skip
            out.writerow([f"{v:g}" for v in case] + [f"{v:.5f}" for v in found])
            file.flush()


if __name__ == "__main__":
    FOLDER.mkdir(exist_ok=True)
    if "rows" not in sys.argv[1:]:
        build("stand_closed.csv", closed_cases(), CLOSED_PHOTONS)
    if "closed" not in sys.argv[1:]:
        build("stand_rows.csv", row_cases(), ROW_PHOTONS)
