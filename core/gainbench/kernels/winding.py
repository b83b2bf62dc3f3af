"""Stability by the argument principle, for speed windows whose delay line would make a large state matrix.

With ``h = 1 - (measured value fed forward)`` and L = C G, ``(1 + L) h`` has the poles of C and of the plant's state
matrix. Times ``delta`` (the integrator's pole) and ``delta - slow`` (the plant's slowest real pole), what is left is
finite and real at z = 1 and at z = -1. Along the upper half of the unit circle its phase then grows by pi for every
zero less every pole within.

References
----------
K. J. Astrom, B. Wittenmark, Computer-Controlled Systems, 3rd ed., 1997, section 3.3, for the criterion (from memory).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled
from gainbench.kernels.frequency import hessenberg, pi_at, plant_at, workspace
from gainbench.kernels.loop_records import SampledPlant

TURN = 0.7
"""Largest phase step that is taken as it is [rad]."""
HALVINGS = 40


@compiled
def fed_part(plant: SampledPlant) -> SampledPlant:
    """The path from the measured value back to itself, as a plant."""
    none = np.zeros(plant.m.shape[0])
    return SampledPlant(
        plant.m,
        plant.c,
        plant.bw,
        none,
        none,
        plant.dw,
        0.0,
        0.0,
        plant.period,
        plant.shift,
        plant.window,
        plant.scale,
        plant.filter_gain,
    )


@compiled
def traced(
    plant: SampledPlant,
    fed: SampledPlant,
    kp: float,
    ki_period: float,
    rule: int,
    slow: float,
    w: float,
    work: NDArray[np.complex128],
) -> complex:
    """The function whose phase is followed; ``slow`` is NaN where no pole of the plant is taken out."""
    half = math.sin(0.5 * w * plant.period)
    delta = complex(-2.0 * half * half, math.sin(w * plant.period))
    value = 1.0 + plant_at(plant, w, work) * pi_at(kp, ki_period, rule, w, plant.period)
    value *= 1.0 - plant_at(fed, w, work)
    if ki_period != 0.0:
        value *= delta
    if not math.isnan(slow):
        value *= delta - slow
    return value


@compiled
def growth(plant: SampledPlant, kp: float, ki_period: float, rule: int, slow: float, w: NDArray[np.float64]) -> float:
    """Growth of the phase along the upper half circle, over pi; ``w`` is the rising grid to look on."""
    reduced = hessenberg(plant)
    fed = fed_part(reduced)
    work = workspace(reduced)
    places = np.empty(HALVINGS + 2)
    values = np.empty(HALVINGS + 2, dtype=np.complex128)
    depth = np.empty(HALVINGS + 2, dtype=np.int64)
    left, before = w[0], traced(reduced, fed, kp, ki_period, rule, slow, w[0], work)
    total = math.atan2(before.imag, before.real)
    if abs(total) > 0.5 * math.pi:
        total -= math.copysign(math.pi, total)
    for k in range(1, w.size):
        places[0], values[0] = w[k], traced(reduced, fed, kp, ki_period, rule, slow, w[k], work)
        depth[0] = 0
        top = 0
        while top >= 0:
            ratio = values[top] / before
            step = math.atan2(ratio.imag, ratio.real)
            if abs(step) > TURN and depth[top] < HALVINGS:
                middle = math.sqrt(left * places[top])
                depth[top] += 1
                depth[top + 1] = depth[top]
                places[top + 1] = middle
                values[top + 1] = traced(reduced, fed, kp, ki_period, rule, slow, middle, work)
                top += 1
            else:
                total += step
                left, before = places[top], values[top]
                top -= 1
    return total / math.pi
