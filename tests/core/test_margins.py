"""Margins of whole loops: against python-control on loops built another way, and the rules about poles and nulls."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.margins import closed_poles, is_stable, locked_step, open_loop, plant_response, read_loop
from gainbench.model import Firmware
from gainbench.plant import refer, state_space
from gainbench.results import Gains
from gainbench.sampling import current_loop, hardware, speed_loop
from quantities import assert_quantity
from rigs import fixed_sheet

CURRENT = Gains(kp=3.0, ki=2500.0)
SPEED = Gains(kp=0.3, ki=12.0)


@pytest.fixture(scope="module")
def sheet():
    return fixed_sheet("plain")


@pytest.fixture(scope="module")
def inner(sheet):
    return current_loop(hardware(refer(sheet.rig), sheet.rig.stage), Firmware())


@pytest.fixture(scope="module")
def outer(sheet):
    plant = refer(sheet.rig)
    own = hardware(plant, sheet.rig.stage)
    return speed_loop(own, plant, stage=sheet.rig.stage, firmware=Firmware(), current=CURRENT)


def test_current_margins_agree_with_python_control(sheet, inner):
    import control

    # Built apart from the library: continuous state space sampled by python-control, one sample of delay as 1/z, the PI
    # as a fraction in z.
    period = sheet.rig.stage.current_period
    space = state_space(refer(sheet.rig))
    plant = control.ss(space.a[:2, :2], space.b[:2, :1], np.array([[1.0, 0.0]]), 0.0).sample(period, method="zoh")
    delay = control.tf([1.0], [1.0, 0.0], period)
    pi = control.tf([CURRENT.kp + CURRENT.ki * period, -CURRENT.kp], [1.0, -1.0], period)
    loop = control.ss(pi) * control.ss(delay) * plant
    gain, phase, sensitivity, _, cross, _ = control.stability_margins(loop, returnall=True)
    figures = read_loop(inner, CURRENT).figures
    why = "roots of polynomials in z in the other library"
    assert_quantity(figures.phase_margin_deg, min(phase), atol=1e-4, unit="deg", why=why)
    assert_quantity(figures.crossover_hz * math.tau, cross[np.argmin(phase)], rtol=1e-6, unit="rad/s", why=why)
    above = min(g for g in gain if g > 1.0)
    assert_quantity(figures.gain_margin_db, 20.0 * math.log10(above), atol=1e-4, unit="dB", why=why)
    assert_quantity(1.0 / figures.peak_sensitivity, min(sensitivity), rtol=1e-4, unit="1", why=why)


def test_the_curve_is_the_open_loop(inner):
    curve = read_loop(inner, CURRENT).curve
    again = open_loop(inner, CURRENT, frequency=curve.frequency_hz * math.tau)
    assert_quantity(np.abs(again / curve.open_loop - 1.0), 0.0, atol=1e-9, unit="1", why="the same elimination")
    assert not curve.open_loop.flags.writeable
    assert curve.frequency_hz[-1] == pytest.approx(5000.0, rel=1e-12)
    z = np.exp(1j * curve.frequency_hz * math.tau * 1e-4)
    pi = CURRENT.kp + CURRENT.ki * 1e-4 * z / (z - 1.0)
    plant = plant_response(inner, curve.frequency_hz * math.tau)
    assert_quantity(
        np.abs(pi * plant / curve.open_loop - 1.0)[:-1], 0.0, atol=1e-6, unit="1", why="z - 1 at 1e-10 of the rate"
    )


def test_an_unstable_loop_has_a_curve_and_no_figures(inner):
    wild = Gains(kp=40.0, ki=2500.0)
    assert not is_stable(inner, wild)
    reading = read_loop(inner, wild)
    assert reading.figures.stable is False
    assert reading.figures.crossover_hz is None
    assert reading.figures.peak_sensitivity is None
    assert reading.curve.open_loop.size > 100


def test_d5_the_edge_of_stability_of_an_integrator_with_a_sample_of_delay():
    # D5: K h/(z (z - 1)) is stable iff K h < 1, with poles at fs/6 on the edge. Derived identity.
    sheet = fixed_sheet("plain")
    machine = replace(sheet.rig.machine, resistance=1e-9, torque_constant=1e-9)
    rig = replace(sheet.rig, machine=machine)
    loop = current_loop(hardware(refer(rig), rig.stage), Firmware())
    edge = machine.inductance * rig.stage.current_rate
    assert is_stable(loop, Gains(kp=edge * (1.0 - 1e-6), ki=0.0))
    assert not is_stable(loop, Gains(kp=edge * (1.0 + 1e-6), ki=0.0))


def test_the_cancelled_pole_of_a_free_train_does_not_count():
    sheet = fixed_sheet("plain")
    rig = replace(sheet.rig, machine=replace(sheet.rig.machine, viscous_friction=0.0))
    loop = current_loop(hardware(refer(rig), rig.stage), Firmware())
    poles = closed_poles(loop, CURRENT)
    assert min(map(abs, poles)) < 1e-9
    assert is_stable(loop, CURRENT)


def test_proportional_speed_control_alone_is_stable_and_has_margins(outer):
    figures = read_loop(outer, Gains(kp=0.3, ki=0.0)).figures
    assert figures.stable
    assert figures.phase_margin_deg is not None
    assert 60.0 < figures.phase_margin_deg < 95.0


def test_a_long_window_is_judged_like_a_short_one(sheet):
    plant = refer(sheet.rig)
    own = hardware(plant, sheet.rig.stage)
    fixed = fixed_sheet("elastic")
    stage = replace(fixed.rig.stage, speed_window=200, speed_rate=2e3, current_rate=1e4)
    loop = speed_loop(own, plant, stage=stage, firmware=Firmware(), current=CURRENT)
    # 200 periods at 2 kHz delay by 50 ms: a crossover of 1 rad/s holds, one of 200 rad/s does not.
    per_speed = plant.inertia / plant.torque
    assert is_stable(loop, Gains(kp=per_speed * 1.0, ki=per_speed * 0.2))
    assert not is_stable(loop, Gains(kp=per_speed * 200.0, ki=per_speed * 0.2))
    poles = closed_poles(loop, Gains(kp=per_speed * 1.0, ki=per_speed * 0.2))
    assert max(abs(1.0 + pole) for pole in poles) < 1.0


def test_known_stability_is_taken_as_told(inner):
    assert read_loop(inner, CURRENT, stable=True).figures == read_loop(inner, CURRENT).figures


def test_locked_step_is_a_share_of_its_reference(sheet):
    plant = refer(sheet.rig)
    own = hardware(plant, sheet.rig.stage)
    step = locked_step(own, plant, gains=CURRENT, rule=0)
    assert step.rise_s is not None
    assert step.overshoot_percent is not None
    assert step.time[0] == 0.0
    assert step.current[0] == 0.0
    assert step.time.shape == step.current.shape
    assert not step.current.flags.writeable
    low, high = (
        float(
            np.interp(
                level,
                step.current[: np.argmax(step.current > 0.95) + 1],
                step.time[: np.argmax(step.current > 0.95) + 1],
            )
        )
        for level in (0.1, 0.9)
    )
    assert_quantity(step.rise_s, high - low, rtol=0.02, unit="s", why="straight lines between drawn points")
    runaway = locked_step(own, plant, gains=Gains(kp=60.0, ki=2500.0), rule=0)
    assert runaway.rise_s is None
    assert runaway.overshoot_percent is None
