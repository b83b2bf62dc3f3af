"""The edge of stability of a sampled PI loop in the plane of its two gains.

A PI controller on the unit circle is ``C = x + j y t`` with ``t = -cot(w T/2)/2``, ``x`` its proportional part and the
rule's share of the integral, ``y = Ki T``. A closed-loop pole lies on the circle at ``w`` where ``C = -1/G``: one point
``x = Re(-1/G)``, ``y = Im(-1/G)/t`` for each frequency. Walking up in frequency, the side to the right has two
poles outside fewer than the side to the left, for ``dC/d(x, y)`` has the determinant ``t < 0`` throughout. At the
Nyquist frequency ``C`` is ``x`` alone: the edge there is the line ``x = -1/G``, and below the curve's end on it the
side of larger ``x`` has one pole more outside, above it one less.

References
----------
J. Ackermann, Robust Control: the Parameter Space Approach, 2nd ed., 2002, chapter 2, for the boundaries; Y. I. Neimark,
Stability of linearized systems, 1949, for the side with fewer poles outside (both from memory).
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.frequency import hessenberg, plant_at, workspace
from gainbench.kernels.frequency_batch import plant_over
from gainbench.kernels.loop_grid import Grid
from gainbench.kernels.loop_records import SampledPlant

TURN = 0.35
"""Tangent of the largest phase step of the plant between neighbours."""
RISE = 1.7
"""Largest ratio of its sizes between neighbours."""
HALVINGS = 9


class Edge(NamedTuple):
    """The edge at rising frequencies."""

    w: NDArray[np.float64]
    """Above 0 to just below the Nyquist frequency [rad/s], shape (n,)."""
    x: NDArray[np.float64]
    """shape (n,)."""
    y: NDArray[np.float64]
    """shape (n,)."""
    last: float
    """x of the line at the Nyquist frequency; infinite where there is none."""


@compiled
def slope(w: float, period: float) -> float:
    """t, the integral part's imaginary part for Ki T = 1, below 0 up to the Nyquist frequency."""
    return -0.5 / math.tan(0.5 * w * period)


@inlined
def against(response: complex) -> complex:
    """-1/G of the plant's response."""
    size = response.real * response.real + response.imag * response.imag
    if not size > 0.0:
        return complex(math.inf, 0.0)
    return complex(-response.real / size, response.imag / size)


@compiled
def needed(plant: SampledPlant, w: float, work: NDArray[np.complex128]) -> complex:
    """-1/G: the controller that puts a closed-loop pole on the circle at ``w``."""
    return against(plant_at(plant, w, work))


@compiled
def apart(first: complex, second: complex) -> bool:
    """Whether the plant turns or steps too much between two frequencies."""
    along = first.real * second.real + first.imag * second.imag
    across = abs(first.real * second.imag - first.imag * second.real)
    if not math.isfinite(along + across):
        return False
    if along <= 0.0 or across > TURN * along:
        return True
    one = first.real * first.real + first.imag * first.imag
    two = second.real * second.real + second.imag * second.imag
    return max(one, two) > RISE * RISE * min(one, two)


@compiled
def stability_edge(plant: SampledPlant, on: Grid, lowest: float) -> tuple[SampledPlant, Edge]:
    """The reduced plant and its edge on a grid, with points put in above ``lowest`` where neighbours are far apart.

    The grid rises and ends with the Nyquist frequency.
    """
    reduced = hessenberg(plant)
    work = workspace(reduced)
    period = plant.period
    grid = on.w
    known = plant_over(reduced, on.turned)
    room = 4 * grid.size
    w = np.empty(room)
    control = np.empty(room, dtype=np.complex128)
    waiting_w = np.empty(HALVINGS + 2)
    waiting = np.empty(HALVINGS + 2, dtype=np.complex128)
    depth = np.empty(HALVINGS + 2, dtype=np.int64)
    w[0], control[0] = grid[0], against(known[0])
    count = 1
    for k in range(1, grid.size - 1):
        waiting_w[0], waiting[0], depth[0] = grid[k], against(known[k]), 0
        top = 0
        while top >= 0:
            spare = room - count - (grid.size - k) - top
            close = waiting_w[top] < lowest or depth[top] >= HALVINGS or spare <= 2
            if not close and apart(control[count - 1], waiting[top]):
                middle = 0.5 * (w[count - 1] + waiting_w[top])
                depth[top] += 1
                depth[top + 1] = depth[top]
                waiting_w[top + 1], waiting[top + 1] = middle, needed(reduced, middle, work)
                top += 1
            else:
                w[count], control[count] = waiting_w[top], waiting[top]
                count += 1
                top -= 1
    x, y = np.empty(count), np.empty(count)
    for k in range(count):
        x[k] = control[k].real
        y[k] = control[k].imag / slope(w[k], period)
    return reduced, Edge(w[:count].copy(), x, y, against(known[grid.size - 1]).real)
