"""The motion over a short piece as a power series: states, zeros of the current, energy given back."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from drives import ELASTIC, RIGID, matrix_of
from gainbench.kernels.motion import CHARGE, prepare_motion, read_flow, read_step, stride
from gainbench.kernels.response_records import Inputs, PlantState
from gainbench.kernels.series import (
    build_series,
    series_energy,
    sign_kept,
    slope_at,
    state_at,
    turning_point,
    value_at,
    zero_between,
)
from quantities import assert_quantity

ROUNDING = "rounding of a short sum"
WINDING = replace(RIGID, back_emf=1e-12, torque=1e-12)
"""A winding by itself: i = v/R + (i0 - v/R) exp(-t R/L)."""
TAU = WINDING.inductance / WINDING.resistance


def series_of(plant, x, u, width, resting=0):
    """The power series, and the equations it is of."""
    matrix = matrix_of(plant)
    motion, flow = prepare_motion(matrix, 0.0, width), read_flow(matrix, plant.elastic)
    assert motion.fine == 0
    build_series(motion.series, flow, resting, x, u, width)
    return motion, flow


def polynomial(*coefficients):
    """A current by itself, by the share that has passed, and its charge."""
    series = np.zeros((len(coefficients) + 1, 7))
    series[:-1, 0] = coefficients
    series[1:, CHARGE] = [one / (n + 1) for n, one in enumerate(coefficients)]
    return series


@pytest.mark.parametrize("plant", [RIGID, ELASTIC])
@pytest.mark.parametrize("resting", [0, 1])
def test_the_series_is_the_step_at_every_share(plant, resting):
    x = PlantState(1.5, 80.0 * (1 - resting), 1.4, 79.0, 2e-3, 3.0)
    if not plant.elastic:
        x = PlantState(1.5, x.speed, 0.0, 0.0, 0.0, 3.0)
    u = Inputs(12.0, 0.02, 0.03 * plant.elastic)
    motion, flow = series_of(plant, x, u, 50e-6, resting)
    for share in (0.0, 1e-9, 0.37, 1.0):
        if share == 0.0:
            wanted = x
        else:
            steps = prepare_motion(matrix_of(plant), 0.0, share * 50e-6)
            wanted = stride(read_step(steps, 1, resting, 0), flow, x, u)
        got = state_at(motion.series, flow, share)
        assert_quantity(got, wanted, rtol=1e-14, atol=1e-15, unit="SI", why=ROUNDING)


@given(first=st.floats(-10.0, 10.0), voltage=st.floats(-40.0, 40.0), share=st.floats(0.05, 1.0))
def test_energy_of_a_winding_whose_current_turns(first, voltage, share):
    width = 0.5 * TAU
    motion, _ = series_of(WINDING, PlantState(first, 0.0, 0.0, 0.0, 0.0, 0.0), Inputs(voltage, 0.0, 0.0), width)
    got = series_energy(motion.series, voltage, share)
    end, goal = share * width, voltage / WINDING.resistance

    def charge(time):
        return goal * time - (first - goal) * TAU * math.expm1(-time / TAU)

    if voltage * first >= 0.0:
        wanted = 0.0
    else:
        turn = TAU * math.log1p(-first / goal)
        wanted = -voltage * charge(min(turn, end))
    assert_quantity(
        got, wanted, rtol=1e-9, atol=1e-15, unit="J", why="the closed form cancels where the current is small"
    )


def test_energy_where_the_current_dips_through_zero_and_back():
    # i = 0.1 - s + s^2 is below zero between its two roots.
    series = polynomial(0.1, -1.0, 1.0)
    low, high = np.roots([1.0, -1.0, 0.1])[::-1]
    wanted, _ = quad(lambda s: -2.0 * (0.1 - s + s * s), low, high)
    assert turning_point(series, 1.0) == pytest.approx(0.5, abs=1e-14)
    assert_quantity(series_energy(series, 2.0, 1.0), wanted, rtol=1e-12, unit="J", why=ROUNDING)
    back, _ = quad(lambda s: 2.0 * (0.1 - s + s * s), 0.0, low)
    assert_quantity(series_energy(series, -2.0, 1.0), 2.0 * back, rtol=1e-12, unit="J", why=ROUNDING)


def test_no_voltage_gives_nothing_back():
    assert series_energy(polynomial(-1.0, 2.0), 0.0, 1.0) == 0.0


@given(root=st.floats(1e-6, 1.0 - 1e-6), bend=st.floats(-0.5, 0.5), sign=st.sampled_from([-1.0, 1.0]))
def test_a_zero_is_found(root, bend, sign):
    # (s - root) (1 + bend s): monotone or nearly, one zero.
    series = polynomial(-sign * root, sign * (1.0 - bend * root), sign * bend)
    assert zero_between(series, 0.0, 1.0) == pytest.approx(root, abs=4e-15)


def test_values_and_slopes_of_a_polynomial():
    series = polynomial(1.0, 2.0, 3.0)
    assert value_at(series, 0, 0.5) == 1.0 + 1.0 + 0.75
    assert slope_at(series, 0, 0.5) == 2.0 + 3.0
    assert value_at(series, CHARGE, 1.0) == 3.0
    assert turning_point(series, 1.0) == 1.0


@pytest.mark.parametrize(
    ("first", "last", "voltage", "sign"),
    [(1.0, 2.0, 12.0, 1), (-1.0, -2.0, -12.0, 1), (-1.0, -2.0, 0.3, -1), (-1.0, 1.0, 12.0, 0), (1.0, 1.0, 0.0, 1)],
)
def test_the_sign_of_the_power_is_known_or_not(first, last, voltage, sign):
    flow = read_flow(matrix_of(RIGID), False)
    x, y = (PlantState(i, 0.0, 0.0, 0.0, 0.0, 0.0) for i in (first, last))
    assert sign_kept(flow, x, y, voltage, 1e-6) == sign


def test_a_current_that_heads_for_zero_may_turn():
    # Both ends at 1 A, but the slope at the start would take it below zero: something happens between.
    flow = read_flow(matrix_of(RIGID), False)
    x = PlantState(1.0, 500.0, 0.0, 0.0, 0.0, 0.0)
    assert sign_kept(flow, x, x, 1.0, 50e-6) == 0
