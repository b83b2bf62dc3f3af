"""Typed gains in the library's own terms."""

from __future__ import annotations

import pytest

from gainbench.model import HandGains
from gainbench.tuning.hand import hand_gains


@pytest.mark.parametrize(
    ("typed", "kp", "ki"),
    [
        (HandGains(kp=2.0, ki=30.0), 2.0, 30.0),
        (HandGains(kp=2.0, ti=0.5), 2.0, 4.0),
        (HandGains(kp=2.0, wi=8.0), 2.0, 16.0),
        (HandGains(kp=2.0, ki=30.0, ki_has_period=True), 2.0, 30.0 / 0.25),
        (HandGains(kp=2.0, ki=30.0, kp_is_torque=True, ki_is_torque=True), 20.0, 300.0),
        (HandGains(kp=2.0, ki=30.0, kp_is_torque=True), 20.0, 30.0),
        (HandGains(kp=2.0, ti=0.5, kp_is_torque=True), 20.0, 40.0),
        (HandGains(kp=2.0, ki=30.0, ki_is_torque=True, ki_has_period=True), 2.0, 1200.0),
        (HandGains(kp=0.0, ki=30.0), 0.0, 30.0),
    ],
)
def test_every_form(typed, kp, ki):
    gains = hand_gains(typed, period=0.25, torque_constant=0.1)
    assert gains.kp == pytest.approx(kp, rel=1e-15)
    assert gains.ki == pytest.approx(ki, rel=1e-15)


def test_one_of_the_three_is_needed():
    with pytest.raises(ValueError, match="ki, ti and wi"):
        hand_gains(HandGains(kp=1.0), period=1.0, torque_constant=1.0)
