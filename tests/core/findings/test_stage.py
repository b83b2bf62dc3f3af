"""Encoder counts and electrical angles."""

from __future__ import annotations

import math

import pytest

from gainbench.model import IntegratorRule, SpeedSensor


def test_one_count_in_amperes(bench):
    # 2 pi/(4096 * 0.5 ms) = 3.068 rad/s; times 0.481 + 57.6 * 0.5 ms = 0.5098 A s/rad: 1.564 A.
    found = bench.only("encoder-count-coarse", stage={"encoder_counts": 4096})
    assert found.level == "thin"
    assert "1.56 A" in found.title
    assert "29.3 rpm at 2.00 kHz" in found.reason
    assert "24.1 % of the rated current" in found.reason
    # Another window of one period delays by half of one: 180 deg * 60 Hz * 0.5 ms.
    assert "speed_window of 2 halves it and costs 5.4 deg" in found.advice


def test_one_count_on_either_side_of_a_tenth_of_the_rated_current(bench):
    share = 2.0 * math.pi / 0.5e-3 * (0.481 + 57.6 * 0.5e-3) / 0.65
    assert 9854 < share < 9856
    bench.one("encoder-count-coarse", stage={"encoder_counts": 9854})
    bench.silent("encoder-count-coarse", stage={"encoder_counts": 9856})
    bench.silent("encoder-count-coarse", stage={"encoder_counts": 1000}, machine={"rated_current": None})
    bench.silent("encoder-count-coarse", stage={"speed_sensor": SpeedSensor.IDEAL, "encoder_counts": 100})
    bench.silent("encoder-count-coarse", stage={"encoder_counts": 100}, speed_loop={"gains": None, "figures": None})
    bench.silent("encoder-count-coarse", stage={"encoder_counts": 100}, speed_loop={"figures": bench.unstable})


@pytest.mark.parametrize(
    ("rule", "current"),
    [(IntegratorRule.BACKWARD, "1.56 A"), (IntegratorRule.TRAPEZOID, "1.52 A"), (IntegratorRule.FORWARD, "1.48 A")],
)
def test_the_integrator_rule_counts(bench, rule, current):
    found = bench.one("encoder-count-coarse", stage={"encoder_counts": 4096}, firmware={"integrator": rule})
    assert current in found.title


def test_window_and_filter_divide_the_count(bench):
    found = bench.one("encoder-count-coarse", stage={"encoder_counts": 4096, "speed_window": 2})
    assert "0.78 A" in found.title or "782 mA" in found.title
    assert "speed_window of 4 halves it and costs 10.8 deg" in found.advice
    # 1 - exp(-0.5/0.5) = 0.632 of 1.564 A.
    found = bench.one("encoder-count-coarse", stage={"encoder_counts": 4096, "speed_filter": 0.5e-3})
    assert "989 mA" in found.title


def test_a_sheet_in_rms_amperes_is_told_in_them(bench):
    found = bench.one("encoder-count-coarse", stage={"encoder_counts": 4096}, machine=bench.pm_sine)
    assert "1.11 A rms" in found.title


@pytest.mark.parametrize("kind", ["pm_sine", "pm_block"])
def test_the_angle_turned_while_waiting(bench, kind):
    # 360 deg * 4 * n * 1.5 * 50 us is 10 deg at n = 92.59 turns/s = 5556 rpm.
    machine = {**getattr(bench, kind), "max_speed": None, "torque_constant": 0.02}
    found = bench.one("commutation-angle-late", machine=machine, duty={"reference_speed": 5560.0 * bench.rpm})
    assert found.level == "thin"
    assert "10.0 deg electrical" in found.title
    assert ("17.4 % of the voltage" if kind == "pm_sine" else "switched that late") in found.reason
    bench.silent("commutation-angle-late", machine=machine, duty={"reference_speed": 5550.0 * bench.rpm})
    bench.silent("commutation-angle-late", machine={"max_speed": None}, duty={"reference_speed": 5560.0 * bench.rpm})


def test_too_few_ticks_in_an_electrical_turn_break(bench):
    # 2 kHz over 8 are 250 electrical turns/s, 62.5 of the shaft: 3750 rpm.
    slow = {"current_rate": 2e3, "pwm_frequency": 2e3, "speed_rate": 1e3}
    machine = {**bench.pm_block, "max_speed": None}
    found = bench.one("commutation-too-slow", machine=machine, stage=slow, duty={"reference_speed": 3760.0 * bench.rpm})
    assert found.level == "breaks"
    assert "7.98 current ticks" in found.title
    assert "2.01 kHz" in found.advice
    near = bench.judged(machine=machine, stage=slow, duty={"reference_speed": 3740.0 * bench.rpm})
    assert "commutation-too-slow" not in near
    assert "commutation-angle-late" in near
    bench.silent(
        "commutation-too-slow", stage=slow, machine={"max_speed": None}, duty={"reference_speed": 4000.0 * bench.rpm}
    )
    bench.silent("commutation-too-slow", machine=machine, stage=slow, duty={"reference_speed": 0.0})
