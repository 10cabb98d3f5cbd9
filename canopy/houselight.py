"""Light in the house, hour by hour: outside light x house x screens x stand, with all returns between them.

Covering, screens (outermost first) and stand lie over each other like sheets of a stack. The beam goes down
through them once; the diffuse light goes up and down without end, which the adding method sums in closed form
(two-flux layers; Stokes 1862 for plates). Screens lie level at the gutter; light that comes in through the
side walls passes a side screen of the same fabric.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.light import HouseTransmission, Light, StandResponse, SunBands
from canopy.optics import Screen, SolarOptics
from canopy.shading import Paint
from canopy.sheettable import SheetTable, place, sheet_table
from canopy.structure import STRUCTURE_ABSORPTANCE
from weather.record import Weather

SUNSHINE_W_M2 = 120.0
"""Direct normal light from which the sun is said to shine: WMO-No. 8 (2018), chapter 8."""

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]


@dataclass(frozen=True)
class _Sheet:
    """One screen as it hangs, (B, D) or (B, 1): drawn, stowed or between."""

    beam: Floats
    scatter: Floats  # beam to diffuse, downwards
    beam_back: Floats
    beam_kept: Floats
    down: Floats
    up: Floats
    back_above: Floats
    back_below: Floats
    kept_above: Floats
    kept_below: Floats


@dataclass(frozen=True)
class _Flux:
    """Flux between the layers, (B, D) each: S + 1 levels, the last at the top of the stand."""

    beam: list[Floats]
    down: list[Floats]
    up: list[Floats]


def inside(
    sun: SunBands,
    house: HouseTransmission,
    weather: Weather,
    screens: tuple[Screen, ...],
    drawn: Floats,
    stand: StandResponse,
    paint: Paint | None = None,
) -> Light:
    """Return the light in one house, one covering state.

    drawn: (S, N) share of each screen that is drawn, 0 stowed ... 1 drawn. Laws, in every band and hour:
    inside_beam + inside_diffuse - crop_up == crop + ground; nothing is negative.
    """
    hours = len(weather)
    if drawn.shape != (len(screens), hours):
        raise ValueError(f"drawn has shape {drawn.shape}; {(len(screens), hours)} is needed")
    lit = np.flatnonzero(((sun.direct + sun.diffuse) > 0.0).any(axis=0))
    cosine = np.cos(np.radians(weather.zenith[lit]))
    outside_beam = sun.direct[:, lit] * np.maximum(cosine, 0.0)
    outside_diffuse = sun.diffuse[:, lit]
    beam, diffuse = _under_covering(outside_beam, outside_diffuse, house, lit, paint)
    sheets = [_hung(screen, drawn[i, lit], cosine) for i, screen in enumerate(screens)]
    flux = _exchange(beam, diffuse, sheets, house.return_down[:, None], stand, lit)
    parts = _parts(flux, stand, lit)
    kept = [
        flux.beam[i] * s.beam_kept + flux.down[i] * s.kept_above + flux.up[i + 1] * s.kept_below
        for i, s in enumerate(sheets)
    ]
    covering = _covering(outside_beam, outside_diffuse, flux.up[0], house, lit, paint)
    through = paint.through[:, lit] if paint else np.ones(1)
    stopped = house.structure_beam[:, lit] * outside_beam + house.structure_sky[:, lit] * outside_diffuse
    stopped = stopped * through + house.structure_sky[:, lit] * flux.up[0]

    def full(values: Floats) -> Floats:
        out = np.zeros((*values.shape[:-1], hours))
        out[..., lit] = values
        return out

    sunny = np.zeros(hours)
    shines = (weather.dni[lit] >= SUNSHINE_W_M2) & (flux.beam[-1].sum(axis=0) > 0.0)
    sunny[lit] = house.sunny[lit] * shines
    bands = len(outside_beam)
    return Light(
        outside_beam=full(outside_beam),
        outside_diffuse=full(outside_diffuse),
        inside_beam=full(flux.beam[-1]),
        inside_diffuse=full(flux.down[-1]),
        **{name: full(value) for name, value in parts.items()},
        covering=full(covering),
        screen=full(np.stack(kept)) if kept else np.zeros((0, bands, hours)),
        structure=full(STRUCTURE_ABSORPTANCE * stopped),
        sunlit_lai=stand.sunlit_lai,
        sunny=sunny,
    )


def _under_covering(
    outside_beam: Floats,
    outside_diffuse: Floats,
    house: HouseTransmission,
    lit: Rows,
    paint: Paint | None,
) -> tuple[Floats, Floats]:
    """Return beam and diffuse light under the covering before any of it comes back from below."""
    beam = outside_beam * house.beam[:, lit]
    scattered = outside_beam * house.beam_scattered[:, lit]
    sky = outside_diffuse * house.sky[:, lit]
    if paint is None:
        return beam, scattered + sky
    through, clear = paint.through[:, lit], paint.beam[:, lit]
    return beam * clear, (scattered + sky) * through + beam * (through - clear)


def _covering(
    outside_beam: Floats,
    outside_diffuse: Floats,
    up: Floats,
    house: HouseTransmission,
    lit: Rows,
    paint: Paint | None,
) -> Floats:
    """Return what each layer of the covering keeps, (L, B, D); the paint's share goes to the outermost."""
    kept: Floats = house.covering_beam[:, :, lit] * outside_beam
    kept += house.covering_sky[:, :, lit] * outside_diffuse
    if paint is not None:
        kept = kept * paint.through[:, lit]
        kept[0] += paint.absorbed[:, lit] * (outside_beam + outside_diffuse)
    return kept + house.covering_up[:, :, None] * up


