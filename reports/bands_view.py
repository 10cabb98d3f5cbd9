"""The `bands` command: shares of a black surface's radiation by band, in words."""

from __future__ import annotations

import itertools
import math

from canopy.bands import SOLAR, THERMAL
from weather.constants import STEFAN_BOLTZMANN
from weather.errors import UserError

LOWEST_K, HIGHEST_K = 1.0, 50_000.0


def parse_edges(text: str) -> list[float]:
    """Return rising band edges in µm from comma-separated text.

    Errors: UserError when a piece is no number, or edges do not rise from 0 or more.
    """
    edges: list[float] = []
    for piece in text.split(","):
        try:
            edge = float(piece)
        except ValueError:
            raise UserError(f"--edges: {piece.strip()!r} is no number; write e.g. 0.4,0.7,3,8,14") from None
        if not math.isfinite(edge) and piece.strip().lower() not in ("inf", "+inf"):
            raise UserError(f"--edges: {piece.strip()!r} is no wavelength; write µm, or inf as the last edge")
        edges.append(edge)
    if len(edges) < 2 or edges[0] < 0 or any(b <= a for a, b in itertools.pairwise(edges)):
        raise UserError(f"--edges: found {text}; allowed are two or more µm values that rise from 0 or more")
    return edges


def bands_text(temperature_k: float, edges: str | None) -> str:
    """Return the table of band shares at one temperature (K), with power and peak.

    Without edges: the tool's own solar and thermal bands.
    Errors: UserError for a temperature or edges out of range.
    """
    from canopy.planck import band_share, peak_wavelength_um

    if not LOWEST_K <= temperature_k <= HIGHEST_K:
        hint = "; temperatures are in kelvin, 0 °C is 273.15 K" if temperature_k < LOWEST_K else ""
        raise UserError(
            f"--temperature: found {temperature_k:g}; allowed is {LOWEST_K:g} to {HIGHEST_K:g} K{hint}"
        )
    if edges is None:
        cuts = [0.0, *SOLAR.edges, *THERMAL.edges, math.inf]
        names = ["below UV", *SOLAR.names, "between", *THERMAL.names, "beyond"]
    else:
        cuts = parse_edges(edges)
        names = [""] * (len(cuts) - 1)
    total = STEFAN_BOLTZMANN * temperature_k**4
    lines = [
        f"Black surface at {temperature_k:g} K ({temperature_k - 273.15:.2f} °C)",
        f"radiates {total:.6g} W/m2, peak at {float(peak_wavelength_um(temperature_k)):.4f} µm",
        "",
        f"{'band':<10} {'from µm':>9} {'to µm':>9} {'share':>12} {'W/m2':>13}",
    ]
    for name, low, high in zip(names, cuts, cuts[1:], strict=False):
        share = float(band_share(low, high, temperature_k))
        lines.append(f"{name:<10} {low:>9.4g} {high:>9.4g} {share:>12.8f} {share * total:>13.6g}")
    share = float(band_share(cuts[0], cuts[-1], temperature_k))
    lines.append(f"{'all':<10} {cuts[0]:>9.4g} {cuts[-1]:>9.4g} {share:>12.8f} {share * total:>13.6g}")
    return "\n".join(lines)
