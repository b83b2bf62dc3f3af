"""The bench procedure: the sheet's numbers, worked out by hand."""

from __future__ import annotations

from dataclasses import replace

import pytest

from gainbench.handover.bench import bench_procedure, first_current


def test_order_and_numbers_of_the_unwinder(demos):
    limit, direction, step, spin, duty = bench_procedure(demos["label-unwinder"])
    # A tenth of 20 A.
    assert limit.startswith("Low limit first")
    assert "2 A instead of 20 A" in limit
    assert "by 4096 in one turn" in direction
    assert "commutation" not in direction
    # 52 mN m/A times 2 A; 0.60 ohm times 2 A.
    assert "against 104 mN*m" in step
    assert "from 0 to 2 A" in step
    assert "1.2 V at the end" in step
    rise = demos["label-unwinder"].locked_step.rise_s
    assert f"in {rise * 1e6:.4g} us" in step
    # J = 310 + 3600/9 = 710 g cm^2 against 310; a tenth of 1500 rpm is 15.71 rad/s, where friction takes
    # (12 mN m + 20 uN m s 15.71)/(52 mN m/A) = 0.2368 A and 0.052 15.71 + 0.6 0.2368 = 0.9589 V.
    assert "2.29 times" in spin
    assert "150 rpm" in spin
    assert "236.8 mA" in spin
    assert "958.9 mV" in spin
    assert "raise the limit in steps to 20 A" in duty
    assert "1500 rpm" in duty


def test_field_oriented_machines_are_told_of_offset_and_peak(demos):
    limit, direction, step, spin, _ = bench_procedure(demos["bottle-indexer"])
    assert "commutation offset" in direction
    # A tenth of 12 A rms as peak.
    assert "1.697 A peak" in limit
    # 1.7 ohm per phase times 1.697 A.
    assert "2.885 V phase peak" in step
    assert "phase peak" in spin


def test_every_demo_has_a_procedure_in_plain_ascii(demos):
    for assessment in demos.values():
        steps = bench_procedure(assessment)
        assert len(steps) == 5
        assert all(step.isascii() and step.endswith(".") and "None" not in step and "nan" not in step for step in steps)


def test_a_small_rated_current_bounds_the_first_current(unwinder):
    assert first_current(unwinder({"machine.rated_current": "1.5 A"})) == pytest.approx(1.5)


def test_the_first_step_stays_below_the_voltage_limit(unwinder):
    by_hand = {"method": "by-hand", "kp": "2 V/A", "ki": "0 V/(A*s)"}
    changed = {f"aims.current.{key}": value for key, value in by_hand.items()}
    assessment = unwinder({**changed, "stage.voltage_use": "5 %"})
    # 2.4 V over 2 V/A.
    assert first_current(assessment) == pytest.approx(1.2)


def test_friction_above_the_low_limit_is_said(unwinder):
    spin = bench_procedure(unwinder({"machine.coulomb_friction": "120 mN*m"}))[3]
    assert "more than the low limit of 2 A" in spin
    assert "more than the low limit" not in bench_procedure(unwinder())[3]


def test_a_motor_alone_keeps_its_gains(unwinder):
    assert "divide" not in bench_procedure(unwinder({"train.load_inertia": "1 g*cm^2"}))[3]


def test_without_a_reference_the_spin_is_a_tenth_of_no_load_speed(unwinder):
    spin = bench_procedure(unwinder({"duty.reference_speed": "0 rpm"}))[3]
    # 45.6 V over 52 mV s/rad is 876.9 rad/s; a tenth of it is 837.4 rpm.
    assert "837.4 rpm" in spin


def test_an_ideal_sensor_has_no_counts(unwinder):
    direction = bench_procedure(unwinder({"stage.speed_sensor": "ideal"}))[1]
    assert "the measured speed must be positive" in direction


def test_nothing_to_run_without_gains_or_stability(demos):
    assessment = demos["label-unwinder"]
    (none,) = bench_procedure(replace(assessment, speed=replace(assessment.speed, gains=None, figures=None)))
    assert "no gains" in none
    shaky = replace(assessment.current, figures=replace(assessment.current.figures, stable=False))
    (unstable,) = bench_procedure(replace(assessment, current=shaky))
    assert unstable.startswith("Do not run these gains")


def test_without_a_response_there_is_nothing_to_compare_with(demos):
    assert "No response was computed" in bench_procedure(replace(demos["label-unwinder"], response=None))[4]


def test_energy_given_back_is_said_where_it_is_more_than_a_trace(demos):
    # The unwinder brakes from its overshoot, the bottle indexer stops; the drum hardly ever brakes.
    said = {name: "back to the bus" in bench_procedure(one)[4] for name, one in demos.items()}
    energies = {name: one.response.figures.returned_energy_j for name, one in demos.items()}
    moving = {name: 0.5 * one.plant.inertia * one.sheet.duty.reference_speed**2 for name, one in demos.items()}
    assert said == {name: energies[name] > 0.01 * moving[name] for name in demos}
    assert set(said.values()) == {True, False}
