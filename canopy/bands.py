"""The one table of band edges: solar and thermal."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True)
class BandSet:
    """Adjoining wavelength bands, names and edges in µm (one edge more than names)."""

    names: tuple[str, ...]
    edges: tuple[float, ...]

    def __post_init__(self) -> None:
        """Refuse edges that do not rise or do not fit the names."""
        if len(self.edges) != len(self.names) + 1:
            raise ValueError(f"{len(self.names)} bands need {len(self.names) + 1} edges")
        if any(b <= a for a, b in zip(self.edges, self.edges[1:], strict=False)) or self.edges[0] <= 0:
            raise ValueError(f"band edges must rise from above 0 µm, found {self.edges}")

    def __len__(self) -> int:
        """Return the number of bands."""
        return len(self.names)

    def index(self, name: str) -> int:
        """Return the row of a band."""
        return self.names.index(name)

    @property
    def lower(self) -> NDArray[np.float64]:
        """Lower edges, µm."""
        return np.array(self.edges[:-1])

    @property
    def upper(self) -> NDArray[np.float64]:
        """Upper edges, µm."""
        return np.array(self.edges[1:])


SOLAR: Final = BandSet(
    ("uv", "par", "far_red", "nir_1", "nir_2"), (0.28, 0.40, 0.70, 0.75, 1.35, 2.80)
)
"""Sunlight as crops and pyranometers (285-2800 nm) see it."""

PAR_COLOURS: Final = BandSet(("blue", "green", "red"), (0.40, 0.50, 0.60, 0.70))
"""Thirds of PAR for reports."""

THERMAL: Final = BandSet(("3-8", "8-14", "14-100"), (3.0, 8.0, 14.0, 100.0))
"""Long-wave; 8-14 µm is the atmospheric window. Outer bands reach to 0 and infinity in exchange."""

NIR_BANDS: Final = ("far_red", "nir_1", "nir_2")
"""Bands that add up to what every table calls NIR heat (.70-2.80 µm)."""
