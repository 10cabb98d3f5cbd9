"""The study file's sections: keys, ranges and defaults. Every range is checked here and nowhere else.

Units stand in README's table: metres, degrees, degC, hours of civil time, W/m2 of floor.
"""

from __future__ import annotations

from functools import partial
from itertools import pairwise
from typing import Annotated, Any, Literal
from unicodedata import category
from zoneinfo import ZoneInfo, available_timezones

from pydantic import AfterValidator, BeforeValidator, Field, field_validator, model_validator

from canopy.energykeys import HeatPumpKeys, StoreKeys, TariffKeys
from canopy.fuel import fuel_names
from canopy.seasonal import Seasonal, day_number, parse
from canopy.section import Section as Section
from weather.errors import nearest


def _seasonal(low: float, high: float) -> Any:
    return BeforeValidator(partial(parse, low=low, high=high))


class _DayOfYear:
    """A day "MM-DD" or nothing."""

    words = 'a day "MM-DD", 01-01 to 12-31 without 02-29'

    def __call__(self, raw: object) -> object:
        """Return the text after its check; ValueError for what is no day."""
        if raw is not None:
            day_number(raw)
        return raw


def _plain(text: str) -> str:
    """Return a text without signs that cannot be seen and without space at its ends, or raise ValueError."""
    if text != text.strip():
        raise ValueError("begins or ends with a space; remove it")
    for sign in text:
        if category(sign) in ("Cc", "Cf", "Cs", "Zl", "Zp") and sign not in _JOINERS:
            raise ValueError(f"holds the sign U+{ord(sign):04X}, which cannot be seen; remove it")
    return text


_JOINERS = "\u200c\u200d"  # some scripts need them

Day = Annotated[str | None, BeforeValidator(_DayOfYear())]
Temperature = Annotated[Seasonal, _seasonal(-60, 60)]
Name = Annotated[str, Field(min_length=1, max_length=60), AfterValidator(_plain)]
Title = Annotated[str, Field(min_length=1, max_length=120), AfterValidator(_plain)]
FileName = Annotated[str, Field(min_length=1, max_length=1000), AfterValidator(_plain)]
Hour = Annotated[float, Field(ge=0, le=24)]


class SiteKeys(Section):
    """[site]: absent coordinates are taken from the weather file's header."""

    latitude: Annotated[float, Field(ge=-66.5, le=72)] | None = None
    longitude: Annotated[float, Field(ge=-180, le=180)] | None = None
    elevation: Annotated[float, Field(ge=-430, le=5000)] | None = None
    timezone: Name | None = None
    horizon: list[list[float]] = []

    @field_validator("timezone")
    @classmethod
    def _zone(cls, name: str | None) -> str | None:
        if name is not None:
            try:
                ZoneInfo(name)
            except (KeyError, ValueError, OSError):
                hint = nearest(name, sorted(available_timezones()))
                raise ValueError(f'"{name}" is no IANA time zone{hint}') from None
        return name

    @field_validator("horizon")
    @classmethod
    def _horizon(cls, points: list[list[float]]) -> list[list[float]]:
        for point in points:
            if len(point) != 2 or not (0 <= point[0] <= 360 and 0 <= point[1] <= 60):
                raise ValueError(f"{str(point)[:40]} is no [azimuth 0-360, elevation 0-60] in degrees")
        if any(b[0] <= a[0] for a, b in pairwise(points)):
            raise ValueError("azimuths must rise")
        return points

    @model_validator(mode="after")
    def _pair(self) -> SiteKeys:
        if (self.latitude is None) != (self.longitude is None):
            raise ValueError("latitude and longitude stand together or not at all")
        return self


