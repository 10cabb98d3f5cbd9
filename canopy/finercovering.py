"""A covering of the study in finer bands: averaged anew where its spectrum is known, else spread."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from functools import lru_cache
from pathlib import Path
from typing import Any, Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy import library_rows
from canopy.bands import SOLAR, THERMAL, BandSet, parents
from canopy.layers import Wetness, build_solar, build_thermal
from canopy.library_build import StackSpec, aged, stack_of
from canopy.optics import Covering, SolarOptics, ThermalOptics
from canopy.reband import spread_covering
from canopy.studyfile import Study, is_file_name
from canopy.studykeys import CoveringKeys

Rows = NDArray[np.intp]
Optics = tuple[SolarOptics, ThermalOptics]
Wet = Literal["film", "drops", "none"]

AVERAGED: Final = "is averaged anew from its spectrum"
TABLED: Final = "is tabled by band: each part of a band takes the band's value"
PARTLY: Final = "is averaged anew; its layers that are tabled by band keep the band's value"
QUOTED: Final = "is quoted: each part of a band takes the band's value"


def finer_covering(
    name: str, base: Covering, study: Study, solar: BandSet, thermal: BandSet
) -> tuple[Covering, str]:
    """Return a covering of the study in finer bands, and in words how; `base` is the same in the usual bands.

    Errors: UserError as `choose.choose_covering`.
    """
    own = next((c for c in study.keys.covering if c.name == name), None)
    if own is None and not is_file_name(name):
        entry = library_rows.table("covering", name)
        return _library(entry, base, entry["wetting"], solar, thermal)
    file = name if own is None else own.spectrum
    if file is not None:
        return _laboratory(study.folder / file, base, own, solar, thermal)
    assert own is not None
    if _says_anything(own):
        return spread_covering(base, parents(solar, SOLAR), parents(thermal, THERMAL)), QUOTED
    entry = library_rows.table("covering", str(own.based_on))
    made, how = _library(entry, base, own.wet or entry["wetting"], solar, thermal)
    return aged(made, entry["ageing"][0], own.age_years), how


def _says_anything(keys: CoveringKeys) -> bool:
    quoted = ("par_normal", "par_hemispherical", "haze", "thermal_transmittance", "u_value")
    return any(getattr(keys, key) is not None for key in quoted)


def _laboratory(
    path: Path, base: Covering, keys: CoveringKeys | None, solar: BandSet, thermal: BandSet
) -> tuple[Covering, str]:
    from canopy.labspectrum import covering_from_spectrum

    thickness = None if keys is None else keys.thickness_mm
    lab = covering_from_spectrum(path, base.name, thickness, wet=None if keys is None else keys.wet)
    dry = _optics(lab.stack, "dry", solar, thermal)
    moist = dry if lab.wet == "none" else _optics(lab.stack, lab.wet, solar, thermal)
    return _rebuilt(base, dry, moist, parents(solar, SOLAR)), AVERAGED


def _rebuilt(base: Covering, dry: Optics, wet: Optics, row: Rows) -> Covering:
    """Return a covering with finer optics; what comes through stays straight as in the usual bands."""
    return replace(
        base,
        solar_dry=_straight(dry[0], base.solar_dry, row),
        solar_wet=_straight(wet[0], base.solar_wet, row),
        thermal_dry=dry[1],
        thermal_wet=wet[1],
    )


def _library(
    entry: Mapping[str, Any], base: Covering, wet: Wet, solar: BandSet, thermal: BandSet
) -> tuple[Covering, str]:
    dry = _row_optics(entry["name"], "dry", solar, thermal)
    moist = dry if wet == "none" else _row_optics(entry["name"], wet, solar, thermal)
    made = _rebuilt(base, dry, moist, parents(solar, SOLAR))
    tabled = ["measured" in layer for layer in entry["layers"]]
    return made, TABLED if all(tabled) else PARTLY if any(tabled) else AVERAGED


@lru_cache(maxsize=64)
def _row_optics(name: str, wetness: Wetness, solar: BandSet, thermal: BandSet) -> Optics:
    return _optics(stack_of(library_rows.table("covering", name)), wetness, solar, thermal)


def _optics(stack: StackSpec, wetness: Wetness, solar: BandSet, thermal: BandSet) -> Optics:
    sheets = [layer.optics for layer in stack.layers]
    light = build_solar(sheets, solar, webs=stack.webs or None, wetness=wetness, drops=stack.drops)
    return light, build_thermal(sheets, thermal, wetness=wetness, drops=stack.drops)


def _straight(optics: SolarOptics, base: SolarOptics, row: Rows) -> SolarOptics:
    """Return optics whose transmitted beam stays straight by the share of the usual bands."""
    share = base.beam_beam / np.maximum(base.beam_beam + base.beam_diffuse, 1e-15)
    through = optics.beam_beam + optics.beam_diffuse
    return replace(optics, beam_beam=through * share[row], beam_diffuse=through * (1.0 - share[row]))
