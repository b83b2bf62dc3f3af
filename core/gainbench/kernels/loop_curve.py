"""The open loop over frequency, on a grid that follows it: dense where it turns or steps, sparse where it does not."""

from __future__ import annotations

import math

import numpy as np
from numba import njit
from numpy.typing import NDArray

from gainbench.kernels.frequency import hessenberg, pi_at, plant_at, workspace
from gainbench.kernels.loop_records import SampledPlant

POINTS = 400
"""Frequencies of the even part of the grid."""
DECADES = 4.0
"""Span of the even part below the Nyquist frequency."""
TAIL = 40
"""Frequencies of the sparse part below it."""
TAIL_DECADES = 6.0
LAST_GAP = 1e-6
"""Share of the Nyquist frequency that the last but one point stays below it: L is real at the last."""
TURN = 0.3
"""Tangent of the largest phase step between neighbours."""
RISE = 1.5
"""Largest ratio of sizes between neighbours."""
FAINT = 0.05
"""Where both neighbours are smaller the loop decides nothing, and steps are left."""
LOUD = 20.0
"""Where both are larger, a step of the size alone is left."""
HALVINGS = 14


@njit(cache=True, nogil=True, error_model="numpy")
def grid(period: float, window: int, peaks: NDArray[np.float64], spreads: NDArray[np.float64]) -> NDArray[np.float64]:
    """Frequencies [rad/s], rising, from far below to the Nyquist frequency.

    Around each of ``peaks`` [rad/s], folded below the Nyquist frequency, points stand at distances that grow from
    its half width ``spreads``; a speed window of many periods adds points between the zeros of its response.
    """
    nyquist = math.pi / period
    low = nyquist * 10.0**-DECADES
    lobes = 6 * window if window > 8 else 0
    around = 15
    out = np.empty(TAIL + POINTS + lobes + peaks.size * around)
    count = 0
    for k in range(TAIL):
        out[count] = low * 10.0 ** (-TAIL_DECADES * (TAIL - k) / TAIL)
        count += 1
    for k in range(POINTS - 1):
        out[count] = low * 10.0 ** (DECADES * k / (POINTS - 1))
        count += 1
    out[count - 1] = min(out[count - 1], nyquist * (1.0 - LAST_GAP))
    for k in range(lobes):
        out[count] = nyquist * (k + 0.5) / lobes
        count += 1
    for k in range(peaks.size):
        centre = peaks[k] % (2.0 * nyquist)
        if centre > nyquist:
            centre = 2.0 * nyquist - centre
        width = max(spreads[k], 1e-7 * nyquist)
        for j in range(around):
            offset = 0.0 if j == 7 else width * 0.35 * 3.0 ** (abs(j - 7) - 1) * (1.0 if j > 7 else -1.0)
            if low < centre + offset < nyquist:
                out[count] = centre + offset
                count += 1
    rising = np.sort(out[:count])
    out[count] = nyquist
    out[:count] = rising
    # One point stands just below the last, and no two stand together.
    kept = 0
    for k in range(count):
        if out[k] < nyquist * (1.0 - 0.5 * LAST_GAP) and (kept == 0 or out[k] > out[kept - 1] * (1.0 + 1e-9)):
            out[kept] = out[k]
            kept += 1
    gap = nyquist * (1.0 - LAST_GAP)
    if out[kept - 1] < gap:
        final = np.empty(kept + 2)
        final[kept] = gap
    else:
        final = np.empty(kept + 1)
    final[:kept] = out[:kept]
    final[-1] = nyquist
    return final


@njit(cache=True, nogil=True, error_model="numpy")
def far(first: complex, second: complex) -> bool:
    """Whether the loop turns or steps too much between two frequencies."""
    one = first.real * first.real + first.imag * first.imag
    two = second.real * second.real + second.imag * second.imag
    if max(one, two) < FAINT * FAINT:
        return False
    along = first.real * second.real + first.imag * second.imag
    across = abs(first.real * second.imag - first.imag * second.real)
    if along <= 0.0 or across > TURN * along:
        return True
    low, high = min(one, two), max(one, two)
    return low < LOUD * LOUD and high > RISE * RISE * low


@njit(cache=True, nogil=True, error_model="numpy")
def trace_loop(
    plant: SampledPlant, kp: float, ki_period: float, rule: int, w: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.complex128]]:
    """The open loop on the grid, with points put in where neighbours are far apart.

    ``plant`` as :func:`gainbench.kernels.frequency.hessenberg` leaves it.
    """
    work = workspace(plant)
    period = plant.period
    room = 4 * w.size
    frequency = np.empty(room)
    loop = np.empty(room, dtype=np.complex128)
    # A stack of points that wait on the right, nearest on top.
    waiting_w = np.empty(HALVINGS + 2)
    waiting_l = np.empty(HALVINGS + 2, dtype=np.complex128)
    depth = np.empty(HALVINGS + 2, dtype=np.int64)
    frequency[0] = w[0]
    loop[0] = plant_at(plant, w[0], work) * pi_at(kp, ki_period, rule, w[0], period)
    count = 1
    for k in range(1, w.size):
        waiting_w[0] = w[k]
        waiting_l[0] = plant_at(plant, w[k], work) * pi_at(kp, ki_period, rule, w[k], period)
        depth[0] = 0
        top = 0
        while top >= 0:
            left = frequency[count - 1]
            spare = room - count - (w.size - k) - top
            if depth[top] < HALVINGS and spare > 2 and far(loop[count - 1], waiting_l[top]):
                middle = math.sqrt(left * waiting_w[top])
                depth[top] += 1
                depth[top + 1] = depth[top]
                waiting_w[top + 1] = middle
                waiting_l[top + 1] = plant_at(plant, middle, work) * pi_at(kp, ki_period, rule, middle, period)
                top += 1
            else:
                frequency[count] = waiting_w[top]
                loop[count] = waiting_l[top]
                count += 1
                top -= 1
    return frequency[:count].copy(), loop[:count].copy()


@njit(cache=True, nogil=True, error_model="numpy")
def loop_curve(
    plant: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    peaks: NDArray[np.float64],
    spreads: NDArray[np.float64],
) -> tuple[SampledPlant, NDArray[np.float64], NDArray[np.complex128]]:
    """The reduced plant, and its open loop over a grid of its own."""
    reduced = hessenberg(plant)
    w = grid(plant.period, plant.window, peaks, spreads)
    frequency, loop = trace_loop(reduced, kp, ki_period, rule, w)
    return reduced, frequency, loop
