"""Refusals, instability, margins."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.model import DesignMethod
from gainbench.results import Refusal

NO_GAINS = {"gains": None, "figures": None, "curve": None}


def test_both_loops_hold_and_say_their_margins(bench):
    found = bench.judged()
    assert list(found) == ["current-loop-holds", "speed-loop-holds"]
    assert found["current-loop-holds"].text.startswith(
        "The current loop holds with 60.0 deg of phase margin at 1.00 kHz."
    )
    assert "10.1 dB" in found["current-loop-holds"].reason
    assert "peak sensitivity 1.24: the curve stays 0.81 clear" in found["speed-loop-holds"].reason


def test_a_loop_without_figures_of_its_own_holds_all_the_same(bench):
    bare = {
        "crossover_hz": None,
        "phase_margin_deg": None,
        "delay_margin_s": None,
        "gain_margin_db": None,
        "peak_sensitivity": None,
        "bandwidth_hz": None,
    }
    assert "inside the unit circle" in bench.one("speed-loop-holds", speed=bare).reason


@pytest.mark.parametrize("name", ["current", "speed"])
def test_a_refusal_names_reason_and_nearest(bench, name):
    refusal = Refusal(
        reason="the delay takes more phase than there is",
        nearest_crossover=2.0 * np.pi * 210.0,
        largest_margin=np.radians(41.5),
    )
    found = bench.one(f"{name}-loop-refused", **{f"{name}_loop": {**NO_GAINS, "refusal": refusal}})
    assert found.level == "breaks"
    assert found.subject == name
    assert "60.0 deg of margin" in found.title
    assert ("1.00 kHz" if name == "current" else "60.0 Hz") in found.title
    assert found.reason == refusal.reason
    assert "a crossover of 210 Hz, the nearest with the same margin" in found.advice
    assert "a phase margin of 41.5 deg, the largest at the asked crossover" in found.advice
    bench.silent(f"{name}-loop-refused")


@pytest.mark.parametrize(
    ("aims", "refusal", "title", "advice"),
    [
        (
            {"method": DesignMethod.BANDWIDTH_MARGIN, "bandwidth": 2.0 * np.pi * 300.0},
            Refusal(reason="no", nearest_bandwidth=2.0 * np.pi * 250.0, largest_margin=1.0),
            "a bandwidth of 300 Hz and 60.0 deg of margin",
            "a bandwidth of 250 Hz, the nearest with the same margin, or a phase margin of 57.3 deg, the largest at "
            "the asked bandwidth",
        ),
        (
            {"method": DesignMethod.LAG_CANCELLATION},
            Refusal(reason="without viscous friction there is no lag to cancel"),
            "lag cancellation and a crossover of 60.0 Hz",
            "Try the method crossover-margin",
        ),
        (
            {"method": DesignMethod.POLE_PLACEMENT, "natural_frequency": 2.0 * np.pi * 90.0},
            Refusal(reason="no"),
            "poles placed at 90.0 Hz",
            "Try the method crossover-margin",
        ),
        ({"method": DesignMethod.SYMMETRIC_OPTIMUM}, Refusal(reason=""), "the method symmetric-optimum", "Try"),
        ({}, Refusal(reason="no"), "a crossover of 60.0 Hz", "Ask for less of both"),
    ],
)
def test_a_refusal_speaks_the_words_of_its_method(bench, aims, refusal, title, advice):
    found = bench.one("speed-loop-refused", speed_aims=aims, speed_loop={**NO_GAINS, "refusal": refusal})
    assert title in found.title
    assert advice in found.advice
    assert found.reason


@pytest.mark.parametrize(("name", "crossover", "nyquist"), [("current", 1000.0, 10e3), ("speed", 60.0, 1e3)])
def test_an_unstable_loop_breaks(bench, name, crossover, nyquist):
    late = bench.curve(crossover, delay=0.3 / crossover, nyquist=nyquist)
    found = bench.one(f"{name}-loop-unstable", **{f"{name}_loop": {"figures": bench.unstable, "curve": late}})
    assert found.level == "breaks"
    assert found.subject == name
    # 90 deg less 0.3 of a turn leaves -18 deg.
    assert "18.0 deg beyond -180 deg" in found.reason
    assert ("at 1.00 kHz" if name == "current" else "at 60.0 Hz") in found.reason
    bench.silent(f"{name}-loop-unstable")
    assert f"{name}-loop-holds" not in bench.judged(**{f"{name}_loop": {"figures": bench.unstable}})


def test_an_unstable_loop_says_only_what_its_curve_shows(bench):
    def reason(**curve):
        return bench.one("speed-loop-unstable", speed_loop={"figures": bench.unstable, **curve}).reason

    plain = "a pole of the closed sampled loop lies outside the unit circle"
    assert reason(curve=None) == plain
    assert reason(curve=bench.curve(60.0, delay=0.0, nyquist=1e3)) == plain
    assert "above 1 up to half the loop's rate" in reason(curve=bench.curve(60.0, delay=0.0, nyquist=50.0))
    lifted = bench.curve(60.0, delay=0.0, nyquist=1e3, bumps=((1000.0, 60.0),))
    assert "above 1 again from" in reason(curve=lifted)


def test_the_speed_loop_waits_for_the_current_loop(bench):
    found = bench.one(
        "speed-loop-waits", current_loop={"figures": bench.unstable}, speed_loop={"figures": bench.unstable}
    )
    assert found.level == "breaks"
    assert "unstable" in found.reason
    refused = {**NO_GAINS, "refusal": Refusal(reason="no")}
    codes = bench.judged(current_loop=refused, speed_loop={**NO_GAINS, "refusal": Refusal(reason="no")})
    assert "has no gains" in codes["speed-loop-waits"].reason
    assert "speed-loop-refused" not in codes
    bench.silent("speed-loop-waits", speed_loop=refused)


MARGINS = [
    ("phase-margin", "phase_margin_deg", 44.9, 45.0, "44.9 deg"),
    ("gain-margin", "gain_margin_db", 5.9, 6.0, "5.9 dB"),
    ("gain-reduction", "gain_reduction_db", -5.9, -6.0, "5.9 dB"),
    ("sensitivity", "peak_sensitivity", 2.05, 2.0, "2.05"),
]


@pytest.mark.parametrize("name", ["current", "speed"])
@pytest.mark.parametrize(("code", "field", "thin", "enough", "number"), MARGINS)
def test_a_margin_is_thin_on_one_side_of_its_line(bench, name, code, field, thin, enough, number):
    found = bench.only(f"{name}-{code}-thin", **{name: {field: thin}})
    assert found.level == "thin"
    assert found.subject == name
    assert number in found.title
    bench.silent(f"{name}-{code}-thin", **{name: {field: enough}})
    bench.silent(f"{name}-{code}-thin", **{name: {field: None}})
    assert f"{name}-loop-holds" not in bench.judged(**{name: {field: thin}})
    assert f"{name}-loop-holds" in bench.judged(**{name: {field: enough}})


@pytest.mark.parametrize(("name", "period", "number"), [("current", 50e-6, "49.5 us"), ("speed", 500e-6, "495 us")])
def test_less_than_one_period_of_delay_is_thin(bench, name, period, number):
    found = bench.only(f"{name}-delay-margin-thin", **{name: {"delay_margin_s": 0.99 * period}})
    assert number in found.title
    assert "0.99 of its period" in found.reason
    bench.silent(f"{name}-delay-margin-thin", **{name: {"delay_margin_s": period}})


def test_a_sensitivity_behind_a_thin_margin_is_told_with_it(bench):
    found = bench.only("speed-phase-margin-thin", speed={"phase_margin_deg": 20.0, "peak_sensitivity": 2.9})
    assert "its peak sensitivity is 2.90" in found.reason
