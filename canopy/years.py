"""Several weather years of one study: every candidate in each, then their spread and return levels."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from canopy.returns import ManyYears, YearLoad, combine, year_load
from weather.record import Weather

Floats = NDArray[np.float64]
HeatOf = Callable[[Weather], Sequence[Floats]]


def yearly_loads(weather: Weather, heats: Sequence[Floats]) -> tuple[YearLoad, ...]:
    """Return one year's load per candidate; `heats` (N,) W/m2 floor each, over the whole record."""
    return tuple(year_load(weather.time, heat, weather.temp_air, weather.step_s) for heat in heats)


def spread(
    records: Sequence[Weather], heat_of: HeatOf, say: Callable[[str], None] | None = None
) -> tuple[ManyYears | None, ...]:
    """Compute every record and return the spread per candidate; None for fewer than two real years.

    `heat_of` gives the heat delivered, W/m2 floor, of every candidate in one record. Typical and clear-sky
    records are no years and are left out: their extremes are removed.
    """
    real = [record for record in records if not record.typical and not record.clear_sky]
    if len(real) < 2:
        return ()
    rows: list[tuple[YearLoad, ...]] = []
    for at, record in enumerate(real, start=1):
        if say is not None:
            say(f"weather year {at} of {len(real)}: {record.title}")
        rows.append(yearly_loads(record, heat_of(record)))
    return tuple(combine([row[k] for row in rows]) for k in range(len(rows[0])))


def middle_year(records: Sequence[Weather]) -> int:
    """Return which record to report hour by hour: the one whose mean outside air is in the middle.

    With an even number, the colder of the two in the middle.
    """
    order = np.argsort([float(record.temp_air.mean()) for record in records], kind="stable")
    return int(order[(len(order) - 1) // 2])
