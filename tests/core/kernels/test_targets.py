"""Crossovers at which one margin gives one bandwidth: each is checked by putting it back."""

from __future__ import annotations

import math

import numpy as np

from gainbench.kernels.frequency import gains_at, pi_at, plant_response
from gainbench.kernels.loop_records import SampledPlant
from gainbench.kernels.targets import crossovers_for_bandwidth
from quantities import assert_quantity


def test_every_crossover_gives_the_bandwidth_and_they_come_highest_first():
    period, margin, bandwidth = 1e-3, math.radians(55.0), 600.0
    nothing = np.zeros(1)
    plant = SampledPlant(
        np.array([[-0.02]]), np.ones(1), np.array([0.4]), nothing, nothing, 0.0, 0.0, 0.0, period, 1, 1, 1.0, 1.0
    )
    grid = np.geomspace(0.5, math.pi / period * (1.0 - 1e-6), 300)
    found = crossovers_for_bandwidth(plant, 0, margin, bandwidth, grid)
    assert found.size >= 1
    assert np.all(np.diff(found) < 0.0)
    at_bandwidth = plant_response(plant, np.array([bandwidth]))[0]
    for w in found:
        kp, ki_period = gains_at(plant_response(plant, np.array([w]))[0], w, period, 0, margin)
        loop = at_bandwidth * pi_at(kp, ki_period, 0, bandwidth, period)
        assert_quantity(abs(loop / (1.0 + loop)), math.sqrt(0.5), rtol=1e-9, unit="1", why="halved down to rounding")
