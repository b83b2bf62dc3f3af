"""The winding kernel against closed forms."""

from __future__ import annotations

import numpy as np

from gainbench.kernels.identify_winding import COLUMNS, run_winding
from quantities import assert_quantity

STEP, R, L, K = 2e-4, 0.5, 1e-3, 0.05
SETS = np.array([[R, L, K]])
T = STEP * np.arange(200)


def current(voltage: np.ndarray, speed: np.ndarray, start: float = 0.0) -> np.ndarray:
    out = np.empty((1, T.size))
    bounds = np.array([0, T.size])
    run_winding(voltage[None], speed, STEP, SETS, np.zeros(1, dtype=np.int64), bounds, np.array([[start]]), out)
    return out[0]


def test_a_step_of_voltage():
    expected = 3.0 / R * (1.0 - np.exp(-R / L * T)) + 2.0 * np.exp(-R / L * T)
    found = current(np.full(T.size, 3.0), np.zeros(T.size), 2.0)
    assert_quantity(found, expected, rtol=1e-12, unit="A", why="exact steps")


def test_a_ramp_of_speed():
    # L di/dt + R i = -K a t has i = -K a/R (t - T + T exp(-t/T)), T = L/R.
    own = L / R
    expected = -K * 400.0 / R * (T - own + own * np.exp(-T / own))
    found = current(np.zeros(T.size), 400.0 * T)
    assert_quantity(found, expected, rtol=1e-9, atol=1e-12, unit="A", why="exact for a straight speed")


def test_segments_begin_anew():
    out = np.empty((1, T.size))
    starts = np.array([[0.0, 5.0]])
    bounds = np.array([0, 50, T.size])
    run_winding(np.zeros((1, T.size)), np.zeros(T.size), STEP, SETS, np.zeros(1, dtype=np.int64), bounds, starts, out)
    assert SETS.shape[1] == COLUMNS
    assert not out[0, :50].any()
    assert_quantity(out[0, 50:], 5.0 * np.exp(-R / L * T[:150]), rtol=1e-12, unit="A", why="exact steps")
