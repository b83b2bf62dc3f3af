"""The duty's defaults, as format 1 gives them."""

from __future__ import annotations

from gainbench.model import MAX_TICKS, Duty


def test_defaults():
    duty = Duty(reference_speed=-10.0, length=2.0)
    assert (duty.reference_at, duty.reference_ramp, duty.load_step) == (0.0, 0.0, 0.0)
    assert (duty.stop_at, duty.stop_ramp) == (None, 0.0)


def test_the_load_comes_at_half_time_unless_told():
    assert Duty(reference_speed=1.0, length=0.3).load_time == 0.15
    assert Duty(reference_speed=1.0, length=0.3, load_at=0.0).load_time == 0.0
    assert Duty(reference_speed=1.0, length=0.3, load_at=0.25).load_time == 0.25


def test_the_longest_duty():
    assert MAX_TICKS == 2_000_000
