"""The curve puts points in where the loop turns."""

from __future__ import annotations

import math

import numpy as np

from gainbench.kernels.frequency import hessenberg
from gainbench.kernels.loop_curve import edge_count, edges_of_one, far, trace_loop
from gainbench.kernels.loop_grid import loop_grid
from gainbench.kernels.loop_records import SampledPlant
from quantities import assert_quantity

PERIOD = 1e-3


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
    grid = loop_grid(PERIOD, 1, peaks=np.array([turn / PERIOD]), spreads=np.array([decay / PERIOD]))
    w, loop = trace_loop(hessenberg(plant), 1.0, 0.0, 0, grid)
    assert w.size > grid.w.size
    assert np.all(np.diff(w) > 0.0)
    close = np.abs(w - turn / PERIOD) < 3.0 * decay / PERIOD
    assert close.sum() >= 10
    # At resonance the pair adds 1e-3 / (2 decay) = 2.5.
    assert_quantity(np.abs(loop[close] - 0.5).max(), 2.5, rtol=0.05, unit="1", why="points stand beside the summit")


def test_edges_are_where_the_gain_goes_through_one():
    loop = np.array([2.0, 1.5j, 0.5, -0.2, -3.0, 1.0, 0.1], dtype=complex)
    loop.setflags(write=False)
    assert edges_of_one(loop).tolist() == [1, 3, 4]
    assert [edge_count(loop), edge_count(loop[:2]), edge_count(loop[:0])] == [3, 0, 0]
    assert edges_of_one(loop[:2]).size == 0
    assert edges_of_one(loop[:0]).size == 0
