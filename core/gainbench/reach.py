"""The reach map of a loop: which crossovers and phase margins positive gains with a stable loop can meet.

A crossover and a margin there ask for one pair of gains. At each crossover the margins whose gains are positive are
known in closed form; within them stability changes only where a closed-loop pole stands on the unit circle at another
frequency, which is solved for on the sampled loop itself. So every edge of the map is exact; only the crossovers it is
computed at are chosen.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.loop_grid import from_on, loop_grid
from gainbench.margins import is_stable, sharp_modes
from gainbench.results import Gains
from gainbench.sampling import Loop

if TYPE_CHECKING:
    from gainbench.kernels.loop_records import SampledPlant
    from gainbench.kernels.stability_edge import Edge

COLUMNS = 100
"""Crossovers that a map is computed at, spread evenly over its range, before those that are put in."""
DECADES = 3.5
"""Range below the Nyquist frequency where none is asked for."""
SPLIT = 6
"""Parts that the step between two crossovers is split in where the map changes its shape between them."""
_AROUND = np.array([-9.0, -3.0, -1.0, 0.0, 1.0, 3.0, 9.0])
"""Crossovers put in around a resonance or antiresonance, in its half widths."""
_BELOW = 0.03
"""Where the edge of stability begins, over the lowest frequency of interest: there it is next to the point it starts
from, and the digits of its real part are still there."""
_NEXT_TO_NYQUIST = 1.0 - 1e-6


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachMap:
    """What positive gains with a stable loop meet; all arrays read-only."""

    crossover: NDArray[np.float64]
    """Rising [rad/s], shape (n,)."""
    low: NDArray[np.float64]
    """Where each stretch of margins begins, rising along a row [rad], NaN beyond the last one, shape (n, m)."""
    high: NDArray[np.float64]
    """Where it ends [rad], shape (n, m)."""

    @property
    def largest_margin(self) -> NDArray[np.float64]:
        """The largest margin that can be met at each crossover [rad], NaN where none can, shape (n,)."""
        top = np.max(np.where(np.isnan(self.high), -1.0, self.high), axis=1, initial=-1.0)
        return np.where(top < 0.0, np.nan, top)


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachArea:
    """One connected part of a map, as a strip to be filled: stretches that touch from one crossover to the next."""

    crossover: NDArray[np.float64]
    """Rising [rad/s], shape (n,)."""
    low: NDArray[np.float64]
    """Lower edge [rad], shape (n,)."""
    high: NDArray[np.float64]
    """Upper edge [rad], shape (n,)."""


def reach_map(
    loop: Loop, *, lowest: float | None = None, highest: float | None = None, columns: int = COLUMNS
) -> ReachMap:
    """The targets that positive gains with a stable loop meet.

    The gains follow from the target, ``C = -exp(j margin)/G(wc)``; the loop is stable with them where no closed-loop
    pole is outside the unit circle, judged as :func:`gainbench.margins.is_stable` does.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    lowest : float, optional
        First crossover [rad/s], > 0; by default three and a half decades below the Nyquist frequency.
    highest : float, optional
        Last crossover [rad/s], above ``lowest``; never beyond just below the Nyquist frequency, which is the default.
    columns : int
        Crossovers spread evenly by ratio, at least 2; more are put in around what an elastic train does, and where the
        map changes its shape.

    Returns
    -------
    ReachMap
        Margins from 0 to pi/2.

    Raises
    ------
    ValueError
        If the range is empty or there are less than two crossovers.

    References
    ----------
    J. Ackermann, Robust Control: the Parameter Space Approach, 2nd ed., 2002, chapter 2 (from memory).
    """
    from gainbench.kernels.stability_edge import stability_edge

    period = loop.plant.period
    nyquist = math.pi / period
    last = nyquist * _NEXT_TO_NYQUIST if highest is None else min(highest, nyquist * _NEXT_TO_NYQUIST)
    far_below = nyquist * 10.0**-DECADES
    first = far_below if lowest is None else lowest
    if not 0.0 < first < last or columns < 2:
        raise ValueError(f"a map from {first!r} to {last!r} rad/s with {columns!r} crossovers")
    peaks, spreads = sharp_modes(loop)
    grid = loop_grid(period, loop.plant.window, peaks=peaks, spreads=spreads)
    least = float(min(first, far_below, *(0.5 * peaks)))
    reduced, edge = stability_edge(loop.plant, from_on(grid, _BELOW * least), least)
    crossover = np.geomspace(first, last, columns)
    crossover[-1] = last
    if peaks.size:
        around = (peaks[:, None] + spreads[:, None] * _AROUND).ravel()
        crossover = np.union1d(crossover, around[(around > first) & (around < last)])
    pieces = _pieces(loop, reduced, edge, crossover)
    more = _between(pieces)
    if more.size:
        pieces = _merged(pieces, _pieces(loop, reduced, edge, more))
    return _map(loop, pieces)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Pieces:
    """Pieces of margins at each crossover, and how many poles are outside on each, more than with next to no gain."""

    crossover: NDArray[np.float64]
    span: NDArray[np.float64]
    outside: NDArray[np.int64]


def _pieces(loop: Loop, reduced: SampledPlant, edge: Edge, crossover: NDArray[np.float64]) -> _Pieces:
    from gainbench.kernels.reach import reach

    span, outside = reach(reduced, edge, loop.rule, np.ascontiguousarray(crossover))
    return _Pieces(crossover=crossover, span=span, outside=outside)


def _present(pieces: _Pieces) -> NDArray[np.bool_]:
    return ~np.isnan(pieces.span[:, :, 0])


def _between(pieces: _Pieces) -> NDArray[np.float64]:
    """Further crossovers where the fewest poles outside, or the number of pieces, change from one to the next."""
    present = _present(pieces)
    fewest = np.where(present, pieces.outside, np.iinfo(np.int64).max).min(axis=1)
    count = present.sum(axis=1)
    changed = np.flatnonzero((fewest[1:] != fewest[:-1]) | (count[1:] != count[:-1]))
    w = pieces.crossover
    steps = np.arange(1, SPLIT) / SPLIT
    return np.asarray((w[changed, None] * (w[changed + 1] / w[changed])[:, None] ** steps).ravel())


def _merged(first: _Pieces, second: _Pieces) -> _Pieces:
    crossover = np.concatenate((first.crossover, second.crossover))
    order = np.argsort(crossover)
    return _Pieces(
        crossover=crossover[order],
        span=np.concatenate((first.span, second.span))[order],
        outside=np.concatenate((first.outside, second.outside))[order],
    )


def _map(loop: Loop, pieces: _Pieces) -> ReachMap:
    """Keep the pieces on which no pole is outside; two that touch become one."""
    present = _present(pieces)
    met = present & (pieces.outside == _stable_count(loop, pieces, present=present))
    joined = met[:, 1:] & met[:, :-1] & (pieces.span[:, 1:, 0] == pieces.span[:, :-1, 1])
    starts, ends = met.copy(), met.copy()
    starts[:, 1:] &= ~joined
    ends[:, :-1] &= ~joined
    width = int(starts.sum(axis=1).max(initial=0))
    low = np.full((pieces.crossover.size, width), np.nan)
    high = np.full_like(low, np.nan)
    row, column = np.nonzero(starts)
    place = np.cumsum(starts, axis=1)[row, column] - 1
    low[row, place] = pieces.span[row, column, 0]
    # In the order of rows, each stretch has one start and one end.
    high[row, place] = pieces.span[(*np.nonzero(ends), 1)]
    for one in (pieces.crossover, low, high):
        one.setflags(write=False)
    return ReachMap(crossover=pieces.crossover, low=low, high=high)


def _stable_count(loop: Loop, pieces: _Pieces, *, present: NDArray[np.bool_]) -> int | None:
    """The count that stands for no pole outside, tried where it is furthest from all edges; None where none does."""
    for count in np.unique(pieces.outside[present]):
        own = present & (pieces.outside == count)
        width = np.where(own, pieces.span[:, :, 1] - pieces.span[:, :, 0], -1.0)
        row, column = np.unravel_index(int(np.argmax(width)), width.shape)
        if _stable(loop, float(pieces.crossover[row]), 0.5 * float(pieces.span[row, column].sum())):
            return int(count)
    return None


def _stable(loop: Loop, crossover: float, margin: float) -> bool:
    from gainbench.kernels.frequency import gains_over, plant_response

    w = np.array([crossover])
    period = loop.plant.period
    kp, ki_period = gains_over(plant_response(loop.plant, w), w, period, loop.rule, margin)
    return is_stable(loop, Gains(kp=float(kp[0]), ki=float(ki_period[0]) / period))


def reach_areas(reach: ReachMap) -> tuple[ReachArea, ...]:
    """The map as strips to be filled.

    Parameters
    ----------
    reach : ReachMap
        Any.

    Returns
    -------
    tuple of ReachArea
        Where a stretch parts in two, or two become one, the larger overlap goes on; the other starts or ends a strip
        with what it shares with the crossover beside it, so that no gap is left between them.
    """
    done: list[_Strip] = []
    going: list[_Strip] = []
    before: list[_Stretch] = []
    for row in range(reach.crossover.size):
        here = [
            _Stretch(row=row, low=float(low), high=float(high))
            for low, high in zip(reach.low[row], reach.high[row], strict=True)
            if not math.isnan(low)
        ]
        pairs = [
            (_shared(strip[-1], one, row=row), k, j) for k, strip in enumerate(going) for j, one in enumerate(here)
        ]
        followed: dict[int, int] = {}
        for shared, k, j in sorted(pairs, key=lambda pair: pair[0].width, reverse=True):
            if shared.width > 0.0 and k not in followed and j not in followed.values():
                followed[k] = j
        for k, strip in enumerate(going):
            if k not in followed:
                done.append(strip + _widest(strip[-1], here, row=row))
        continued = [[*going[k], here[j]] for k, j in followed.items()]
        started = [
            [*_widest(one, before, row=row - 1), one] for j, one in enumerate(here) if j not in followed.values()
        ]
        going, before = continued + started, here
    return tuple(_area(reach, strip) for strip in done + going)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Stretch:
    row: int
    low: float
    high: float

    @property
    def width(self) -> float:
        return self.high - self.low


_Strip = list[_Stretch]


def _shared(one: _Stretch, other: _Stretch, *, row: int) -> _Stretch:
    return _Stretch(row=row, low=max(one.low, other.low), high=min(one.high, other.high))


def _widest(one: _Stretch, others: list[_Stretch], *, row: int) -> _Strip:
    """What a stretch shares most of with one of others, as the end of a strip; empty where it shares nothing."""
    shared = max((_shared(one, other, row=row) for other in others), key=lambda found: found.width, default=None)
    return [] if shared is None or shared.width <= 0.0 else [shared]


def _area(reach: ReachMap, strip: _Strip) -> ReachArea:
    crossover = reach.crossover[[one.row for one in strip]]
    low, high = np.array([one.low for one in strip]), np.array([one.high for one in strip])
    for array in (crossover, low, high):
        array.setflags(write=False)
    return ReachArea(crossover=crossover, low=low, high=high)
