"""A covering from a laboratory's spectrum: n and k where the physics allows, angle dependence from there.

Where reflectance was not measured, nothing comes through, or the file ends, an assumption stands in and is
said, with what it can matter.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from canopy.coveringfigures import figures
from canopy.labcsv import LabSpectrum, read_lab_csv
from canopy.lablimits import SOLAR_FROM_UM, SOLAR_TO_UM, joined_up, say_limits
from canopy.layers import GLASS_DROPS, PLASTIC_DROPS
from canopy.library_build import SOLIDS, LayerSpec, StackSpec, assemble, optics_of
from canopy.materials import Material
from canopy.optics import Covering
from canopy.sheet import Floats, Passage
from canopy.sheets import EquivalentSheet, MaterialSheet, SpectralLayer
from canopy.slabinverse import Inverted, index_with, invert, with_dark_bands
from weather.errors import UserError

__all__ = ["LabCovering", "covering_from_spectrum", "read_lab_csv"]

Kind = Literal["glass", "rigid plastic", "film"]
Wet = Literal["film", "drops", "none"]

THERMAL_FROM_UM: Final = 5.0  # a file that reaches from here to 14 µm carries the long-wave side too
THERMAL_TO_UM: Final = 14.0
_EDGE_UM: Final = 2.9  # between what the spectrum gives for sunlight and for long-wave
_FILM_MM: Final = 0.5  # thinner is a film
_GLASS_N: Final = 1.52
_POLYMER_N: Final = 1.50
_FACE_SLACK: Final = 0.004  # front and back reflectance closer than this belong to equal faces
_SMOOTH: Final = 21  # points over which noise is averaged before faces are called different
_CLEAR: Final = 0.985  # T + R above which a coat on one face cannot be told from one on the other


@dataclass(frozen=True)
class LabCovering:
    """The covering, the inverted sheet (W,), what was assumed and what the measurement does not allow."""

    covering: Covering
    wavelength_um: NDArray[np.float64]
    inverted: Inverted
    assumed: tuple[str, ...]
    limits: tuple[str, ...]
    stack: StackSpec  # what the optics were averaged from ...
    wet: Wet  # ... and how water lies on it


@dataclass(frozen=True)
class JoinedSheet:
    """One optics below 2.9 µm, another above."""

    solar: SpectralLayer
    thermal: SpectralLayer
    haze: float = 0.0

    def passage(self, wavelength_um: Floats, theta: Floats, water_um: float = 0.0) -> Passage:
        """Return (2, W, M) powers; solar cells and thermal cells never mix in one call."""
        part = self.solar if float(wavelength_um[0]) < _EDGE_UM and wavelength_um[-1] < 4.1 else self.thermal
        return part.passage(wavelength_um, theta, water_um)


def covering_from_spectrum(
    path: Path,
    name: str,
    thickness_mm: float | None = None,
    *,
    kind: Kind | None = None,
    wet: Wet | None = None,
) -> LabCovering:
    """Return the covering whose single sheet has this spectrum at normal incidence.

    Without thickness the sheet is taken as 4 mm (glass) and only k, mass and resistance depend on it. `kind`
    None: thinner than .5 mm is film, else glass. Raises UserError for a file that cannot be
    read or does not cover 0.40-0.70 µm.
    """
    lab = read_lab_csv(path)
    _require_cover(path, lab)
    thickness = 4.0 if thickness_mm is None else thickness_mm
    kind = kind or ("film" if thickness < _FILM_MM else "glass")
    assumed, limits = list(lab.notes), list[str]()
    if thickness_mm is None:
        assumed.append("thickness not given: 4 mm (moves heat capacity and resistance, hardly light)")
    front, back = _faces(lab, kind, assumed, limits)
    found = invert(lab.wavelength_um, thickness * 1000.0, lab.transmit, front, back)
    dark_known = back is None and joined_up(lab.wavelength_um)
    if dark_known:
        found = with_dark_bands(found, lab.wavelength_um)
    say_limits(lab, found, dark_known, limits)
    optics = _optics(lab, found, thickness, kind, _haze(lab, assumed), assumed)
    stack, state = _stack(thickness, kind, optics), wet or ("drops" if kind == "film" else "film")
    covering = _record(path, name, kind, state, stack, limits)
    assumed.append(_reach(covering))
    return LabCovering(covering, lab.wavelength_um, found, tuple(assumed), tuple(limits), stack, state)


def _require_cover(path: Path, lab: LabSpectrum) -> None:
    inside = (lab.wavelength_um >= SOLAR_FROM_UM) & (lab.wavelength_um <= SOLAR_TO_UM)
    if inside.sum() < 7:
        raise UserError(f"{path.name}: {inside.sum()} points in .40-.70 µm; at least 7 are needed")


def _faces(
    lab: LabSpectrum, kind: Kind, assumed: list[str], limits: list[str]
) -> tuple[Floats, Floats | None]:
    """Return reflectance front and back (None: equal faces)."""
    if lab.front is None and lab.back is None:
        n = _GLASS_N if kind == "glass" else _POLYMER_N
        limits.append(
            f"no reflectance in the file: n cannot be had; {n:g} taken at all wavelengths "
            "(n ± .1 moves transmission at 60° by about .01)"
        )
        r = ((n - 1.0) / (n + 1.0)) ** 2
        t = np.minimum(lab.transmit / (1.0 - r) ** 2, 1.0)
        t = np.clip(lab.transmit * (1.0 - r * r * t * t) / (1.0 - r) ** 2, 0.0, 1.0)
        return np.asarray(r * (1.0 + t * lab.transmit)), None
    if lab.front is None or lab.back is None:
        assumed.append("reflectance measured on one side only: both faces taken as equal")
        one = lab.front if lab.front is not None else lab.back
        assert one is not None
        return one, None
    mean = 0.5 * (lab.front + lab.back)
    window = min(_SMOOTH, lab.front.size)
    smooth = np.convolve(lab.front - lab.back, np.full(window, 1.0 / window), mode="valid")
    apart = float(np.max(np.abs(smooth)))
    if apart <= _FACE_SLACK:
        return mean, None
    limits.append(
        f"front and back reflectance differ by up to {apart:.3f}: a coated or layered sheet, not one n, k; "
        "each face gets the index that gives its reflectance, which carries angles to about .02 at 60°"
    )
    clear = lab.transmit + mean > _CLEAR  # without absorption both sides reflect alike whatever the faces do
    return np.where(clear, mean, lab.front), np.where(clear, mean, lab.back)


def _haze(lab: LabSpectrum, assumed: list[str]) -> float:
    if lab.scattered is None:
        assumed.append(
            "haze not measured: 0 (clear); a sheet that scatters needs the column transmittance_diffuse"
        )
        return 0.0
    par = (lab.wavelength_um >= SOLAR_FROM_UM) & (lab.wavelength_um <= SOLAR_TO_UM)
    return float(np.clip(lab.scattered[par].mean() / max(lab.transmit[par].mean(), 1e-9), 0.0, 1.0))


def _material(name: str, wavelength: Floats, found: Inverted, where: NDArray[np.bool_]) -> Material:
    n = found.index_front[where]
    return Material(name, name, wavelength[where], n, found.k[where], "laboratory spectrum", "user's own", "")


def _sheet(lab: LabSpectrum, found: Inverted, where: NDArray[np.bool_], thickness_m: float) -> SpectralLayer:
    """Return the sheet on part of the spectrum: by n and k, or by faces where these do not exist."""
    w = lab.wavelength_um[where]
    equal = bool(np.array_equal(found.index_front, found.index_back))
    if equal:
        return MaterialSheet(_material("laboratory", lab.wavelength_um, found, where), thickness_m)
    return EquivalentSheet(found.index_front[where], found.index_back[where], found.crossing[where], w)


def _optics(
    lab: LabSpectrum,
    found: Inverted,
    thickness_mm: float,
    kind: Kind,
    haze: float,
    assumed: list[str],
) -> JoinedSheet:
    """Return sunlight and long-wave sides; ends of the file held, missing long-wave assumed."""
    w = lab.wavelength_um
    below = w <= _EDGE_UM
    if w[0] > 0.285:
        assumed.append(f"no data below {w[0]:.3g} µm: the first values hold down to .28 µm")
    if w[below][-1] < 2.45:
        assumed.append(f"no data from {w[below][-1]:.3g} µm up: the last values hold to 2.8 µm")
    solar = _sheet(lab, found, below, thickness_mm / 1000.0)
    above = w >= _EDGE_UM
    if above.any() and w[above][0] <= THERMAL_FROM_UM and w[-1] >= THERMAL_TO_UM:
        if w[-1] < 40.0:
            assumed.append(f"no data beyond {w[-1]:.3g} µm: the last values hold to 100 µm")
        return JoinedSheet(solar, _sheet(lab, found, above, thickness_mm / 1000.0), haze)
    return JoinedSheet(solar, _assumed_thermal(thickness_mm, kind, assumed), haze)


def _assumed_thermal(thickness_mm: float, kind: Kind, assumed: list[str]) -> SpectralLayer:
    """Long-wave side of a sheet that was measured in sunlight only."""
    if kind == "film":
        assumed.append(
            "no long-wave data: taken as plain polyethylene of this thickness; an infrared-absorbing film "
            "passes .2-.3 instead of .6, worth about 30 W/m2 of covering on a clear night"
        )
        return MaterialSheet("polyethylene", thickness_mm / 1000.0)
    assumed.append(
        "no long-wave data: taken as opaque, emissivity .89 normal (glass, rigid plastics .84-.91)"
    )
    reflect = index_with(np.array([0.11, 0.11]), np.zeros(2))
    return EquivalentSheet(reflect, reflect, np.zeros(2), np.array([3.0, 100.0]))


def _stack(thickness_mm: float, kind: Kind, optics: JoinedSheet) -> StackSpec:
    solid = SOLIDS[{"glass": "soda-lime-clear", "film": "polyethylene"}.get(kind, "polycarbonate")]
    layer = LayerSpec(optics, f"laboratory sheet {thickness_mm:g} mm", thickness_mm / 1000.0, solid)
    return StackSpec((layer,), (), (), None, GLASS_DROPS if kind == "glass" else PLASTIC_DROPS)


def _record(path: Path, name: str, kind: Kind, state: Wet, stack: StackSpec, limits: list[str]) -> Covering:
    dry = optics_of(stack, "dry")
    moist = dry if state == "none" else optics_of(stack, state)
    entry = {
        "name": name,
        "title": f"{name} (laboratory spectrum)",
        "kind": kind,
        "provenance": "computed",
        "source": f"laboratory spectrum {path.name}, inverted to n and k; {len(limits)} limits said",
    }
    return assemble(entry, stack, dry, moist)


def _reach(covering: Covering) -> str:
    got = figures(covering)
    return (
        f"from the spectrum follow: par_normal {got.par_normal:.3f}, par_hemispherical "
        f"{got.par_hemispherical:.3f}, thermal_transmittance {got.thermal_transmittance:.3f}"
    )
