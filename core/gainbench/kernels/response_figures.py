"""Figures that are read off the speed trace: passes over the ticks of a window."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled

NEVER = -1
LANES = 64
"""Sums and maxima kept beside each other, so that several ticks are taken at once."""


class StepTicks(NamedTuple):
    """The speed after the reference came, by ticks."""

    excess: float
    """Largest excess over the reference, at least 0 [rad/s]."""
    tenth: int
    """First tick at 10 % of the reference, or NEVER."""
    ninth: int
    """First tick at 90 % of the reference, or NEVER."""
    outside: int
    """Last tick outside the band, or NEVER."""


class LoadTicks(NamedTuple):
    """The speed after the load step came, by ticks."""

    dip: float
    """Largest distance from the reference in force [rad/s]."""
    outside: int
    """Last tick outside the band, or NEVER."""


@compiled
def step_ticks(speed: NDArray[np.float64], goal: float, first: int, end: int, band: float) -> StepTicks:
    """Look at the speed in ticks ``first`` to before ``end``, signed by the goal [rad/s], which is not 0."""
    sign = 1.0 if goal > 0.0 else -1.0
    size = abs(goal)
    tenth = ninth = outside = NEVER
    excesses = np.zeros(LANES)
    for begin in range(first, end, LANES):
        part = speed[begin : min(begin + LANES, end)]
        for lane in range(part.size):
            excesses[lane] = max(excesses[lane], sign * part[lane] - size)
    for tick in range(first, end):
        if sign * speed[tick] >= 0.1 * size:
            tenth = tick
            break
    if tenth != NEVER:
        for tick in range(tenth, end):
            if sign * speed[tick] >= 0.9 * size:
                ninth = tick
                break
    for tick in range(end - 1, first - 1, -1):
        if abs(speed[tick] - goal) > band:
            outside = tick
            break
    return StepTicks(excesses.max(), tenth, ninth, outside)


@compiled
def load_ticks(
    speed: NDArray[np.float64], reference: NDArray[np.float64], first: int, end: int, band: float
) -> LoadTicks:
    """Look at the speed's distance from the reference in force in ticks ``first`` to before ``end``."""
    outside = NEVER
    dips = np.zeros(LANES)
    for begin in range(first, end, LANES):
        part, asked = speed[begin : min(begin + LANES, end)], reference[begin : min(begin + LANES, end)]
        for lane in range(part.size):
            dips[lane] = max(dips[lane], abs(part[lane] - asked[lane]))
    for tick in range(end - 1, first - 1, -1):
        if abs(speed[tick] - reference[tick]) > band:
            outside = tick
            break
    return LoadTicks(dips.max(), outside)


@compiled
def size_figures(values: NDArray[np.float64]) -> tuple[float, float]:
    """Sum of the squares, and the largest size."""
    squares, sizes = np.zeros(LANES), np.zeros(LANES)
    for first in range(0, values.size, LANES):
        part = values[first : first + LANES]
        for lane in range(part.size):
            value = part[lane]
            squares[lane] += value * value
            sizes[lane] = max(sizes[lane], abs(value))
    return squares.sum(), sizes.max()
