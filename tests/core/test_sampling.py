"""The loops as their controllers meet them: delay, feedforward, elastic modes, agreement of the two rates."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.margins import plant_response
from gainbench.model import Firmware, IntegratorRule, SpeedSensor
from gainbench.plant import refer
from gainbench.results import Gains
from gainbench.sampling import current_loop, hardware, speed_loop, update_delay
from quantities import assert_quantity
from rigs import fixed_sheet, random_sheets

CURRENT = Gains(kp=2.66, ki=4681.0)


@pytest.fixture(scope="module")
def rig():
    return random_sheets(3, 1)[0].rig


@pytest.mark.parametrize(
    ("delay", "held", "part"),
    [(0.0, 0, 0.0), (0.25, 0, 0.25), (1.0, 1, 0.0), (1.5, 1, 0.5), (2.0, 2, 0.0), (1.0 - 1e-12, 1, 0.0)],
)
def test_the_update_delay_is_split_into_periods_and_a_part(rig, delay, held, part):
    found = update_delay(replace(rig.stage, update_delay=delay))
    assert found.held == held
    assert_quantity(found.part, part, atol=1e-12, unit="periods", why="parts below 1e-9 are none")


@pytest.mark.parametrize("delay", [0.0, 0.3, 1.0, 1.7, 2.0])
def test_d4_d9_delay_and_hold_cost_their_degrees(delay):
    # D4: (update_delay + 1/2) Ts costs 360 f (d + 1/2) Ts degrees; an exact delay, not an approximation of one (D9).
    # Identity. On a winding whose lag is far below, only the integration L di/dt = v is left, at -90 degrees.
    sheet = fixed_sheet("plain")
    machine = replace(
        sheet.rig.machine, resistance=1e-6, torque_constant=1e-6, back_emf_constant=None, speed_constant=None
    )
    rig = replace(sheet.rig, machine=machine, stage=replace(sheet.rig.stage, update_delay=delay, current_filter=0.0))
    plant = refer(rig)
    loop = current_loop(hardware(plant, rig.stage), Firmware())
    rate = rig.stage.current_rate
    for share in (6.0, 10.0, 20.0):
        w = math.tau * rate / share
        phase = np.angle(plant_response(loop, np.array([w]))[0] * 1j * np.exp(1j * w * (delay + 0.5) / rate))
        # A part of a period mixes two holds: the phase of (1 - f) + f z^-1 is f w Ts to second order only.
        allowed = 1e-6 if delay in (0.0, 1.0, 2.0) else 0.02
        assert_quantity(phase, 0.0, atol=allowed, unit="rad", why="closed form; second order in parts of a period")


def test_a_speed_loop_at_the_current_rate_is_the_current_loop_closed():
    # With one rate, an ideal sensor and no delay, speed by reference is T_i w/i of the same sampled plant.
    sheet = fixed_sheet("plain")
    stage = replace(
        sheet.rig.stage,
        speed_rate=sheet.rig.stage.current_rate,
        speed_sensor=SpeedSensor.IDEAL,
        speed_delay=0,
        update_delay=1.0,
        current_filter=0.0,
        speed_filter=0.0,
    )
    plant = refer(replace(sheet.rig, stage=stage))
    own = hardware(plant, stage)
    loop = current_loop(own, Firmware())
    outer = speed_loop(own, plant, stage=stage, firmware=Firmware(), current=CURRENT)
    w = np.geomspace(10.0, 0.9 * math.pi * stage.current_rate, 40)
    to_current = plant_response(loop, w)
    turned = replace(loop, plant=loop.plant._replace(c=np.eye(loop.plant.m.shape[0])[1]))
    to_speed = plant_response(turned, w)
    z = np.exp(1j * w / stage.current_rate)
    controller = CURRENT.kp + CURRENT.ki / stage.current_rate * z / (z - 1.0)
    expected = controller * to_speed / (1.0 + controller * to_current)
    got = plant_response(outer, w)
    assert_quantity(np.abs(got - expected) / np.abs(expected), 0.0, atol=1e-9, unit="1", why="two routes, one plant")


def test_feedforward_changes_the_speed_loop_and_not_the_current_loop():
    sheet = fixed_sheet("plain")
    plant = refer(sheet.rig)
    own = hardware(plant, sheet.rig.stage)
    w = np.geomspace(1.0, 1000.0, 5)
    off, on = Firmware(), Firmware(back_emf_feedforward=True)
    assert np.array_equal(plant_response(current_loop(own, off), w), plant_response(current_loop(own, on), w))
    loops = [speed_loop(own, plant, stage=sheet.rig.stage, firmware=one, current=CURRENT) for one in (off, on)]
    assert np.abs(plant_response(loops[0], w) / plant_response(loops[1], w) - 1.0).max() > 1e-4


def test_rules_and_modes():
    sheet = fixed_sheet("plain")
    plant = refer(sheet.rig)
    own = hardware(plant, sheet.rig.stage)
    assert own.modes == ()
    assert [current_loop(own, Firmware(integrator=rule)).rule for rule in IntegratorRule] == [0, 1, 2]
    elastic = replace(plant, elastic=True, motor_inertia=1e-3, load_inertia=2e-3, stiffness=100.0, damping=0.0)
    # K1: JM 1e-3, JL 2e-3, k 100: antiresonance 223.607 rad/s, resonance 387.298 rad/s. Derived.
    modes = hardware(elastic, sheet.rig.stage).modes
    assert_quantity([mode.imag for mode in modes], [223.607, 387.298], atol=5e-4, unit="rad/s", why="digits printed")
    # K3: with damping 0.01: decays c/(2 JL) = 2.5 and c (1/JM + 1/JL)/2 = 7.5 per second. Derived.
    damped = hardware(replace(elastic, damping=0.01, load_viscous=0.0), sheet.rig.stage).modes
    assert_quantity([mode.real for mode in damped], [-2.5, -7.5], rtol=1e-12, unit="1/s", why="closed form")
    assert hardware(replace(elastic, damping=100.0), sheet.rig.stage).modes == ()
