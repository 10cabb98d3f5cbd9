"""Heat store against boiler: the smallest boiler that holds with a store of a given volume, solved exactly.

Hour by hour the store obeys s[t+1] = a s[t] + p[t] - q[t] with 0 <= s <= V, 0 <= p <= b, a = 1 - standing
loss; the year closes on itself. A fuller store never hurts, so the best plan keeps it as full as the boiler
can, and a plan exists if and only if no window of hours asks for more than a store that was full at its start
plus the boiler can give:

    b >= (sum_k a^(j-k) q[k] - a^(j-i+1) V) / sum_k a^(j-k)      for every window i..j,

and b at least the largest discounted mean of an endless window (no store lasts for ever). The largest of
these ratios is the answer. It is found by Newton's method on the fractional programme (Dinkelbach 1967,
Management Science 13:492), which ends at the exact window after a few passes over the year.

Perfect foresight: the boiler knows every coming hour. Real operation needs a reserve on top.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from weather.constants import CP_WATER

Floats = NDArray[np.float64]

WATER_DENSITY: Final = 983.2  # kg/m3 at 60 degC, steam tables
J_PER_KWH: Final = 3.6e6
S_PER_H: Final = 3600.0
VOLUMES_M3: Final = (0.0, 25.0, 50.0, 100.0, 150.0, 200.0)
"""m3 per 1000 m2 floor; 100-200 is common practice beside CO2 supply or combined heat and power."""

SPREAD_K: Final = 40.0  # common practice: 90 to 50 degC with pipe heating
STANDING_LOSS_PER_H: Final = 0.0004  # about 1 % a day for a large insulated tank: common practice
RESERVE_PCT: Final = 10.0  # on top of perfect foresight: common practice
_BLOCK_EXPONENT: Final = 30.0  # a**-n stays below e**30 within one block
_TOLERANCE: Final = 1e-9  # W/m2


@dataclass(frozen=True)
class StoreSizes:
    """Store volumes and the smallest boiler for each, per m2 of floor. Perfect foresight; reserve on top."""

    volume_m3: Floats  # (V,) per 1000 m2 floor
    capacity_kwh_m2: Floats  # (V,) usable heat
    boiler_w_m2: Floats  # (V,) exact smallest boiler
    with_reserve_w_m2: Floats  # (V,) with the operating reserve
    spread_k: float
    standing_loss_per_h: float
    reserve_pct: float


def capacity(volume_m3: float | Floats, spread_k: float) -> Floats:
    """Return usable heat, kWh per m2 floor, of m3 per 1000 m2 floor with a temperature spread in K."""
    per_m3 = WATER_DENSITY * CP_WATER * spread_k / J_PER_KWH
    return np.asarray(volume_m3, float) / 1000.0 * per_m3


def smallest_boiler(load: Floats, capacity_wh_m2: float, loss_per_h: float, step_s: float = S_PER_H) -> float:
    """Return the smallest boiler, W/m2 floor, that serves a year's load with a store; exact.

    `load` (N,) W/m2 floor, steps of `step_s`; `capacity_wh_m2` usable store, Wh/m2; `loss_per_h` share of the
    content lost per hour (0 <= loss < 1). The record is taken to repeat.
    """
    step_h = step_s / S_PER_H
    keep = (1.0 - loss_per_h) ** step_h
    q = np.asarray(load, float)
    if not len(q) or float(q.max()) <= 0.0:
        return 0.0
    full = capacity_wh_m2 / step_h  # in units of W/m2 x one step
    boiler = _endless(q, keep)
    laps = np.concatenate((q, q))
    for _ in range(200):
        excess, length = _worst_window(laps - boiler, full, keep)
        if excess <= _TOLERANCE:
            break
        boiler += excess / _geometric(keep, length)
    return boiler


def _geometric(keep: float, length: int) -> float:
    return float(length) if keep == 1.0 else float((1.0 - keep**length) / (1.0 - keep))


def _endless(q: Floats, keep: float) -> float:
    """Return the largest discounted mean load over endless windows of a repeating record."""
    if keep == 1.0:
        return float(q.mean())
    once = _fading_sum(q, keep)
    start = once[-1] / (1.0 - keep ** len(q))  # content carried round the year
    settled = once + start * keep ** np.arange(1, len(q) + 1)
    return float(settled.max() * (1.0 - keep))


def _fading_sum(q: Floats, keep: float) -> Floats:
    """Return y[t] = keep y[t - 1] + q[t], from an empty store; blocks keep the powers small."""
    block = max(1, min(len(q), int(_BLOCK_EXPONENT / -np.log(keep))))
    power = keep ** np.arange(1, block + 1)
    out = np.empty(len(q))
    carry = 0.0
    for first in range(0, len(q), block):
        part = q[first : first + block]
        faded = power[: len(part)]
        out[first : first + block] = faded * (carry + np.cumsum(part / faded))
        carry = float(out[first + len(part) - 1])
    return out


def _worst_window(net: Floats, full: float, keep: float) -> tuple[float, int]:
    """Return the largest shortfall over all windows and that window's length in steps.

    Shortfall of i..j: sum_k keep^(j-k) net[k] - keep^(j-i+1) full. Scaled by keep^-j it is a difference of
    two running sums, so the best start for every end is a running maximum; blocks keep the powers small.
    """
    n = len(net)
    block = n if keep == 1.0 else max(1, min(n, int(_BLOCK_EXPONENT / -np.log(keep))))
    best, best_length = -np.inf, 1
    carry, carry_start = -full, 0  # shortfall just before the block, floored at a full store
    for first in range(0, n, block):
        part = net[first : first + block]
        power = keep ** np.arange(len(part) + 1)  # keep^0 ... keep^m
        running = np.concatenate(([0.0], np.cumsum(part / power[1:])))  # Z[m] = sum_k keep^-k net[k]
        # a window that starts after m steps of the block begins at a full store: -full = power[m] * level[m]
        level = -running - full / power
        level[0] = carry
        highest = np.maximum.accumulate(level[:-1])
        short = power[1:] * (running[1:] + highest)
        at = int(np.argmax(short))
        if short[at] > best:
            start = int(np.flatnonzero(level[: at + 1] == highest[at])[-1])
            best = float(short[at])
            best_length = at - start + 1 if start > 0 else first + at + 1 - carry_start
        last = int(np.flatnonzero(level[:-1] == highest[-1])[-1])
        if short[-1] > -full:
            carry, carry_start = float(short[-1]), (first + last if last > 0 else carry_start)
        else:
            carry, carry_start = -full, first + len(part)
    return best, best_length


def store_sizes(
    load: Floats,
    step_s: float = S_PER_H,
    volumes_m3: tuple[float, ...] = VOLUMES_M3,
    spread_k: float = SPREAD_K,
    loss_per_h: float = STANDING_LOSS_PER_H,
    reserve_pct: float = RESERVE_PCT,
) -> StoreSizes:
    """Return the smallest boiler for each store volume (m3 per 1000 m2 floor)."""
    heat = capacity(np.asarray(volumes_m3, float), spread_k)
    boiler = np.array([smallest_boiler(load, float(c) * 1000.0, loss_per_h, step_s) for c in heat])
    return StoreSizes(
        volume_m3=np.asarray(volumes_m3, float),
        capacity_kwh_m2=heat,
        boiler_w_m2=boiler,
        with_reserve_w_m2=boiler * (1.0 + reserve_pct / 100.0),
        spread_k=spread_k,
        standing_loss_per_h=loss_per_h,
        reserve_pct=reserve_pct,
    )
