"""What a few hundred columns of pixels show of a trace: extremes, means and turns of each, in one pass."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled

LOW, HIGH, MEAN, FIRST, LAST, TURNS = range(6)
"""Rows of the result of :func:`column_figures`."""


@compiled
def column_figures(values: NDArray[np.float64], per: int) -> NDArray[np.float64]:
    """Smallest, largest and mean value, places of the extremes, and turns of the curve in each column.

    ``per`` values make a column; the last one is filled up with the last value. ``FIRST`` and ``LAST`` are the places
    of the two extremes within the column, in their order; a turn is a change from rising to falling or back.
    """
    count = values.size
    whole = (count + per - 1) // per
    found = np.empty((6, whole))
    for column in range(whole):
        start = column * per
        low = high = before = values[start]
        lowest = highest = 0
        total = 0.0
        slope = 0.0
        turns = 0
        for step in range(per):
            value = values[min(start + step, count - 1)]
            total += value
            # Without branches: on ripple every guess of the processor would be wrong.
            lowest = step if value < low else lowest
            highest = step if value > high else highest
            low, high = min(low, value), max(high, value)
            change = value - before
            turns += 1 if change * slope < 0.0 else 0
            slope = change
            before = value
        found[0, column] = low
        found[1, column] = high
        found[2, column] = total / per
        found[3, column] = min(lowest, highest)
        found[4, column] = max(lowest, highest)
        found[5, column] = turns
    return found


@compiled
def band_edges(figures: NDArray[np.float64], mean: NDArray[np.float64], half: int) -> NDArray[np.float64]:
    """Lower and upper edge of a band of ripple: the outermost over ``half`` columns to each side, about their mean.

    ``figures`` as :func:`column_figures` gives it; ``mean`` is the line through the middle, so that a slope does not
    look like ripple. The first row is the lower edge, the second the upper one.
    """
    whole = mean.size
    edges = np.empty((2, whole))
    for column in range(whole):
        low, high = figures[0, column], figures[1, column]
        low_about, high_about = low - figures[2, column], high - figures[2, column]
        for near in range(max(0, column - half), min(whole, column + half + 1)):
            low = min(low, figures[0, near])
            high = max(high, figures[1, near])
            low_about = min(low_about, figures[0, near] - figures[2, near])
            high_about = max(high_about, figures[1, near] - figures[2, near])
        edges[0, column] = min(max(mean[column] + low_about, low), figures[0, column])
        edges[1, column] = max(min(mean[column] + high_about, high), figures[1, column])
    return edges
