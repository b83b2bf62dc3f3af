"""One step of the PI controller, worked by hand: three integrator rules, two windup rules, the feedforward."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.kernels.pi import pi_step
from gainbench.kernels.response_records import BACKWARD, FORWARD, TRAPEZOID, PiInputs, PiLaw, PiState


def law(rule=BACKWARD, *, kp=2.0, ki_period=0.5, weight=1.0, hold=True, relief=0.0):
    return PiLaw(kp, ki_period, weight, rule, hold, relief)


def run(controller, errors, *, limit=100.0, addend=0.0, start=0.0):
    """Outputs, integrators and clamps over ticks at which the reference is the error and nothing is measured."""
    state, rows = PiState(start, 0.0), []
    for error in errors:
        state, output = pi_step(controller, state, PiInputs(error, 0.0, addend, limit))
        rows.append((output.value, state.integral, output.clamped))
    return rows


@pytest.mark.parametrize(
    ("rule", "expected"),
    [
        # e = 1, 3, -2: backward sums 0.5, 2, 1 and adds 2 e; forward puts out the sum before; trapezoid sums halves.
        (BACKWARD, [(2.5, 0.5, False), (8.0, 2.0, False), (-3.0, 1.0, False)]),
        (FORWARD, [(2.0, 0.5, False), (6.5, 2.0, False), (-2.0, 1.0, False)]),
        (TRAPEZOID, [(2.25, 0.25, False), (7.25, 1.25, False), (-2.5, 1.5, False)]),
    ],
)
def test_three_ticks_of_each_integrator_rule(rule, expected):
    assert run(law(rule), [1.0, 3.0, -2.0]) == expected


@pytest.mark.parametrize(
    ("rule", "expected"),
    [
        # e = 3 asks for more than 4 in every rule: held. e = -1 brings it back inside.
        (BACKWARD, [(4.0, 0.0, True), (-2.5, -0.5, False)]),
        (FORWARD, [(4.0, 0.0, True), (-2.0, -0.5, False)]),
        # The error of the held tick still counts as the old one: (-1 + 3)/2 = 1 goes into the sum.
        (TRAPEZOID, [(4.0, 0.0, True), (-1.5, 0.5, False)]),
    ],
)
def test_hold_keeps_the_integrator_at_the_clamp(rule, expected):
    assert run(law(rule), [3.0, -1.0], limit=4.0) == expected


def test_hold_lets_the_integrator_come_back_from_beyond():
    # s = 20 against a limit of 4: u is far above it while e < 0, so that the sum goes down in spite of the clamp.
    assert run(law(), [-1.0, -1.0], limit=4.0, start=20.0) == [(4.0, 19.5, True), (4.0, 19.0, True)]


def test_hold_looks_at_the_sum_with_the_feedforward_in_it():
    # p + s' = -2.5 alone would be inside; with the addend u = -7.5, and e u > 0: held.
    assert run(law(), [-1.0], limit=4.0, addend=-5.0) == [(-4.0, 0.0, True)]
    # With the addend on the other side u = 7.5 and e u < 0: the sum goes on.
    assert run(law(), [-1.0], limit=4.0, addend=10.0) == [(4.0, -0.5, True)]


def test_back_calculation_takes_a_share_of_what_was_cut_off():
    # s' = 1.5, u = 7.5, cut by 3.5; a quarter of that comes off the sum.
    assert run(law(hold=False, relief=0.25), [3.0], limit=4.0) == [(4.0, 0.625, True)]
    assert run(law(FORWARD, hold=False, relief=0.25), [3.0], limit=4.0) == [(4.0, 1.0, True)]


def test_weight_touches_the_proportional_part_alone():
    state, output = pi_step(law(weight=0.25), PiState(0.0, 0.0), PiInputs(4.0, 1.0, 0.0, 100.0))
    # p = 2 (0.25 * 4 - 1) = 0, e = 3.
    assert output.value == 1.5
    assert state == PiState(1.5, 3.0)


def test_a_sum_on_the_limit_is_not_clamped():
    assert run(law(), [1.6], limit=4.0) == [(4.0, 0.8, False)]


def test_no_room_puts_out_nothing():
    value, _, clamped = run(law(), [1.0], limit=0.0)[0]
    assert value == 0.0
    assert clamped


@given(
    error=st.floats(0.1, 50.0),
    ticks=st.integers(1, 60),
    rule=st.sampled_from([BACKWARD, FORWARD, TRAPEZOID]),
    hold=st.booleans(),
)
def test_the_integrator_does_not_wind_up(error, ticks, rule, hold):
    # R9: Astrom & Hagglund; Astrom & Murray (from memory): with anti-windup the integrator stays within the clamp.
    limit = 4.0
    controller = law(rule, hold=hold, relief=0.25)
    for value, integral, _ in run(controller, [error] * ticks, limit=limit):
        assert abs(value) <= limit
        assert integral <= limit + controller.ki_period * error


@given(errors=st.lists(st.floats(-5.0, 5.0), max_size=20), rule=st.sampled_from([BACKWARD, FORWARD, TRAPEZOID]))
def test_both_ways_are_alike(errors, rule):
    there = run(law(rule), errors, limit=3.0)
    back = run(law(rule), [-error for error in errors], limit=3.0)
    assert [(-value, -integral, clamped) for value, integral, clamped in there] == back
