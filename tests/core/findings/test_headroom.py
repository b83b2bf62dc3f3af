"""Limits in the response, and energy that comes back."""

from __future__ import annotations

import numpy as np
import pytest

TICKS = 9000
"""Of the quiet bench: 450 ms at 20 kHz."""


def marked(first: int, count: int) -> np.ndarray:
    flags = np.zeros(TICKS, dtype=np.bool_)
    flags[first : first + count] = True
    return flags


def clamped(first: int, count: int) -> dict:
    return {"response": {"current_limited_s": count / 20e3}, "traces": {"current_clamped": marked(first, count)}}


def test_a_clamped_step_names_the_ramp_that_would_stay_below(bench):
    found = bench.only("current-clamped", **clamped(400, 180))
    assert found.level == "thin"
    assert "9.00 ms" in found.title
    assert "the step of the reference asks for more than 20.0 A" in found.reason
    # 0.7 * (1.04 - 12e-3 - 20e-6 * 157.08) N m / 71e-6 kg m^2 = 10103 rad/s^2 = 96477 rpm/s.
    assert "A reference_ramp of 96000 rpm/s or less" in found.advice
    bench.silent("current-clamped")


def test_a_clamped_ramp_names_itself(bench):
    found = bench.one("current-clamped", duty={"reference_ramp": 2e4}, **clamped(400, 100))
    assert "the ramp of 190000 rpm/s" in found.reason


def test_a_clamp_in_the_load_and_in_the_stop(bench):
    found = bench.one("current-clamped", **clamped(5000, 100))
    assert "the load step of 60.0 mN*m" in found.reason
    stop = {"stop_at": 0.35}
    found = bench.one("current-clamped", duty=stop, **clamped(7000, 100))
    assert "the sudden stop" in found.reason
    assert "A stop_ramp of" in found.advice
    found = bench.one("current-clamped", duty={**stop, "stop_ramp": 2e4}, **clamped(7000, 100))
    assert "the stop at 190000 rpm/s" in found.reason
    found = bench.one("current-clamped", **clamped(0, 100))
    assert "before the reference comes" in found.reason


def test_no_ramp_is_named_where_none_would_do(bench):
    found = bench.one("current-clamped", train={"load_torque": 3.2}, **clamped(400, 100))
    assert "rpm/s" not in found.advice


def test_near_the_highest_speed_the_voltage_sets_the_ramp(bench):
    fast = {"machine": {"max_speed": None}, "duty": {"reference_speed": 7800.0 * bench.rpm}}
    found = bench.one("current-clamped", **fast, **clamped(400, 100))
    # (45.6 - 0.052 * 816.8)/0.6 = 5.21 A; 0.7 * (0.2709 - 12e-3 - 16.3e-3) N m / 71e-6 kg m^2 = 2391 rad/s^2.
    assert "A reference_ramp of 23000 rpm/s or less" in found.advice


def test_no_ramp_is_named_for_a_duty_that_cannot_be_held(bench):
    found = bench.one("current-clamped", duty={"load_step": 3.10}, **clamped(5000, 100))
    assert found.advice == "First ask for a duty that can be held"


def test_a_load_that_drives_makes_stopping_harder(bench):
    def ramp(**train):
        text = bench.one("current-clamped", train=train, duty={"stop_at": 0.2}, **clamped(4000, 100)).advice
        return float(text.split(" of ")[1].split(" ")[0])

    assert ramp(load_torque=-0.5) < ramp(load_torque=0.0) < ramp(load_torque=0.5)


def test_a_voltage_on_its_limit_while_the_current_lags(bench):
    # A quarter of 1/(2 pi 60 Hz) is 0.663 ms: 13.3 ticks.
    def limited(count, off):
        lag = np.zeros(TICKS)
        lag[400 : 400 + count] = off
        return {
            "response": {"voltage_limited_s": count / 20e3},
            "traces": {"voltage_clamped": marked(400, count), "current_reference": lag},
        }

    found = bench.only("voltage-clamped", **limited(14, 2.0))
    assert found.level == "thin"
    assert "700 us" in found.title
    assert "integrator winds up" in found.reason
    bench.silent("voltage-clamped", **limited(13, 2.0))
    # A twentieth of the limit of 20 A.
    bench.silent("voltage-clamped", **limited(14, 0.9))
    bench.one("voltage-clamped", **limited(14, 1.1))


def test_a_voltage_on_its_limit_without_a_speed_crossover(bench):
    lag = np.full(TICKS, 5.0)
    changes = {
        "response": {"voltage_limited_s": 1e-3},
        "traces": {"voltage_clamped": marked(0, 20), "current_reference": lag},
    }
    bench.one("voltage-clamped", speed={"crossover_hz": None}, **changes)


@pytest.mark.parametrize(("peak", "told"), [(22.1, True), (22.0, False)])
def test_a_peak_beyond_the_limit(bench, peak, told):
    if told:
        found = bench.only("current-peak-over-limit", response={"peak_current_a": peak})
        assert "22.1 A, 10.5 % above" in found.title
        assert "the machine's" in found.reason
        assert "18.1 A" in found.advice
    else:
        bench.silent("current-peak-over-limit", response={"peak_current_a": peak})


def test_the_peak_speaks_of_whose_limit_it_is(bench):
    found = bench.one("current-peak-over-limit", stage={"current_limit": 15.0}, response={"peak_current_a": 17.0})
    assert found.subject == "stage"
    assert "the limit of 15.0 A is the stage's" in found.reason
    sine = bench.one("current-peak-over-limit", machine=bench.pm_sine, response={"peak_current_a": 32.0})
    assert "22.6 A rms" in sine.title


def test_energy_given_back_on_stopping(bench):
    # Half of 71e-6 kg m^2 * (157.08 rad/s)^2 is 0.876 J; a fifth of it 0.175 J.
    found = bench.only("energy-returned", duty={"stop_at": 0.35}, response={"returned_energy_j": 0.18})
    assert found.level == "thin"
    assert "180 mJ" in found.title
    assert "876 mJ" in found.reason
    # 0.18 J over 0.5 * 48^2 * 0.21 V^2.
    assert "744 uF" in found.advice
    assert "brake resistor" in found.advice
    bench.silent("energy-returned", duty={"stop_at": 0.35}, response={"returned_energy_j": 0.17})
    bench.silent("energy-returned", response={"returned_energy_j": 0.18})


def test_energy_given_back_by_a_load_that_drives(bench):
    bench.one("energy-returned", duty={"load_step": -0.5}, response={"returned_energy_j": 3.0})


def test_nothing_without_a_response(bench):
    assert set(bench.judged(without_response=True)) == {"current-loop-holds", "speed-loop-holds"}
