"""The curve's grid: rising, ending at Nyquist, dense where the loop turns."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.loop_curve import LAST_GAP, POINTS, far, grid, loop_curve
from gainbench.kernels.loop_records import SampledPlant
from quantities import assert_quantity

NOTHING = np.empty(0)
PERIOD = 1e-3
NYQUIST = math.pi / PERIOD


@pytest.mark.parametrize("window", [1, 2, 40])
@pytest.mark.parametrize("peaks", [[], [300.0], [0.4 * NYQUIST, 1.7 * NYQUIST, NYQUIST], [1e9]])
def test_the_grid_rises_from_far_below_to_the_nyquist_frequency(window, peaks):
    w = grid(PERIOD, window, np.array(peaks), np.full(len(peaks), 2.0))
    assert np.all(np.diff(w) > 0.0)
    assert w[-1] == NYQUIST
    assert_quantity(w[-2], NYQUIST * (1.0 - LAST_GAP), rtol=1e-12, unit="rad/s", why="rounding of one product")
    assert w[0] < 1e-8 * NYQUIST
    assert w.size >= POINTS


def test_points_gather_around_a_peak_and_its_alias():
    w = grid(PERIOD, 1, np.array([2.0 * NYQUIST - 500.0]), np.array([0.01]))
    assert np.abs(w - 500.0).min() == 0.0
    assert np.sum(np.abs(w - 500.0) < 0.1) >= 5


def test_neighbours_far_apart_are_told():
    assert not far(1.0 + 0j, 1.05 + 0.05j)
    assert far(1.0 + 0j, 1.0 + 0.5j)
    assert far(1.0 + 0j, -1.0 + 0j)
    assert far(1.0 + 0j, 2.0 + 0j)
    assert not far(0.01 + 0j, -0.01j)
    assert not far(100.0 + 0j, 300.0 + 0j)


def test_a_sharp_resonance_is_followed_through_its_turn():
    # A lightly damped pair at 0.3 of Nyquist, narrower than the even grid's step: a hint finds it.
    turn, decay = 0.3 * math.pi, 2e-4
    z = math.exp(-decay) * np.array([[math.cos(turn), -math.sin(turn)], [math.sin(turn), math.cos(turn)]])
    nothing = np.zeros(2)
    plant = SampledPlant(
        z - np.eye(2), np.array([1.0, 0.0]), np.array([0.0, 1e-3]), nothing, nothing,
        0.5, 0.0, 0.0, PERIOD, 0, 1, 1.0, 1.0,
    )  # fmt: skip
    reduced, w, loop = loop_curve(plant, 1.0, 0.0, 0, np.array([turn / PERIOD]), np.array([decay / PERIOD]))
    assert reduced.m.shape == (2, 2)
    assert np.all(np.diff(w) > 0.0)
    close = np.abs(w - turn / PERIOD) < 3.0 * decay / PERIOD
    assert close.sum() >= 10
    # At resonance the pair adds 1e-3 / (2 decay) = 2.5.
    assert_quantity(np.abs(loop[close] - 0.5).max(), 2.5, rtol=0.05, unit="1", why="points stand beside the summit")
