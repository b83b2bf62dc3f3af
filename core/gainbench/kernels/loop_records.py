"""The named tuples that the loop kernels take and return: plain scalars and arrays, SI, no numba."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray


class SampledPlant(NamedTuple):
    """What one PI controller sees from its output to its measured value, sampled at the controller's rate.

    In delta form, ``(x[n+1] - x[n]) = m x[n] + b0 u[n] + b1 u[n-1] + bw y[n]``, with

        raw[n]  = c x[n] + d0 u[n] + d1 u[n-1] + dw y[n]
        sum[n]  = scale (raw[n-shift] + raw[n-shift-1] + ... over ``window`` terms)
        y[n]    = y[n-1] + filter_gain (sum[n] - y[n-1])

    so that slow modes at fast sampling keep their digits.
    """

    m: NDArray[np.float64]
    """shape (n, n)."""
    c: NDArray[np.float64]
    """shape (n,)."""
    b0: NDArray[np.float64]
    """shape (n,)."""
    b1: NDArray[np.float64]
    """shape (n,)."""
    bw: NDArray[np.float64]
    """From the measured value itself, where it is fed forward, shape (n,)."""
    d0: float
    d1: float
    dw: float
    period: float
    """[s]."""
    shift: int
    """Whole periods from raw to measured value."""
    window: int
    scale: float
    filter_gain: float


class LoopNumbers(NamedTuple):
    """Figures of one loop in rad/s and plain ratios; NaN where there is none."""

    crossover: float
    """[rad/s]."""
    phase_margin: float
    """[rad]."""
    delay_margin: float
    """[s]."""
    gain_margin: float
    """Factor above 1."""
    gain_reduction: float
    """Factor below 1."""
    peak_sensitivity: float
    bandwidth: float
    """[rad/s]."""
