"""The method in words with its sources, as the report prints it."""

from __future__ import annotations

from typing import Final

METHOD: Final[tuple[tuple[str, str, str], ...]] = (
    (
        "Weather",
        "Read as it is labelled, shifted to where the radiation really stands, checked, gaps filled and "
        "marked. Missing parts are computed: diffuse from global, water vapour from humidity, clear sky "
        "from turbidity.",
        "Driesse, Jensen & Perez 2024 (continuous Erbs); Gueymard 1994; Ineichen & Perez 2002, through pvlib",
    ),
    (
        "Sun",
        "Position in the middle of every hour, refraction included.",
        "Reda & Andreas 2008 (NREL/TP-560-34302), through pvlib",
    ),
    (
        "Sunlight by band",
        "Clear-sky spectra from a table by height of the sun and water vapour, shifted by cloud, split into "
        "UV, PAR, far-red and two bands of NIR; photons from the same spectra.",
        "Bird & Riordan 1986 (SPECTRL2), tabled in advance and shipped",
    ),
    (
        "Sky long-wave",
        "Where the file has none: clear-sky emissivity with a daily wave, raised by cloud as the sun tells "
        "it and blended through the night. Split into the atmospheric window (8–14 µm) and the rest on "
        "both sides of it: three bands.",
        "Prata 1996; Crawford & Duchon 1999; Berdahl & Fromberg 1982",
    ),
    (
        "Covering",
        "Each sheet by Fresnel's laws and absorption with all inner reflections, both polarisations apart; "
        "layers added up; dry and with a wet inner face. Beam angle by angle, diffuse light over the "
        "half-sphere. Dirt by month takes light and warms the outermost layer.",
        "Stokes 1862; Byrnes 2016; optical constants as named with each covering",
    ),
    (
        "House",
        "The beam is followed through roofs, walls and gables, straight and with the first mirror "
        "reflection; gutters and ridges are boxes with depth, bars shade by angle; the sky is integrated "
        "over the half-sphere, brighter round the sun and at the horizon. Left out: second mirror "
        "reflections. Light is taken on a level plane at the top of the crop; under an arch, at most as "
        "high as its gutter.",
        "plane geometry; Perez et al. 1990",
    ),
    (
        "Crop",
        "Leaves that scatter, band by band, by discrete ordinates; leaf angles by an ellipsoid; rows by "
        "their exact gaps; sunlit and shaded leaves apart; light passes to and fro between leaves, floor, "
        "screens and covering until it is absorbed or out.",
        "Campbell 1986 and 1990; Ross 1981; Stamnes & Swanson 1981",
    ),
    (
        "Screens",
        "Drawn by rules that look at the outside only: light, temperature, hours and days. A drawn screen "
        "lies under the whole roof; side walls and gable ends stay free of it against heat loss unless "
        "screened_walls is set. Air above it is colder and drier; it opens a gap for humidity.",
        "strips and holes of the fabric, area by area",
    ),
    (
        "Long-wave inside",
        "Floor, pipes, leaves, screens, covering layers and sky exchange in three bands (up to 8, 8–14 and "
        "above 14 µm), each surface "
        "emitting at its own temperature, with transmission and reflection of every layer and all "
        "inter-reflections.",
        "Planck's law (Chang & Rhee 1984); adding method",
    ),
    (
        "Convection and air",
        "Outer and inner convection by form of the house, gaps between layers, leakage and vents by wind "
        "and temperature difference.",
        "Bot 1983; De Zwart 1996; Papadakis, Frangoudakis & Kyritsis 1992; Boulard & Baille 1995; ASHRAE "
        "Fundamentals (leakage); EN 673",
    ),
    (
        "Water",
        "Transpiration of sunlit and shaded leaves, evaporation from the floor, condensation as a film that "
        "grows, dries and runs off; a humidity limit held by venting.",
        "Stanghellini 1987; Lewis's analogy; ASHRAE Fundamentals ch. 1",
    ),
    (
        "Stores and solving",
        "Air, vapour, crop, pipes, covering and a soil column store heat. All hours are solved together "
        "until each closes; an hour that does not is solved again by another route, and a run with an hour "
        "left open ends without a report.",
        "Newton's method; Kusuda & Achenbach 1965 for the deep ground",
    ),
    (
        "Heating size",
        "From the hours in order of size, and as a design night worked out step by step, the larger of both; "
        "a paper calculation with U-values stands beside it. A screen that opens at once makes a pulse in "
        "the load, which the size does not count. The smallest boiler beside a heat store is exact for a "
        "year known in advance.",
        "ASHRAE Fundamentals ch. 14; EN 673; Dinkelbach 1967 for the heat store",
    ),
)
"""(stage, how, after whom)."""
