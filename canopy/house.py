"""The shape of a house: sections, panels, areas and volume (geometry only, no material)."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from weather.errors import UserError

MAX_PITCH_DEG = 60.0
"""Steepest slope that the light path treats (steeper roofs throw light to and fro between two slopes)."""


@dataclass(frozen=True)
class House:
    """One house, as the study gives it; metres and degrees. Derived sizes are properties.

    Of a gable with two pitches, `pitch` is the slope that faces `ridge_azimuth` + 90 degrees, `pitch_other`
    the one that faces the other way.
    """

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

    @property
    def width(self) -> float:
        """All spans together, m."""
        return self.spans * self.span_width

    @property
    def roof_rise(self) -> float:
        """Gutter to ridge or crown, m."""
        if self.form == "arch":
            return self.rise
        a, b = math.tan(math.radians(self.pitch)), math.tan(math.radians(self.pitch_other))
        return self.span_width * a * b / (a + b) if a > 0.0 and b > 0.0 else 0.0

    @property
    def arc_radius(self) -> float:
        """Radius of an arch, m (infinite for a flat one)."""
        half = 0.5 * self.span_width
        return (half**2 + self.rise**2) / (2.0 * self.rise) if self.rise > 0.0 else math.inf

    @property
    def arc_edge_deg(self) -> float:
        """Slope of an arch at its gutter, degrees (90 for a semicircle)."""
        return math.degrees(2.0 * math.atan2(self.rise, 0.5 * self.span_width))

    @property
    def roof_line(self) -> float:
        """Length of the roof section of one span, m."""
        if self.form == "arch":
            edge = math.radians(self.arc_edge_deg)
            return self.span_width * (edge / math.sin(edge) if edge > 1e-9 else 1.0)
        return sum(self._slopes())

    def _slopes(self) -> tuple[float, float]:
        """Lengths of the two slopes of a gable section, m."""
        rise = self.roof_rise
        if rise == 0.0:
            return 0.5 * self.span_width, 0.5 * self.span_width
        return rise / math.sin(math.radians(self.pitch)), rise / math.sin(math.radians(self.pitch_other))

    @property
    def roof_section(self) -> float:
        """Area of one span's section above the gutter line, m2."""
        if self.form == "gable":
            return 0.5 * self.span_width * self.roof_rise
        edge = math.radians(self.arc_edge_deg)
        if edge < 1e-6:
            return 2.0 / 3.0 * self.span_width * self.rise
        return self.arc_radius**2 * (edge - math.sin(edge) * math.cos(edge))

    @property
    def roof_area(self) -> float:
        """Roof covering, m2."""
        return self.spans * self.roof_line * self.length

    @property
    def side_area(self) -> float:
        """The two side walls, m2."""
        return 2.0 * self.length * self.gutter_height

    @property
    def gable_area(self) -> float:
        """The two gable ends, m2."""
        return 2.0 * self.spans * (self.span_width * self.gutter_height + self.roof_section)

    @property
    def wall_area(self) -> float:
        """Side walls and gable ends, m2."""
        return self.side_area + self.gable_area

    @property
    def volume(self) -> float:
        """Air volume, m3."""
        return self.floor_area * self.gutter_height + self.spans * self.roof_section * self.length

    @property
    def perimeter(self) -> float:
        """Outer foundation, m."""
        return 2.0 * (self.width + self.length)

    @property
    def ridge_height(self) -> float:
        """Highest line of the roof above the floor, m."""
        return self.gutter_height + self.roof_rise

    @property
    def roof_slope_deg(self) -> float:
        """Area mean of the roof's slope, degrees."""
        if self.form == "arch":
            return 0.5 * self.arc_edge_deg
        a, b = self._slopes()
        return (a * self.pitch + b * self.pitch_other) / (a + b)

    @property
    def roof_sky_view(self) -> float:
        """View factor of the roof to the sky (area mean, long house); the rest sees roofs and ground.

        Outer slopes see (1 + cos slope) / 2; each valley sees the sky through the opening between two
        ridges, so by reciprocity opening / valley length (crossed strings, Hottel 1954).
        """
        if self.form == "arch":
            edge = math.radians(self.arc_edge_deg)
            outer = 0.5 * (1.0 + (math.sin(edge) / edge if edge > 1e-9 else 1.0)) * self.roof_line
        else:
            a, b = self._slopes()
            cos_a, cos_b = math.cos(math.radians(self.pitch)), math.cos(math.radians(self.pitch_other))
            outer = 0.5 * ((1.0 + cos_a) * a + (1.0 + cos_b) * b)
        return (outer + (self.spans - 1) * self.span_width) / (self.spans * self.roof_line)

    @property
    def wall_sky_view(self) -> float:
        """View factor of an upright wall in the open to the sky."""
        return 0.5

    @property
    def structure_plan_fraction(self) -> float:
        """Share of the plan that gutters, ridges and bars cover, seen from straight above."""
        boxes = (self.spans + 1) * self.gutter_width + self.spans * self.ridge_width
        lines = min(boxes / self.width, 1.0)
        bars = min(self.bar_width / self.bar_spacing, 1.0) if self.bar_spacing > 0.0 else 0.0
        return lines + (1.0 - lines) * bars


