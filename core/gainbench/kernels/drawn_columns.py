"""A trace of thousands of ticks as a line and bands of ripple over a few hundred columns of pixels."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.columns import FIRST, HIGH, LAST, LOW, MEAN, TURNS, band_edges, column_figures
from gainbench.kernels.compiled import compiled

_NEAR = 12
"""Columns to each side that are looked at together."""
_RIPPLE_TURNS = 5
"""A curve that turns as often as this within them is ripple there."""
_CLOSED, _OPENED = 24, 10
"""Gaps in ripple of fewer columns are ripple too, stretches of fewer are not."""
_EVENT = 4.0
"""A column that spans as many times what ripple usually spans is an event of its own, and never hidden in a band."""
_SMOOTHED = 2
"""Columns to each side over which edges and mean of ripple are taken, so that they do not beat with the columns."""


@compiled
def drawn_columns(
    values: NDArray[np.float64], per: int, least_ripple: float
) -> tuple[NDArray[np.int64], NDArray[np.float64], NDArray[np.int64], NDArray[np.float64], NDArray[np.bool_]]:
    """The line, the bands, and where there is ripple; ``per`` values make a column, the last one may have fewer.

    The first two results are the line, at most two points a column: its ticks and values. They are the two extremes of
    each column in their order, the later one left out where the curve goes on the same way to the next column, or its
    middle with its mean where it is ripple. The third is the tick in the middle of each column, the fourth the lower
    and upper edge of its band, shape (2, columns), which hold only where the fifth is true. Ripple narrower than
    ``least_ripple`` is a line all the same.
    """
    count = values.size
    figures = column_figures(values, per)
    whole = figures.shape[1]
    ripple = _rippled(figures, least_ripple)
    mean = _averaged(figures[MEAN], ripple)
    edges = band_edges(figures, mean, int(np.int64(_SMOOTHED)))
    centres = np.empty(whole, dtype=np.int64)
    ticks = np.empty(2 * whole, dtype=np.int64)
    line = np.empty(2 * whole)
    points = 0
    for column in range(whole):
        start = column * per
        centres[column] = min(start + per // 2, count - 1)
        if ripple[column]:
            ticks[points], line[points] = centres[column], mean[column]
            points += 1
            continue
        first = min(start + int(figures[FIRST, column]), count - 1)
        last = min(start + int(figures[LAST, column]), count - 1)
        ticks[points], line[points] = first, values[first]
        points += 1
        after = start + per
        goes_on = after < count and not ripple[column + 1]
        if goes_on and last == after - 1:
            goes_on = (values[last] - values[first]) * (values[after] - values[last]) >= 0.0
        else:
            goes_on = False
        if last > first and not goes_on:
            ticks[points], line[points] = last, values[last]
            points += 1
    return ticks[:points].copy(), line[:points].copy(), centres, edges, ripple


@compiled
def _rippled(figures: NDArray[np.float64], least_ripple: float) -> NDArray[np.bool_]:
    """Which columns hold ripple: many turns nearby, no short gaps or stretches, and no events."""
    whole = figures.shape[1]
    turns = np.empty(whole)
    spans = np.empty(whole)
    many = 0
    for column in range(whole):
        span = figures[HIGH, column] - figures[LOW, column]
        turns[column] = figures[TURNS, column] if span > least_ripple else 0.0
        if turns[column] > 0.0:
            spans[many] = span
            many += 1
    ripple = np.zeros(whole, dtype=np.bool_)
    if many == 0:
        return ripple
    near = 0.0
    for column in range(min(_NEAR, whole)):
        near += turns[column]
    for column in range(whole):
        if column + _NEAR < whole:
            near += turns[column + _NEAR]
        if column > _NEAR:
            near -= turns[column - _NEAR - 1]
        ripple[column] = near >= _RIPPLE_TURNS - 0.5
    for turn in range(2):
        # First short gaps are closed, then short stretches opened.
        wanted, longest = (turn == 1), (_OPENED if turn == 1 else _CLOSED)
        start = 0
        for column in range(1, whole + 1):
            if column < whole and ripple[column] == ripple[start]:
                continue
            inside = start > 0 and column < whole
            if inside and ripple[start] == wanted and column - start < longest:
                for one in range(start, column):
                    ripple[one] = not wanted
            start = column
    usual = _median(spans, many)
    for column in range(whole):
        if figures[HIGH, column] - figures[LOW, column] > _EVENT * usual:
            ripple[column] = False
    return ripple


@compiled
def _averaged(mean: NDArray[np.float64], ripple: NDArray[np.bool_]) -> NDArray[np.float64]:
    """The mean over neighbouring columns of ripple."""
    found = mean.copy()
    for column in range(mean.size):
        if ripple[column]:
            total, share = 0.0, 0
            for near in range(max(0, column - _SMOOTHED), min(mean.size, column + _SMOOTHED + 1)):
                if ripple[near]:
                    total += mean[near]
                    share += 1
            found[column] = total / share
    return found


@compiled
def _median(values: NDArray[np.float64], count: int) -> float:
    """Of the first values, which it puts in another order: what is left and right of the middle is parted by halves."""
    middle = (count - 1) // 2
    low, high = 0, count - 1
    while low < high:
        pivot = values[middle]
        left, right = low, high
        while left <= right:
            while values[left] < pivot:
                left += 1
            while values[right] > pivot:
                right -= 1
            if left <= right:
                values[left], values[right] = values[right], values[left]
                left += 1
                right -= 1
        if right < middle:
            low = left
        if left > middle:
            high = right
    if count % 2 == 1:
        return float(values[middle])
    above = values[middle + 1]
    for place in range(middle + 2, count):
        above = min(above, values[place])
    return float(0.5 * (values[middle] + above))
