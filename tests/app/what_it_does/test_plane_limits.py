import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.model import MachineKind
from gainbench.plant import refer
from gainbench.sheetfile import parse_sheet
from gainbench_app.what_it_does.plane_limits import least_circle_share, plane_limits


@pytest.fixture
def sheets(demo_texts):
    return {name: parse_sheet(text, f"{name}.bench.toml").sheet for name, text in demo_texts.items()}


def test_brushed_limits_are_the_line_of_the_trade(sheets):
    plant = refer(sheets["label-unwinder"].rig)
    idle = plant.voltage_limit / plant.back_emf
    limits = plane_limits(plant, np.array([0.0, 0.5 * idle, idle]))
    stall = plant.torque * plant.voltage_limit / plant.resistance
    np.testing.assert_allclose(limits.voltage_high, [stall, 0.5 * stall, 0.0], atol=1e-12 * stall)
    np.testing.assert_allclose(limits.voltage_low, [-stall, -1.5 * stall, -2.0 * stall])
    most = plant.torque * plant.current_limit
    np.testing.assert_allclose(limits.high, [most, most, 0.0], atol=1e-12)
    np.testing.assert_allclose(limits.low, [-most] * 3)


def test_beyond_the_highest_speed_there_is_no_torque(sheets):
    plant = refer(sheets["label-unwinder"].rig)
    beyond = 1.01 * (plant.voltage_limit + plant.resistance * plant.current_limit) / plant.back_emf
    limits = plane_limits(plant, np.array([beyond]))
    assert math.isnan(limits.high[0])
    assert limits.voltage_high[0] < -plant.torque * plant.current_limit


def test_a_sine_machine_is_on_the_circle(sheets):
    plant = next(refer(one.rig) for one in sheets.values() if one.rig.machine.kind is MachineKind.PM_SINE)
    speed = np.linspace(-1.2, 1.2, 25) * plant.voltage_limit / plant.back_emf
    limits = plane_limits(plant, speed)
    for torque in (limits.voltage_low, limits.voltage_high):
        current = torque / plant.torque
        there = ~np.isnan(current)
        assert there.any()
        direct = plant.pole_pairs * speed * plant.inductance * current
        quadrature = plant.resistance * current + plant.back_emf * speed
        np.testing.assert_allclose(np.hypot(direct, quadrature)[there], plant.voltage_limit)


def test_the_share_of_the_circle_is_that_of_the_contract(sheets):
    sheet = next(one for one in sheets.values() if one.rig.machine.kind is MachineKind.PM_SINE)
    found = assess(sheet)
    trace, plant = found.response.trace, found.plant
    share = least_circle_share(plant, trace)
    k = int(np.argmax(np.abs(trace.speed * trace.current)))
    crossed = plant.pole_pairs * plant.inductance * trace.speed[k] * trace.current[k]
    assert share * plant.voltage_limit == pytest.approx(math.sqrt(plant.voltage_limit**2 - crossed**2))
    assert least_circle_share(replace(plant, voltage_limit=0.5 * abs(crossed)), trace) == 0.0
    assert least_circle_share(refer(sheets["label-unwinder"].rig), trace) is None