class WeatherKeys(Section):
    """[weather]: exactly one source."""

    file: FileName | None = None
    files: Annotated[list[FileName], Field(max_length=100)] = []
    shipped: Name | None = None
    clear_sky: bool = False
    longwave: Literal["file", "model"] | None = None
    first_day: Day = None
    last_day: Day = None
    allow_long_gaps: bool = False
    columns: dict[str, str] = {}
    units: dict[str, str] = {}
    utc_offset: Annotated[float, Field(ge=-12, le=14)] | None = None
    label: Literal["start", "middle", "end"] | None = None
    albedo: Annotated[float, Field(ge=0.05, le=0.9)] = 0.2

    @model_validator(mode="after")
    def _one_source(self) -> WeatherKeys:
        given = [
            key
            for key, on in (
                ("file", self.file is not None),
                ("files", bool(self.files)),
                ("shipped", self.shipped is not None),
                ("clear_sky", self.clear_sky),
            )
            if on
        ]
        if len(given) != 1:
            found = " and ".join(given) if given else "no source"
            raise ValueError(f"{found} given; write one of file, files, shipped, clear_sky = true")
        if (self.first_day is None) != (self.last_day is None):
            raise ValueError("first_day and last_day stand together or not at all")
        if self.clear_sky and self.longwave == "file":
            raise ValueError('longwave = "file" needs a file; a clear-sky year has none')
        return self


class HouseKeys(Section):
    """[house]: shape, structure, tightness and vents."""

    form: Literal["gable", "arch"] = "gable"
    spans: Annotated[int, Field(ge=1, le=200)] = 10
    span_width: Annotated[float, Field(ge=2, le=40)] = 8.0
    length: Annotated[float, Field(ge=3, le=1000)] = 60.0
    gutter_height: Annotated[float, Field(ge=0.0, le=12)] = 4.5
    pitch: Annotated[float, Field(ge=0, le=60)] | None = None
    pitch_other: Annotated[float, Field(ge=0, le=60)] | None = None
    rise: Annotated[float, Field(gt=0, le=15)] | None = None
    ridge_azimuth: Annotated[float, Field(ge=0, le=360)] = 0.0
    gutter_width: Annotated[float, Field(ge=0, le=2)] = 0.25
    gutter_depth: Annotated[float, Field(ge=0, le=1)] = 0.18
    ridge_width: Annotated[float, Field(ge=0, le=1)] = 0.06
    ridge_depth: Annotated[float, Field(ge=0, le=1)] = 0.08
    bar_spacing: Annotated[float, Field(ge=0, le=10)] = 1.12
    bar_width: Annotated[float, Field(ge=0, le=0.5)] = 0.04
    bar_depth: Annotated[float, Field(ge=0, le=0.5)] = 0.06
    leakage_per_hour: Annotated[float, Field(ge=0, le=20)] | None = None
    vent_area_fraction: Annotated[float, Field(ge=0, le=1)] = 0.15
    insect_net: bool = False
    screened_walls: bool = False
    wind_exposure: Literal["open", "normal", "sheltered"] = "normal"
    perimeter_loss: Annotated[float, Field(ge=0, le=5)] = 0.8
    wall_covering: Name | None = None
    gable_covering: Name | None = None
    floor_map: bool = False
    paint: list[list[Any]] = []

    @field_validator("paint")
    @classmethod
    def _paint(cls, rows: list[list[Any]]) -> list[list[Any]]:
        for row in rows:
            if len(row) != 3 or not all(
                isinstance(x, int | float) and not isinstance(x, bool) for x in row[1:]
            ):
                raise ValueError(f'{str(row)[:60]} is no ["MM-DD", shade 0-0.9, wear-off days]')
            day_number(row[0])
            if not (0 <= row[1] <= 0.9 and 1 <= row[2] <= 400):
                raise ValueError(f"{str(row)[:60]}: shade lies in 0-0.9, wear-off in 1-400 days")
        return rows

    @model_validator(mode="after")
    def _shape(self) -> HouseKeys:
        if self.form == "arch":
            if self.pitch is not None or self.pitch_other is not None:
                raise ValueError('an arch has a rise, not a pitch; remove pitch or write form = "gable"')
            if self.rise is None:
                raise ValueError("an arch needs rise, the height from gutter to crown in metres")
        elif self.rise is not None:
            raise ValueError('a gable has a pitch, not a rise; remove rise or write form = "arch"')
        return self


class Planting(Section):
    """[[crop.planting]]: a published growth curve from planting to final leaf area."""

    planted: str
    removed: str
    final_lai: Annotated[float, Field(gt=0, le=10)]
    days_to_final: Annotated[float, Field(ge=5, le=300)] = 60.0
    start_lai: Annotated[float, Field(gt=0, le=5)] = 0.2

    @field_validator("planted", "removed")
    @classmethod
    def _dates(cls, text: str) -> str:
        day_number(text)
        return text


