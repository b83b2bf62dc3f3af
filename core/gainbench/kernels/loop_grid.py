"""Frequencies on which a loop is first looked at; plain numpy."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

POINTS = 400
"""Frequencies of the even part of the grid."""
DECADES = 4.0
"""Span of the even part below the Nyquist frequency."""
TAIL = 40
"""Frequencies of the sparse part below it."""
TAIL_DECADES = 6.0
LAST_GAP = 1e-6
"""Share of the Nyquist frequency that the last but one point stays below it: L is real at the last."""
LARGEST_WINDOW = 8
"""Speed windows of more periods add points between the zeros of their response."""
POINTS_PER_PERIOD = 6
_STEPS = 0.35 * 3.0 ** np.arange(7)
_AROUND = np.concatenate((-_STEPS[::-1], [0.0], _STEPS))
_TAIL = -DECADES - TAIL_DECADES * np.arange(TAIL, 0, -1) / TAIL
_EVEN = -DECADES + DECADES * np.arange(POINTS - 1) / (POINTS - 1)
_SHARES = np.concatenate((10.0 ** np.concatenate((_TAIL, _EVEN)), [1.0 - LAST_GAP, 1.0]))
_SHARES.setflags(write=False)


class Grid(NamedTuple):
    """Frequencies of one loop."""

    w: NDArray[np.float64]
    """[rad/s], shape (n,)."""
    turned: NDArray[np.float64]
    """Sine and cosine of w T/2, half the cost of a frequency, shape (2, n)."""


def half_turns(w: NDArray[np.float64], period: float) -> NDArray[np.float64]:
    """Sine and cosine of w T/2, by numpy at once.

    Parameters
    ----------
    w : ndarray, shape (n,)
        Frequencies [rad/s].
    period : float
        Of the loop [s].

    Returns
    -------
    ndarray, shape (2, n)
        Read-only, so that kernels meet one kind of array.
    """
    turn = w * (0.5 * period)
    out = np.empty((2, w.size))
    np.sin(turn, out=out[0])
    np.cos(turn, out=out[1])
    out.setflags(write=False)
    return out


_TURNED = half_turns(_SHARES, math.pi)


def loop_grid(period: float, window: int, *, peaks: NDArray[np.float64], spreads: NDArray[np.float64]) -> Grid:
    """Frequencies from far below to the Nyquist frequency, that one included.

    Around each peak, folded below the Nyquist frequency, points stand at distances that grow from its half width.

    Parameters
    ----------
    period : float
        Of the loop [s].
    window : int
        Of the speed measurement, in periods.
    peaks : ndarray, shape (n,)
        Frequencies of what the even grid could miss [rad/s].
    spreads : ndarray, shape (n,)
        Their half widths [rad/s].

    Returns
    -------
    Grid
        Rising.
    """
    nyquist = math.pi / period
    if peaks.size == 0 and window <= LARGEST_WINDOW:
        return Grid(_SHARES * nyquist, _TURNED)
    found = [_SHARES]
    if window > LARGEST_WINDOW:
        lobes = POINTS_PER_PERIOD * window
        found.append((np.arange(lobes) + 0.5) / lobes)
    if peaks.size > 0:
        centre = np.mod(peaks / nyquist, 2.0)
        centre = np.where(centre > 1.0, 2.0 - centre, centre)
        width = np.maximum(spreads / nyquist, 1e-7)
        around = (centre[:, None] + width[:, None] * _AROUND).ravel()
        found.append(around[(around > 10.0**-DECADES) & (around < 1.0 - LAST_GAP)])
    shares = np.sort(np.concatenate(found))
    apart = np.concatenate(([True], shares[1:] > shares[:-1] * (1.0 + 1e-9)))
    w = np.asarray(shares[apart] * nyquist)
    return Grid(w, half_turns(w, period))


def from_on(grid: Grid, lowest: float) -> Grid:
    """The part of a grid at and above a frequency [rad/s]."""
    first = int(np.searchsorted(grid.w, lowest))
    turned = np.ascontiguousarray(grid.turned[:, first:])
    turned.setflags(write=False)
    return Grid(grid.w[first:], turned)
