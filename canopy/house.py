"""The shape of a house: sections, panels, areas and volume (geometry only, no material)."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True)
class House:
    """One house, as the study gives it; metres and degrees. Derived sizes are properties."""

    form: Literal["gable", "arch"]
    spans: int
    span_width: float
    length: float  # along the ridge
    gutter_height: float
    pitch: float  # gable: degrees; unused for arches
    pitch_other: float  # gable: second slope if the two differ, else equal to pitch
    rise: float  # arch: gutter to crown
    ridge_azimuth: float  # direction of the ridge line, degrees from north
    gutter_width: float
    gutter_depth: float
    ridge_width: float
    ridge_depth: float
    bar_spacing: float  # 0: no bars
    bar_width: float
    bar_depth: float
    crop_plane_height: float

    @property
    def floor_area(self) -> float:
        """Floor, m2."""
        return self.spans * self.span_width * self.length
