"""Constants that contradict each other, and ratings."""

from __future__ import annotations

import math

import pytest

from gainbench.model import BackEmfValues


def test_constants_that_disagree_name_the_slip(bench):
    # The same constant in rms instead of peak volts, line to line: a factor of sqrt(2).
    machine = {
        **bench.pm_sine,
        "torque_constant": 1.5 * math.sqrt(2.0) * 0.05,
        "back_emf_values": BackEmfValues.PHASE_RMS,
    }
    agrees = {**machine, "back_emf_constant": 0.05 / math.sqrt(2.0)}
    slipped = {**machine, "back_emf_constant": 0.05}
    found = bench.one("back-emf-constant-disagrees", machine=slipped)
    assert found.level == "thin"
    assert found.subject == "machine"
    assert "a factor of 1.41" in found.title
    assert "peak against rms would explain it" in found.reason
    assert "torque_constant" in found.advice
    bench.silent("back-emf-constant-disagrees", machine=agrees)


@pytest.mark.parametrize(("gap", "told"), [(1.049, False), (1.06, True), (0.951, False), (0.94, True)])
def test_constants_may_differ_by_what_data_sheets_round(bench, gap, told):
    machine = {"speed_constant": 1.0 / (0.052 * gap)}
    if told:
        found = bench.only("speed-constant-disagrees", machine=machine)
        assert "no usual mix-up" in found.reason
    else:
        bench.silent("speed-constant-disagrees", machine=machine)


def test_each_constant_has_its_own_finding(bench):
    found = bench.judged(machine={"speed_constant": 100.0, "back_emf_constant": 0.5})
    assert {"speed-constant-disagrees", "back-emf-constant-disagrees"} <= set(found)


def test_a_duty_beyond_the_highest_speed_breaks(bench):
    found = bench.one("duty-over-max-speed", machine={"max_speed": 1499.0 * bench.rpm})
    assert found.level == "breaks"
    assert "1500 rpm" in found.title
    assert "1499 rpm" in found.title
    assert "duty-over-max-speed" in bench.judged(
        machine={"max_speed": 1499.0 * bench.rpm}, duty={"reference_speed": -1500.0 * bench.rpm}
    )
    bench.silent("duty-over-max-speed", machine={"max_speed": 1500.0 * bench.rpm * (1.0 + 1e-12)})
    bench.silent("duty-over-max-speed", machine={"max_speed": None})


def test_an_overshoot_beyond_the_highest_speed_is_thin(bench):
    found = bench.only("overshoot-over-max-speed", machine={"max_speed": 1550.0 * bench.rpm})
    assert "1551 rpm" in found.title
    bench.silent("overshoot-over-max-speed", machine={"max_speed": 1552.0 * bench.rpm})
    bench.silent("overshoot-over-max-speed", machine={"max_speed": 1550.0 * bench.rpm}, without_response=True)


def test_a_steady_current_beyond_the_rated_one(bench):
    # (12e-3 + 20e-6 w + T/3)/0.052 is 6.5 A at T = 0.96855 N m and 1500 rpm.
    found = bench.one("steady-current-over-rated", duty={"load_step": 0.970})
    assert found.level == "thin"
    assert "Holding the duty's load takes 6.51 A, rated are 6.50 A" in found.title
    assert "100 % of the rated" in found.reason
    bench.silent("steady-current-over-rated", duty={"load_step": 0.967})
    bench.silent("steady-current-over-rated", duty={"load_step": 0.970}, machine={"rated_current": None})


def test_a_steady_current_without_a_load_step_is_that_of_the_speed(bench):
    found = bench.one("steady-current-over-rated", duty={"load_step": 0.0}, train={"load_torque": 1.2})
    assert "the duty's speed" in found.title


def test_rms_over_the_duty_beyond_the_rated_current(bench):
    found = bench.only("rms-current-over-rated", response={"rms_current_a": 7.0})
    assert "7.00 A, rated are 6.50 A" in found.title
    assert "1.16 times as much" in found.reason
    bench.silent("rms-current-over-rated", response={"rms_current_a": 6.5})
    bench.silent("rms-current-over-rated", response={"rms_current_a": 7.0}, machine={"rated_current": None})


def test_ratings_in_rms_are_held_against_rms(bench):
    # 9 A of phase peak are 6.36 A rms, below 6.5 A rms; 9.3 A are 6.58 A rms.
    bench.silent("rms-current-over-rated", machine=bench.pm_sine, response={"rms_current_a": 9.0})
    found = bench.one("rms-current-over-rated", machine=bench.pm_sine, response={"rms_current_a": 9.3})
    assert "6.58 A rms, rated are 6.50 A rms" in found.title
