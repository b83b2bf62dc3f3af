"""Stability by the argument principle agrees with the poles themselves, stable and unstable alike."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.frequency import hessenberg, plant_response
from gainbench.kernels.lifting import closed_speed, speed_plant
from gainbench.kernels.winding import fed_part, half_turns
from quantities import assert_quantity

R, L, KE, J, B, TS = 0.6, 0.45e-3, 0.052, 7.1e-5, 2e-5, 50e-6
A = np.array([[-R / L, -KE / L, 0.0], [KE / J, -B / J, 0.0], [0.0, 1.0, 0.0]])
BV = np.array([1.0 / L, 0.0, 0.0])


@pytest.mark.parametrize("window", [1, 4, 30])
@pytest.mark.parametrize("back_emf", [0.0, KE])
@pytest.mark.parametrize("ki", [0.0, 2.0])
def test_the_count_of_unstable_poles(window, back_emf, ki):
    plant = speed_plant(A, BV, 0, TS, 1, 0.0, 2.66, 0.234, 0, back_emf, 10, 0, window, 1.0)
    own = np.linalg.eigvals(plant.m)
    slow = own[np.argmin(np.abs(own))]
    assert slow.imag == 0.0
    seen = set()
    for kp in np.geomspace(0.003, 30.0, 15):
        poles = 1.0 + np.linalg.eigvals(closed_speed(plant, kp, ki * 5e-4, 0))
        expected = int(np.sum(np.abs(poles) > 1.0))
        turns = half_turns(plant, kp, ki * 5e-4, 0, slow.real)
        outside = int(np.sum(np.abs(1.0 + np.delete(own, np.argmin(np.abs(own)))) > 1.0)) + 1 + (ki != 0.0) - turns
        assert_quantity(
            outside, expected, atol=1e-3, unit="poles", why="phase is a whole number of half turns at z = -1"
        )
        seen.add(expected > 0)
    assert seen == {True, False}


def test_the_part_that_is_fed_forward_is_a_plant_of_its_own():
    plant = hessenberg(speed_plant(A, BV, 0, TS, 1, 0.0, 2.66, 0.234, 0, KE, 10, 0, 2, 1.0))
    part = fed_part(plant)
    w = np.array([100.0, 1000.0])
    got = plant_response(part, w)
    z = np.exp(1j * w * plant.period)
    for k in range(2):
        raw = plant.c @ np.linalg.solve((z[k] - 1.0) * np.eye(plant.m.shape[0]) - plant.m, plant.bw) + plant.dw
        expected = plant.scale * (z[k] ** -1 + z[k] ** -2) * raw
        assert_quantity(abs(got[k] - expected), 0.0, atol=1e-10 * abs(expected), unit="1", why="one elimination")
    assert math.isfinite(abs(got[0]))
