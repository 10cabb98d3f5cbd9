"""The method in words with its sources, as the report and the workbook print it."""

from __future__ import annotations

from typing import Final

METHOD: Final[tuple[tuple[str, str, str], ...]] = (
    (
        "Sun",
        "Position at the middle of every hour, refraction included.",
        "Reda & Andreas 2004 (NREL/TP-560-34302), through pvlib",
    ),
    (
        "Sunlight by band",
        "Clear-sky spectrum by air mass and water vapour, split into UV, PAR, far-red and two bands of NIR, "
        "with a correction for cloud.",
        "Bird & Riordan 1986 (SPECTRL2), through pvlib",
    ),
    (
        "Covering",
        "Each sheet by Fresnel and Bouguer with all inner reflections, both polarisations apart, angle by "
        "angle for the beam and over the "
        "half-sphere for diffuse light; layers added up, dry and with a wet inner face.",
        "Born & Wolf; Duffie & Beckman ch. 5",
    ),
    (
        "House",
        "The beam is followed exactly through roofs, walls and gables, with the first reflection off "
        "neighbouring panes; gutters, ridges "
        "and bars shade as solid bodies; the sky is integrated over the half-sphere.",
        "Perez et al. 1990 for the brightness of the sky",
    ),
    (
        "Crop",
        "Leaves scatter: discrete ordinates for each band, sunlit and shaded leaves apart, over a reflecting "
        "floor.",
        "Campbell 1986 for leaf angles; Chandrasekhar 1960 for the method",
    ),
    (
        "Sky long-wave",
        "Two-part sky: the atmospheric window 8-14 µm and the rest, each with its own emission.",
        "Prata 1996 with a cloud correction; Crawford & Duchon 1999",
    ),
    (
        "Long-wave inside",
        "Floor, leaves, screens, covering layers and sky exchange in bands, every surface at its own "
        "temperature, with "
        "transmission and reflection of every layer.",
        "Siegel & Howell, enclosure theory by bands",
    ),
    (
        "Heat and vapour",
        "All hours solved together: heating, venting, leakage, convection, transpiration, condensation, "
        "stores in air, crop, pipes, "
        "covering and soil. Every hour closes.",
        "Monteith 1965; correlations named in the handbook of the program",
    ),
    (
        "Heating size",
        "From the hours, and as a design night worked out step by step.",
        "ASHRAE Fundamentals ch. 14 for design temperatures",
    ),
)
"""(stage, how, after whom)."""
