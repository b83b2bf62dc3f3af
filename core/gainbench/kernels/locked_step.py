"""The current loop's reference step with the rotor locked: the true current between ticks too, no clamp.

The locked machine is a resistance and an inductance, so that the current within a stretch of constant voltage is one
exponential: levels are met in closed form, and the largest current stands at the end of a stretch.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled
from gainbench.kernels.lifting import FORWARD, TRAPEZOID

LONGEST = 400_000
"""Ticks after which a step that still moves is taken as it is."""
STILL = 1e-10
"""Change per tick of current and voltage, over their final size, below which the step has settled."""
STILL_TICKS = 8
RUNAWAY = 1e9
POINTS = 480
"""Of the drawn curve, about."""
NEAR = 3e-3
"""Distance from the end value, as a share of it, that is no longer worth drawing."""


class LockedPi(NamedTuple):
    """The current PI."""

    kp: float
    ki_period: float
    rule: int


class Winding(NamedTuple):
    """The locked machine and the sampler's filter, exactly over both parts of a tick: exp - I and input columns."""

    resistance: float
    """[ohm]."""
    lag: float
    """L/R [s]."""
    filtered: bool
    early: NDArray[np.float64]
    """Over the first part of a tick, states current and filtered current, shape (2, 2)."""
    early_in: NDArray[np.float64]
    """shape (2,)."""
    late: NDArray[np.float64]
    """Over the rest, shape (2, 2)."""
    late_in: NDArray[np.float64]
    """shape (2,)."""


class StepTimes(NamedTuple):
    """What the step showed, for a reference of one; NaN where it did not get there."""

    at_low: float
    """When 10 % was met [s]."""
    at_high: float
    """When 90 % was met [s]."""
    largest: float
    ticks: int
    """Until the current stayed near its end value."""


@compiled
def next_voltage(pi: LockedPi, error: float, previous: float, integral: float) -> tuple[float, float]:
    """The PI's output and its integral afterwards, without a clamp."""
    if pi.rule == TRAPEZOID:
        after = integral + 0.5 * pi.ki_period * (error + previous)
    else:
        after = integral + pi.ki_period * error
    return pi.kp * error + (integral if pi.rule == FORWARD else after), after


@compiled
def met(start: float, rest: float, level: float, time: float) -> float:
    """When an exponential from ``start`` towards ``rest`` meets a level, with the time constant ``time``."""
    return -time * math.log1p((level - start) / (start - rest))


@compiled
def run_step(
    winding: Winding,
    period: float,
    held: int,
    part: float,
    pi: LockedPi,
    ticks: int,
    curve: NDArray[np.float64],
    per_tick: int,
) -> StepTimes:
    """Run the step; ``curve`` takes the current ``per_tick`` times a tick, for as long as it is."""
    resistance, tau = winding.resistance, winding.lag
    early, early_in = winding.early, winding.early_in
    late, late_in = winding.late, winding.late_in
    current, filtered = 0.0, 0.0
    integral, previous = 0.0, 0.0
    under_way = np.zeros(4)
    end = 1.0 if pi.ki_period > 0.0 else pi.kp / (pi.kp + resistance)
    at_low, at_high, largest = math.nan, math.nan, 0.0
    still, outside = 0, 0
    ended = ticks
    size = 1e-300
    for k in range(ticks):
        sample = filtered if winding.filtered else current
        error = 1.0 - sample
        voltage, integral = next_voltage(pi, error, previous, integral)
        previous = error
        change = abs(voltage - under_way[0]) if k > 0 else 1.0 + abs(voltage)
        for j in range(3, 0, -1):
            under_way[j] = under_way[j - 1]
        under_way[0] = voltage
        first = current
        for stretch in range(2):
            width = part * period if stretch == 0 else (1.0 - part) * period
            if width == 0.0:
                continue
            applied = under_way[held + 1] if stretch == 0 else under_way[held]
            begin = k * period + (0.0 if stretch == 0 else part * period)
            rest = applied / resistance
            if stretch == 0:
                after = current + early[0, 0] * current + early_in[0] * applied
                filtered += early[1, 0] * current + early[1, 1] * filtered + early_in[1] * applied
            else:
                after = current + late[0, 0] * current + late_in[0] * applied
                filtered += late[1, 0] * current + late[1, 1] * filtered + late_in[1] * applied
            if math.isnan(at_low) and after >= 0.1:
                at_low = begin + met(current, rest, 0.1, tau)
            if math.isnan(at_high) and after >= 0.9:
                at_high = begin + met(current, rest, 0.9, tau)
            if per_tick > 0:
                # Points of this stretch, at even parts of the tick.
                for j in range(per_tick):
                    place = k * per_tick + j + 1
                    moment = (j + 1.0) / per_tick * period
                    low = 0.0 if stretch == 0 else part * period
                    if place < curve.size and low < moment + 1e-12 * period and moment <= low + width * (1.0 + 1e-9):
                        curve[place] = rest + (current - rest) * math.exp(-(moment - low) / tau)
            current = after
            largest = max(largest, current)
        size = max(size, abs(voltage))
        if abs(current) > RUNAWAY:
            return StepTimes(math.nan, math.nan, math.nan, k)
        if abs(current - end) > NEAR * end:
            outside = k + 1
        if abs(current - first) < STILL and change < STILL * size:
            still += 1
            if still >= STILL_TICKS:
                ended = k + 1
                break
        else:
            still = 0
    return StepTimes(at_low, at_high, largest, min(outside, ended))


@compiled
def locked_step(
    winding: Winding,
    period: float,
    held: int,
    part: float,
    pi: LockedPi,
) -> tuple[StepTimes, NDArray[np.float64], int]:
    """The step until it settles, its curve from the first to where it hardly moves, and points per tick."""
    # np.int64: numba would compile a copy of the callee for each literal.
    times = run_step(winding, period, held, part, pi, int(np.int64(LONGEST)), np.empty(0), int(np.int64(0)))
    shown = min(max(times.ticks + times.ticks // 4, 12), LONGEST)
    per_tick = max(1, min(16, POINTS // shown))
    # The first point is the start, at rest.
    curve = np.zeros(shown * per_tick + 1)
    run_step(winding, period, held, part, pi, shown, curve, per_tick)
    return times, curve, per_tick
