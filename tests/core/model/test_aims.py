"""The words of the aims, and what holds where a sheet says nothing."""

from __future__ import annotations

import pytest

from gainbench.model import (
    CURRENT_METHODS,
    SPEED_METHODS,
    Aims,
    DesignMethod,
    Firmware,
    GainForm,
    HandGains,
    IntegratorRule,
    LoopAims,
    SpeedAims,
    SpeedOutput,
    WindupRule,
)


@pytest.mark.parametrize(
    ("words", "enumeration"),
    [
        (("backward", "forward", "trapezoid"), IntegratorRule),
        (("hold", "back-calculation"), WindupRule),
        (("kp-ki", "kp-ti", "kp-wi"), GainForm),
        (("A", "N*m"), SpeedOutput),
    ],
)
def test_words_of_format_1(words, enumeration):
    assert tuple(enumeration) == words


def test_each_loop_has_the_methods_of_format_1():
    both = {"crossover-margin", "bandwidth-margin", "lag-cancellation", "pole-placement", "by-hand"}
    assert set(CURRENT_METHODS) == both | {"magnitude-optimum"}
    assert set(SPEED_METHODS) == both | {"symmetric-optimum"}
    assert set(CURRENT_METHODS) | set(SPEED_METHODS) == set(DesignMethod)
    assert len(CURRENT_METHODS) == len(SPEED_METHODS) == 6


def test_defaults_of_the_firmware():
    assert Firmware() == Firmware(
        integrator=IntegratorRule.BACKWARD,
        windup=WindupRule.HOLD,
        back_emf_feedforward=False,
        gain_form=GainForm.KP_KI,
        ki_includes_period=False,
        speed_unit="rad/s",
        speed_unit_size=1.0,
        speed_output=SpeedOutput.AMPERE,
    )


def test_the_reference_counts_whole_by_default():
    aims = Aims(
        current=LoopAims(method=DesignMethod.MAGNITUDE_OPTIMUM), speed=SpeedAims(method=DesignMethod.SYMMETRIC_OPTIMUM)
    )
    assert aims.speed.reference_weight == 1.0
    assert aims.firmware == Firmware()


def test_gains_by_hand_are_plain_si_unless_told():
    hand = HandGains(kp=2.0, ki=3.0)
    assert (hand.ti, hand.wi) == (None, None)
    assert (hand.kp_is_torque, hand.ki_is_torque, hand.ki_has_period) == (False, False, False)
