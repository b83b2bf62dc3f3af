"""The current of a winding under a known voltage and speed, for many sets of parameters side by side.

``L di/dt = v - R i - Ke w``; over an interval the voltage is constant and the speed goes straight from one sample to
the next, so that every step is exact.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled

RESISTANCE = 0
INDUCTANCE = 1
BACK_EMF = 2
COLUMNS = 3
"""Columns of a set of parameters, SI."""


@compiled
def run_winding(
    voltage: NDArray[np.float64],
    speed: NDArray[np.float64],
    step: float,
    sets: NDArray[np.float64],
    source: NDArray[np.int64],
    bounds: NDArray[np.int64],
    starts: NDArray[np.float64],
    out: NDArray[np.float64],
) -> None:
    """Run every set over every segment, each segment from a start of its own.

    Parameters
    ----------
    voltage : ndarray, shape (n_sources, n)
        Mean voltage from each sample to the next [V].
    speed : ndarray, shape (n,)
        At the samples [rad/s].
    step : float
        From sample to sample [s].
    sets : ndarray, shape (n_sets, 3)
        Parameters in the order of the constants above.
    source : ndarray, shape (n_sets,)
        Which row of ``voltage`` drives the set.
    bounds : ndarray, shape (n_segments + 1,)
        First sample of each segment, and n at the end.
    starts : ndarray, shape (n_sets, n_segments)
        Current at the first sample of each segment [A].
    out : ndarray, shape (n_sets, n)
        Current [A]; filled.
    """
    for one in range(sets.shape[0]):
        resistance, inductance, constant = sets[one, RESISTANCE], sets[one, INDUCTANCE], sets[one, BACK_EMF]
        x = resistance * step / inductance
        share = -math.expm1(-x)
        gain = share / resistance
        keep = 1.0 - share
        # What a straight change over the interval leaves of itself at its end.
        late = (1.0 - share / x) / resistance * constant
        early = gain * constant - late
        drive = voltage[source[one]]
        for segment in range(bounds.size - 1):
            current = starts[one, segment]
            out[one, bounds[segment]] = current
            for k in range(bounds[segment], bounds[segment + 1] - 1):
                current = keep * current + gain * drive[k] - early * speed[k] - late * speed[k + 1]
                out[one, k + 1] = current
