"""What the unknown start of each segment explains is taken out of residuals and sensitivities."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled

_NOTHING = 1e-20
"""Share of a column's own square below which a direction is spent."""


@compiled
def project(rows: NDArray[np.float64], nuisance: NDArray[np.float64], bounds: NDArray[np.int64]) -> NDArray[np.float64]:
    """Make each row orthogonal to the nuisance directions within each segment, in place.

    Parameters
    ----------
    rows : ndarray, shape (n_rows, n)
        Residual first, then sensitivities; changed.
    nuisance : ndarray, shape (n_nuisance, n)
        Sensitivities to the start of the segment, one or two; changed.
    bounds : ndarray, shape (n_segments + 1,)
        First sample of each segment, and n at the end.

    Returns
    -------
    ndarray, shape (n_segments, n_nuisance)
        How much of each direction the residual held: what the starts are to be moved by.
    """
    count = nuisance.shape[0]
    moved = np.zeros((bounds.size - 1, count))
    for segment in range(bounds.size - 1):
        first, last = bounds[segment], bounds[segment + 1]
        mixed = 0.0
        whole = np.zeros(2)
        for one in range(count):
            before = 0.0
            for k in range(first, last):
                before += nuisance[one, k] * nuisance[one, k]
            if one == 1 and whole[0] > 0.0:
                total = 0.0
                for k in range(first, last):
                    total += nuisance[0, k] * nuisance[1, k]
                mixed = total / whole[0]
                for k in range(first, last):
                    nuisance[1, k] -= mixed * nuisance[0, k]
            size = 0.0
            for k in range(first, last):
                size += nuisance[one, k] * nuisance[one, k]
            if size <= _NOTHING * before or size == 0.0:
                whole[one] = 0.0
                continue
            whole[one] = size
            for row in range(rows.shape[0]):
                total = 0.0
                for k in range(first, last):
                    total += nuisance[one, k] * rows[row, k]
                total /= size
                for k in range(first, last):
                    rows[row, k] -= total * nuisance[one, k]
                if row == 0:
                    moved[segment, one] = total
        if count == 2:
            moved[segment, 0] -= mixed * moved[segment, 1]
    return moved


@compiled
def block_sums(rows: NDArray[np.float64], count: int) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Scores and information of consecutive blocks of samples.

    Parameters
    ----------
    rows : ndarray, shape (1 + p, n)
        Residual first, then sensitivities.
    count : int
        Of blocks.

    Returns
    -------
    scores : ndarray, shape (count, p)
        Sum of sensitivity times residual.
    information : ndarray, shape (count, p, p)
        Sum of products of sensitivities.
    """
    p, n = rows.shape[0] - 1, rows.shape[1]
    scores = np.zeros((count, p))
    information = np.zeros((count, p, p))
    for block in range(count):
        for k in range(block * n // count, (block + 1) * n // count):
            for i in range(p):
                scores[block, i] += rows[1 + i, k] * rows[0, k]
                for j in range(i + 1):
                    information[block, i, j] += rows[1 + i, k] * rows[1 + j, k]
        for i in range(p):
            for j in range(i):
                information[block, j, i] = information[block, i, j]
    return scores, information


@compiled
def unroll(rows: NDArray[np.float64], bounds: NDArray[np.int64], keep: float) -> NDArray[np.float64]:
    """Residuals as what entered them at each sample, sensitivities as what such an entry does to the scores.

    With ``r[k] = keep r[k-1] + e[k]`` and ``l[k] = s[k] + keep l[k+1]`` within a segment ``sum s r = sum l e``
    exactly, for any ``keep``; where it is the model's own memory, ``e`` is the disturbance, without memory.

    Parameters
    ----------
    rows : ndarray, shape (1 + p, n)
        Residual first, then sensitivities.
    bounds : ndarray, shape (n_segments + 1,)
        First sample of each segment, and n at the end.
    keep : float
        Share of a state that is left after one sample.

    Returns
    -------
    ndarray, shape (1 + p, n)
        ``e``, 0 at the first sample of a segment, then ``l``.
    """
    out = np.empty_like(rows)
    for segment in range(bounds.size - 1):
        first, last = bounds[segment], bounds[segment + 1]
        out[0, first] = 0.0
        for k in range(first + 1, last):
            out[0, k] = rows[0, k] - keep * rows[0, k - 1]
        for row in range(1, rows.shape[0]):
            total = 0.0
            for k in range(last - 1, first - 1, -1):
                total = rows[row, k] + keep * total
                out[row, k] = total
    return out
