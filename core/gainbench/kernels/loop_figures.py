"""Margins and bandwidth of a sampled loop: brackets from its curve, each refined on the loop itself."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled
from gainbench.kernels.frequency import hessenberg, loop_at, workspace
from gainbench.kernels.loop_curve import trace_loop
from gainbench.kernels.loop_grid import Grid
from gainbench.kernels.loop_records import LoopNumbers, SampledPlant

SIZE = 0
"""tanh ln \\|L\\|: zero at a crossing of one."""
CLOSED = 1
"""tanh ln of sqrt(2) \\|L/(1 + L)\\|: zero at the bandwidth."""
ACROSS = 2
"""Im L/\\|L\\|: zero on the real axis."""
SENSITIVITY = 3
"""-\\|1 + L\\|^2."""

# int(np.int64(SIZE)) and the like below: numba would compile a copy of the callee for each literal.
REAL_NOISE = 1e-5
"""Im L/\\|L\\| below this at both ends of a bracket is rounding, no crossing of the axis.

Where a freely turning train makes L nearly real, far below every corner, rounding of the state matrix (up to 1e-11)
stands for a friction that is not there; it would cross the axis at no more than its square root.
"""
NARROW = 1e-14
"""Width of a bracket, as a share of the frequency, at which the search for a root ends."""


@compiled
def measure(kind: int, loop: complex) -> float:
    """One of the functions above, of L."""
    square = loop.real * loop.real + loop.imag * loop.imag
    if kind == SIZE:
        return (square - 1.0) / (square + 1.0)
    if kind == ACROSS:
        return loop.imag / math.sqrt(square) if square > 0.0 else 0.0
    distance = (1.0 + loop.real) * (1.0 + loop.real) + loop.imag * loop.imag
    if kind == CLOSED:
        return (2.0 * square - distance) / (2.0 * square + distance)
    return -distance


@compiled
def root(
    plant: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    kind: int,
    low: float,
    high: float,
    at_low: float,
    at_high: float,
    work: NDArray[np.complex128],
) -> float:
    """Frequency of a sign change within a bracket, by the Illinois rule with a halving where that stalls.

    References
    ----------
    M. Dowell, P. Jarratt, A modified regula falsi method, BIT 11, 1971 (from memory).
    """
    side = 0
    for turn in range(80):
        if high - low <= NARROW * high:
            break
        middle = low - at_low * (high - low) / (at_high - at_low)
        if turn % 4 == 3 or not low < middle < high:
            middle = 0.5 * (low + high)
        if middle in (low, high):
            break
        value = measure(kind, loop_at(plant, kp, ki_period, rule, middle, work))
        if value == 0.0:
            return middle
        if (value > 0.0) == (at_low > 0.0):
            low, at_low = middle, value
            if side == -1:
                at_high *= 0.5
            side = -1
        else:
            high, at_high = middle, value
            if side == 1:
                at_low *= 0.5
            side = 1
    return 0.5 * (low + high)


@compiled
def summit(
    plant: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    kind: int,
    sign: float,
    low: float,
    high: float,
    work: NDArray[np.complex128],
) -> tuple[float, float]:
    """Frequency and value of the largest ``sign`` times measure within a bracket, by parabolas and golden sections.

    References
    ----------
    R. P. Brent, Algorithms for Minimization without Derivatives, 1973, chapter 5 (from memory).
    """
    share = 0.5 * (3.0 - math.sqrt(5.0))
    best = low + share * (high - low)
    at_best = sign * measure(kind, loop_at(plant, kp, ki_period, rule, best, work))
    # The best places so far, and the last two steps.
    second, third, at_second, at_third = best, best, at_best, at_best
    step, before = 0.0, 0.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        least = 3e-10 * best
        if abs(best - middle) <= 2.0 * least - 0.5 * (high - low):
            break
        one, two = (best - second) * (at_best - at_third), (best - third) * (at_best - at_second)
        top, under = (best - third) * two - (best - second) * one, 2.0 * (one - two)
        if under < 0.0:
            top, under = -top, -under
        # A parabola counts within the bracket, and where it moves by less than half the step before last.
        if (
            abs(before) > least
            and abs(top) < abs(0.5 * under * before)
            and (under * (low - best) < top < under * (high - best))
        ):
            before, step = step, top / under
        else:
            before = high - best if best < middle else low - best
            step = share * before
        place = best + (step if abs(step) >= least else math.copysign(least, step))
        value = sign * measure(kind, loop_at(plant, kp, ki_period, rule, place, work))
        if value >= at_best:
            if place >= best:
                low = best
            else:
                high = best
            third, at_third, second, at_second = second, at_second, best, at_best
            best, at_best = place, value
            continue
        if place < best:
            low = place
        else:
            high = place
        if value >= at_second or second == best:
            third, at_third, second, at_second = second, at_second, place, value
        elif value >= at_third or third in (best, second):
            third, at_third = place, value
    return best, sign * at_best


@compiled
def crossings(
    plant: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    kind: int,
    w: NDArray[np.float64],
    loop: NDArray[np.complex128],
    work: NDArray[np.complex128],
) -> NDArray[np.float64]:
    """Zeros of a measure in rising order, shape (2, n): frequency, and -1 where it falls, 1 where it rises.

    Between two points of the curve, a peak that reaches through zero and back is looked for where three points
    show one that comes near.
    """
    values = np.empty(w.size)
    for k in range(w.size):
        values[k] = measure(kind, loop[k])
    # The last point, where L is real, is treated by itself on the real axis.
    size = w.size - 1 if kind == ACROSS else w.size
    out = np.empty((2, 2 * w.size))
    count = 0
    for k in range(1, size):
        before, after = values[k - 1], values[k]
        if before == 0.0 or (before < 0.0) == (after < 0.0):
            # Hidden pair: the middle of three points stands out towards zero.
            if k + 1 < size and kind != ACROSS:
                further = values[k + 1]
                sign = 1.0 if after < 0.0 else -1.0
                inner = sign * after
                reach = max(abs(after - before), abs(after - further))
                out_of = inner >= sign * before and inner >= sign * further
                if out_of and further * after > 0.0 and before * after > 0.0 and inner > -2.0 * reach:
                    place, value = summit(plant, kp, ki_period, rule, kind, sign, w[k - 1], w[k + 1], work)
                    if sign * value > 0.0:
                        way = 1.0 if sign > 0.0 else -1.0
                        out[0, count] = root(plant, kp, ki_period, rule, kind, w[k - 1], place, before, value, work)
                        out[1, count] = way
                        out[0, count + 1] = root(
                            plant, kp, ki_period, rule, kind, place, w[k + 1], value, further, work
                        )
                        out[1, count + 1] = -way
                        count += 2
            continue
        if after == 0.0 and k + 1 < size and (values[k + 1] < 0.0) == (before < 0.0):
            continue
        if kind == ACROSS and (
            (loop[k].real > 0.0 and loop[k - 1].real > 0.0) or max(abs(before), abs(after)) < REAL_NOISE
        ):
            continue
        place = w[k] if after == 0.0 else root(plant, kp, ki_period, rule, kind, w[k - 1], w[k], before, after, work)
        out[0, count] = place
        out[1, count] = 1.0 if before < 0.0 else -1.0
        count += 1
    found = np.empty((2, count))
    for k in range(count):
        found[0, k], found[1, k] = out[0, k], out[1, k]
    return found


@compiled
def first_fall(found: NDArray[np.float64]) -> float:
    """The first zero through which a measure falls; NaN if none."""
    for k in range(found.shape[1]):
        if found[1, k] < 0.0:
            return float(found[0, k])
    return math.nan


@compiled
def numbers_of(
    plant: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    w: NDArray[np.float64],
    loop: NDArray[np.complex128],
) -> LoopNumbers:
    """All figures of a stable loop from its curve; ``plant`` reduced."""
    work = workspace(plant)
    ones = crossings(plant, kp, ki_period, rule, int(np.int64(SIZE)), w, loop, work)
    phase_margin = math.nan
    delay_margin = math.nan
    for k in range(ones.shape[1]):
        point = loop_at(plant, kp, ki_period, rule, ones[0, k], work)
        above = math.atan2(-point.imag, -point.real)
        if math.isnan(phase_margin) or abs(above) < phase_margin:
            phase_margin = abs(above)
        delay = (above if above >= 0.0 else above + math.tau) / ones[0, k]
        if math.isnan(delay_margin) or delay < delay_margin:
            delay_margin = delay
    gain_margin = math.nan
    gain_reduction = math.nan
    axis = crossings(plant, kp, ki_period, rule, int(np.int64(ACROSS)), w, loop, work)
    for k in range(axis.shape[1] + 1):
        # The curve ends on the real axis, at the Nyquist frequency.
        point = loop[w.size - 1] if k == axis.shape[1] else loop_at(plant, kp, ki_period, rule, axis[0, k], work)
        if point.real >= 0.0:
            continue
        factor = -1.0 / point.real
        if factor > 1.0 and not factor >= gain_margin:
            gain_margin = factor
        if factor < 1.0 and not factor <= gain_reduction:
            gain_reduction = factor
    values = np.empty(w.size)
    best = -math.inf
    for k in range(w.size):
        values[k] = measure(int(np.int64(SENSITIVITY)), loop[k])
        best = max(best, values[k])
    nearest = best
    for k in range(1, w.size - 1):
        if values[k] >= values[k - 1] and values[k] >= values[k + 1]:
            reach = max(values[k] - values[k - 1], values[k] - values[k + 1])
            if values[k] + 2.0 * reach >= best:
                value = summit(plant, kp, ki_period, rule, int(np.int64(SENSITIVITY)), 1.0, w[k - 1], w[k + 1], work)[1]
                nearest = max(nearest, value)
    bandwidth = first_fall(crossings(plant, kp, ki_period, rule, int(np.int64(CLOSED)), w, loop, work))
    sensitivity = 1.0 / math.sqrt(-nearest) if nearest < 0.0 else math.inf
    return LoopNumbers(
        first_fall(ones), phase_margin, delay_margin, gain_margin, gain_reduction, sensitivity, bandwidth
    )


@compiled
def loop_numbers(
    plant: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    grid: Grid,
) -> tuple[tuple[float, float, float, float, float, float, float], NDArray[np.float64], NDArray[np.complex128]]:
    """Figures and curve of a loop over its grid and the points between; figures mean something for a stable one.

    The figures are those of :class:`gainbench.results.LoopFigures`, in its units and order, NaN where there is none;
    the curve is frequency in Hz and L. Plain results: numba looks up a class anew each time it gives back one.
    """
    reduced = hessenberg(plant)
    w, loop = trace_loop(reduced, kp, ki_period, rule, grid)
    found = numbers_of(reduced, kp, ki_period, rule, w, loop)
    hertz = np.empty(w.size)
    for k in range(w.size):
        hertz[k] = w[k] / math.tau
    figures = (
        found.crossover / math.tau,
        math.degrees(found.phase_margin),
        found.delay_margin,
        20.0 * math.log10(found.gain_margin),
        20.0 * math.log10(found.gain_reduction),
        found.peak_sensitivity,
        found.bandwidth / math.tau,
    )
    return figures, hertz, loop
