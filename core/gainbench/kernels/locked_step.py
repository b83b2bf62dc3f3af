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
from gainbench.kernels.lifting import FORWARD, TRAPEZOID, held_step

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
    """The locked machine and the sampler's filter."""

    resistance: float
    """[ohm]."""
    inductance: float
    """[H]."""
    filter_time: float
    """[s]; 0 is none."""


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
    steps: NDArray[np.float64],
    inputs: NDArray[np.float64],
    period: float,
    held: int,
    part: float,
    pi: LockedPi,
    ticks: int,
    curve: NDArray[np.float64],
    per_tick: int,
) -> StepTimes:
    """Run the step; ``curve`` takes the current ``per_tick`` times a tick, for as long as it is.

    ``steps``, shape (2, 2, 2), and ``inputs``, shape (2, 2), are the winding exactly over both parts of a tick: exp - I
    and what a volt adds, states current and filtered current.
    """
    resistance, tau = winding.resistance, winding.inductance / winding.resistance
    sampled_late = winding.filter_time > 0.0
    # What the exponential is at the points of each stretch, at even parts of the tick; NaN outside the stretch.
    decay = np.full((2, per_tick), math.nan)
    for stretch in range(2):
        low = 0.0 if stretch == 0 else part * period
        width = part * period if stretch == 0 else (1.0 - part) * period
        for j in range(per_tick):
            moment = (j + 1.0) / per_tick * period
            if low < moment + 1e-12 * period and moment <= low + width * (1.0 + 1e-9):
                decay[stretch, j] = math.exp(-(moment - low) / tau)
    current, filtered = 0.0, 0.0
    integral, previous = 0.0, 0.0
    under_way = np.zeros(4)
    end = 1.0 if pi.ki_period > 0.0 else pi.kp / (pi.kp + resistance)
    at_low, at_high, largest = math.nan, math.nan, 0.0
    still, outside = 0, 0
    ended = ticks
    size = 1e-300
    for k in range(ticks):
        sample = filtered if sampled_late else current
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
            after = current + steps[stretch, 0, 0] * current + inputs[stretch, 0] * applied
            filtered += steps[stretch, 1, 0] * current + steps[stretch, 1, 1] * filtered + inputs[stretch, 1] * applied
            if math.isnan(at_low) and after >= 0.1:
                at_low = begin + met(current, rest, 0.1, tau)
            if math.isnan(at_high) and after >= 0.9:
                at_high = begin + met(current, rest, 0.9, tau)
            for j in range(per_tick):
                place = k * per_tick + j + 1
                if place < curve.size and not math.isnan(decay[stretch, j]):
                    curve[place] = rest + (current - rest) * decay[stretch, j]
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
) -> tuple[float, float, NDArray[np.float64], NDArray[np.float64]]:
    """The step until it settles: time from 10 to 90 %, the largest current, and its curve to where it hardly moves.

    The curve is instants and current; what the step does not get to is NaN.
    """
    a, column = np.zeros((2, 2)), np.zeros(2)
    a[0, 0] = -winding.resistance / winding.inductance
    if winding.filter_time > 0.0:
        a[1, 0], a[1, 1] = 1.0 / winding.filter_time, -1.0 / winding.filter_time
    column[0] = 1.0 / winding.inductance
    steps, inputs = np.empty((2, 2, 2)), np.empty((2, 2))
    for stretch in range(2):
        over, gained = held_step(a, column, (part if stretch == 0 else 1.0 - part) * period)
        for r in range(2):
            steps[stretch, r, 0], steps[stretch, r, 1] = over[r, 0], over[r, 1]
            inputs[stretch, r] = gained[r]
    # First until it settles, then once more for what is drawn: the first point is the start, at rest.
    ticks, per_tick, curve = LONGEST, 0, np.zeros(0)
    times = StepTimes(math.nan, math.nan, math.nan, 0)
    for turn in range(2):
        found = run_step(winding, steps, inputs, period, held, part, pi, ticks, curve, per_tick)
        if turn == 0:
            times = found
            ticks = min(max(times.ticks + times.ticks // 4, 12), LONGEST)
            per_tick = max(1, min(16, POINTS // ticks))
            curve = np.zeros(ticks * per_tick + 1)
    time, step = np.empty(curve.size), period / per_tick
    for k in range(curve.size):
        time[k] = k * step
    return times.at_high - times.at_low, times.largest, time, curve
