"""Stability by the argument principle agrees with the poles themselves, stable and unstable alike."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.kernels.frequency import hessenberg, plant_response
from gainbench.kernels.lifting import closed_loop
from gainbench.kernels.loop_grid import loop_grid
from gainbench.kernels.winding import fed_part, growth
from gainbench.model import Firmware, SpeedSensor
from gainbench.plant import refer
from gainbench.results import Gains
from gainbench.sampling import hardware, speed_loop
from quantities import assert_quantity
from rigs import fixed_sheet

CURRENT = Gains(kp=3.0, ki=2500.0)
NOTHING = np.empty(0)


def plant_of(window, *, feedforward):
    sheet = fixed_sheet("plain")
    stage = replace(
        sheet.rig.stage, speed_sensor=SpeedSensor.ENCODER, encoder_counts=4096, speed_window=window, speed_rate=1e3
    )
    plant = refer(sheet.rig)
    firmware = Firmware(back_emf_feedforward=feedforward)
    return speed_loop(hardware(plant, stage), plant, stage=stage, firmware=firmware, current=CURRENT).plant


@pytest.mark.parametrize("window", [1, 4, 30])
@pytest.mark.parametrize("feedforward", [False, True])
@pytest.mark.parametrize("ki", [0.0, 2.0])
def test_the_count_of_unstable_poles(window, feedforward, ki):
    plant = plant_of(window, feedforward=feedforward)
    grid = loop_grid(plant.period, window, peaks=NOTHING, spreads=NOTHING).w
    own = np.linalg.eigvals(plant.m)
    slow = own[np.argmin(np.abs(own))]
    assert slow.imag == 0.0
    seen = set()
    for kp in np.geomspace(0.003, 30.0, 15):
        poles = 1.0 + np.linalg.eigvals(closed_loop(plant, kp, ki * 5e-4, 0))
        expected = int(np.sum(np.abs(poles) > 1.0))
        turns = growth(plant, kp, ki * 5e-4, 0, slow.real, grid)
        outside = int(np.sum(np.abs(1.0 + np.delete(own, np.argmin(np.abs(own)))) > 1.0)) + 1 + (ki != 0.0) - turns
        assert_quantity(
            outside, expected, atol=1e-3, unit="poles", why="phase is a whole number of half turns at z = -1"
        )
        seen.add(expected > 0)
    assert seen == {True, False}


def test_the_part_that_is_fed_forward_is_a_plant_of_its_own():
    plant = hessenberg(plant_of(2, feedforward=True))
    part = fed_part(plant)
    w = np.array([100.0, 1000.0])
    got = plant_response(part, w)
    z = np.exp(1j * w * plant.period)
    for k in range(2):
        raw = plant.c @ np.linalg.solve((z[k] - 1.0) * np.eye(plant.m.shape[0]) - plant.m, plant.bw) + plant.dw
        expected = plant.scale * (z[k] ** -1 + z[k] ** -2) * raw
        assert_quantity(abs(got[k] - expected), 0.0, atol=1e-10 * abs(expected), unit="1", why="one elimination")
    assert math.isfinite(abs(got[0]))
