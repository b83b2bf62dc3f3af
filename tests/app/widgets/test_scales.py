import numpy as np
import pytest

from gainbench_app.widgets.scales import (
    corners,
    frequency_text,
    nice_range,
    nice_step,
    number_text,
    stepped,
    time_text,
)


@pytest.mark.parametrize(
    ("span", "most", "step"), [(10.0, 5, 2.0), (0.45, 6, 0.1), (1.0, 3, 0.5), (7.0, 3, 2.5), (0.0, 3, 1.0)]
)
def test_steps_are_nice(span, most, step):
    assert nice_step(span, most) == pytest.approx(step)


def test_a_range_holds_its_values_and_ends_at_half_steps():
    found = nice_range(-3.0, 23.6, most=3)
    assert found.low <= -3.0 < 23.6 <= found.high
    assert found.low / (found.step / 2.0) == pytest.approx(round(found.low / (found.step / 2.0)))
    assert found.ticks() == [0.0, 10.0, 20.0]
    assert nice_range(5.0, 5.0).span > 0.0


def test_a_range_grows_at_once_and_shrinks_late():
    shown = nice_range(0.0, 100.0)
    assert stepped(shown, low=0.0, high=90.0) is shown
    assert stepped(shown, low=0.0, high=120.0).high >= 120.0
    assert stepped(shown, low=0.0, high=30.0).high < 50.0
    assert stepped(None, low=0.0, high=30.0).high < 50.0


def test_numbers_are_written_for_people():
    assert number_text(1500.0, 500.0) == "1\N{NARROW NO-BREAK SPACE}500"
    assert number_text(-0.25, 0.25) == "\N{MINUS SIGN}0.25"
    assert number_text(0.0, 0.1) == "0"
    assert frequency_text(60.0) == "60.0\N{NO-BREAK SPACE}Hz"
    assert frequency_text(999.7) == "1.00\N{NO-BREAK SPACE}kHz"
    assert time_text(0.0232) == "23.2\N{NO-BREAK SPACE}ms"
    assert time_text(1e-4) == "100\N{NO-BREAK SPACE}µs"
    assert time_text(0.0) == "0\N{NO-BREAK SPACE}ms"
    assert time_text(2.5) == "2.50\N{NO-BREAK SPACE}s"


def test_a_ramp_keeps_only_its_corners():
    x = np.linspace(0.0, 4.0, 4001)
    y = np.clip(x - 1.0, 0.0, 2.0)
    corner_x, corner_y = corners(x, y)
    assert len(corner_x) < 12
    np.testing.assert_allclose(np.interp(x, corner_x, corner_y), y, atol=1e-12)