def _hung(screen: Screen, drawn: Floats, cosine: Floats) -> _Sheet:
    """Return a screen as it hangs: fabric where it is drawn, a dense bundle over the rest's parked share."""
    optics = screen.solar
    table = sheet_table(optics)
    where = place(np.maximum(cosine, 0.0))
    clear = SheetTable.read(table.beam, where)
    scatter = SheetTable.read(table.total, where) - clear
    kept = SheetTable.read(table.absorbed, where)
    back = 1.0 - clear - scatter - kept
    bundle = (1.0 - drawn) * screen.parked_shade
    free = (1.0 - drawn) - bundle
    mirror = _bundle_reflectance(optics)

    def column(values: Floats) -> Floats:
        return values[:, None] * drawn

    return _Sheet(
        beam=clear * drawn + free,
        scatter=scatter * drawn,
        beam_back=back * drawn + bundle * mirror,
        beam_kept=kept * drawn + bundle * (1.0 - mirror),
        down=column(optics.diffuse_in) + free,
        up=column(optics.diffuse_out) + free,
        back_above=column(optics.reflect_outside) + bundle * mirror,
        back_below=column(optics.reflect_inside) + bundle * mirror,
        kept_above=column(optics.absorbed_from_outside[0]) + bundle * (1.0 - mirror),
        kept_below=column(optics.absorbed_from_inside[0]) + bundle * (1.0 - mirror),
    )


def _bundle_reflectance(optics: SolarOptics) -> Floats:
    """Return the reflectance of many folds on each other, (B, 1).

    Kubelka & Munk (1931) for an endless pile: with r and t of one fold,
    R = (1 + r^2 - t^2 - sqrt((1 + r^2 - t^2)^2 - 4 r^2)) / (2 r).
    """
    r, t = optics.reflect_outside, optics.diffuse_in
    b = 1.0 + r * r - t * t
    root = np.sqrt(np.maximum(b * b - 4.0 * r * r, 0.0))
    pile = np.where(r > 1e-9, (b - root) / (2.0 * np.where(r > 1e-9, r, 1.0)), 0.0)
    return np.asarray(np.clip(pile, 0.0, 1.0))[:, None]


def _exchange(
    beam: Floats,
    diffuse: Floats,
    sheets: list[_Sheet],
    house_back: Floats,
    stand: StandResponse,
    lit: Rows,
) -> _Flux:
    """Return the flux at every level, all returns summed.

    From the stand upwards every stack below level i answers diffuse light d with d R + Q; Q is what the beam
    sends up. At the covering the loop closes: d = diffuse + back (d R + Q).
    """
    beams = [beam]
    for sheet in sheets:
        beams.append(beams[-1] * sheet.beam)
    answers = [(stand.diffuse_up[:, lit], beams[-1] * stand.beam_up[:, lit])]
    for sheet, above in zip(sheets[::-1], beams[-2::-1], strict=True):
        r, q = answers[-1]
        loop = 1.0 / (1.0 - sheet.back_below * r)
        sent = (above * sheet.scatter + sheet.back_below * q) * loop
        answers.append(
            (
                sheet.back_above + sheet.up * r * sheet.down * loop,
                above * sheet.beam_back + sheet.up * (q + r * sent),
            )
        )
    answers.reverse()
    r, q = answers[0]
    down = [(diffuse + house_back * q) / (1.0 - house_back * r)]
    for sheet, above, (r, q) in zip(sheets, beams[:-1], answers[1:], strict=True):
        arriving = above * sheet.scatter + sheet.down * down[-1] + sheet.back_below * q
        down.append(arriving / (1.0 - sheet.back_below * r))
    up = [d * r + q for d, (r, q) in zip(down, answers, strict=True)]
    return _Flux(beams, down, up)


def _parts(flux: _Flux, stand: StandResponse, lit: Rows) -> dict[str, Floats]:
    """Return what leaves and ground take of the light at the top of the stand."""
    beam, down = flux.beam[-1], flux.down[-1]
    return {
        "crop": beam * stand.beam_crop[:, lit] + down * stand.diffuse_crop[:, lit],
        "crop_sunlit": beam * stand.beam_crop_sunlit[:, lit] + down * stand.diffuse_crop_sunlit[:, lit],
        "ground": beam * stand.beam_ground[:, lit] + down * stand.diffuse_ground[:, lit],
        "crop_up": flux.up[-1],
    }
