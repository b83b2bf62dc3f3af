"""Signals moved by parts of a sample, without a change of their noise."""

from __future__ import annotations

import itertools

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_HALF = 12
"""Taps to either side of a fractional delay."""
_SHAPE = 8.0
"""Of its Kaiser window: ripples of 1e-4."""
_BINOMIAL = np.array([1.0, 4.0, 6.0, 4.0, 1.0]) / 16.0


def soften(values: Array, bounds: NDArray[np.int64]) -> Array:
    """A signal behind the binomial filter (1, 4, 6, 4, 1)/16, which leaves nothing near the Nyquist frequency.

    A delay by a part of a sample cannot keep what is there; if it took it away, noise would be least at half samples
    and a fit would find every dead time there. The same filter on all signals leaves linear equations as they are.

    Parameters
    ----------
    values : ndarray, shape (n,)
        In any unit.
    bounds : ndarray, shape (n_pieces + 1,)
        First sample of each unbroken piece, and n at the end.

    Returns
    -------
    ndarray, shape (n,)
    """
    found = np.empty_like(values)
    for first, last in itertools.pairwise(bounds):
        piece = values[first:last]
        if piece.size < _BINOMIAL.size:
            found[first:last] = piece
            continue
        front = 2.0 * piece[0] - piece[2:0:-1]
        back = 2.0 * piece[-1] - piece[-2:-4:-1]
        found[first:last] = np.convolve(np.concatenate((front, piece, back)), _BINOMIAL, mode="valid")
    return found


def delayed(values: Array, shift: float, bounds: NDArray[np.int64]) -> Array:
    """A signal that acts later than it is stamped, by any part of a sample.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Softened, in any unit.
    shift : float
        In samples; -0.5 is the middle of the interval that a sample begins.
    bounds : ndarray, shape (n_pieces + 1,)
        First sample of each unbroken piece, and n at the end.

    Returns
    -------
    ndarray, shape (n,)
        Beyond the ends of a piece its first and last values hold.
    """
    from scipy.special import i0

    whole = int(np.floor(shift))
    part = shift - whole
    taps = np.zeros(2 * _HALF)
    if part == 0.0:
        taps[_HALF - 1] = 1.0
    else:
        at = np.arange(2 * _HALF) - (_HALF - 1) - part
        taps = np.sinc(at) * i0(_SHAPE * np.sqrt(np.maximum(0.0, 1.0 - (at / _HALF) ** 2))) / i0(_SHAPE)
        taps /= taps.sum()
    found = np.empty_like(values)
    for first, last in itertools.pairwise(bounds):
        piece = values[first:last]
        size = piece.size
        # Output k is sum taps[j] piece[k - whole - (j - _HALF + 1)].
        front, back = _HALF + whole, _HALF - 1 - whole
        start, end = max(0, -front), size - max(0, -back)
        if start >= end:
            found[first:last] = piece[-1] if front < 0 else piece[0]
            continue
        padded = np.concatenate((np.full(max(0, front), piece[0]), piece[start:end], np.full(max(0, back), piece[-1])))
        found[first:last] = np.convolve(padded, taps, mode="valid")
    return found
