"""From a trace of thousands of ticks to what a few hundred pixel columns can show."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_LEAST_PER_COLUMN = 6
"""Below so many ticks in a column every tick is drawn."""
_NEAR = 25
"""Columns that are looked at together."""
_RIPPLE_TURNS = 5
"""A curve that turns as often as this within them is ripple there."""
_CLOSED, _OPENED = 24, 10
"""Gaps in ripple of fewer columns are ripple too, stretches of fewer are not."""
_EVENT = 4.0
"""A column that spans as many times what ripple usually spans is an event of its own, and never hidden in a band."""
_SMOOTHED = 5
"""Columns over which the edges and the mean line of ripple are taken, so that they do not beat with the columns."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """A stretch of ripple: its smallest and largest values."""

    x: Array
    low: Array
    high: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawn:
    """A curve for drawing: a line, and bands of ripple behind it."""

    x: Array
    y: Array
    bands: tuple[Band, ...] = ()

    @property
    def lowest(self) -> float:
        """Smallest value drawn."""
        return min([float(self.y.min()), *(float(band.low.min()) for band in self.bands)])

    @property
    def highest(self) -> float:
        """Largest value drawn."""
        return max([float(self.y.max()), *(float(band.high.max()) for band in self.bands)])


def decimated(time: Array, values: Array, *, columns: int, least_ripple: float) -> Drawn:
    """Reduce a trace to about one point per column.

    Where a column holds one movement, its extremes are drawn in their order, so that no peak is lost; where it holds
    ripple, the line is the mean and the extremes make a band.

    Parameters
    ----------
    time, values : ndarray, shape (n,)
        The trace, n >= 1.
    columns : int
        Pixel columns, >= 1.
    least_ripple : float
        A band narrower than this is drawn as a line [unit of values].

    Returns
    -------
    Drawn
        At most two points per column.
    """
    count = len(values)
    per = -(-count // max(1, columns))
    if per < _LEAST_PER_COLUMN:
        return Drawn(x=time, y=values)
    from gainbench.kernels.columns import FIRST, HIGH, LAST, LOW, MEAN, TURNS, band_edges, column_figures

    figures = column_figures(np.ascontiguousarray(values), per)
    whole = figures.shape[1]
    low, high = figures[LOW], figures[HIGH]
    turns = figures[TURNS] * (high - low > least_ripple)
    ripple = _joined(np.convolve(turns, np.ones(_NEAR), mode="same") >= _RIPPLE_TURNS - 0.5)
    if turns.any():
        ripple &= high - low <= _EVENT * float(np.median((high - low)[turns > 0]))
    starts = np.minimum(np.arange(whole) * per, count - 1)
    centre = time[np.minimum(starts + per // 2, count - 1)]
    first = np.minimum(starts + figures[FIRST].astype(np.int64), count - 1)
    last = np.minimum(starts + figures[LAST].astype(np.int64), count - 1)
    x = np.stack((time[first], time[last]), axis=1)
    y = np.stack((values[first], values[last]), axis=1)
    if not ripple.any():
        return Drawn(x=x.ravel(), y=y.ravel())
    mean = _averaged(figures[MEAN], ripple)
    low_edge, high_edge = band_edges(figures, mean, _SMOOTHED // 2)
    x[ripple] = centre[ripple, None]
    y[ripple] = mean[ripple, None]
    return Drawn(x=x.ravel(), y=y.ravel(), bands=tuple(_bands(centre, low_edge, high_edge, ripple)))


def _joined(ripple: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Without short gaps, and then without short stretches."""
    joined = ripple.copy()
    for wanted, longest in ((False, _CLOSED), (True, _OPENED)):
        edges = np.flatnonzero(np.diff(joined.astype(np.int8))) + 1
        for start, stop in pairwise(edges.tolist()):
            if bool(joined[start]) is wanted and stop - start < longest:
                joined[start:stop] = not wanted
    return joined


def _averaged(mean: Array, ripple: NDArray[np.bool_]) -> Array:
    """The mean over neighbouring columns of ripple."""
    weights = np.ones(_SMOOTHED)
    share = np.convolve(ripple.astype(float), weights, mode="same")
    total = np.convolve(np.where(ripple, mean, 0.0), weights, mode="same")
    return np.where(ripple, total / np.maximum(share, 1.0), mean)


def _bands(x: Array, low: Array, high: Array, ripple: NDArray[np.bool_]) -> list[Band]:
    edges = np.flatnonzero(np.diff(np.concatenate(([False], ripple, [False]))))
    return [
        Band(x=x[start:stop], low=low[start:stop], high=high[start:stop])
        for start, stop in zip(edges[::2], edges[1::2], strict=True)
        if stop - start > 1
    ]


def stretches(time: Array, flags: NDArray[np.bool_]) -> list[tuple[float, float]]:
    """The intervals in which a flag is set, from the first tick of each to the tick after its last [s]."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], flags, [False]))))
    last = len(time) - 1
    return [
        (float(time[start]), float(time[min(stop, last)])) for start, stop in zip(edges[::2], edges[1::2], strict=True)
    ]


def merged(intervals: list[tuple[float, float]], gap: float) -> list[tuple[float, float]]:
    """Intervals closer than a gap, which no screen can tell apart, as one."""
    result: list[tuple[float, float]] = []
    for start, stop in intervals:
        if result and start - result[-1][1] <= gap:
            result[-1] = (result[-1][0], stop)
        else:
            result.append((start, stop))
    return result


def warm_up() -> None:
    """Compile, or load from the disk cache, what decimates traces; a window calls it off its own thread."""
    from gainbench.kernels.columns import MEAN, band_edges, column_figures

    figures = column_figures(np.sin(np.arange(64.0)), _LEAST_PER_COLUMN)
    band_edges(figures, figures[MEAN], _SMOOTHED // 2)