class CropKeys(Section):
    """[crop]: the leaf canopy and what lies under it."""

    leaf: Name = "tomato"
    leaf_area_index: Annotated[Seasonal, _seasonal(0, 10)] | None = None
    planting: list[Planting] = []
    leaf_angle_chi: Annotated[float, Field(ge=0.1, le=10)] = 1.0
    row_width: Annotated[float, Field(gt=0, le=10)] | None = None
    row_spacing: Annotated[float, Field(gt=0, le=20)] | None = None
    row_azimuth: Annotated[float, Field(ge=0, le=360)] | None = None
    height: Annotated[float, Field(gt=0, le=6)] = 2.0
    ground_cover: Name = "mulch-woven-white"

    @model_validator(mode="after")
    def _rows(self) -> CropKeys:
        if (self.row_width is None) != (self.row_spacing is None):
            raise ValueError("row_width and row_spacing stand together or not at all")
        if self.row_width is not None and self.row_spacing is not None and self.row_width > self.row_spacing:
            raise ValueError(f"row_width {self.row_width:g} exceeds row_spacing {self.row_spacing:g}")
        if self.row_azimuth is not None and self.row_width is None:
            raise ValueError("row_azimuth needs row_width and row_spacing")
        if self.leaf_area_index is not None and self.planting:
            raise ValueError("leaf_area_index and planting exclude each other")
        return self


class ClimateKeys(Section):
    """[climate]: set-points and schedules (civil time)."""

    heat_day: Temperature = parse(18.0, -60, 60)
    heat_night: Temperature = parse(16.0, -60, 60)
    vent_at: Temperature = parse(24.0, -60, 60)
    humidity_max_pct: Annotated[float, Field(ge=40, le=100)] = 100.0
    day_from: Hour = 7.0
    day_until: Hour = 19.0
    ramp_k_per_h: Annotated[float, Field(gt=0, le=20)] = 2.0
    light_raise_k: Annotated[float, Field(ge=0, le=10)] = 0.0
    light_raise_full_w_m2: Annotated[float, Field(gt=0, le=1200)] = 400.0
    crop_limit_c: Annotated[float, Field(ge=-20, le=30)] = 5.0


class HeatingKeys(Section):
    """[heating]: emitters, capacity, fuel and price."""

    capacity_w_m2: Annotated[float, Field(ge=0, le=2000)] | None = None
    pipe_diameter: Annotated[float, Field(gt=0.005, le=0.2)] = 0.051
    pipe_m_per_m2: Annotated[float, Field(gt=0, le=10)] = 1.6
    flow_max_c: Annotated[float, Field(ge=25, le=120)] = 90.0
    min_pipe_c: Annotated[float, Field(ge=15, le=80)] | None = None
    fuel: Name = "natural-gas"
    efficiency: Annotated[float, Field(gt=0.3, le=1.1)] | None = None
    margin_pct: Annotated[float, Field(ge=0, le=100)] = 15.0
    price_per_kwh: Annotated[float, Field(ge=0, le=10)] | None = None
    co2_kg_per_kwh: Annotated[float, Field(ge=0, le=2)] | None = None
    tariff: TariffKeys | None = None
    heat_pump: HeatPumpKeys | None = None
    heat_pump_tariff: TariffKeys | None = None
    store: StoreKeys | None = None

    @field_validator("fuel")
    @classmethod
    def _fuel(cls, name: str) -> str:
        if name not in fuel_names():
            hint = nearest(name, fuel_names()) or f"; known: {', '.join(fuel_names())}"
            raise ValueError(f'unknown fuel "{name}"{hint}')
        return name

    @model_validator(mode="after")
    def _prices(self) -> HeatingKeys:
        if self.tariff is not None and self.price_per_kwh is not None:
            raise ValueError("price_per_kwh and the table tariff exclude each other")
        if self.heat_pump_tariff is not None and self.heat_pump is None:
            raise ValueError("heat_pump_tariff needs the table heat_pump")
        if self.min_pipe_c is not None and self.min_pipe_c > self.flow_max_c:
            raise ValueError(f"min_pipe_c {self.min_pipe_c:g} exceeds flow_max_c {self.flow_max_c:g}")
        return self
