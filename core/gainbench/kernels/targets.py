"""Targets of a sampled loop: the crossovers at which one margin gives one bandwidth."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled
from gainbench.kernels.frequency import gains_at, hessenberg, pi_at, plant_at, workspace
from gainbench.kernels.loop_figures import CLOSED, measure
from gainbench.kernels.loop_records import SampledPlant

HALVINGS = 70
"""From neighbours on the grid down to rounding."""


@compiled
def miss(
    plant: SampledPlant,
    rule: int,
    margin: float,
    at_bandwidth: complex,
    bandwidth: float,
    w: float,
    work: NDArray[np.complex128],
) -> float:
    """How far |T| is above 1/sqrt(2) at the bandwidth when the loop crosses over at ``w`` with the margin."""
    kp, ki_period = gains_at(plant_at(plant, w, work), w, plant.period, rule, margin)
    return measure(int(np.int64(CLOSED)), at_bandwidth * pi_at(kp, ki_period, rule, bandwidth, plant.period))


@compiled
def crossovers_for_bandwidth(
    plant: SampledPlant, rule: int, margin: float, bandwidth: float, w: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Crossovers at which |T| is 1/sqrt(2) at the bandwidth, highest first; ``w`` is the rising grid to look on."""
    reduced = hessenberg(plant)
    work = workspace(reduced)
    at_bandwidth = plant_at(reduced, bandwidth, work)
    found = np.empty(w.size)
    count = 0
    high = w[w.size - 1]
    at_high = miss(reduced, rule, margin, at_bandwidth, bandwidth, high, work)
    for k in range(w.size - 2, -1, -1):
        low = w[k]
        at_low = miss(reduced, rule, margin, at_bandwidth, bandwidth, low, work)
        if (at_low > 0.0) != (at_high > 0.0) and not math.isnan(at_low) and not math.isnan(at_high):
            first, last = low, high
            for _ in range(HALVINGS):
                middle = 0.5 * (first + last)
                if middle in (first, last):
                    break
                value = miss(reduced, rule, margin, at_bandwidth, bandwidth, middle, work)
                if (value > 0.0) == (at_low > 0.0):
                    first = middle
                else:
                    last = middle
            found[count] = 0.5 * (first + last)
            count += 1
        high, at_high = low, at_low
    return found[:count].copy()
