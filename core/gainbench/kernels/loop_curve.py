"""The open loop over frequency, with points put in where it turns or steps between those of the grid."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.frequency import integral_turned, loop_at, workspace
from gainbench.kernels.frequency_batch import plant_over
from gainbench.kernels.loop_grid import Grid
from gainbench.kernels.loop_records import SampledPlant

TURN = 0.3
"""Tangent of the largest phase step between neighbours."""
RISE = 1.5
"""Largest ratio of sizes between neighbours."""
FAINT = 0.05
"""Where both neighbours are smaller the loop decides nothing, and steps are left."""
LOUD = 20.0
"""Where both are larger, a step of the size alone is left."""
HALVINGS = 14


@compiled
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


@compiled
def trace_loop(
    plant: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    grid: Grid,
) -> tuple[NDArray[np.float64], NDArray[np.complex128]]:
    """The open loop on the grid, with points put in where neighbours are far apart.

    ``plant`` as :func:`gainbench.kernels.frequency.hessenberg` leaves it.
    """
    work = workspace(plant)
    w, turned = grid.w, grid.turned
    known = plant_over(plant, turned)
    for k in range(w.size):
        known[k] *= kp + ki_period * integral_turned(turned[0, k], turned[1, k], rule)
    k = 1
    while k < w.size and not far(known[k - 1], known[k]):
        k += 1
    if k == w.size:
        return w, known
    room = 4 * w.size
    frequency = np.empty(room)
    loop = np.empty(room, dtype=np.complex128)
    # A stack of points that wait on the right, nearest on top.
    waiting_w = np.empty(HALVINGS + 2)
    waiting_l = np.empty(HALVINGS + 2, dtype=np.complex128)
    depth = np.empty(HALVINGS + 2, dtype=np.int64)
    frequency[0] = w[0]
    loop[0] = known[0]
    count = 1
    for k in range(1, w.size):
        waiting_w[0] = w[k]
        waiting_l[0] = known[k]
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
                waiting_l[top + 1] = loop_at(plant, kp, ki_period, rule, middle, work)
                top += 1
            else:
                frequency[count] = waiting_w[top]
                loop[count] = waiting_l[top]
                count += 1
                top -= 1
    return frequency[:count].copy(), loop[:count].copy()


@inlined
def beyond_one(value: complex) -> bool:
    """Whether \\|L\\| is above 1."""
    return value.real * value.real + value.imag * value.imag > 1.0


@compiled
def edge_count(loop: NDArray[np.complex128]) -> int:
    """How often a curve goes from one side of \\|L\\| = 1 to the other."""
    count = 0
    for k in range(1, loop.size):
        count += 1 if beyond_one(loop[k]) != beyond_one(loop[k - 1]) else 0
    return count


@compiled
def edges_of_one(loop: NDArray[np.complex128]) -> NDArray[np.int64]:
    """The points after which a curve goes from one side of \\|L\\| = 1 to the other."""
    out = np.empty(edge_count(loop), dtype=np.int64)
    count = 0
    for k in range(1, loop.size):
        if beyond_one(loop[k]) != beyond_one(loop[k - 1]):
            out[count] = k - 1
            count += 1
    return out
