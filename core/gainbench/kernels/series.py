"""The motion over a piece that is short against the plant, as a power series: instants in it, and its energy."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.motion import CHARGE, LOAD_RESTS, MOTOR_RESTS
from gainbench.kernels.response_records import Flow, Inputs, PlantState

HALVINGS = 52
"""Of a piece, to find an instant in it: to the rounding of the instant itself."""
SAME_INSTANT = 1e-15
"""Share of a piece below which the search for a zero ends."""


@compiled
def build_series(series: NDArray[np.float64], flow: Flow, resting: int, x: PlantState, u: Inputs, width: float) -> None:
    """Fill the power series of states and charge in the share of ``width`` [s] that has passed, by terms and states."""
    i, w, f, l, t = x.current, x.speed, x.filtered, x.load_speed, x.twist  # noqa: E741
    series[0, 0], series[0, 1], series[0, 2], series[0, 3], series[0, 4] = i, w, f, l, t
    series[0, 5], series[0, CHARGE] = x.angle, 0.0
    pushed, motor_pushed, load_pushed = flow.iv * u.voltage, flow.wd * u.motor_drag, flow.ld * u.load_drag
    for term in range(1, series.shape[0]):
        share = width / term
        di = flow.ii * i + flow.iw * w + pushed
        dw = flow.wi * i + flow.ww * w + flow.wl * l + flow.wt * t + motor_pushed
        df = flow.fi * i + flow.ff * f
        dl = flow.lw * w + flow.ll * l + flow.lt * t + load_pushed
        dt = w - l
        if resting & MOTOR_RESTS:
            dw = 0.0
        if resting & LOAD_RESTS:
            dl = 0.0
        series[term, 5], series[term, CHARGE] = share * w, share * i
        i, w, f, l, t = share * di, share * dw, share * df, share * dl, share * dt  # noqa: E741
        series[term, 0], series[term, 1], series[term, 2], series[term, 3], series[term, 4] = i, w, f, l, t
        pushed = motor_pushed = load_pushed = 0.0


@inlined
def value_at(series: NDArray[np.float64], row: int, share: float) -> float:
    """One state, or the charge, at a share of the piece."""
    value = 0.0
    for term in range(series.shape[0] - 1, 0, -1):
        value = (value + series[term, row]) * share
    return float(value + series[0, row])


@inlined
def slope_at(series: NDArray[np.float64], row: int, share: float) -> float:
    """Derivative of one state by the share, at a share of the piece."""
    value = 0.0
    for term in range(series.shape[0] - 1, 0, -1):
        value = value * share + term * series[term, row]
    return value


@compiled
def state_at(series: NDArray[np.float64], flow: Flow, share: float) -> PlantState:
    """The state at a share of the piece."""
    filtered = load_speed = twist = 0.0
    if flow.fi != 0.0:
        filtered = value_at(series, 2, share)
    if flow.elastic:
        load_speed, twist = value_at(series, 3, share), value_at(series, 4, share)
    return PlantState(
        value_at(series, 0, share),
        value_at(series, 1, share),
        filtered,
        load_speed,
        twist,
        value_at(series, 5, share),
    )


@compiled
def turning_point(series: NDArray[np.float64], end: float) -> float:
    """Share up to ``end`` where the current's slope changes its sign; ``end`` where it does not."""
    before = series[1, 0]
    if before * slope_at(series, 0, end) >= 0.0:
        return end
    low, high = 0.0, end
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        if slope_at(series, 0, middle) * before > 0.0:
            low = middle
        else:
            high = middle
    return high


@compiled
def zero_between(series: NDArray[np.float64], low: float, high: float) -> float:
    """Share at which the current, monotone from ``low`` to ``high`` and of other sign there, is zero.

    By Newton's method kept within its bracket.
    """
    before, after = value_at(series, 0, low), value_at(series, 0, high)
    rising = after > before
    share = low + (high - low) * before / (before - after)
    for _ in range(HALVINGS):
        value = slope = 0.0
        for term in range(series.shape[0] - 1, -1, -1):
            slope = slope * share + value
            value = value * share + series[term, 0]
        if (value > 0.0) == rising:
            high = share
        else:
            low = share
        closer = share - value / slope if slope != 0.0 else -1.0
        if not low <= closer <= high:
            closer = 0.5 * (low + high)
        step, share = closer - share, closer
        if abs(step) < SAME_INSTANT:
            break
    return share


@compiled
def series_energy(series: NDArray[np.float64], voltage: float, end: float) -> float:
    """Integral of -v i where v i < 0 up to a share of the piece, split where the current changes its sign [J]."""
    if voltage == 0.0:
        return 0.0
    turn = turning_point(series, end)
    given = charge = low = 0.0
    current = series[0, 0]
    for part in range(2):
        high = turn if part == 0 else end
        if high > low:
            after, total = value_at(series, 0, high), value_at(series, CHARGE, high)
            if current * after < 0.0:
                middle = value_at(series, CHARGE, zero_between(series, low, high))
                given += max(0.0, -voltage * (middle - charge))
                charge = middle
            given += max(0.0, -voltage * (total - charge))
            low, charge, current = high, total, after
    return given


@inlined
def sign_kept(flow: Flow, x: PlantState, y: PlantState, voltage: float, time: float) -> int:
    """1: v i stays at or above 0 from x to y; -1: at or below 0; 0: it may change its sign."""
    ahead = x.current + (flow.ii * x.current + flow.iw * x.speed + flow.iv * voltage) * time
    before, after, aimed = voltage * x.current, voltage * y.current, voltage * ahead
    # Without a branch, so that many are looked at together.
    takes = (before >= 0.0) & (after >= 0.0) & (aimed >= 0.0)
    gives = (before <= 0.0) & (after <= 0.0) & (aimed <= 0.0)
    return 1 if takes else (-1 if gives else 0)
