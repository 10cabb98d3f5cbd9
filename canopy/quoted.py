"""A covering from the three or four numbers of a quotation, on the model of a library covering.

What is quoted is met; what is not quoted stays as in the model, and is said. Figures that no covering of that
kind can have together are said too.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

from scipy.optimize import brentq

from canopy import library, reshape
from canopy.coveringfigures import CoveringFigures, figures
from canopy.optics import Covering, SolarOptics
from weather.constants import STEFAN_BOLTZMANN

MATCH: Final = 0.001  # quoted figures are met this closely, or it is said that they are not
_SKY_CONTRAST_W_M2: Final = 0.25 * STEFAN_BOLTZMANN * 283.15**4  # 283 K below a clear sky of emissivity .75
_NIGHT_K: Final = 20.0  # inside less outside of the sensitivity text
_WEB_MAX: Final = 20.0  # W m-2 K-1 through webs and seams, beyond any product
_RESISTANCE_MAX: Final = 0.06  # m2 K/W of a solid sheet, 12 mm of plastic
_OPAQUE: Final = 0.005  # long-wave transmittance of what counts as opaque
_RATIO_SLACK: Final = 0.05  # by how much hemispherical/normal PAR may leave the model's


@dataclass(frozen=True)
class Quote:
    """What a quotation says: fractions, U in W m-2 K-1; None where nothing is quoted."""

    name: str
    based_on: str
    par_normal: float | None = None
    par_hemispherical: float | None = None
    haze: float | None = None
    thermal_transmittance: float | None = None
    u_value: float | None = None

    @property
    def says_anything(self) -> bool:
        """Whether any figure is quoted; without one the covering is that of the library."""
        return any(getattr(self, key) is not None for key in _RANGE_KEYS)


@dataclass(frozen=True)
class FittedCovering:
    """The covering, what was assumed, what contradicts, and how much the assumptions can matter."""

    covering: Covering
    assumed: tuple[str, ...]
    contradictions: tuple[str, ...]
    sensitivity: str


def fit_quoted(quote: Quote, *, wet: library.Wetting | None = None, age_years: float = 0.0) -> FittedCovering:
    """Return the covering that meets a quotation.

    Raises UserError when `based_on` is not in the library. `thermal_transmittance` is the hemispherical one,
    weighted by a 283 K blackbody, not the 7-13 µm normal figure of EN 13206 (lower for absorbing films);
    `u_value` is under EN 673's conditions (he 25, hi 7.7). Age is taken off after the fit: a quotation is for
    the new sheet.
    """
    base = library.covering(quote.based_on, wet=wet)
    contradictions = _impossible(quote, figures(base))
    covering = _light(base, quote)
    covering = _heat(covering, quote)
    got = figures(covering)
    contradictions += _missed(quote, got)
    covering = replace(
        covering,
        name=quote.name,
        title=f"{quote.name} (quoted, on the model of {quote.based_on})"
        if quote.says_anything
        else base.title,
        haze=got.haze,
        source=_source(quote, base),
    )
    if age_years > 0.0:
        from canopy.library_build import aged

        loss = library.row(quote.based_on).figures["par_loss_per_year"].value
        covering = aged(covering, loss, age_years)
    if not quote.says_anything:
        return FittedCovering(covering, (f"as {quote.based_on} in the library",), (), "")
    assumed = (*_beyond_plain(quote, base), *_assumed(quote, got))
    return FittedCovering(covering, assumed, tuple(contradictions), _sensitivity(quote, got))


def _light(base: Covering, quote: Quote) -> Covering:
    a, b = reshape.light_factor(base.solar_dry, quote.par_normal, quote.par_hemispherical)
    dry = reshape.scale_light(base.solar_dry, a, b)
    wet = reshape.scale_light(base.solar_wet, a, b)
    if quote.haze is not None:
        dry, wet = reshape.set_haze(dry, quote.haze), _wet_haze(base, wet, quote.haze)
    return replace(base, solar_dry=dry, solar_wet=wet)


def _wet_haze(base: Covering, wet: SolarOptics, haze: float) -> SolarOptics:
    """Drops scatter besides the sheet: the straight shares of both multiply."""
    before = reshape.haze_of(base.solar_dry)
    moist = reshape.haze_of(base.solar_wet)
    straight = (1.0 - haze) * (1.0 - moist) / max(1.0 - before, 1e-9)
    return reshape.set_haze(wet, 1.0 - min(1.0, straight))


def _heat(covering: Covering, quote: Quote) -> Covering:
    """Set long-wave transmission, then U; a few rounds since each moves the other a little."""
    start = covering
    passes = reshape.transmitted(covering.thermal_dry) > _OPAQUE
    for _ in range(1 if quote.u_value is None else 4):
        if quote.thermal_transmittance is not None and passes:
            covering = _fit_thermal(covering, quote.thermal_transmittance)
        if quote.u_value is not None:
            covering = _fit_u(covering, start, quote.u_value)
    return covering


def _fit_thermal(covering: Covering, target: float) -> Covering:
    def at(power: float) -> Covering:
        return reshape.with_thermal(covering, lambda optics: reshape.thicken(optics, power))

    return _between(at, lambda c: reshape.transmitted(c.thermal_dry), target, 0.1, 400.0)


def _fit_u(covering: Covering, start: Covering, target: float) -> Covering:
    """Webs and seams carry more heat, or gap faces emit less; a single sheet resists more."""

    def u(c: Covering) -> float:
        return figures(c).u_value_w_m2_cover_k

    if not covering.gaps:
        bare = replace(covering, resistance=start.resistance)
        return _between(lambda x: reshape.with_resistance(bare, x), u, target, 0.0, _RESISTANCE_MAX)
    plain = replace(covering, gaps=start.gaps)
    without = reshape.with_webs(plain, -_WEB_MAX)
    if u(without) <= target:
        return _between(lambda x: reshape.with_webs(without, x), u, target, 0.0, _WEB_MAX)
    return _between(
        lambda x: reshape.with_thermal(without, lambda optics: reshape.shine(optics, x)), u, target, 0.02, 1.0
    )


def _between(
    make: Callable[[float], Covering],
    measure: Callable[[Covering], float],
    target: float,
    low: float,
    high: float,
) -> Covering:
    """Return make(x) that measures the target, or the nearer end where the target lies beyond."""
    at_low, at_high = measure(make(low)) - target, measure(make(high)) - target
    if at_low * at_high > 0.0:
        return make(low if abs(at_low) < abs(at_high) else high)
    return make(float(brentq(lambda x: measure(make(x)) - target, low, high, xtol=1e-9, rtol=1e-10)))


def _impossible(quote: Quote, base: CoveringFigures) -> list[str]:
    """What contradicts before anything is fitted."""
    out = []
    normal, hemi = quote.par_normal, quote.par_hemispherical
    if normal is not None and hemi is not None:
        if hemi > normal:
            out.append(
                f"par_hemispherical {hemi:g} exceeds par_normal {normal:g}: "
                "a flat sheet passes less slanted light than straight light"
            )
        elif abs(hemi / max(normal, 1e-6) - base.par_hemispherical / base.par_normal) > _RATIO_SLACK:
            out.append(
                f"par_hemispherical/par_normal is {hemi / max(normal, 1e-6):.3f}, {quote.based_on} has "
                f"{base.par_hemispherical / base.par_normal:.3f}: they may come from different samples"
            )
    thermal = quote.thermal_transmittance
    if thermal is not None and thermal > 0.02 and base.thermal_transmittance <= _OPAQUE:
        out.append(
            f"thermal_transmittance {thermal:g}: {quote.based_on} lets no long-wave through; choose a film"
        )
    return out


def _beyond_plain(quote: Quote, base: Covering) -> list[str]:
    """Say when more PAR is quoted than the model lets through even without any absorption."""
    light = base.solar_dry
    most = {
        "par_normal": 1.0 - float(light.beam_reflect[reshape.PAR, 0]),
        "par_hemispherical": 1.0 - float(light.reflect_outside[reshape.PAR]),
    }
    return [
        f"{key} {value:g} is more than {quote.based_on} passes without any absorption ({limit:.3f}): less "
        "reflection is taken, as with an anti-reflection coat"
        for key, limit in most.items()
        if (value := getattr(quote, key)) is not None and value > limit + MATCH
    ]


def _missed(quote: Quote, got: CoveringFigures) -> list[str]:
    """Quoted figures that the fit could not reach, with the nearest possible value."""
    pairs = (
        ("par_normal", quote.par_normal, got.par_normal),
        ("par_hemispherical", quote.par_hemispherical, got.par_hemispherical),
        ("haze", quote.haze, got.haze),
        ("thermal_transmittance", quote.thermal_transmittance, got.thermal_transmittance),
        ("u_value", quote.u_value, got.u_value_w_m2_cover_k),
    )
    return [
        f"{key} {want:g} cannot be had on the model of {quote.based_on}; nearest {have:.3f}"
        + (_U_HINT if key == "u_value" else "")
        for key, want, have in pairs
        if want is not None and abs(want - have) > MATCH
    ]


def _source(quote: Quote, base: Covering) -> str:
    given = ", ".join(
        f"{key} {value:g}"
        for key in ("par_normal", "par_hemispherical", "haze", "thermal_transmittance", "u_value")
        if (value := getattr(quote, key)) is not None
    )
    rest = f"the rest as {quote.based_on} ({base.provenance}: {base.source})"
    return f"quotation: {given}; {rest}" if given else f"as {quote.based_on}: {base.source}"


_U_HINT: Final = " (EN 673 conditions: U of a heated house under a clear sky is .3-.8 higher)"

_RANGE_KEYS: Final = {
    "par_normal": "par_normal",
    "par_hemispherical": "par_hemispherical",
    "haze": "haze",
    "thermal_transmittance": "thermal_transmittance",
    "u_value": "u_value_w_m2_cover_k",
}


def _assumed(quote: Quote, got: CoveringFigures) -> tuple[str, ...]:
    """Say what stands in for each figure that is not quoted."""
    words = []
    if quote.par_normal is None and quote.par_hemispherical is None:
        words.append(f"PAR transmission as {quote.based_on}: {got.par_hemispherical:.3f} hemispherical")
    elif quote.par_hemispherical is None:
        words.append(
            f"angle dependence as {quote.based_on}: par_hemispherical {got.par_hemispherical:.3f} follows"
        )
    elif quote.par_normal is None:
        words.append(f"angle dependence as {quote.based_on}: par_normal {got.par_normal:.3f} follows")
    if quote.par_normal is not None or quote.par_hemispherical is not None:
        words.append(
            f"UV and NIR change in the same ratio as PAR: nir_hemispherical {got.nir_hemispherical:.3f}; "
            "light that is missing is absorbed in the outer layer, light that is more comes out of "
            "absorption and reflection"
        )
    if quote.haze is None:
        words.append(f"haze as {quote.based_on}: {got.haze:.2f}")
    if quote.thermal_transmittance is None:
        words.append(f"long-wave as {quote.based_on}: transmittance {got.thermal_transmittance:.3f}")
    if quote.u_value is None:
        words.append(f"U-value computed from the layers: {got.u_value_w_m2_cover_k:.2f} W m-2 K-1")
    words.append(f"wet optics, heat capacity and gaps as {quote.based_on}")
    return tuple(words)


def _sensitivity(quote: Quote, got: CoveringFigures) -> str:
    """Say how far what is not quoted can move light and heat, from the ranges of the library row."""
    ranges = library.row(quote.based_on).figures
    half = {key: 0.5 * (ranges[row].high - ranges[row].low) for key, row in _RANGE_KEYS.items()}
    parts = []
    if quote.par_hemispherical is None:
        share = 100.0 * half["par_hemispherical"] / max(got.par_hemispherical, 0.05)
        parts.append(f"diffuse light ± {share:.0f} % (par_hemispherical not quoted)")
    nir = 0.5 * (ranges["nir_hemispherical"].high - ranges["nir_hemispherical"].low)
    parts.append(f"NIR heat ± {100.0 * nir / max(got.nir_hemispherical, 0.05):.0f} % (never quoted)")
    if quote.haze is None:
        parts.append(f"scattered share of sunlight ± {half['haze']:.2f} (haze not quoted)")
    if quote.thermal_transmittance is None and half["thermal_transmittance"] > 0.01:
        watts = half["thermal_transmittance"] * _SKY_CONTRAST_W_M2
        parts.append(f"clear-night loss ± {watts:.0f} W/m2 of covering (thermal_transmittance not quoted)")
    if quote.u_value is None:
        watts = half["u_value"] * _NIGHT_K
        parts.append(f"heat loss at {_NIGHT_K:.0f} K ± {watts:.0f} W/m2 of covering (u_value not quoted)")
    return "What is not quoted can move: " + "; ".join(parts) + "."
