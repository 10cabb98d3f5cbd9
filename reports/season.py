"""A season that runs over the new year, put in the order in which it is lived: autumn before spring."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from canopy.run import Run

Floats = NDArray[np.float64]
YEAR = np.timedelta64(365, "D")  # the nominal year of a record has no 29 February


def season_start(run: Run) -> int | None:
    """Return the row of `Run.days` on which a season begins that wraps round one nominal year, else None."""
    gaps = np.flatnonzero(np.diff(run.days.astype(np.int64)) != 1)
    first, last = str(run.days[0]), str(run.days[-1])
    wraps = first[5:] == "01-01" and last[5:] == "12-31" and first[:4] == last[:4]
    return int(gaps[0]) + 1 if len(gaps) == 1 and wraps else None


def in_order(run: Run) -> Run:
    """Return the run with a season that wraps round the year turned, its autumn dated a year earlier.

    Any other run comes back as it is. For reading only: the tables keep the order of the record.
    """
    day = season_start(run)
    if day is None:
        return run
    start = run.days[day]
    hour = int(np.searchsorted(run.time, start.astype(run.time.dtype)))
    month = run.months.index(str(start.astype("datetime64[M]")))

    def turned(table: Mapping[str, Floats], at: int) -> dict[str, Floats]:
        return {name: np.roll(values, -at) for name, values in table.items()}

    candidates = tuple(
        replace(
            one,
            hourly=turned(one.hourly, hour),
            daily=turned(one.daily, day),
            monthly=turned(one.monthly, month),
        )
        for one in run.candidates
    )
    months = [str(np.datetime64(m, "M") - np.timedelta64(12, "M")) for m in run.months[month:]]
    return replace(
        run,
        hours=np.roll(run.hours, -hour),
        time=np.r_[run.time[hour:] - YEAR, run.time[:hour]],
        days=np.r_[run.days[day:] - YEAR, run.days[:day]],
        months=(*months, *run.months[:month]),
        candidates=candidates,
    )
