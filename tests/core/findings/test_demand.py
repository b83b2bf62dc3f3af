"""Steady current and voltage."""

from __future__ import annotations

import math

import pytest

from gainbench.findings.demand import (
    ampere_name,
    current_at_voltage,
    demands,
    sheet_amperes,
    steady_demand,
    top_speed,
)
from gainbench.model import CurrentValues, Duty


def test_friction_and_braking_load_add(bench):
    plant = bench.case(train={"efficiency": 0.8}).plant
    state = steady_demand(plant, 100.0, load=0.3, loaded=True)
    torque = 12e-3 + 20e-6 * 100.0 + 0.3 / (3.0 * 0.8)
    assert state.current == pytest.approx(torque / 0.052, rel=1e-12)
    assert state.voltage == pytest.approx(0.6 * torque / 0.052 + 5.2, rel=1e-12)
    assert not state.drives


def test_a_driving_load_comes_through_the_losses_and_friction_helps(bench):
    plant = bench.case(train={"efficiency": 0.8}).plant
    state = steady_demand(plant, -100.0, load=0.3, loaded=True)
    torque = -12e-3 - 20e-6 * 100.0 + 0.3 * 0.8 / 3.0
    assert state.current == pytest.approx(torque / 0.052, rel=1e-12)
    assert state.drives


def test_mirrored_signs_give_mirrored_states(bench):
    plant = bench.case(train={"efficiency": 0.8}).plant
    for load in (0.3, -0.3, 0.0):
        one, other = (steady_demand(plant, sign * 80.0, load=sign * load, loaded=False) for sign in (1.0, -1.0))
        assert one.current == -other.current
        assert one.voltage == other.voltage


def test_at_rest_friction_carries_nothing(bench):
    plant = bench.case(train={"efficiency": 0.8}).plant
    state = steady_demand(plant, 0.0, load=-0.3, loaded=False)
    assert state.current == pytest.approx(-0.3 / 2.4 / 0.052, rel=1e-12)
    assert not state.drives


def test_the_inductance_counts_for_a_sinusoidal_machine(bench):
    plant = bench.case(machine=bench.pm_sine).plant
    state = steady_demand(plant, 300.0, load=0.6, loaded=False)
    along = plant.resistance * state.current + plant.back_emf * 300.0
    across = 4 * 300.0 * 0.45e-3 * state.current
    assert state.voltage == pytest.approx(math.hypot(along, across), rel=1e-12)


def test_the_duty_passes_one_state_or_two(bench):
    before, after = demands(bench.case(train={"load_torque": 0.02}))
    assert (before.load, before.loaded, after.loaded) == (0.02, False, True)
    assert after.load == pytest.approx(0.08, rel=1e-12)
    assert before.speed == after.speed == bench.case().sheet.duty.reference_speed
    assert len(demands(bench.case(duty={"load_step": 0.0}))) == 1


def test_a_load_after_the_stop_is_held_at_rest(bench):
    assert demands(bench.case(duty={"stop_at": 0.2}))[1].speed == 0.0
    assert demands(bench.case(duty={"stop_at": 0.3}))[1].speed != 0.0


def test_a_ramp_may_not_come_to_its_speed():
    slow = Duty(reference_speed=-200.0, length=0.5, reference_at=0.1, reference_ramp=100.0)
    assert top_speed(slow) == pytest.approx(-40.0, rel=1e-12)
    stopped = Duty(reference_speed=200.0, length=0.5, reference_at=0.1, reference_ramp=100.0, stop_at=0.3)
    assert top_speed(stopped) == pytest.approx(20.0, rel=1e-12)
    assert top_speed(Duty(reference_speed=200.0, length=0.5)) == 200.0


@pytest.mark.parametrize("kind", ["brushed", "pm_sine"])
def test_the_current_of_the_whole_voltage_needs_the_whole_voltage(bench, kind):
    plant = bench.case(machine=None if kind == "brushed" else bench.pm_sine).plant
    speed = 0.6 * plant.voltage_limit / plant.back_emf
    current = current_at_voltage(plant, -speed)
    # The load, at the motor shaft, that takes this current at this speed.
    load = 3.0 * (plant.torque * current - plant.viscous * speed - plant.coulomb)
    state = steady_demand(plant, speed, load=load, loaded=False)
    assert state.current == pytest.approx(current, rel=1e-12)
    assert state.voltage == pytest.approx(plant.voltage_limit, rel=1e-12)
    assert current_at_voltage(plant, 2.0 * plant.voltage_limit / plant.back_emf) < 0.0


def test_currents_are_told_in_the_ampere_of_the_sheet(bench):
    rms = bench.case(machine=bench.pm_sine).sheet.rig.machine
    peak = bench.case(machine={**bench.pm_sine, "current_values": CurrentValues.PEAK}).sheet.rig.machine
    plain = bench.case().sheet.rig.machine
    assert sheet_amperes(math.sqrt(2.0), rms) == "1.00 A rms"
    assert sheet_amperes(1.0, peak) == "1.00 A peak"
    assert sheet_amperes(1.0, plain) == "1.00 A"
    assert [ampere_name(one) for one in (rms, peak, plain)] == [" rms", " peak", ""]
