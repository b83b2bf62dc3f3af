"""Overshoot, settling, recovery, and what is left at the end."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.results import Gains


def speed_of(bench, share: float) -> dict:
    """A motor at a share of its reference."""
    reference = bench.case().response.trace.reference
    return {"speed": share * reference}


def test_a_step_of_current_that_overshoots(bench):
    found = bench.only("current-overshoot", locked={"overshoot_percent": 30.1})
    assert "30.1 %" in found.title
    bench.silent("current-overshoot", locked={"overshoot_percent": 30.0})
    bench.silent("current-overshoot", locked={"overshoot_percent": None})


def test_a_speed_that_overshoots(bench):
    found = bench.only("speed-overshoot", response={"overshoot_percent": 32.0})
    assert "32.0 %" in found.title
    assert "1980 rpm" in found.reason
    assert "Lower reference_weight" in found.advice
    bench.silent("speed-overshoot", response={"overshoot_percent": 30.0})
    found = bench.one("speed-overshoot", response={"overshoot_percent": 32.0}, speed_aims={"reference_weight": 0.0})
    assert "reference_weight" not in found.advice


def test_a_speed_that_does_not_settle(bench):
    found = bench.only("speed-not-settled", response={"settling_time_s": None}, traces=speed_of(bench, 0.95))
    assert found.level == "thin"
    assert "230 ms" in found.title
    assert "75 rpm off, 5.00 % of the reference" in found.reason
    bench.silent("speed-not-settled")
    bench.silent("speed-not-settled", response={"settling_time_s": 0.0})


def test_why_it_does_not_settle(bench):
    late = {"response": {"settling_time_s": None}}
    assert "ramp alone takes 524 ms" in bench.one("speed-not-settled", duty={"reference_ramp": 300.0}, **late).reason
    limited = {"response": {"settling_time_s": None, "current_limited_s": 0.2}}
    assert "on its limit for 200 ms" in bench.one("speed-not-settled", **limited).reason
    slow = {"speed_loop": {"gains": Gains(kp=0.481, ki=4.0)}}
    assert "Kp/Ki = 120 ms" in bench.one("speed-not-settled", **slow, **late).reason
    assert "no integral" in bench.one("speed-not-settled", speed_loop={"gains": Gains(kp=0.5, ki=0.0)}, **late).reason


def test_a_load_that_is_not_made_up(bench):
    found = bench.only("load-not-recovered", response={"recovery_time_s": None}, traces=speed_of(bench, 0.97))
    assert "within 200 ms of the load step" in found.title
    assert "45 rpm off, 3.00 % of the reference" in found.reason
    slow = {"speed_loop": {"gains": Gains(kp=0.481, ki=4.0)}}
    found = bench.one("load-not-recovered", response={"recovery_time_s": None}, **slow)
    assert "Kp/Ki" in found.reason
    assert "Raise Ki" in found.advice
    bench.silent("load-not-recovered")
    bench.silent("load-not-recovered", response={"recovery_time_s": None, "load_dip_rad_s": None})


def test_recovery_ends_with_the_stop(bench):
    found = bench.one("load-not-recovered", response={"recovery_time_s": None}, duty={"stop_at": 0.3})
    assert "within 50.0 ms" in found.title


NO_FIGURES = {
    "overshoot_percent": None,
    "rise_time_s": None,
    "settling_time_s": None,
    "load_dip_rad_s": None,
    "recovery_time_s": None,
}


def test_an_error_left_where_no_figure_tells(bench):
    early = {"duty": {"load_at": 0.01}, "response": NO_FIGURES}
    found = bench.only("speed-off-at-end", traces=speed_of(bench, 0.97), **early)
    assert "45 rpm off at 450 ms" in found.title
    bench.silent("speed-off-at-end", traces=speed_of(bench, 0.985), **early)


@pytest.mark.parametrize(("left", "told"), [(0.11, True), (0.09, False)])
def test_a_load_without_a_reference(bench, left, told):
    changes = {
        "duty": {"reference_speed": 0.0},
        "response": {**NO_FIGURES, "load_dip_rad_s": 1.0},
        "traces": {"speed": np.full(9000, -left), "reference": np.zeros(9000)},
    }
    if told:
        assert "1.05 rpm off" in bench.only("speed-off-at-end", **changes).title
    else:
        bench.silent("speed-off-at-end", **changes)


def test_nothing_without_reference_and_load(bench):
    still = {"duty": {"reference_speed": 0.0, "load_step": 0.0}, "response": NO_FIGURES}
    assert set(bench.judged(**still)) == {"current-loop-holds", "speed-loop-holds"}
