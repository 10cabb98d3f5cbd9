"""Where things stand in the solver: the march order of hours and the places of the unknowns.

Hours are put in march order: the record is cut into chunks of equal length (a day when it fits) and stored
hour-of-chunk first, so that one step of every chunk is one contiguous slice.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

CHUNK_STEPS: Final = 24


@dataclass(frozen=True)
class Order:
    """March order: position [step, chunk] of hour chunk * steps + step."""

    steps: int
    chunks: int

    def into(self, values: Floats) -> Floats:
        """Bring hour order (..., N) into march order."""
        shape = values.shape[:-1]
        cut = values.reshape(*shape, self.chunks, self.steps).swapaxes(-1, -2)
        return np.ascontiguousarray(cut).reshape(*shape, self.steps * self.chunks)

    def back(self, values: Floats) -> Floats:
        """Bring march order (..., N) back into hour order."""
        shape = values.shape[:-1]
        cut = values.reshape(*shape, self.steps, self.chunks).swapaxes(-1, -2)
        return np.ascontiguousarray(cut).reshape(*shape, self.steps * self.chunks)

    def before(self, values: Floats) -> Floats:
        """Value of the hour before, in march order (..., N); the first hour gets the record's last."""
        shape = values.shape
        cut = values.reshape(*shape[:-1], self.steps, self.chunks)
        out = np.empty_like(cut)
        out[..., 1:, :] = cut[..., :-1, :]
        out[..., 0, 1:] = cut[..., -1, :-1]
        out[..., 0, 0] = cut[..., -1, -1]
        return out.reshape(shape)


def march_order(hours: int) -> Order:
    """Chunks of a day where the record is whole days, else of the largest length that fits."""
    steps = next(c for c in range(min(CHUNK_STEPS, hours), 0, -1) if hours % c == 0)
    return Order(steps, hours // steps)


@dataclass(frozen=True)
class Index:
    """Where each unknown stands; spaces are counted from the floor up, 0 is the house air."""

    layers: int
    screens: int

    def vapour(self, space: int) -> int:
        """Vapour pressure of a space."""
        return self.air0_vapour if space == 0 else space - 1

    def air(self, space: int) -> int:
        """Air temperature of a space."""
        return self.house_air if space == 0 else self.screens + space - 1

    def cover(self, layer: int) -> int:
        """Covering layer, outermost first."""
        return 2 * self.screens + layer

    def screen(self, number: int) -> int:
        """Screen, outermost first."""
        return 2 * self.screens + self.layers + number

    @property
    def floor(self) -> int:
        """Floor surface."""
        return 3 * self.screens + self.layers

    @property
    def leaf(self) -> int:
        """Leaves."""
        return self.floor + 1

    @property
    def air0_vapour(self) -> int:
        """Vapour of the house air."""
        return self.floor + 2

    @property
    def house_air(self) -> int:
        """House air temperature."""
        return self.floor + 3

    @property
    def pipe(self) -> int:
        """Pipe water."""
        return self.floor + 4

    @property
    def vent(self) -> int:
        """Opening: first the screen gap (0 ... gap), then the vents (gap ... gap + 1)."""
        return self.floor + 5

    @property
    def size(self) -> int:
        """Number of unknowns."""
        return self.floor + 6

    @property
    def surfaces(self) -> list[int]:
        """Unknowns that exchange long-wave, in the order of `Exchange`."""
        covers = [self.cover(k) for k in range(self.layers)]
        return [*covers, *(self.screen(k) for k in range(self.screens)), self.leaf, self.floor, self.pipe]

    @property
    def stores(self) -> list[int]:
        """Unknowns with a memory."""
        covers = [self.cover(k) for k in range(self.layers)]
        screens = [self.screen(k) for k in range(self.screens)]
        return [*covers, *screens, self.leaf, self.air0_vapour, self.house_air, self.pipe]


def order_index(order: Order) -> NDArray[np.int64]:
    """Hour numbers in march order."""
    return np.arange(order.steps * order.chunks).reshape(order.chunks, order.steps).T.ravel()
