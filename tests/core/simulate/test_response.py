"""The time response: against plain integration, against sequences worked by hand, and by what must always hold."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drives import (
    CURRENT_GAINS,
    DUTY,
    ELASTIC,
    ENCODER,
    FIRMWARE,
    RIGID,
    SINE,
    SPEED_GAINS,
    STAGE,
    respond_to,
)
from gainbench.kernels.response import run_elastic, run_plain, run_rigid
from gainbench.model import Duty, Firmware, IntegratorRule, MachineKind, WindupRule
from gainbench.results import Gains
from gainbench.simulate import start_breaks, warm_up_response
from plain_drive import NAMES, plain_response
from quantities import assert_quantity

SHORT = replace(DUTY, reference_speed=60.0, load_at=4e-3, stop_at=7e-3, length=10e-3)
RUBBING = replace(RIGID, motor_coulomb=0.02, efficiency=0.7)
SWINGING = replace(ELASTIC, motor_coulomb=0.015, load_coulomb=0.02, efficiency=0.8)

CASES = {
    "plain": {},
    "no delay": {"stage": replace(STAGE, update_delay=0.0)},
    "part of a period": {"stage": replace(STAGE, update_delay=0.35)},
    "more than a period": {"stage": replace(STAGE, update_delay=1.6, speed_delay=3)},
    "two periods": {"stage": replace(STAGE, update_delay=2.0, speed_delay=9)},
    "one rate": {"stage": replace(STAGE, speed_rate=20e3), "speed": Gains(kp=0.1, ki=5.0)},
    "forward": {"firmware": Firmware(integrator=IntegratorRule.FORWARD), "reference_weight": 0.0},
    "trapezoid": {
        "firmware": Firmware(integrator=IntegratorRule.TRAPEZOID, windup=WindupRule.BACK_CALCULATION),
        "reference_weight": 0.5,
    },
    "feedforward": {"firmware": Firmware(back_emf_feedforward=True), "plant": replace(RIGID, voltage_limit=7.0)},
    "encoder": {"stage": ENCODER, "load_torque": 0.05},
    "encoder, window and filter": {"stage": replace(ENCODER, speed_window=3, speed_filter=4e-4, encoder_counts=500)},
    "q axis on its limit": {"plant": replace(SINE, voltage_limit=4.0), "duty": replace(SHORT, reference_speed=-200.0)},
    "elastic": {"plant": ELASTIC, "load_torque": -0.08, "stage": replace(STAGE, update_delay=0.5)},
    "friction": {"plant": RUBBING, "load_torque": 0.06, "duty": replace(SHORT, load_step=-0.2, stop_ramp=2e4)},
    "friction and encoder": {"plant": RUBBING, "stage": ENCODER, "duty": replace(SHORT, reference_ramp=2e4)},
    "two bodies that stick": {"plant": SWINGING, "load_torque": 0.05, "duty": replace(SHORT, load_step=0.4)},
    "a load that starts to switch on the way": {
        "plant": replace(RIGID, efficiency=0.6),
        "duty": replace(SHORT, reference_speed=-60.0, load_step=-0.1),
    },
}


@pytest.mark.parametrize("name", CASES)
def test_response_agrees_with_plain_integration(name):
    case = {
        "plant": RIGID,
        "stage": STAGE,
        "firmware": FIRMWARE,
        "load_torque": 0.0,
        "reference_weight": 1.0,
        "current": CURRENT_GAINS,
        "speed": SPEED_GAINS,
        "duty": SHORT,
    } | CASES[name]
    got = respond_to(case["duty"], **{key: value for key, value in case.items() if key != "duty"})
    places = [case[key] for key in ("plant", "stage", "firmware", "duty")]
    rest = {key: case[key] for key in ("load_torque", "reference_weight", "current", "speed")}
    rows, energy = plain_response(*places, **rest)
    for signal in NAMES:
        wanted = rows[signal]
        scale = float(np.abs(wanted).max())
        assert_quantity(
            getattr(got.trace, signal), wanted, atol=1e-9 * scale, unit="SI", why="tolerance of the integration"
        )
    assert_quantity(got.figures.returned_energy_j, energy, rtol=1e-8, atol=1e-12, unit="J", why="the same")


def test_the_cases_do_what_they_are_there_for():
    limited = respond_to(SHORT, **CASES["feedforward"]).figures
    assert limited.voltage_limited_s > 0.0
    assert limited.current_limited_s > 0.0
    slowed = respond_to(replace(SHORT, reference_ramp=2e4), plant=RUBBING, stage=ENCODER).figures
    assert slowed.returned_energy_j > 0.0
    sine = respond_to(CASES["q axis on its limit"]["duty"], plant=CASES["q axis on its limit"]["plant"])
    assert sine.figures.peak_voltage_v < 4.0 + 1e-12
    assert sine.figures.voltage_limited_s > 0.0


IDLE = replace(RIGID, motor_inertia=1e9, motor_viscous=0.0, resistance=1e-9, torque=1e-9, back_emf=1e-9)
"""A winding without resistance on a shaft that does not turn: an integrator."""


def test_d6_sequence_of_the_magnitude_optimum_by_hand():
    # D6, derived: an integrator behind a hold and one period of delay, with K h = 1/3: 0, 0, 1/3, 2/3, 8/9, 1, 28/27.
    gains = Gains(kp=IDLE.inductance / (3.0 * STAGE.current_period), ki=0.0)
    duty = Duty(reference_speed=6.0, length=1e-3)
    got = respond_to(duty, plant=IDLE, current=gains, speed=Gains(kp=0.5, ki=0.0))
    assert np.all(got.trace.current_reference == 3.0)
    wanted = [0.0, 0.0, 1.0 / 3.0, 2.0 / 3.0, 8.0 / 9.0, 1.0, 28.0 / 27.0]
    assert_quantity(got.trace.current[:7] / 3.0, wanted, rtol=1e-9, unit="1", why="the resistance that is left")
    assert_quantity(100.0 * (got.trace.current.max() / 3.0 - 1.0), 100.0 / 27.0, rtol=1e-7, unit="%", why="the same")


FALLING = replace(IDLE, motor_inertia=1e-4, ratio=1.0, inductance=1.0, resistance=1.0)
"""A shaft that the load torque alone moves: w = -T t/J."""
COARSE = replace(ENCODER, encoder_counts=8, speed_rate=1e3)


@pytest.mark.parametrize(
    ("way", "window", "counts"),
    [
        # The angle in counts is 0.31 n^2: 0, 0.31, 1.24, 2.79, 4.96, 7.75 above the middle of a count.
        (1, 1, [0, 0, 1, 3, 5, 8]),
        # Backwards an edge is passed half a count earlier than at whole counts: rounded down, not towards zero.
        (-1, 1, [0, 0, -1, -3, -5, -8]),
        (1, 3, [0, 0, 1, 3, 5, 8]),
    ],
)
def test_the_encoder_counts_whole_counts_from_the_middle_of_one(way, window, counts):
    tw, size = 1e-3, math.tau / 8
    rise = 2.0 * 0.31 * size / tw**2
    duty = Duty(reference_speed=0.0, load_step=-way * rise * FALLING.motor_inertia, load_at=0.0, length=6e-3)
    got = respond_to(
        duty,
        plant=FALLING,
        stage=replace(COARSE, speed_window=window),
        current=Gains(kp=1e-9, ki=0.0),
        speed=Gains(kp=1e-4, ki=0.0),
    )
    assert_quantity(
        got.trace.speed[::20], way * rise * tw * np.arange(6), rtol=1e-9, unit="rad/s", why="next to no current"
    )
    before = [0] * window + counts
    measured = [(before[n + window] - before[n]) * size / (window * tw) for n in range(6)]
    # The speed controller's output is minus the measured speed times its gain.
    assert_quantity(-1e4 * got.trace.current_reference[::20], measured, atol=1e-9, unit="rad/s", why="rounding")


def test_delays_by_the_tick():
    stage = replace(STAGE, speed_delay=4, update_delay=2.0)
    duty = Duty(reference_speed=10.0, reference_at=1e-3, length=3e-3)
    got = respond_to(duty, stage=stage, speed=Gains(kp=0.5, ki=0.0)).trace
    # The reference is read at tick 20, acts on the current loop at 24, on the winding at 26, on the current at 27.
    assert np.flatnonzero(got.reference)[0] == 20
    assert np.flatnonzero(got.current_reference)[0] == 24
    assert np.flatnonzero(got.voltage)[0] == 24
    assert np.flatnonzero(got.current)[0] == 27


def test_the_load_acts_on_the_interval_after_its_tick():
    got = respond_to(Duty(reference_speed=0.0, load_step=0.1, load_at=1e-3, length=2e-3)).trace
    assert np.flatnonzero(got.speed)[0] == 21
    wanted = -0.1 / 3.0 / RIGID.motor_inertia * STAGE.current_period
    assert_quantity(got.speed[21], wanted, rtol=1e-3, unit="rad/s", why="friction and back EMF of one period")


def test_the_reference_is_read_at_speed_ticks():
    got = respond_to(Duty(reference_speed=10.0, reference_at=1.05e-3, length=3e-3)).trace
    assert np.flatnonzero(got.reference)[0] == 30


@settings(max_examples=40)
@given(
    torque=st.floats(-0.9, 0.9),
    efficiency=st.floats(0.3, 1.0),
    coulomb=st.sampled_from([0.0, 1e-4, 0.02]),
    elastic=st.booleans(),
    encoder=st.booleans(),
    delay=st.sampled_from([0.0, 0.4, 1.0, 2.0]),
    feedforward=st.booleans(),
)
def test_equilibrium_stays_put(torque, efficiency, coulomb, elastic, encoder, delay, feedforward):
    plant = replace(ELASTIC if elastic else RIGID, efficiency=efficiency, motor_coulomb=coulomb)
    stage = replace(ENCODER if encoder else STAGE, update_delay=delay)
    got = respond_to(
        Duty(reference_speed=0.0, length=20e-3),
        plant=plant,
        stage=stage,
        firmware=Firmware(back_emf_feedforward=feedforward),
        load_torque=torque,
    ).trace
    current = torque / (3.0 * efficiency) / plant.torque
    assert_quantity(got.speed, 0.0, atol=1e-10, unit="rad/s", why="a free body feels the rounding of its torques")
    assert_quantity(got.load_speed, 0.0, atol=1e-10, unit="rad/s", why="the same")
    assert_quantity(got.current, current, rtol=1e-12, atol=1e-13, unit="A", why="rounding")
    assert_quantity(got.voltage, 0.6 * current, rtol=1e-12, atol=1e-12, unit="V", why="rounding")
    if coulomb > 0.0:
        assert not got.speed.any()


@settings(max_examples=30)
@given(
    reference=st.floats(-150.0, 150.0),
    load=st.floats(-0.3, 0.3),
    torque=st.floats(-0.2, 0.2),
    efficiency=st.floats(0.4, 1.0),
    coulomb=st.sampled_from([0.0, 0.02]),
    elastic=st.booleans(),
)
def test_both_ways_are_alike(reference, load, torque, efficiency, coulomb, elastic):
    plant = replace(ELASTIC if elastic else RIGID, efficiency=efficiency, motor_coulomb=coulomb)
    there = Duty(reference_speed=reference, load_step=load, reference_at=1e-3, stop_at=15e-3, length=20e-3)
    back = replace(there, reference_speed=-reference, load_step=-load)
    one = respond_to(there, plant=plant, load_torque=torque)
    other = respond_to(back, plant=plant, load_torque=-torque)
    for name in NAMES:
        assert np.array_equal(getattr(one.trace, name), -getattr(other.trace, name))
    assert one.figures == other.figures


def test_figures_of_the_whole_duty_are_those_of_the_trace():
    plant = replace(RIGID, motor_coulomb=0.012)
    got = respond_to(replace(DUTY, reference_speed=300.0, stop_at=40e-3), plant=plant, stage=ENCODER)
    trace, figures = got.trace, got.figures
    assert figures.peak_current_a == np.abs(trace.current).max()
    assert figures.peak_voltage_v == np.abs(trace.voltage).max()
    assert figures.rms_current_a == pytest.approx(math.sqrt(np.mean(trace.current**2)), rel=1e-12)
    assert figures.voltage_limited_s == pytest.approx(trace.voltage_clamped.sum() * 50e-6, rel=1e-12)
    assert figures.current_limited_s == pytest.approx(trace.current_clamped[::10].sum() * 500e-6, rel=1e-12)
    assert figures.current_limited_s > 0.0
    assert np.array_equal(trace.current_clamped, np.repeat(trace.current_clamped[::10], 10))
    assert np.abs(trace.current_reference).max() == plant.current_limit
    assert figures.returned_energy_j > 0.0


def test_a_field_oriented_machine_counts_its_energy_by_three_halves():
    plant = replace(RIGID, back_emf=0.052 / 1.5, pole_pairs=0)
    duty = replace(DUTY, stop_at=30e-3)
    plain = respond_to(duty, plant=plant).figures.returned_energy_j
    sine = respond_to(duty, plant=replace(plant, kind=MachineKind.PM_SINE)).figures.returned_energy_j
    assert plain > 0.0
    assert sine == pytest.approx(1.5 * plain, rel=1e-12)


def test_braking_gives_back_most_of_what_the_wheel_had():
    # 3000 rad/s^2 takes 4.1 A: at 300 rad/s the back EMF gives 64 W, of which the winding keeps 10 W.
    duty = Duty(reference_speed=300.0, stop_at=60e-3, stop_ramp=3000.0, length=0.2)
    had = RIGID.motor_inertia * 300.0**2 / 2.0
    assert 0.6 * had < respond_to(duty).figures.returned_energy_j < 0.85 * had


def test_traces_are_read_only_and_of_one_length():
    for plant in (RIGID, ELASTIC):
        trace = respond_to(plant=plant).trace
        for name in type(trace).__slots__:
            row = getattr(trace, name)
            assert row.shape == (1000,)
            assert row.flags.c_contiguous
            with pytest.raises(ValueError, match="read-only"):
                row[0] = 1
    assert np.array_equal(trace.time, np.arange(1000) * STAGE.current_period)


def test_a_rigid_load_goes_with_the_motor_and_an_elastic_one_does_not():
    rigid, elastic = respond_to().trace, respond_to(plant=ELASTIC).trace
    assert np.array_equal(rigid.load_speed, rigid.speed)
    assert np.abs(elastic.load_speed - elastic.speed).max() > 1.0


def test_one_tick_is_a_duty():
    got = respond_to(Duty(reference_speed=10.0, length=50e-6))
    assert got.trace.speed.tolist() == [0.0]
    assert got.figures.rise_time_s is None


def test_the_same_again():
    one, other = respond_to(stage=ENCODER), respond_to(stage=ENCODER)
    assert one.figures == other.figures
    assert np.array_equal(one.trace.speed, other.trace.speed)


def test_back_calculation_without_a_proportional_gain_is_refused():
    with pytest.raises(ValueError, match="back-calculation"):
        respond_to(firmware=Firmware(windup=WindupRule.BACK_CALCULATION), speed=Gains(kp=0.0, ki=1.0))


def test_what_stands_in_the_way_of_a_start():
    plant = replace(RIGID, efficiency=0.8)
    # 3 * 0.8 * 0.052 * 20 A = 2.496 N m.
    assert start_breaks(plant, 2.495) is None
    assert start_breaks(plant, -2.495) is None
    over = start_breaks(plant, -2.6)
    assert over is not None
    assert "-2.6 N*m" in over
    assert "20.83 A" in over
    assert "20 A" in over
    weak = start_breaks(replace(plant, voltage_limit=10.0), 2.4)
    assert weak is not None
    assert "11.54 V" in weak
    assert "10 V" in weak
    assert start_breaks(plant, 3.0 * 0.8 * 0.052 * 20.0) is None


def test_warming_up_needs_nothing_and_leaves_nothing_to_compile():
    warm_up_response()
    assert all(loop.signatures for loop in (run_plain, run_rigid, run_elastic))
