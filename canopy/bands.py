"""The one table of band edges: solar and thermal."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
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


SOLAR: Final = BandSet(("uv", "par", "far_red", "nir_1", "nir_2"), (0.28, 0.40, 0.70, 0.75, 1.35, 2.80))
"""Sunlight as crops and pyranometers (285-2800 nm) see it."""

PAR_COLOURS: Final = BandSet(("blue", "green", "red"), (0.40, 0.50, 0.60, 0.70))
"""Thirds of PAR for reports."""

THERMAL: Final = BandSet(("3-8", "8-14", "14-100"), (3.0, 8.0, 14.0, 100.0))
"""Long-wave; 8-14 µm is the atmospheric window. Outer bands reach to 0 and infinity in exchange."""

NEAREST: Final = 0.01
"""Narrowest finer band, as a share of its lower edge: 4 nm in blue light, .1 µm in the window."""

NIR_BANDS: Final = ("far_red", "nir_1", "nir_2")
"""Bands that add up to what every table calls NIR heat (.70-2.80 µm)."""


def finer(edges: Sequence[float], base: BandSet) -> BandSet:
    """Return bands that nest in those of `base`: "par" cut in two gives "par-1" and "par-2".

    Edges in µm; a band that is not cut keeps its name. Raises ValueError for edges that do not rise, leave
    the base bands, miss one of their edges or lie closer together than `NEAREST` allows.
    """
    cuts = [_snapped(float(edge), base) for edge in edges]
    kept = ", ".join(f"{edge:g}" for edge in base.edges)
    for low, high in itertools.pairwise(cuts):
        if not high > low:
            raise ValueError(f"{low:g} is followed by {high:g}; edges rise")
        if high < low * (1.0 + NEAREST):
            raise ValueError(f"{low:g} and {high:g} lie less than {100 * NEAREST:g} % apart")
    for edge in base.edges:
        if edge not in cuts:
            raise ValueError(f"the edge {edge:g} µm is missing; {kept} stay edges, others come between")
    if cuts[0] != base.edges[0] or cuts[-1] != base.edges[-1]:
        outside = cuts[0] if cuts[0] < base.edges[0] else cuts[-1]
        raise ValueError(f"{outside:g} µm lies outside {base.edges[0]:g} to {base.edges[-1]:g} µm")
    names: list[str] = []
    for name, low, high in zip(base.names, base.edges, base.edges[1:], strict=False):
        parts = sum(low <= cut < high for cut in cuts)
        names += [name] if parts == 1 else [f"{name}-{i}" for i in range(1, parts + 1)]
    return BandSet(tuple(names), tuple(cuts))


def _snapped(edge: float, base: BandSet) -> float:
    """Return the base edge that an edge means, else the edge itself."""
    return next((own for own in base.edges if abs(own - edge) < 1e-9), edge)


def parents(bands: BandSet, base: BandSet) -> NDArray[np.intp]:
    """Return for each band the row of the base band that holds it, (bands,)."""
    middle = 0.5 * (bands.lower + bands.upper)
    return np.searchsorted(np.array(base.edges), middle) - 1