def check_shape(house: House) -> None:
    """Refuse a house that cannot stand, with one message that names what is impossible.

    Raises
    ------
    UserError
        For the first impossible size found.
    """
    for bad, text in _form_rules(house) + _size_rules(house):
        if bad:
            raise UserError(f"house: {text}")


def _form_rules(h: House) -> list[tuple[bool, str]]:
    """Return (is impossible, message) for spans, slopes and walls."""
    w = h.span_width
    rules = [
        (h.spans < 1, f"spans = {h.spans}; a house has at least 1 span"),
        (not w > 0.0, f"span_width = {w:g} m; it must be above 0"),
        (not h.length > 0.0, f"length = {h.length:g} m; it must be above 0"),
        (
            not h.gutter_height >= 0.0,
            f"gutter_height = {h.gutter_height:g} m makes negative walls; 0 up",
        ),
    ]
    if h.form == "arch":
        rules += [
            (not h.rise > 0.0, f"rise = {h.rise:g} m; an arch rises above its gutter (more than 0)"),
            (
                h.rise > 0.5 * w * (1.0 + 1e-12),
                f"rise = {h.rise:g} m makes crossing roofs; at most half the span, {0.5 * w:g} m",
            ),
        ]
    for name, value in (("pitch", h.pitch), ("pitch_other", h.pitch_other)):
        outside = h.form == "gable" and not 0.0 <= value <= MAX_PITCH_DEG
        rules.append((outside, f"{name} = {value:g} degrees makes crossing roofs; 0 to {MAX_PITCH_DEG:g}"))
    one_flat = h.form == "gable" and (h.pitch == 0.0) != (h.pitch_other == 0.0)
    rules.append((one_flat, "one slope flat and the other not: the two never meet at a ridge"))
    return rules


def _size_rules(h: House) -> list[tuple[bool, str]]:
    """Return (is impossible, message) for gutters, ridges, bars and the crop plane."""
    sizes = [f"{box}_{size}" for box in ("gutter", "ridge", "bar") for size in ("width", "depth")] + [
        "bar_spacing"
    ]
    rules = [(not getattr(h, k) >= 0.0, f"{k} = {getattr(h, k):g} m; it must be 0 or more") for k in sizes]
    lowest = h.gutter_height - (h.gutter_depth if h.gutter_width > 0.0 else 0.0)
    sunk = h.gutter_width > 0.0 and h.gutter_depth > h.gutter_height
    free = f"below the gutter at {h.gutter_height:g} m less its depth, {lowest:g} m"
    return [
        *rules,
        (sunk, f"gutter_depth = {h.gutter_depth:g} m; at most gutter_height {h.gutter_height:g} m"),
        (
            h.gutter_width + h.ridge_width >= h.span_width,
            f"gutter_width + ridge_width = {h.gutter_width + h.ridge_width:g} m; "
            f"less than span_width {h.span_width:g} m",
        ),
        (
            h.ridge_width > 0.0 and h.ridge_depth > h.roof_rise + h.gutter_height,
            f"ridge_depth = {h.ridge_depth:g} m; less than the ridge is high, {h.ridge_height:g} m",
        ),
        (
            h.bar_spacing > 0.0 and h.bar_width >= h.bar_spacing,
            f"bar_width = {h.bar_width:g} m; less than bar_spacing {h.bar_spacing:g} m",
        ),
        (
            not 0.0 <= h.crop_plane_height <= lowest,
            f"crop_plane_height = {h.crop_plane_height:g} m; from 0 to {free}",
        ),
    ]
