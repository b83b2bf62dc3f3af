"""Crossovers that are missing, early or late, and integrals too slow."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.results import Gains


@pytest.mark.parametrize("name", ["current", "speed"])
def test_an_asked_crossover_that_is_not_the_first(bench, name):
    asked = 1000.0 if name == "current" else 60.0
    found = bench.one(f"{name}-crossover-not-first", **{name: {"crossover_hz": 0.5 * asked}})
    assert found.level == "thin"
    assert ("500 Hz already, 1.00 kHz" if name == "current" else "30.0 Hz already, 60.0 Hz") in found.title
    bench.silent(f"{name}-crossover-not-first", **{name: {"crossover_hz": asked * (1.0 + 0.5e-3)}})
    bench.silent(
        f"{name}-crossover-not-first",
        **{name: {"crossover_hz": 0.5 * asked}, f"{name}_loop": {"asked_crossover": None}},
    )


def test_a_later_crossing_is_told_with_its_frequency(bench):
    peak = bench.curve(60.0, delay=1e-4, nyquist=1e3, bumps=((200.0, 5.0),))
    found = bench.only("speed-later-crossing", speed_loop={"curve": peak})
    assert "60.0 Hz" in found.title
    assert "for good at 20" in found.reason
    assert "the margins count every crossing" in found.reason
    # A lift of 200/60 = 3.33 would bring the gain to 1: 3.2 does not.
    below = bench.curve(60.0, delay=1e-4, nyquist=1e3, bumps=((200.0, 3.2),))
    bench.silent("speed-later-crossing", speed_loop={"curve": below})
    bench.silent("speed-later-crossing", speed_loop={"curve": None})


def test_a_later_crossing_of_an_elastic_train_speaks_of_the_shaft(bench):
    peak = bench.curve(60.0, delay=1e-4, nyquist=1e3, bumps=((200.0, 5.0),))
    found = bench.one("speed-later-crossing", speed_loop={"curve": peak}, train=bench.elastic)
    assert "shaft's damping" in found.reason
    assert "damp the shaft" in found.advice


def test_a_gain_that_stays_above_one_again(bench):
    lifted = bench.curve(60.0, delay=0.0, nyquist=1e3, bumps=((1000.0, 60.0),))
    found = bench.one("speed-later-crossing", speed_loop={"curve": lifted})
    assert "up to half the loop's rate" in found.reason


def test_where_the_asked_crossover_is_the_later_one_it_is_told_once(bench):
    peak = bench.curve(30.0, delay=1e-4, nyquist=1e3, bumps=((60.0, 4.0),))
    found = bench.judged(speed_loop={"curve": peak}, speed={"crossover_hz": 30.0})
    assert "speed-crossover-not-first" in found
    assert "speed-later-crossing" not in found


@pytest.mark.parametrize("name", ["current", "speed"])
def test_no_crossover_at_all(bench, name):
    none = {"crossover_hz": None, "phase_margin_deg": None, "delay_margin_s": None}
    found = bench.one(f"{name}-no-crossover", **{name: none})
    assert "stays below 1" in found.title
    high = bench.curve(60.0, delay=0.0, nyquist=50.0)
    found = bench.one(f"{name}-no-crossover", **{name: none, f"{name}_loop": {"curve": high}})
    assert "stays above 1" in found.title
    bench.silent(f"{name}-no-crossover")


@pytest.mark.parametrize(("name", "crossover"), [("current", 1000.0), ("speed", 60.0)])
def test_an_integral_far_below_the_crossover_is_slow(bench, name, crossover):
    line = 2.0 * np.pi * crossover / 50.0
    found = bench.only(f"{name}-integral-slow", **{f"{name}_loop": {"gains": Gains(kp=0.5, ki=0.5 * 0.99 * line)}})
    assert ("8.04 ms" if name == "current" else "134 ms") in found.title
    assert "costs 5.7 deg" in found.advice
    bench.silent(f"{name}-integral-slow", **{f"{name}_loop": {"gains": Gains(kp=0.5, ki=0.5 * 1.01 * line)}})


def test_a_loop_without_integral_says_what_stays(bench):
    found = bench.only("speed-no-integral", speed_loop={"gains": Gains(kp=0.5, ki=0.0)})
    # 1/(0.052 * 0.5 + 20e-6) rad/s for each newton metre.
    assert "38.4 rad/s" in found.reason
    found = bench.only("current-no-integral", current_loop={"gains": Gains(kp=2.4, ki=0.0)})
    # 0.6/(0.6 + 2.4) of the current is missing.
    assert "20.0 %" in found.reason
    bench.silent("speed-no-integral")
    bench.silent("current-no-integral")
