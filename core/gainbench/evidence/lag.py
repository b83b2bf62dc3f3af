"""Dead time between two columns of a log: the lag at which a linear equation between them fits best."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_FEWEST = 25
"""Samples that are looked at to either side, at least."""
_LONGEST = 0.1
"""Seconds that are looked at to either side, at least."""
_SAME = 1.01
"""Squares within this share of the least are as good: of those the shortest lag is taken."""


def best_lag(target: Array, columns: Array, *, step: float, better: float = 0.98) -> int:
    """The lag with which ``target(t - lag)`` is closest to a sum of the columns.

    The squares that least squares leaves at every lag come from one correlation per column:
    ``y'y - c' (X X')^-1 c`` with ``c(lag) = X y(lag)``.

    Parameters
    ----------
    target : ndarray, shape (n,)
        In any unit.
    columns : ndarray, shape (p, n)
        In units of their own.
    step : float
        From sample to sample [s].
    better : float
        Share of the squares that are left without a lag, which those with one must stay below.

    Returns
    -------
    int
        Samples; positive where the target acts later than it is stamped.
    """
    from scipy.signal import fftconvolve

    n = target.size
    reach = min(max(_FEWEST, round(_LONGEST / step)), n // 5)
    inner = columns[:, reach : n - reach]
    scale = np.sqrt(np.sum(inner**2, axis=1))
    inner = inner[scale > 0.0] / scale[scale > 0.0, None]
    if inner.shape[1] < 4 * inner.shape[0] or not inner.size:
        return 0
    # Row of correlations for lags reach ... -reach: the target's window starts at sample reach - lag.
    correlations = np.array([fftconvolve(target, row[::-1], mode="valid") for row in inner])
    explained = np.einsum("pk,pq,qk->k", correlations, np.linalg.pinv(inner @ inner.T, rcond=1e-10), correlations)
    squares = np.concatenate(([0.0], np.cumsum(target**2)))
    whole = squares[inner.shape[1] :] - squares[: squares.size - inner.shape[1]]
    left = np.maximum(whole - explained, 0.0) / np.maximum(whole, 1e-300)
    lags = reach - np.arange(left.size)
    here = left[reach]
    if left.min() > better * here:
        return 0
    good = np.flatnonzero(left <= _SAME * left.min() + 1e-12)
    return int(lags[good[np.argmin(np.abs(lags[good]))]])
