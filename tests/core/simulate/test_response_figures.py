"""Figures of the speed, from traces made by hand: the windows, the whole ticks, and when there is none."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from drives import STAGE
from gainbench.model import Duty
from gainbench.simulate.duty import schedule
from gainbench.simulate.response_figures import SpeedFigures, speed_figures

STAGE = replace(STAGE, current_rate=1000.0, speed_rate=1000.0, pwm_frequency=1000.0)
DUTY = Duty(reference_speed=100.0, reference_at=2e-3, load_step=0.1, load_at=9e-3, length=14e-3)
SPEED = np.array([0, 0, 0, 10, 60, 91, 108, 103, 101, 100, 94, 97, 99, 100], dtype=float)
"""10 % at tick 3, 90 % at 5, the top at 6, last outside 2 % at 7; the load's dip at 10, last outside at 11."""
REFERENCE = np.array([0, 0] + [100] * 12, dtype=float)


def figures(duty=DUTY, speed=SPEED, reference=REFERENCE):
    return speed_figures(speed, reference, duty=duty, plan=schedule(duty, STAGE), stage=STAGE)


EXPECTED = SpeedFigures(
    overshoot_percent=8.0,
    rise_time_s=2e-3,
    settling_time_s=5e-3,
    load_dip_rad_s=6.0,
    recovery_time_s=2e-3,
)


def same(got: SpeedFigures, wanted: SpeedFigures) -> None:
    for name in SpeedFigures.__slots__:
        value = getattr(wanted, name)
        assert getattr(got, name) == (None if value is None else pytest.approx(value, rel=1e-12)), name


def test_step_and_load():
    same(figures(), EXPECTED)


def test_all_is_signed_by_the_reference():
    same(figures(replace(DUTY, reference_speed=-100.0), -SPEED, -REFERENCE), EXPECTED)
    # The wrong way round it never gets there.
    wrong = figures(replace(DUTY, reference_speed=-100.0), SPEED, -REFERENCE)
    assert wrong.overshoot_percent == 0.0
    assert wrong.rise_time_s is None
    assert wrong.settling_time_s is None


def test_without_a_load_step_the_window_goes_on():
    calm = figures(replace(DUTY, load_step=0.0))
    # The last outside 2 % is now tick 11, 9 ms after the reference.
    same(calm, replace(EXPECTED, settling_time_s=9e-3, load_dip_rad_s=None, recovery_time_s=None))


def test_without_a_reference_there_is_only_the_dip():
    idle = figures(replace(DUTY, reference_speed=0.0), SPEED - REFERENCE, np.zeros(14))
    same(idle, SpeedFigures(load_dip_rad_s=6.0))
    same(figures(replace(DUTY, reference_speed=0.0, load_step=0.0)), SpeedFigures())


@pytest.mark.parametrize("load_at", [0.0, 1e-3, 2e-3])
def test_a_load_that_does_not_come_after_the_reference_leaves_none(load_at):
    same(figures(replace(DUTY, load_at=load_at)), SpeedFigures())


def test_a_stop_ends_both_windows():
    early = figures(replace(DUTY, stop_at=7e-3))
    # Ticks 2 to 6 are left, the last of them outside 2 %; the load comes after the stop.
    same(early, SpeedFigures(overshoot_percent=8.0, rise_time_s=2e-3))
    late = figures(replace(DUTY, stop_at=11e-3))
    same(late, replace(EXPECTED, recovery_time_s=None))


def test_a_stop_before_the_reference_leaves_nothing_to_read():
    same(figures(replace(DUTY, stop_at=1e-3)), SpeedFigures())


def test_a_time_that_ends_with_its_window_is_no_time():
    unsettled = SPEED.copy()
    unsettled[8] = 97.9
    unsettled[13] = 102.1
    got = figures(speed=unsettled)
    assert got.settling_time_s is None
    assert got.recovery_time_s is None


def test_never_outside_is_zero():
    still = figures(speed=REFERENCE.copy())
    nothing = SpeedFigures(
        overshoot_percent=0.0, rise_time_s=0.0, settling_time_s=0.0, load_dip_rad_s=0.0, recovery_time_s=0.0
    )
    same(still, nothing)


def test_on_the_edge_of_the_band_is_inside():
    edge = REFERENCE.copy()
    edge[5:] = 98.0
    assert figures(speed=edge).settling_time_s == 0.0


def test_the_dip_is_from_the_reference_in_force():
    ramp = REFERENCE.copy()
    ramp[9:12] = [80.0, 90.0, 97.0]
    got = figures(speed=ramp, reference=ramp)
    assert got.load_dip_rad_s == 0.0
    assert got.recovery_time_s == 0.0
