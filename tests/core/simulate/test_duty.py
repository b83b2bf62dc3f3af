"""A duty's times as ticks: what "from t on" means, to the rounding of a time."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from drives import STAGE
from gainbench.model import Duty
from gainbench.simulate.duty import first_tick, schedule

DUTY = Duty(reference_speed=-80.0, reference_at=20e-3, reference_ramp=1000.0, load_step=0.1, load_at=0.25, length=0.45)


@pytest.mark.parametrize(
    ("time", "tick"),
    [(0.0, 0), (50e-6, 1), (51e-6, 2), (20e-3, 400), (0.1 + 0.2, 6000), (50e-6 * (1 + 9e-7), 1), (50e-6 * 1.000002, 2)],
)
def test_the_first_tick_not_before_a_time(time, tick):
    assert first_tick(time, STAGE) == tick


@given(tick=st.integers(0, 2_000_000), rate=st.sampled_from([8e3, 10e3, 16e3, 20e3, 1e5 / 3.0]))
def test_a_time_on_a_tick_is_that_tick(tick, rate):
    assert first_tick(tick / rate, replace(STAGE, current_rate=rate)) == tick


def test_times_of_a_duty():
    plan = schedule(DUTY, STAGE)
    assert (plan.ticks, plan.reference, plan.load, plan.stop) == (9000, 400, 5000, 9000)
    assert (plan.step_end, plan.load_end) == (5000, 9000)
    stopped = schedule(replace(DUTY, stop_at=0.2), STAGE)
    assert (stopped.stop, stopped.step_end, stopped.load_end) == (4000, 4000, 4000)


def test_the_load_comes_halfway_where_nothing_is_said():
    assert schedule(replace(DUTY, load_at=None), STAGE).load == 4500


@pytest.mark.parametrize(
    ("stop_at", "size"),
    # 1000 rad/s^2 from 20 ms on: 30 rad/s at 50 ms, all of it from 100 ms on, nothing before it has begun.
    [(50e-3, 30.0), (100e-3, 80.0), (0.2, 80.0), (20e-3, 0.0), (10e-3, 0.0)],
)
def test_the_reference_goes_back_from_where_it_is(stop_at, size):
    assert schedule(replace(DUTY, stop_at=stop_at), STAGE).stop_size == pytest.approx(size, abs=1e-9)


def test_a_step_is_all_there_at_once():
    step = replace(DUTY, reference_ramp=0.0)
    assert schedule(replace(step, stop_at=20e-3), STAGE).stop_size == 80.0
    assert schedule(replace(step, stop_at=19e-3), STAGE).stop_size == 0.0
