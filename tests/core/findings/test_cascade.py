"""Separation of the loops, and rates against crossovers."""

from __future__ import annotations

import pytest


def test_crossovers_too_near(bench):
    found = bench.one("loop-separation-thin", speed={"crossover_hz": 251.0}, speed_loop={"asked_crossover": None})
    assert found.level == "thin"
    assert "3.98 times" in found.title
    assert "crossover 1.00 kHz against 251 Hz" in found.reason
    assert "below 250 Hz of crossover" in found.advice
    bench.silent("loop-separation-thin", speed={"crossover_hz": 250.0}, speed_loop={"asked_crossover": None})


def test_bandwidths_too_near(bench):
    found = bench.only("loop-separation-thin", speed={"bandwidth_hz": 401.0})
    assert "bandwidth 1.60 kHz against 401 Hz" in found.reason
    bench.silent("loop-separation-thin", speed={"bandwidth_hz": 400.0})
    bench.silent("loop-separation-thin", speed={"bandwidth_hz": 401.0}, current={"bandwidth_hz": None})


@pytest.mark.parametrize(
    ("name", "rate", "thin", "enough"), [("current", "20.0 kHz", 2001.0, 2000.0), ("speed", "2.00 kHz", 201.0, 200.0)]
)
def test_a_rate_too_slow_for_its_crossover(bench, name, rate, thin, enough):
    apart = {f"{name}_loop": {"asked_crossover": None}}
    found = bench.one(f"{name}-rate-slow", **{name: {"crossover_hz": thin}}, **apart)
    assert found.subject == "stage"
    assert ("10.0 ticks" if name == "current" else "9.95 ticks") in found.title
    assert rate in found.reason
    assert "18.1 deg" in found.reason or "18.0 deg" in found.reason
    assert f"{name}_rate" in found.advice
    bench.silent(f"{name}-rate-slow", **{name: {"crossover_hz": enough}}, **apart)


def test_nothing_is_said_of_loops_that_do_not_hold(bench):
    found = bench.judged(current_loop={"figures": bench.unstable}, speed_loop={"figures": bench.unstable})
    assert not {"loop-separation-thin", "current-rate-slow", "speed-rate-slow"} & set(found)
    found = bench.judged(speed_loop={"figures": bench.unstable}, current={"crossover_hz": 5000.0})
    assert "current-rate-slow" in found
