"""Frequency response of a sampled plant and of a PI controller, from state space in delta form.

With z = exp(j w T) and delta = z - 1 = -2 sin^2(w T/2) + j sin(w T), the response is c (delta I - m)^-1 b + d: no
polynomial in z is expanded, so that frequencies far below the rate keep their digits. The state matrix is brought to
Hessenberg form once, so that each frequency costs one elimination below the diagonal.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.lifting import BACKWARD, FORWARD
from gainbench.kernels.linalg import to_hessenberg
from gainbench.kernels.loop_records import SampledPlant


@compiled
def hessenberg(plant: SampledPlant) -> SampledPlant:
    """The same plant in other coordinates, by reflections: m is zero below its first subdiagonal."""
    n = plant.m.shape[0]
    m, columns = plant.m.copy(), np.empty((4, n))
    for k in range(n):
        columns[0, k], columns[1, k], columns[2, k], columns[3, k] = plant.c[k], plant.b0[k], plant.b1[k], plant.bw[k]
    to_hessenberg(m, columns)
    return SampledPlant(
        m,
        columns[0],
        columns[1],
        columns[2],
        columns[3],
        plant.d0,
        plant.d1,
        plant.dw,
        plant.period,
        plant.shift,
        plant.window,
        plant.scale,
        plant.filter_gain,
    )


@compiled
def workspace(plant: SampledPlant) -> NDArray[np.complex128]:
    """Room for one elimination, shape (n + 3, n)."""
    n = plant.m.shape[0]
    return np.empty((n + 3, n), dtype=np.complex128)


@inlined
def inverse(value: complex) -> complex:
    """1/value without the scaling of a general division: pivots are far from where it would be needed."""
    size = 1.0 / (value.real * value.real + value.imag * value.imag)
    return complex(value.real * size, -value.imag * size)


@inlined
def smoothing(plant: SampledPlant, half: float, level: float) -> complex:
    """Window and filter of the measured value, without its scale and its whole periods."""
    value = complex(1.0, 0.0)
    if plant.window > 1:
        # Sum of z^-i over the window: a ratio of sines with half the window's delay.
        turn = math.atan2(half, level)
        ratio = math.sin(turn * plant.window) / half
        lag = -turn * (plant.window - 1)
        value *= ratio * complex(math.cos(lag), math.sin(lag))
    if plant.filter_gain != 1.0:
        back = complex(1.0 - 2.0 * half * half, -2.0 * half * level)
        value *= plant.filter_gain * inverse(1.0 - (1.0 - plant.filter_gain) * back)
    return value


@inlined
def plant_turned(plant: SampledPlant, half: float, level: float, work: NDArray[np.complex128]) -> complex:
    """Measured value over controller output, ``plant.m`` upper Hessenberg; sine and cosine of w T/2 tell where."""
    n = plant.m.shape[0]
    delta = complex(-2.0 * half * half, 2.0 * half * level)
    back = complex(1.0 + delta.real, -delta.imag)
    fed = plant.dw != 0.0
    for r in range(n):
        if plant.bw[r] != 0.0:
            fed = True
    # Rows of delta I - m, and both right-hand sides behind them.
    for r in range(n):
        for k in range(max(r - 1, 0), n):
            work[r, k] = -plant.m[r, k]
        work[r, r] += delta
        work[n, r] = plant.b0[r] + plant.b1[r] * back
        work[n + 1, r] = plant.bw[r]
    for k in range(n - 1):
        low = work[k + 1, k]
        top = work[k, k]
        if low == 0.0:
            work[n + 2, k] = inverse(top)
            continue
        if abs(low.real) + abs(low.imag) > abs(top.real) + abs(top.imag):
            for j in range(k, n):
                work[k, j], work[k + 1, j] = work[k + 1, j], work[k, j]
            work[n, k], work[n, k + 1] = work[n, k + 1], work[n, k]
            work[n + 1, k], work[n + 1, k + 1] = work[n + 1, k + 1], work[n + 1, k]
            low, top = top, low
        pivot = inverse(top)
        work[n + 2, k] = pivot
        factor = low * pivot
        for j in range(k + 1, n):
            work[k + 1, j] -= factor * work[k, j]
        work[n, k + 1] -= factor * work[n, k]
        if fed:
            work[n + 1, k + 1] -= factor * work[n + 1, k]
    work[n + 2, n - 1] = inverse(work[n - 1, n - 1])
    raw = plant.d0 + plant.d1 * back
    loop = complex(plant.dw, 0.0)
    for side in range(2 if fed else 1):
        for k in range(n - 1, -1, -1):
            value = work[n + side, k]
            for j in range(k + 1, n):
                value -= work[k, j] * work[n + side, j]
            value *= work[n + 2, k]
            work[n + side, k] = value
            if side == 0:
                raw += plant.c[k] * value
            else:
                loop += plant.c[k] * value
    ahead = plant.scale * smoothing(plant, half, level)
    for _ in range(plant.shift):
        ahead *= back
    if fed:
        return ahead * raw / (1.0 - ahead * loop)
    return ahead * raw


@compiled
def plant_at(plant: SampledPlant, w: float, work: NDArray[np.complex128]) -> complex:
    """Measured value over controller output at one frequency; ``plant.m`` is upper Hessenberg."""
    turn = 0.5 * w * plant.period
    return plant_turned(plant, math.sin(turn), math.cos(turn), work)


@inlined
def integral_turned(half: float, level: float, rule: int) -> complex:
    """Integral part over error for Ki T = 1: backward (1 + d)/d, forward 1/d, trapezoid (2 + d)/(2 d), d = z - 1."""
    # 1/(z - 1) = -1/2 - j/2 cot(w T/2), exactly.
    share = 0.5 if rule == BACKWARD else (-0.5 if rule == FORWARD else 0.0)
    return complex(share, -0.5 * level / half)


@compiled
def integral_at(w: float, period: float, rule: int) -> complex:
    """Integral part over error for Ki T = 1 at one frequency."""
    turn = 0.5 * w * period
    return integral_turned(math.sin(turn), math.cos(turn), rule)


@compiled
def pi_at(kp: float, ki_period: float, rule: int, w: float, period: float) -> complex:
    """The PI controller at one frequency."""
    return kp + ki_period * integral_at(w, period, rule)


@compiled
def loop_at(
    plant: SampledPlant, kp: float, ki_period: float, rule: int, w: float, work: NDArray[np.complex128]
) -> complex:
    """The open loop at one frequency; ``plant.m`` is upper Hessenberg."""
    turn = 0.5 * w * plant.period
    half, level = math.sin(turn), math.cos(turn)
    return plant_turned(plant, half, level, work) * (kp + ki_period * integral_turned(half, level, rule))


@compiled
def plant_response(plant: SampledPlant, w: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Measured value over controller output, shape of ``w``."""
    reduced = hessenberg(plant)
    work = workspace(reduced)
    out = np.empty(w.size, dtype=np.complex128)
    for k in range(w.size):
        out[k] = plant_at(reduced, w[k], work)
    return out


@compiled
def gains_at(response: complex, w: float, period: float, rule: int, margin: float) -> tuple[float, float]:
    """The one kp and Ki T with which L(w) = exp(j (margin - pi)), of any sign."""
    wanted = cmath.exp(complex(0.0, margin - math.pi)) / response
    shape = integral_at(w, period, rule)
    if shape.imag == 0.0:
        return math.nan, math.nan
    ki_period = wanted.imag / shape.imag
    return wanted.real - ki_period * shape.real, ki_period


@compiled
def gains_for_margin(plant: SampledPlant, w: float, rule: int, margin: float) -> tuple[float, float]:
    """The one kp and Ki T with ``|L| = 1`` and the margin at ``w``, of any sign."""
    reduced = hessenberg(plant)
    return gains_at(plant_at(reduced, w, workspace(reduced)), w, plant.period, rule, margin)


@compiled
def gains_over(
    response: NDArray[np.complex128], w: NDArray[np.float64], period: float, rule: int, margin: float
) -> NDArray[np.float64]:
    """``gains_at`` for each frequency, shape (2, n)."""
    out = np.empty((2, w.size))
    for k in range(w.size):
        out[0, k], out[1, k] = gains_at(response[k], w[k], period, rule, margin)
    return out
