"""The frequency response of a sampled plant on many frequencies: the elimination of :mod:`.frequency`, many at a time.

Each step of the elimination runs over a block of frequencies that lie next to each other in memory, which the
compiler turns into vector instructions; pivots are chosen for each frequency by itself, so that the numbers are those
of one elimination after the other.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled
from gainbench.kernels.frequency import inverse, smoothing
from gainbench.kernels.loop_records import SampledPlant

BLOCK = 64
"""Frequencies of one block: enough for vectors, few enough for the nearest cache."""


@compiled
def is_fed(plant: SampledPlant) -> bool:
    """Whether the measured value acts on the plant itself, by the feedforward."""
    if plant.dw != 0.0:
        return True
    return bool(np.any(plant.bw != 0.0))


@compiled
def eliminate(re: NDArray[np.float64], im: NDArray[np.float64], sides: int, scratch: NDArray[np.float64]) -> None:
    """Solve a block of upper Hessenberg systems in place.

    Parameters
    ----------
    re, im : ndarray, shape (n, n + sides, BLOCK)
        Rows of each system, its right-hand sides behind them, which hold the solutions afterwards.
    sides : int
        Right-hand sides.
    scratch : ndarray, shape (n + 2, 2, BLOCK)
        Reciprocals of the pivots, then the factor of a step, then which rows it changes.
    """
    n = re.shape[0]
    for k in range(n):
        last = k + 1 == n
        for lane in range(BLOCK):
            top_re, top_im = re[k, k, lane], im[k, k, lane]
            low_re = low_im = 0.0
            if not last:
                low_re, low_im = re[k + 1, k, lane], im[k + 1, k, lane]
            swap = abs(low_re) + abs(low_im) > abs(top_re) + abs(top_im)
            pivot_re, pivot_im = (low_re, low_im) if swap else (top_re, top_im)
            other_re, other_im = (top_re, top_im) if swap else (low_re, low_im)
            size = 1.0 / (pivot_re * pivot_re + pivot_im * pivot_im)
            by_re, by_im = pivot_re * size, -pivot_im * size
            scratch[k, 0, lane], scratch[k, 1, lane] = by_re, by_im
            scratch[n, 0, lane] = other_re * by_re - other_im * by_im
            scratch[n, 1, lane] = other_re * by_im + other_im * by_re
            scratch[n + 1, 0, lane] = 1.0 if swap else 0.0
        if last:
            break
        for j in range(k + 1, n + sides):
            for lane in range(BLOCK):
                a_re, a_im = re[k, j, lane], im[k, j, lane]
                b_re, b_im = re[k + 1, j, lane], im[k + 1, j, lane]
                swap = scratch[n + 1, 0, lane] > 0.5
                top_re, top_im = (b_re, b_im) if swap else (a_re, a_im)
                low_re, low_im = (a_re, a_im) if swap else (b_re, b_im)
                f_re, f_im = scratch[n, 0, lane], scratch[n, 1, lane]
                re[k, j, lane], im[k, j, lane] = top_re, top_im
                re[k + 1, j, lane] = low_re - (f_re * top_re - f_im * top_im)
                im[k + 1, j, lane] = low_im - (f_re * top_im + f_im * top_re)
    for side in range(n, n + sides):
        for k in range(n - 1, -1, -1):
            for j in range(k + 1, n):
                for lane in range(BLOCK):
                    a_re, a_im = re[k, j, lane], im[k, j, lane]
                    x_re, x_im = re[j, side, lane], im[j, side, lane]
                    re[k, side, lane] -= a_re * x_re - a_im * x_im
                    im[k, side, lane] -= a_re * x_im + a_im * x_re
            for lane in range(BLOCK):
                b_re, b_im = re[k, side, lane], im[k, side, lane]
                by_re, by_im = scratch[k, 0, lane], scratch[k, 1, lane]
                re[k, side, lane] = b_re * by_re - b_im * by_im
                im[k, side, lane] = b_re * by_im + b_im * by_re


@compiled
def plant_over(plant: SampledPlant, turned: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Measured value over controller output on many frequencies.

    Parameters
    ----------
    plant : SampledPlant
        ``m`` upper Hessenberg.
    turned : ndarray, shape (2, n)
        Sine and cosine of w T/2, which tell where.

    Returns
    -------
    ndarray, shape (n,)
    """
    n, count = plant.m.shape[0], turned.shape[1]
    fed = is_fed(plant)
    sides = 2 if fed else 1
    re, im = np.empty((n, n + sides, BLOCK)), np.empty((n, n + sides, BLOCK))
    scratch = np.empty((n + 2, 2, BLOCK))
    seen_re, seen_im = np.empty((sides, BLOCK)), np.empty((sides, BLOCK))
    # Room for whole blocks: behind the last frequency it goes on with another that no pivot is zero at.
    room = (count + BLOCK - 1) // BLOCK * BLOCK
    delta_re, delta_im = np.full(room, -1.0), np.full(room, 1.0)
    for k in range(count):
        half, level = turned[0, k], turned[1, k]
        delta_re[k], delta_im[k] = -2.0 * half * half, 2.0 * half * level
    out = np.empty(count, dtype=np.complex128)
    smoothed = plant.window > 1 or plant.filter_gain != 1.0
    ahead_re, ahead_im = np.empty(BLOCK), np.empty(BLOCK)
    for first in range(0, count, BLOCK):
        now_re, now_im = delta_re[first : first + BLOCK], delta_im[first : first + BLOCK]
        for r in range(n):
            for k in range(max(r - 1, 0), n):
                value = -plant.m[r, k]
                for lane in range(BLOCK):
                    re[r, k, lane] = value
                    im[r, k, lane] = 0.0
            now, older = plant.b0[r], plant.b1[r]
            for lane in range(BLOCK):
                re[r, r, lane] += now_re[lane]
                im[r, r, lane] = now_im[lane]
                re[r, n, lane] = now + older * (1.0 + now_re[lane])
                im[r, n, lane] = -older * now_im[lane]
            if fed:
                own = plant.bw[r]
                for lane in range(BLOCK):
                    re[r, n + 1, lane] = own
                    im[r, n + 1, lane] = 0.0
        eliminate(re, im, sides, scratch)
        for side in range(sides):
            still, older = (plant.d0, plant.d1) if side == 0 else (plant.dw, 0.0)
            for lane in range(BLOCK):
                seen_re[side, lane] = still + older * (1.0 + now_re[lane])
                seen_im[side, lane] = -older * now_im[lane]
            for k in range(n):
                weight = plant.c[k]
                for lane in range(BLOCK):
                    seen_re[side, lane] += weight * re[k, n + side, lane]
                    seen_im[side, lane] += weight * im[k, n + side, lane]
        for lane in range(BLOCK):
            ahead_re[lane], ahead_im[lane] = plant.scale, 0.0
        for _ in range(plant.shift):
            for lane in range(BLOCK):
                one_re, one_im = ahead_re[lane], ahead_im[lane]
                back_re, back_im = 1.0 + now_re[lane], -now_im[lane]
                ahead_re[lane] = one_re * back_re - one_im * back_im
                ahead_im[lane] = one_re * back_im + one_im * back_re
        if smoothed:
            for lane in range(min(BLOCK, count - first)):
                value = smoothing(plant, turned[0, first + lane], turned[1, first + lane])
                value *= complex(ahead_re[lane], ahead_im[lane])
                ahead_re[lane], ahead_im[lane] = value.real, value.imag
        if fed:
            for lane in range(BLOCK):
                value = complex(ahead_re[lane], ahead_im[lane])
                value *= inverse(1.0 - value * complex(seen_re[1, lane], seen_im[1, lane]))
                ahead_re[lane], ahead_im[lane] = value.real, value.imag
        for lane in range(min(BLOCK, count - first)):
            one_re, one_im = ahead_re[lane], ahead_im[lane]
            two_re, two_im = seen_re[0, lane], seen_im[0, lane]
            out[first + lane] = complex(one_re * two_re - one_im * two_im, one_re * two_im + one_im * two_re)
    return out
