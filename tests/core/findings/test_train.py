"""Resonance, efficiency, driving loads."""

from __future__ import annotations

import math

import pytest


def test_a_crossover_near_the_antiresonance(bench):
    # k/9 over JL/9: the antiresonance does not know the ratio; sqrt(k/3.6e-4) is three times 60 Hz at k = 460.5.
    line = 3.6e-4 * (3.0 * 2.0 * math.pi * 60.0) ** 2
    near = {**bench.elastic, "shaft_stiffness": 0.99 * line}
    found = bench.only("train-resonance-near", train=near)
    assert found.level == "thin"
    assert "60.0 Hz is near the shaft's antiresonance at 179 Hz" in found.title
    assert "2.98 times the crossover" in found.reason
    assert "below 59.7 Hz" in found.advice
    bench.silent("train-resonance-near", train={**bench.elastic, "shaft_stiffness": 1.01 * line})
    bench.silent("train-resonance-near", train=near, speed_loop={"figures": bench.unstable})
    bench.silent("train-resonance-near")


def test_a_crossover_above_the_antiresonance(bench):
    found = bench.one("train-resonance-near", train={**bench.elastic, "shaft_stiffness": 10.0})
    assert "is above the shaft's antiresonance at 26.5 Hz" in found.title
    assert "swings behind it" in found.reason


def test_an_efficiency_below_the_contracts_line(bench):
    found = bench.only("train-efficiency-low", train={"efficiency": 0.80})
    assert "80.0 %" in found.title
    # The load's share of the inertia, 40/71, times 1/0.8 - 1.
    assert "14.1 % more current" in found.reason
    bench.silent("train-efficiency-low", train={"efficiency": 0.85})
    bench.silent("train-efficiency-low", train={"efficiency": 0.5, "load_inertia": 0.0})


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_a_load_that_drives_against_its_friction(bench, sign):
    # Friction holds 3 * (12e-3 + 20e-6 * 157.08) = 45.4 mN m at the load shaft.
    duty = {"reference_speed": sign * 1500.0 * bench.rpm, "load_step": -sign * 0.1}
    found = bench.only("load-drives", duty=duty)
    assert found.level == "thin"
    assert "100 mN*m" in found.title
    assert "works as a generator" in found.reason
    assert "holding brake" in found.advice
    held = bench.only("load-drives", duty={**duty, "load_step": -sign * 0.04})
    assert "friction holds it back" in held.reason
    bench.silent("load-drives", duty={**duty, "load_step": sign * 0.1})


def test_the_sum_of_both_loads_drives(bench):
    bench.silent("load-drives", train={"load_torque": 0.2}, duty={"load_step": -0.1})
    found = bench.one("load-drives", train={"load_torque": -0.2}, duty={"load_step": 0.1})
    assert "200 mN*m" in found.title
