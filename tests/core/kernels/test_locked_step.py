"""The locked-rotor step, against closed forms and against the same law on a fine grid."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.locked_step import LockedPi, Winding, locked_step, met, next_voltage
from quantities import assert_quantity

R, L = 0.6, 0.45e-3


def winding(filter_time):
    return Winding(R, L, filter_time)


def test_a_level_is_met_on_the_exponential():
    # 63.2 % of the way after one time constant (K11, closed form).
    assert_quantity(
        met(0.0, 2.0, 2.0 * (1.0 - math.exp(-1.0)), 0.75e-3), 0.75e-3, rtol=1e-14, unit="s", why="closed form"
    )


def test_the_three_integrator_rules_by_hand():
    assert next_voltage(LockedPi(2.0, 0.5, 0), 1.0, 0.0, 10.0) == (12.5, 10.5)
    assert next_voltage(LockedPi(2.0, 0.5, 1), 1.0, 0.0, 10.0) == (12.0, 10.5)
    assert next_voltage(LockedPi(2.0, 0.5, 2), 1.0, 3.0, 10.0) == (13.0, 11.0)


def fine(filter_time, period, held, part, pi, ticks, parts):
    """The law with the plant stepped by small exact parts of a period."""
    width = period / parts
    decay = math.exp(-R / L * width)
    i = f = s = before = 0.0
    sent = [0.0] * 5
    times, currents = [0.0], [0.0]
    for k in range(ticks):
        error = 1.0 - (f if filter_time > 0.0 else i)
        u, s = next_voltage(pi, error, before, s)
        before = error
        sent.insert(0, u)
        for j in range(parts):
            v = sent[held + 1] if j < round(part * parts) else sent[held]
            new = v / R + (i - v / R) * decay
            if filter_time > 0.0:
                # Trapezoidal input of the filter: error of second order in the small part.
                g = math.exp(-width / filter_time)
                f = g * f + (1.0 - g) * 0.5 * (i + new)
            i = new
            times.append((k + (j + 1) / parts) * period)
            currents.append(i)
    return np.array(times), np.array(currents)


@pytest.mark.parametrize("rule", [0, 1, 2])
@pytest.mark.parametrize(
    ("held", "part", "filter_time"), [(1, 0.0, 0.0), (0, 0.5, 0.0), (1, 0.4, 0.0), (1, 0.0, 2e-5), (2, 0.0, 0.0)]
)
def test_rise_and_overshoot_between_ticks(rule, held, part, filter_time):
    period = 50e-6
    pi = LockedPi(2.2, 4000.0 * period, rule)
    rise, largest, time, curve = locked_step(winding(filter_time), period, held, part, pi)
    t, i = fine(filter_time, period, held, part, pi, 2000, 200)
    low, high = (
        np.interp(level, i[: np.argmax(i >= level) + 1][-2:], t[: np.argmax(i >= level) + 1][-2:])
        for level in (0.1, 0.9)
    )
    assert_quantity(rise, high - low, rtol=1e-4, unit="s", why="parts of a tick in the reference")
    assert_quantity(largest, i.max(), rtol=1e-5, unit="1", why="filter input by trapezoids in the reference")
    drawn = np.interp(time, t, i)
    assert_quantity(curve, drawn, atol=2e-4, unit="1", why="filter input by trapezoids in the reference")
    assert abs(curve[-1] - 1.0) < 4e-3


def test_without_an_integral_part_ninety_percent_is_never_met():
    rise, largest, _, _ = locked_step(winding(0.0), 50e-6, 1, 0.0, LockedPi(1.0, 0.0, 0))
    assert math.isnan(rise)
    assert_quantity(largest, 1.0 / 1.6, rtol=0.1, unit="1", why="the end value Kp/(Kp + R) with some overshoot")


def test_a_locked_loop_that_runs_away_says_nothing():
    _, largest, _, curve = locked_step(winding(0.0), 50e-6, 1, 0.0, LockedPi(30.0, 0.2, 0))
    assert math.isnan(largest)
    assert np.all(np.isfinite(curve))


def test_w3_lag_cancellation_rises_in_ln9_over_the_bandwidth():
    # W3: Kp = alpha L, Ki = alpha R gives a first-order step, 10-90 % in ln 9/alpha. Harnefors & Nee, IEEE Trans. Ind.
    # Appl. 34(1), 1998 (formulas from memory). At 2,000 ticks per time constant, without update delay.
    alpha = 2000.0
    period = 1.0 / alpha / 2000.0
    rise, largest, _, _ = locked_step(winding(0.0), period, 0, 0.0, LockedPi(alpha * L, alpha * R * period, 0))
    assert_quantity(rise, math.log(9.0) / alpha, rtol=5e-3, unit="s", why="half a tick of hold")
    assert largest < 1.0 + 1e-3


@pytest.mark.parametrize("ticks_per_lag", [20, 2000])
def test_the_drawn_step_ends_at_its_end_value_however_fine_the_sampling(ticks_per_lag):
    alpha = 2000.0
    period = 1.0 / alpha / ticks_per_lag
    _, _, time, curve = locked_step(winding(0.0), period, 0, 0.0, LockedPi(alpha * L, alpha * R * period, 0))
    assert_quantity(curve[-1], 1.0, atol=4e-3, unit="1", why="share of the end value that is not worth drawing")
    # A first-order lag is that near after ln(1/0.003) = 5.8 time constants; a quarter more is drawn.
    assert_quantity(time[-1] * alpha, 7.3, rtol=0.1, unit="1", why="delay and hold beside the lag")
