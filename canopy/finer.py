"""Finer bands on request: light and long-wave in them, light folded back to the bands of every table.

What is known as a spectrum (library coverings built of materials, laboratory sheets) is averaged anew over
the finer bands. What is known as band values (screens, leaves, grounds, paint, quoted coverings, coverings
tabled by band) carries the value of the wider band into each of its parts.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy import houselight
from canopy.bands import SOLAR, THERMAL, BandSet, finer, parents
from canopy.finercovering import finer_covering
from canopy.heatcase import CoveringHeat, HeatCase
from canopy.light import HouseTransmission, Light, StandResponse, SunBands
from canopy.optics import Covering, Screen
from canopy.reband import spread_solar, spread_thermal
from canopy.shading import Paint
from canopy.skybands import sky_bands
from canopy.studyfile import Study
from canopy.sunlight import split
from weather.record import Weather

Floats = NDArray[np.float64]

BY_BAND: Final = (
    *("outside_beam", "outside_diffuse", "inside_beam", "inside_diffuse", "crop", "crop_sunlit"),
    *("ground", "crop_up", "covering", "screen", "structure"),
)
"""Parts of `Light` with a band axis, the last but one."""


STATED_PCT: Final = {"par": 0.2, "nir": 0.7, "uv": 2.5, "heat": 0.6, "sky_loss": 1.0}
"""Widest change of yearly totals against the usual bands, %, over the library's coverings but the one below
(Greensboro, gable house, night screen; 13 and 12 bands, 36 and 36): found .16, .64, 2.12, .47, .80."""
STEEP_NIR_PCT: Final = 5.0
"""The same for NIR under a coat that cuts inside a band (NIR-reflecting glass: found 4.5)."""


@dataclass(frozen=True)
class Finer:
    """One weather record in finer bands."""

    study: Study
    solar: BandSet
    thermal: BandSet
    sun: SunBands
    sky_bands: Floats  # (T, N)
    made: dict[str, tuple[Covering, str]]  # by name, as they come

    def covering(self, name: str, base: Covering) -> Covering:
        """Return a covering of the study in the finer bands, built once."""
        if name not in self.made:
            self.made[name] = finer_covering(name, base, self.study, self.solar, self.thermal)
        return self.made[name][0]

    def inside(
        self,
        house: HouseTransmission,
        weather: Weather,
        screens: tuple[Screen, ...],
        drawn: Floats,
        stand: StandResponse,
        paint: Paint | None,
    ) -> Light:
        """Return the light in a house, arguments as `houselight.inside`, in the bands of every table.

        `house` stands in the finer bands; screens, stand and paint are spread from the wider ones. Flux is
        linear in the outside light of a band, so the sums over parts keep every law of `Light`.
        """
        row = parents(self.solar, SOLAR)
        fabric = tuple(replace(s, solar=spread_solar(s.solar, row)) for s in screens)
        coat = None if paint is None else _each(paint, lambda v: v[row])
        crop = _each(stand, lambda v: v[row] if v.ndim == 2 else v)
        light = houselight.inside(self.sun, house, weather, fabric, drawn, crop, coat)
        first = np.flatnonzero(np.diff(row, prepend=-1))
        folded = {name: np.add.reduceat(getattr(light, name), first, axis=-2) for name in BY_BAND}
        return replace(light, **folded)

    def case(self, case: HeatCase, covering: Covering) -> HeatCase:
        """Return a heat case in the finer thermal bands; `covering` comes from `covering`."""
        row = parents(self.thermal, THERMAL)
        return replace(
            case,
            outside=replace(case.outside, sky_bands=self.sky_bands),
            covering=CoveringHeat(
                covering.thermal_dry,
                covering.thermal_wet,
                covering.heat_capacity,
                covering.resistance,
                covering.gaps,
            ),
            screens=tuple(replace(s, thermal=spread_thermal(s.thermal, row)) for s in case.screens),
            crop=replace(case.crop, emissivity=case.crop.emissivity[row]),
            ground=replace(case.ground, emissivity=case.ground.emissivity[row]),
        )

    @property
    def said(self) -> str:
        """What the finer bands do and how far they can move totals, in words."""
        most = STATED_PCT
        return (
            f"finer bands: light is computed in {len(self.solar)} bands and folded back to {len(SOLAR)}, the "
            f"heat balance in {len(self.thermal)} long-wave bands (usual: {len(THERMAL)}); against the usual "
            "bands yearly totals of the library's coverings moved (one temperate year, to 36 bands each) "
            f"by at most {most['par']:g} % in PAR, {most['nir']:g} % in NIR ({STEEP_NIR_PCT:g} % where a "
            f"coat cuts inside a band), {most['uv']:g} % in UV, {most['heat']:g} % in heat and "
            f"{most['sky_loss']:g} % in sky loss; screens, leaves, ground and paint keep the value of the "
            "wider band; rating figures, design night, the year with the proposed boiler and the grey "
            "comparison stay in the usual bands"
        )

    def note(self, name: str) -> str:
        """Return how a covering came into the finer bands, in words."""
        return f"finer bands: {name} {self.made[name][1]}"


def _each(record: Any, change: Callable[[Floats], Floats]) -> Any:
    return replace(record, **{f.name: change(getattr(record, f.name)) for f in fields(record)})


def make_finer(study: Study, weather: Weather) -> Finer | None:
    """Return a record in the finer bands that a study asks for; None where it asks for none."""
    keys = study.keys.bands
    if not keys.solar and not keys.thermal:
        return None
    solar = finer(keys.solar, SOLAR) if keys.solar else SOLAR
    thermal = finer(keys.thermal, THERMAL) if keys.thermal else THERMAL
    sky = sky_bands(weather.longwave_down, weather.temp_air, weather.vapour_pressure, thermal)
    return Finer(study, solar, thermal, split(weather, solar), sky, {})
