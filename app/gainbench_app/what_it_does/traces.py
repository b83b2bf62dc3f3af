"""From a trace of thousands of ticks to what a few hundred pixel columns can show."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_LEAST_PER_COLUMN = 6
"""Below so many ticks in a column every tick is drawn."""


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
    from gainbench.kernels.drawn_columns import drawn_columns

    # A copy may be written to: arrays of the other kind would be compiled for once more.
    ticks, line, centres, edges, ripple = drawn_columns(np.array(values), per, least_ripple)
    bands = tuple(_bands(time[centres], *edges, ripple)) if ripple.any() else ()
    return Drawn(x=time[ticks], y=line, bands=bands)


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
    ticks = np.arange(64.0)
    decimated(ticks, np.sin(ticks), columns=1, least_ripple=0.0)
