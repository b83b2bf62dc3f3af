"""What the tick loop starts from: delays split, filters and rules turned to numbers, drag by direction, the start."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from drives import CURRENT_GAINS, DUTY, ELASTIC, ENCODER, FIRMWARE, RIGID, SINE, SPEED_GAINS, STAGE
from gainbench.kernels.response_records import BACKWARD, FORWARD, TRAPEZOID
from gainbench.model import Firmware, IntegratorRule, WindupRule
from gainbench.results import Gains
from gainbench.simulate.duty import schedule
from gainbench.simulate.preparation import prepare_run


def prepared(*, plant=RIGID, stage=STAGE, firmware=FIRMWARE, duty=DUTY, load_torque=0.0, current=CURRENT_GAINS):
    return prepare_run(
        plant,
        stage,
        firmware,
        duty,
        plan=schedule(duty, stage),
        load_torque=load_torque,
        reference_weight=0.7,
        current=current,
        speed=SPEED_GAINS,
    )


@pytest.mark.parametrize(
    ("delay", "whole", "part"), [(0.0, 0, 0.0), (0.3, 0, 0.3), (1.0, 1, 0.0), (1.75, 1, 0.75), (2.0, 2, 0.0)]
)
def test_the_update_delay_is_split(delay, whole, part):
    sampling = prepared(stage=replace(STAGE, update_delay=delay)).sampling
    assert sampling.held_ticks == whole
    assert sampling.held_part == pytest.approx(part, abs=1e-15)


def test_sensor_and_filter():
    assert prepared().sampling.counts_per_radian == 0.0
    sampling = prepared(stage=replace(ENCODER, speed_window=3, speed_filter=1e-3)).sampling
    assert sampling.counts_per_radian == 4096 / math.tau
    assert sampling.window == 3
    assert sampling.filter_gain == pytest.approx(1.0 - math.exp(-0.5), rel=1e-14)
    assert prepared().sampling.filter_gain == 1.0


def test_what_only_some_drives_have():
    assert prepared().sampling.reactance == 0.0
    assert prepared(plant=SINE).sampling.reactance == 4 * SINE.inductance
    assert prepared().sampling.feedforward == 0.0
    fed = prepared(firmware=Firmware(back_emf_feedforward=True))
    assert fed.sampling.feedforward == RIGID.back_emf


def test_each_loop_has_its_period_and_weight():
    run = prepared()
    assert run.current_law.ki_period == pytest.approx(1500.0 * 50e-6, rel=1e-14)
    assert run.speed_law.ki_period == pytest.approx(40.0 * 500e-6, rel=1e-14)
    assert (run.current_law.weight, run.speed_law.weight) == (1.0, 0.7)


@pytest.mark.parametrize(
    ("rule", "number"),
    [(IntegratorRule.BACKWARD, BACKWARD), (IntegratorRule.FORWARD, FORWARD), (IntegratorRule.TRAPEZOID, TRAPEZOID)],
)
def test_rules_by_number(rule, number):
    assert prepared(firmware=Firmware(integrator=rule)).speed_law.rule == number


def test_back_calculation_takes_at_most_all():
    back = Firmware(windup=WindupRule.BACK_CALCULATION)
    run = prepared(firmware=back)
    assert not run.current_law.hold
    assert run.current_law.relief == pytest.approx(50e-6 * 1500.0 / 1.4, rel=1e-14)
    assert prepared(firmware=back, current=Gains(kp=1e-3, ki=1500.0)).current_law.relief == 1.0
    with pytest.raises(ValueError, match="above 0"):
        prepared(firmware=back, current=Gains(kp=0.0, ki=1500.0))
    assert prepared(current=Gains(kp=0.0, ki=1500.0)).current_law.hold


@pytest.mark.parametrize("load", [0.09, -0.09])
def test_drag_of_a_load_behind_a_gear(load):
    plant = replace(RIGID, efficiency=0.8, motor_coulomb=0.01)
    without, loaded = prepared(plant=plant, load_torque=load, duty=replace(DUTY, load_step=load)).drags
    # 0.09/(3 * 0.8) = 0.0375 where it brakes, 0.09 * 0.8/3 = 0.024 where it drives.
    forwards, backwards = (0.0375, 0.024) if load > 0.0 else (-0.024, -0.0375)
    assert without.motor_forwards == pytest.approx(forwards + 0.01, rel=1e-12)
    assert without.motor_backwards == pytest.approx(backwards - 0.01, rel=1e-12)
    assert loaded.motor_forwards == pytest.approx(2.0 * forwards + 0.01, rel=1e-12)
    assert (without.load_forwards, without.load_backwards) == (0.0, 0.0)


def test_an_elastic_train_carries_the_load_on_its_own_body():
    plant = replace(ELASTIC, motor_coulomb=0.01, load_coulomb=0.02)
    drag = prepared(plant=plant, load_torque=0.09).drags[0]
    assert tuple(drag) == pytest.approx((-0.01, 0.01, 0.03 - 0.02, 0.03 + 0.02), rel=1e-12)


def test_the_start_is_the_equilibrium():
    start = prepared(plant=replace(ELASTIC, efficiency=0.8), load_torque=-0.09).start
    assert start.current == pytest.approx(-0.0375 / 0.052, rel=1e-12)
    assert start.voltage == pytest.approx(0.6 * start.current, rel=1e-12)
    assert start.twist == pytest.approx(-0.0375 / 5.0, rel=1e-12)
