"""From the continuous plant to what each PI controller sees, sampled exactly at the controller's own rate.

The update delay d = q + f splits each current period: over the first f Ts the voltage of tick k - q - 1 acts, over
the rest that of tick k - q. The closed current loop, as a one-tick map, is raised to the speed period.
"""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from gainbench.kernels.linalg import expm_minus_identity, matmul, power_minus_identity
from gainbench.kernels.loop_records import SampledPlant

BACKWARD = 0
FORWARD = 1
TRAPEZOID = 2


@njit(cache=True, nogil=True, error_model="numpy")
def held_step(
    a: NDArray[np.float64], bv: NDArray[np.float64], width: float
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """exp(a width) - I and the integral of exp(a t) bv over ``width``."""
    n = a.shape[0]
    joint = np.zeros((n + 1, n + 1))
    joint[:n, :n] = a * width
    joint[:n, n] = bv * width
    joint = expm_minus_identity(joint)
    return joint[:n, :n].copy(), joint[:n, n].copy()


@njit(cache=True, nogil=True, error_model="numpy")
def tick_step(
    a: NDArray[np.float64], bv: NDArray[np.float64], period: float, part: float
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """One current period: exp - I, input column of the older voltage (first ``part``), of the newer one (the rest)."""
    late, newer = held_step(a, bv, (1.0 - part) * period)
    if part == 0.0:
        return late, np.zeros(a.shape[0]), newer
    early, column = held_step(a, bv, part * period)
    older = column.copy()
    for r in range(a.shape[0]):
        for c in range(a.shape[0]):
            older[r] += late[r, c] * column[c]
    return late + early + matmul(late, early), older, newer


@njit(cache=True, nogil=True, error_model="numpy")
def current_plant(
    a: NDArray[np.float64], bv: NDArray[np.float64], sampled: int, period: float, held: int, part: float
) -> SampledPlant:
    """From voltage command to current sample. The last state, the angle, feeds nothing back and is dropped."""
    n = a.shape[0] - 1
    step, older, newer = tick_step(a[:n, :n].copy(), bv[:n].copy(), period, part)
    c = np.zeros(n)
    c[sampled] = 1.0
    return SampledPlant(step, c, newer, older, np.zeros(n), 0.0, 0.0, 0.0, period, held, 1, 1.0, 1.0)


@njit(cache=True, nogil=True, error_model="numpy")
def closed_tick(
    a: NDArray[np.float64],
    bv: NDArray[np.float64],
    sampled: int,
    period: float,
    held: int,
    part: float,
    kp: float,
    ki_period: float,
    rule: int,
    back_emf: float,
) -> NDArray[np.float64]:
    """One tick of the closed current loop in delta form.

    States: plant, the voltages under way (newest first), integrator, the previous error (trapezoid), then the two
    inputs current reference and measured speed as constant states.
    """
    n = a.shape[0]
    step, older, newer = tick_step(a, bv, period, part)
    stored = held + (1 if part > 0.0 else 0)
    trapezoid = rule == TRAPEZOID
    integral = n + stored
    size = integral + 1 + (1 if trapezoid else 0)
    reference, speed = size, size + 1
    d = np.zeros((size + 2, size + 2))
    error = np.zeros(size + 2)
    error[reference] = 1.0
    error[sampled] -= 1.0
    change = ki_period * error
    if trapezoid:
        change *= 0.5
        change[size - 1] += 0.5 * ki_period
    voltage = kp * error
    voltage[integral] += 1.0
    if rule != FORWARD:
        voltage += change
    voltage[speed] += back_emf
    d[:n, :n] = step
    for r in range(n):
        if held == 0:
            d[r] += newer[r] * voltage
        else:
            d[r, n + held - 1] += newer[r]
        if part > 0.0:
            d[r, n + held] += older[r]
    for j in range(stored):
        if j == 0:
            d[n] += voltage
        else:
            d[n + j, n + j - 1] += 1.0
        d[n + j, n + j] -= 1.0
    d[integral] += change
    if trapezoid:
        d[size - 1] += error
        d[size - 1, size - 1] -= 1.0
    return d


@njit(cache=True, nogil=True, error_model="numpy")
def without(d: NDArray[np.float64], index: int, size: int) -> NDArray[np.float64]:
    """The leading ``size`` rows and columns without the one at ``index``."""
    out = np.empty((size - 1, size - 1))
    for r in range(size - 1):
        for c in range(size - 1):
            out[r, c] = d[r if r < index else r + 1, c if c < index else c + 1]
    return out


@njit(cache=True, nogil=True, error_model="numpy")
def closed_current(
    a: NDArray[np.float64],
    bv: NDArray[np.float64],
    sampled: int,
    period: float,
    held: int,
    part: float,
    kp: float,
    ki_period: float,
    rule: int,
) -> NDArray[np.float64]:
    """Closed current loop in delta form, feedforward cut, the free angle left out."""
    d = closed_tick(a, bv, sampled, period, held, part, kp, ki_period, rule, 0.0)
    return without(d, a.shape[0] - 1, d.shape[0] - 2)


@njit(cache=True, nogil=True, error_model="numpy")
def speed_plant(
    a: NDArray[np.float64],
    bv: NDArray[np.float64],
    sampled: int,
    period: float,
    held: int,
    part: float,
    kp: float,
    ki_period: float,
    rule: int,
    back_emf: float,
    divisor: int,
    reference_delay: int,
    window: int,
    filter_gain: float,
) -> SampledPlant:
    """From current reference to measured speed at the speed rate, the current loop closed inside.

    ``window`` 0 is the ideal sensor; ``back_emf`` is Ke where it is fed forward, else 0.
    """
    n = a.shape[0]
    d = closed_tick(a, bv, sampled, period, held, part, kp, ki_period, rule, back_emf)
    size = d.shape[0] - 2
    # The old reference acts through the first ticks, the new one through the rest: only it enters the second power.
    before = power_minus_identity(d, reference_delay)
    after = power_minus_identity(d, divisor - reference_delay)
    whole = before + after + matmul(after, before)
    new = after[:size, size].copy()
    old = whole[:size, size] - new
    fed = whole[:size, size + 1].copy()
    angle = n - 1
    keep = np.array([r for r in range(size) if r != angle])
    m = without(whole, angle, size)
    tw = divisor * period
    c = np.zeros(size - 1)
    if window == 0:
        c[1] = 1.0
        return SampledPlant(m, c, new[keep], old[keep], fed[keep], 0.0, 0.0, 0.0, tw, 0, 1, 1.0, filter_gain)
    c[:] = whole[angle, :size][keep]
    return SampledPlant(
        m,
        c,
        new[keep],
        old[keep],
        fed[keep],
        new[angle],
        old[angle],
        fed[angle],
        tw,
        1,
        window,
        1.0 / (window * tw),
        filter_gain,
    )


@njit(cache=True, nogil=True, error_model="numpy")
def closed_speed(plant: SampledPlant, kp: float, ki_period: float, rule: int) -> NDArray[np.float64]:
    """Closed speed loop in delta form.

    States: those of the plant, the older reference, the raw values of the window, the measured value, the
    integrator, the previous error.
    """
    n = plant.m.shape[0]
    delayed = plant.window + plant.shift - 1
    older, raw = n, n + 1
    value = raw + delayed
    integral, previous = value + 1, value + 2
    size = value + 3
    now = np.zeros(size)
    for r in range(n):
        now[r] = plant.c[r]
    # raw value of this tick, of use only without a shift, where it has no direct part
    total = np.zeros(size)
    if plant.shift == 0:
        total += now
        for j in range(delayed):
            total[raw + j] += 1.0
    else:
        for j in range(plant.shift - 1, delayed):
            total[raw + j] += 1.0
    measured = plant.filter_gain * plant.scale * total
    measured[value] += 1.0 - plant.filter_gain
    error = -measured
    change = ki_period * error
    if rule == TRAPEZOID:
        change *= 0.5
        change[previous] += 0.5 * ki_period
    reference = kp * error
    reference[integral] += 1.0
    if rule != FORWARD:
        reference += change
    out = np.zeros((size, size))
    for r in range(n):
        out[r, :n] = plant.m[r]
        out[r, older] += plant.b1[r]
        out[r] += plant.b0[r] * reference + plant.bw[r] * measured
    out[older] = reference
    if delayed > 0:
        out[raw] = now + plant.d0 * reference + plant.dw * measured
        out[raw, older] += plant.d1
        for j in range(1, delayed):
            out[raw + j, raw + j - 1] = 1.0
    out[value] = measured
    out[integral] = change
    out[previous] = error
    for r in range(n, size):
        if r != integral:
            out[r, r] -= 1.0
    return out
