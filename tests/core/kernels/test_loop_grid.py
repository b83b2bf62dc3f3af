"""The grid: rising, ending at Nyquist, with points around what it could miss."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.loop_grid import LAST_GAP, POINTS, from_on, half_turns, loop_grid
from quantities import assert_quantity

PERIOD = 1e-3
NYQUIST = math.pi / PERIOD


@pytest.mark.parametrize("window", [1, 2, 40])
@pytest.mark.parametrize("peaks", [[], [300.0], [0.4 * NYQUIST, 1.7 * NYQUIST, NYQUIST], [1e9]])
def test_the_grid_rises_from_far_below_to_the_nyquist_frequency(window, peaks):
    w = loop_grid(PERIOD, window, peaks=np.array(peaks), spreads=np.full(len(peaks), 2.0)).w
    assert np.all(np.diff(w) > 0.0)
    assert w[-1] == NYQUIST
    assert_quantity(w[-2], NYQUIST * (1.0 - LAST_GAP), rtol=1e-12, unit="rad/s", why="rounding of one product")
    assert w[0] < 1e-8 * NYQUIST
    assert w.size >= POINTS


def test_points_gather_around_a_peak_and_its_alias():
    w = loop_grid(PERIOD, 1, peaks=np.array([2.0 * NYQUIST - 500.0]), spreads=np.array([0.01])).w
    assert_quantity(np.abs(w - 500.0).min(), 0.0, atol=1e-9, unit="rad/s", why="folded in shares of Nyquist")
    assert np.sum(np.abs(w - 500.0) < 0.1) >= 5


def test_half_turns_are_sines_and_cosines():
    w = loop_grid(PERIOD, 1, peaks=np.empty(0), spreads=np.empty(0)).w
    turned = half_turns(w, PERIOD)
    assert_quantity(turned[0], np.sin(0.5 * w * PERIOD), rtol=1e-15, unit="1", why="the same function")
    assert_quantity(turned[0, -1], 1.0, rtol=1e-15, unit="1", why="half the Nyquist turn is a right angle")
    assert_quantity(np.hypot(turned[0], turned[1]), 1.0, rtol=1e-14, unit="1", why="a point on the circle")


@pytest.mark.parametrize("peaks", [[], [300.0]])
def test_a_grid_carries_its_half_turns(peaks):
    grid = loop_grid(PERIOD, 1, peaks=np.array(peaks), spreads=np.full(len(peaks), 2.0))
    wanted = half_turns(grid.w, PERIOD)
    assert_quantity(grid.turned, wanted, rtol=1e-12, atol=1e-15, unit="1", why="rounding of the turn")
    part = from_on(grid, 100.0)
    assert np.array_equal(part.w, grid.w[grid.w >= 100.0])
    assert np.array_equal(part.turned, grid.turned[:, grid.w >= 100.0])
    assert from_on(grid, 0.0).w.size == grid.w.size
