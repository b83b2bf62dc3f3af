"""From the continuous plant to what each PI controller sees, sampled exactly at the controller's own rate.

The update delay d = q + f splits each current period: over the first f Ts the voltage of tick k - q - 1 acts, over
the rest that of tick k - q. The closed current loop, as a one-tick map, is raised to the speed period.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled
from gainbench.kernels.linalg import expm_minus_identity, matmul, power_minus_identity
from gainbench.kernels.loop_records import SampledPlant

BACKWARD = 0
FORWARD = 1
TRAPEZOID = 2


@compiled
def held_step(
    a: NDArray[np.float64], bv: NDArray[np.float64], width: float
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """exp(a width) - I and the integral of exp(a t) bv over ``width``."""
    n = a.shape[0]
    if width == 0.0:
        return np.zeros((n, n)), np.zeros(n)
    joint = np.zeros((n + 1, n + 1))
    for r in range(n):
        for c in range(n):
            joint[r, c] = a[r, c] * width
        joint[r, n] = bv[r] * width
    joint = expm_minus_identity(joint)
    step, column = np.empty((n, n)), np.empty(n)
    for r in range(n):
        for c in range(n):
            step[r, c] = joint[r, c]
        column[r] = joint[r, n]
    return step, column


@compiled
def tick_step(a: NDArray[np.float64], bv: NDArray[np.float64], period: float, part: float) -> NDArray[np.float64]:
    """One current period, shape (n, n + 2): exp - I, then the columns of the older and of the newer voltage.

    The older voltage acts through the first ``part`` of the period, the newer one through the rest.
    """
    n = a.shape[0]
    late, newer = held_step(a, bv, (1.0 - part) * period)
    early, older = held_step(a, bv, part * period)
    both = matmul(late, early)
    out = np.empty((n, n + 2))
    for r in range(n):
        carried = older[r]
        for c in range(n):
            out[r, c] = late[r, c] + early[r, c] + both[r, c]
            carried += late[r, c] * older[c]
        out[r, n] = carried
        out[r, n + 1] = newer[r]
    return out


@compiled
def closed_tick(
    tick: NDArray[np.float64],
    sampled: int,
    held: int,
    split: bool,
    kp: float,
    ki_period: float,
    rule: int,
    back_emf: float,
) -> NDArray[np.float64]:
    """One tick of the closed current loop in delta form; ``tick`` of :func:`tick_step`.

    States: plant, the voltages under way (newest first), integrator, the previous error (trapezoid), then the two
    inputs current reference and measured speed as constant states. ``split`` is True where two voltages act in a tick.
    """
    n = tick.shape[0]
    stored = held + (1 if split else 0)
    trapezoid = rule == TRAPEZOID
    integral = n + stored
    size = integral + 1 + (1 if trapezoid else 0)
    reference, speed = size, size + 1
    d = np.zeros((size + 2, size + 2))
    # Rows of what follows from the states at the tick: the change of the integral, and the voltage.
    half = 0.5 if trapezoid else 1.0
    change, voltage = np.zeros(size + 2), np.zeros(size + 2)
    change[reference] = half * ki_period
    change[sampled] = -half * ki_period
    if trapezoid:
        change[size - 1] = half * ki_period
    voltage[reference] = kp
    voltage[sampled] = -kp
    voltage[integral] = 1.0
    voltage[speed] = back_emf
    if rule != FORWARD:
        for c in range(size + 2):
            voltage[c] += change[c]
    for r in range(n):
        for c in range(n):
            d[r, c] = tick[r, c]
        if held == 0:
            for c in range(size + 2):
                d[r, c] += tick[r, n + 1] * voltage[c]
        else:
            d[r, n + held - 1] += tick[r, n + 1]
        if split:
            d[r, n + held] += tick[r, n]
    for j in range(stored):
        if j > 0:
            d[n + j, n + j - 1] = 1.0
        else:
            for c in range(size + 2):
                d[n, c] = voltage[c]
        d[n + j, n + j] -= 1.0
    for c in range(size + 2):
        d[integral, c] += change[c]
    if trapezoid:
        d[size - 1, reference] = 1.0
        d[size - 1, sampled] = -1.0
        d[size - 1, size - 1] = -1.0
    return d


@compiled
def lifted_loop(
    tick: NDArray[np.float64],
    sampled: int,
    held: int,
    split: bool,
    kp: float,
    ki_period: float,
    rule: int,
    back_emf: float,
    delay: int,
    divisor: int,
) -> tuple[NDArray[np.float64], float, float, float]:
    """``divisor`` ticks of the loop of :func:`closed_tick`, without the column of the angle, the last state of a plant.

    Returns shape (n + 4, n): the states' change, then a row for what the new reference, the older one, which acts
    through the first ``delay`` ticks, and the measured speed each add to it, and one for what the states add to the
    angle; beside it what those three add to the angle.
    """
    d = closed_tick(tick, sampled, held, split, kp, ki_period, rule, back_emf)
    size, angle = d.shape[0] - 2, tick.shape[0] - 1
    before = power_minus_identity(d, delay)
    after = power_minus_identity(d, divisor - delay)
    both = matmul(after, before)
    out = np.empty((size + 3, size - 1))
    still = np.empty(3)
    for r in range(size):
        source = r if r < angle else (r + 1 if r < size - 1 else angle)
        row = r if r < size - 1 else size + 2
        for c in range(size - 1):
            column = c if c < angle else c + 1
            out[row, c] = both[source, column] + before[source, column] + after[source, column]
        new = after[source, size]
        older = both[source, size] + before[source, size]
        measured = both[source, size + 1] + before[source, size + 1] + after[source, size + 1]
        if r < size - 1:
            out[size - 1, r], out[size, r], out[size + 1, r] = new, older, measured
        else:
            still[0], still[1], still[2] = new, older, measured
    return out, still[0], still[1], still[2]


@compiled
def closed_loop(plant: SampledPlant, kp: float, ki_period: float, rule: int) -> NDArray[np.float64]:
    """A sampled plant with its PI controller around it, in delta form.

    States: those of the plant, the older reference, the raw values of the window, the integrator, and where they count
    the measured value (filter) and the previous error (trapezoid).
    """
    n = plant.m.shape[0]
    delayed = plant.window + plant.shift - 1
    filtered, trapezoid = plant.filter_gain != 1.0, rule == TRAPEZOID
    older, raw = n, n + 1
    integral = raw + delayed
    value = integral + 1
    previous = value + (1 if filtered else 0)
    size = previous + (1 if trapezoid else 0)
    # Rows of what follows from the states at the tick: raw value, measured value, reference.
    now, measured = np.zeros(size), np.zeros(size)
    share = plant.filter_gain * plant.scale
    for c in range(n):
        now[c] = plant.c[c]
        if plant.shift == 0:
            measured[c] = share * plant.c[c]
    for j in range(max(plant.shift - 1, 0), delayed):
        measured[raw + j] = share
    if filtered:
        measured[value] = 1.0 - plant.filter_gain
    half = 0.5 if trapezoid else 1.0
    change, reference = np.zeros(size), np.zeros(size)
    for c in range(size):
        change[c] = -half * ki_period * measured[c]
    if trapezoid:
        change[previous] += half * ki_period
    for c in range(size):
        reference[c] = (0.0 if rule == FORWARD else change[c]) - kp * measured[c]
    reference[integral] += 1.0
    out = np.zeros((size, size))
    for r in range(n):
        for c in range(n):
            out[r, c] = plant.m[r, c]
        out[r, older] = plant.b1[r]
    for c in range(size):
        for r in range(n):
            out[r, c] += plant.b0[r] * reference[c] + plant.bw[r] * measured[c]
        out[older, c] = reference[c]
        if delayed > 0:
            out[raw, c] = now[c] + plant.d0 * reference[c] + plant.dw * measured[c]
        out[integral, c] = change[c]
        if filtered:
            out[value, c] = measured[c]
        if trapezoid:
            out[previous, c] = -measured[c]
    if delayed > 0:
        out[raw, older] += plant.d1
    for j in range(1, delayed):
        out[raw + j, raw + j - 1] = 1.0
    for r in range(n, size):
        if r != integral:
            out[r, r] -= 1.0
    return out
