"""The linear algebra of the hourly balance: rows with slopes for all hours at once, and their elimination.

A `System` collects residuals r and A = -dr/du for n unknowns, every entry an array over hours. Entries that
are structurally zero stay None and cost nothing. `eliminate` solves A d = r + B h + g for several right-hand
sides by Gauss elimination without pivoting on the first n-3 unknowns (conductance rows, safely dominant) and
with Cramer's rule on the last three (air, pipe and vent, whose rows change with the regime).
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Final

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Entry = NDArray[np.float64] | None
Reach = tuple[Floats, Floats]
Slopes = Iterable[tuple[int, Floats]]

REGIME_ROWS: Final = 3


class System:
    """Residuals and slopes of `size` rows over `columns` columns (auxiliary ones behind the unknowns)."""

    def __init__(self, size: int, columns: int, hours: int) -> None:
        """Start with no flow anywhere."""
        self.size = size
        self.hours = hours
        self.shape = (hours,)
        self.residual: list[Floats] = [np.zeros(hours) for _ in range(size)]
        self.slope: list[list[Entry]] = [[None] * columns for _ in range(size)]
        self.flows: dict[str, Floats] = {}

    def add_slope(self, row: int, column: int, value: Floats) -> None:
        """Add to A[row][column]."""
        entry = self.slope[row][column]
        if entry is None:
            full = value.shape == self.shape
            self.slope[row][column] = value.copy() if full else np.full(self.hours, value)
        else:
            entry += value

    def take_slope(self, row: int, column: int, value: Floats) -> None:
        """Subtract from A[row][column]."""
        entry = self.slope[row][column]
        if entry is None:
            self.slope[row][column] = -value if value.shape == self.shape else np.full(self.hours, -value)
        else:
            entry -= value

    def flow(
        self, value: Floats, source: int | None, sink: int | None, slopes: Slopes, name: str = ""
    ) -> None:
        """A flux from one row to another (None: outside the system), with its slopes."""
        if source is not None:
            self.residual[source] -= value
        if sink is not None:
            self.residual[sink] += value
        for column, slope in slopes:
            if source is not None:
                self.add_slope(source, column, slope)
            if sink is not None:
                self.take_slope(sink, column, slope)
        if name:
            old = self.flows.get(name)
            self.flows[name] = value + 0.0 if old is None else old + value

    def chain(self, column: int, slopes: list[tuple[int, Floats]]) -> None:
        """Replace an auxiliary column by what it depends on."""
        for row in range(self.size):
            entry = self.slope[row][column]
            if entry is None:
                continue
            for target, slope in slopes:
                self.add_slope(row, target, entry * slope)
            self.slope[row][column] = None


def _reduce(a: list[list[Entry]], b: list[list[Entry]], n: int, tmp: Floats) -> None:
    """Forward elimination of the first n - REGIME_ROWS unknowns, in place."""
    size = len(a)
    for k in range(n - REGIME_ROWS):
        pivot = a[k][k]
        if pivot is None:
            raise ValueError(f"unknown {k} has no equation of its own")
        inverse = 1.0 / pivot
        a[k][k] = inverse
        live = [j for j in range(k + 1, n) if a[k][j] is not None]
        live_b = [j for j, entry in enumerate(b[k]) if entry is not None]
        for i in range(k + 1, size):
            lower = a[i][k]
            if lower is None:
                continue
            lower *= inverse
            _subtract(a[i], a[k], live, lower, tmp)
            _subtract(b[i], b[k], live_b, lower, tmp)


def _subtract(row: list[Entry], pivot_row: list[Entry], live: list[int], factor: Floats, tmp: Floats) -> None:
    for j in live:
        entry = row[j]
        np.multiply(factor, pivot_row[j], out=tmp)  # type: ignore[arg-type]
        if entry is None:
            row[j] = -tmp
        else:
            entry -= tmp


def _cramer(a: list[list[Entry]], b: list[list[Entry]], reach: Reach, hours: int) -> None:
    """Solve the last three rows for every right-hand side, in place in b.

    Where the first right-hand side moves the last unknown out of `reach`, that unknown takes its
    limit and the two rows before it are solved for the rest.
    """
    n = len(a)
    zero = np.zeros(hours)

    def at(i: int, j: int) -> Floats:
        return _or(a[n - 3 + i][n - 3 + j], zero)

    p, q, r, s, t, u, v, w, x = (at(i, j) for i in range(3) for j in range(3))
    cofactor = [
        [t * x - u * w, r * w - q * x, q * u - r * t],
        [u * v - s * x, p * x - r * v, r * s - p * u],
        [s * w - t * v, q * v - p * w, p * t - q * s],
    ]
    inverse = 1.0 / (p * cofactor[0][0] + q * cofactor[1][0] + r * cofactor[2][0])
    moved = sum((c * e for c, e in _pairs(cofactor[2], b, 0)), zero) * inverse
    low, high = reach
    held = np.clip(moved, low, high)
    stopped = ~(held == moved)
    some = bool(stopped.any())
    small = 1.0 / (p * t - q * s) if some else zero
    for column in range(len(b[0])):
        if all(b[i][column] is None for i in range(n - 3, n)):
            continue
        fresh = [sum((c * e for c, e in _pairs(row, b, column)), zero) * inverse for row in cofactor]
        if some:
            last = held if column == 0 else zero
            top, mid = (_or(b[n - 3 + k][column], zero) - c * last for k, c in ((0, r), (1, u)))
            other = [(t * top - q * mid) * small, (p * mid - s * top) * small, last]
            fresh = [np.where(stopped, one, two) for one, two in zip(other, fresh, strict=True)]
        for k in range(3):
            b[n - 3 + k][column] = fresh[k]


def _or(entry: Entry, zero: Floats) -> Floats:
    return zero if entry is None else entry


def _pairs(row: list[Floats], b: list[list[Entry]], column: int) -> list[tuple[Floats, Floats]]:
    """Coefficients with the right-hand entries of the last three rows that are not zero."""
    entries = [line[column] for line in b[-3:]]
    return [(c, e) for c, e in zip(row, entries, strict=True) if e is not None]


def eliminate(a: list[list[Entry]], b: list[list[Entry]], reach: Reach, hours: int) -> list[list[Entry]]:
    """Solve A x = b for every column of b; both are overwritten. Returns b, now holding the solutions.

    `reach`: lowest and highest move of the last unknown (the opening) in the first column.
    """
    n = len(a)
    tmp = np.empty(hours)
    _reduce(a, b, n, tmp)
    _cramer(a, b, reach, hours)
    for k in range(n - REGIME_ROWS - 1, -1, -1):
        row = b[k]
        for j in range(k + 1, n):
            upper = a[k][j]
            if upper is None:
                continue
            live = [c for c, entry in enumerate(b[j]) if entry is not None]
            _subtract(row, b[j], live, upper, tmp)
        for entry in row:
            if entry is not None:
                entry *= a[k][k]  # type: ignore[arg-type]
    return b
