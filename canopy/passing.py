"""What every roof shape hands back for one covering state, and the sheet tables it is given."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from canopy.sheettable import SheetTable

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Sheets:
    """Covering of roof, side walls and gable ends."""

    roof: SheetTable
    wall: SheetTable
    gable: SheetTable

    @property
    def hazy(self) -> bool:
        """Whether any of them scatters."""
        return self.roof.hazy or self.wall.hazy or self.gable.hazy


@dataclass(frozen=True)
class Passed:
    """Per unit of beam on the horizontal outside, (B, M); absorbed (L, B, M)."""

    beam: Floats  # arrives unscattered
    straight: Floats  # arrives without a bounce, scattered light included
    bounce: Floats  # arrives after one mirror bounce
    absorbed: Floats
