"""Start, voltage and current of the duty once it is steady."""

from __future__ import annotations


def test_a_start_over_a_limit(bench):
    found = bench.one(
        "start-over-limit", start_problem="holding 9 N*m takes 58 A and the limit is 20 A", without_response=True
    )
    assert found.level == "breaks"
    assert "58 A" in found.reason
    bench.silent("start-over-limit")
    bench.silent("start-over-limit", without_response=True)
    sine = bench.one("start-over-limit", start_problem="it takes 58 A", without_response=True, machine=bench.pm_sine)
    assert "phase peak" in sine.reason


def test_a_load_beyond_the_current_limit_breaks(bench):
    # 20 A make 1.04 N m, less 15.1 mN m of friction at 1500 rpm: 3.0746 N m at the load shaft.
    found = bench.one("duty-over-current-limit", duty={"load_step": 3.10})
    assert found.level == "breaks"
    assert "20.2 A, the limit is 20.0 A" in found.title
    bench.silent("duty-over-current-limit", duty={"load_step": 3.07})
    bench.silent("duty-over-current-limit", duty={"load_step": 3.10}, start_problem="too much", without_response=True)


def test_a_speed_beyond_the_voltage_breaks(bench):
    fast = {"max_speed": None}
    # 45.6 V over 52 mV s/rad are 8374 rpm without any load.
    found = bench.one("duty-over-voltage", machine=fast, duty={"reference_speed": 8400.0 * bench.rpm})
    assert found.level == "breaks"
    assert "8400 rpm" in found.title
    assert "the stage gives 45.6 V" in found.title
    assert "without any load the machine tops out at 8374 rpm" in found.reason
    found = bench.one(
        "duty-over-voltage", machine=fast, duty={"reference_speed": -8360.0 * bench.rpm, "load_step": 0.0}
    )
    assert "against friction alone" in found.reason
    found = bench.one("duty-over-voltage", machine=fast, duty={"reference_speed": 8300.0 * bench.rpm, "load_step": 0.5})
    assert "with the load it cannot" in found.reason
    bench.silent("duty-over-voltage", machine=fast, duty={"reference_speed": 8300.0 * bench.rpm, "load_step": 0.0})


def test_little_voltage_left_is_thin(bench):
    fast = {"max_speed": None}
    # 0.9 * 45.6 V = 41.04 V less 0.6 * friction current of about 0.55 A: 780 rad/s = 7450 rpm or so.
    found = bench.one("voltage-headroom-thin", machine=fast, duty={"reference_speed": 7500.0 * bench.rpm})
    assert found.level == "thin"
    assert "7500 rpm takes 90." in found.title
    near = bench.judged(machine=fast, duty={"reference_speed": 7400.0 * bench.rpm})
    assert "voltage-headroom-thin" not in near
    over = bench.judged(machine=fast, duty={"reference_speed": 8400.0 * bench.rpm})
    assert "voltage-headroom-thin" not in over


def test_voltages_of_a_sinusoidal_machine_are_named(bench):
    machine = {**bench.pm_sine, "max_speed": None}
    found = bench.one("duty-over-voltage", machine=machine, duty={"reference_speed": 20000.0 * bench.rpm})
    assert "phase peak" in found.title


def test_a_duty_that_cannot_be_held_is_not_told_twice(bench):
    found = bench.judged(
        duty={"load_step": 3.10}, response={"recovery_time_s": None, "settling_time_s": None, "overshoot_percent": 40.0}
    )
    assert "duty-over-current-limit" in found
    assert not {"load-not-recovered", "speed-not-settled", "speed-overshoot"} & set(found)
