"""Numbers for sentences."""

from __future__ import annotations

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.findings.numbers import acceleration, amount, decibels, degrees, digits, hertz, percent, speed


@pytest.mark.parametrize(
    ("number", "text"),
    [
        (0.0, "0"),
        (1.234, "1.23"),
        (-1.234, "-1.23"),
        (9.996, "10.0"),
        (60.0, "60.0"),
        (99.96, "100"),
        (999.6, "1000"),
        (21234.0, "21234"),
        (0.0123, "0.0123"),
        (0.5, "0.50"),
    ],
)
def test_three_digits(number, text):
    assert digits(number) == text


@pytest.mark.parametrize(
    ("value", "name", "text"),
    [
        (1234.0, "Hz", "1.23 kHz"),
        (999.6, "Hz", "1.00 kHz"),
        (999.4, "Hz", "999 Hz"),
        (2.35, "A", "2.35 A"),
        (-0.0005, "s", "-500 us"),
        (0.0, "J", "0 J"),
        (2e-9, "F", "2.00 nF"),
        (3e-12, "F", "3e-12 F"),
    ],
)
def test_the_prefix_gives_a_handy_size(value, name, text):
    assert amount(value, name) == text


def test_angles_frequencies_speeds_and_levels():
    assert hertz(math.tau * 1230.0) == "1.23 kHz"
    assert degrees(60.0) == "60.0 deg"
    assert degrees(-0.0) == "0.0 deg"
    assert decibels(10.12) == "10.1 dB"
    assert percent(0.125) == "12.5 %"
    assert speed(1500.0 * math.pi / 30.0) == "1500 rpm"
    assert speed(-138240.0 * math.pi / 30.0) == "-138200 rpm"
    assert speed(29.3 * math.pi / 30.0) == "29.3 rpm"
    assert speed(0.0) == "0 rpm"
    assert acceleration(21234.0 * math.pi / 30.0) == "21000 rpm/s"
    assert acceleration(0.5 * math.pi / 30.0) == "0.5 rpm/s"


@given(st.floats(allow_nan=True, allow_infinity=True))
def test_no_number_is_shown_as_nan_or_infinite(value):
    for text in (digits(value), amount(value, "A"), hertz(value), degrees(value), speed(value), acceleration(value)):
        assert not re.search(r"nan|inf", text)
    for text in (percent(value), decibels(value)):
        assert not re.search(r"nan|inf", text)


@given(st.floats(min_value=1e-9, max_value=1e11))
def test_what_is_shown_is_the_value_to_half_a_percent(value):
    text = amount(value, "A")
    shown, name = text.split(" ")
    factor = {"nA": 1e-9, "uA": 1e-6, "mA": 1e-3, "A": 1.0, "kA": 1e3, "MA": 1e6, "GA": 1e9}[name]
    # Three digits are half a unit of the third at worst: 0.5 %.
    assert abs(float(shown) * factor - value) <= 0.00501 * value
