"""The stage's rates and defaults, as format 1 gives them."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.model import SpeedSensor, Stage
from quantities import assert_quantity


def stage(*, current_rate: float = 20e3, speed_rate: float = 2e3) -> Stage:
    return Stage(
        bus_voltage=48.0,
        current_limit=20.0,
        pwm_frequency=20e3,
        current_rate=current_rate,
        speed_rate=speed_rate,
        speed_sensor=SpeedSensor.IDEAL,
    )


def test_words_of_format_1():
    assert tuple(SpeedSensor) == ("encoder", "ideal")


def test_defaults():
    plain = stage()
    assert (plain.voltage_use, plain.update_delay, plain.current_filter) == (0.95, 1.0, 0.0)
    assert (plain.speed_delay, plain.speed_window, plain.speed_filter) == (0, 1, 0.0)


def test_periods():
    plain = stage()
    assert (plain.current_period, plain.speed_period, plain.speed_divisor) == (1.0 / 20e3, 1.0 / 2e3, 10)


@given(speed_rate=st.floats(10.0, 20e3), divisor=st.integers(1, 1000))
def test_the_speed_period_is_a_whole_number_of_current_periods(speed_rate, divisor):
    one = stage(current_rate=speed_rate * divisor, speed_rate=speed_rate)
    assert one.speed_divisor == divisor
    periods = one.speed_period / one.current_period
    assert_quantity(periods, divisor, rtol=4e-16, unit="1", why="two divisions and a product, half a last digit each")


@pytest.mark.parametrize("rate", [30e3, 44.1e3 / 3.0, 1e5 / 7.0])
def test_a_rate_that_is_no_round_number_still_divides(rate):
    assert stage(current_rate=rate, speed_rate=rate / 7.0).speed_divisor == 7
