"""The study file as a whole: screens, quoted coverings, candidates, and the tables of `study`."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import Field, field_validator, model_validator

from canopy.bands import SOLAR, THERMAL, finer
from canopy.seasonal import day_number
from canopy.study import (
    ClimateKeys,
    CropKeys,
    Day,
    FileName,
    HeatingKeys,
    Hour,
    HouseKeys,
    Name,
    Section,
    SiteKeys,
    Title,
    WeatherKeys,
)

MOST_EDGES = 40
Share = Annotated[float, Field(ge=0, le=1)]


class ScreenKeys(Section):
    """[[screen]]: a library screen with a drawing rule of its own."""

    name: Name
    based_on: Name
    close_below_w_m2: Annotated[float, Field(ge=0, le=1500)] | None = None
    close_above_w_m2: Annotated[float, Field(ge=0, le=1500)] | None = None
    close_below_outside_c: Annotated[float, Field(ge=-40, le=40)] | None = None
    from_hour: Hour | None = None
    until_hour: Hour | None = None
    first_day: Day = None
    last_day: Day = None
    humidity_gap_pct: Annotated[float, Field(ge=0, le=50)] | None = None

    @model_validator(mode="after")
    def _pairs(self) -> ScreenKeys:
        if (self.from_hour is None) != (self.until_hour is None):
            raise ValueError("from_hour and until_hour stand together or not at all")
        if (self.first_day is None) != (self.last_day is None):
            raise ValueError("first_day and last_day stand together or not at all")
        if self.from_hour is not None and self.from_hour == self.until_hour:
            raise ValueError("from_hour equals until_hour: never drawn; write 0 and 24 for the whole day")
        return self


class CoveringKeys(Section):
    """[[covering]]: figures from a quotation, or a laboratory spectrum."""

    name: Name
    based_on: Name | None = None
    par_normal: Share | None = None
    par_hemispherical: Share | None = None
    haze: Share | None = None
    thermal_transmittance: Share | None = None
    u_value: Annotated[float, Field(gt=0.2, le=10)] | None = None
    spectrum: FileName | None = None
    thickness_mm: Annotated[float, Field(gt=0.005, le=100)] | None = None
    age_years: Annotated[float, Field(ge=0, le=40)] = 0.0
    wet: Literal["film", "drops", "none"] | None = None
    dirt_by_month: list[Annotated[float, Field(ge=0, le=0.6)]] = []
    wash_days: list[str] = []

    @field_validator("dirt_by_month")
    @classmethod
    def _months(cls, shares: list[float]) -> list[float]:
        if len(shares) not in (0, 12):
            raise ValueError(f"found {len(shares)} shares; write twelve, January to December")
        return shares

    @field_validator("wash_days")
    @classmethod
    def _days(cls, days: list[str]) -> list[str]:
        for day in days:
            day_number(day)
        return days

    @model_validator(mode="after")
    def _one_kind(self) -> CoveringKeys:
        if (self.spectrum is None) == (self.based_on is None):
            raise ValueError("write based_on (a library covering) or spectrum (a CSV), one of the two")
        if self.wash_days and not self.dirt_by_month:
            raise ValueError("wash_days needs dirt_by_month")
        quoted = ("par_normal", "par_hemispherical", "haze", "thermal_transmittance", "u_value")
        given = [key for key in quoted if getattr(self, key) is not None]
        if self.spectrum is not None and given:
            raise ValueError(f"{given[0]} goes with based_on, not with a spectrum")
        if self.spectrum is not None and self.age_years:
            raise ValueError("age_years goes with based_on; a spectrum is of the covering as it is")
        if self.based_on is not None and self.thickness_mm is not None:
            raise ValueError("thickness_mm goes with a spectrum, not with based_on")
        return self


class BandKeys(Section):
    """[bands]: finer bands to compute in; tables and report keep their own."""

    solar: Annotated[list[Annotated[float, Field(ge=0.28, le=2.8)]], Field(max_length=MOST_EDGES)] = []
    thermal: Annotated[list[Annotated[float, Field(ge=3, le=100)]], Field(max_length=MOST_EDGES)] = []

    @field_validator("solar")
    @classmethod
    def _solar(cls, edges: list[float]) -> list[float]:
        return list(finer(edges, SOLAR).edges) if edges else []

    @field_validator("thermal")
    @classmethod
    def _thermal(cls, edges: list[float]) -> list[float]:
        return list(finer(edges, THERMAL).edges) if edges else []


class CandidateKeys(Section):
    """[[candidate]]: a covering, its screens, and overrides of house, crop, climate, heating."""

    name: Name
    covering: Name
    screens: Annotated[list[Name], Field(max_length=2)] = []
    house: dict[str, Any] = {}
    crop: dict[str, Any] = {}
    climate: dict[str, Any] = {}
    heating: dict[str, Any] = {}


class StudyKeys(Section):
    """The whole file."""

    title: Title = "Study"
    units: Literal["si", "us"] = "si"
    show_day: Day = None
    show_hour: Annotated[int, Field(ge=0, le=23)] | None = None
    site: SiteKeys = SiteKeys()
    weather: WeatherKeys
    house: HouseKeys
    crop: CropKeys = CropKeys()
    climate: ClimateKeys = ClimateKeys()
    heating: HeatingKeys = HeatingKeys()
    bands: BandKeys = BandKeys()
    screen: list[ScreenKeys] = []
    covering: list[CoveringKeys] = []
    candidate: Annotated[list[CandidateKeys], Field(min_length=1, max_length=24)]
