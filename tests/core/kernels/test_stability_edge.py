"""The edge of stability, against the roots of a polynomial written down by hand."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest

from gainbench.kernels.lifting import BACKWARD, FORWARD, TRAPEZOID
from gainbench.kernels.loop_grid import loop_grid
from gainbench.kernels.loop_records import SampledPlant
from gainbench.kernels.stability_edge import apart, slope, stability_edge
from quantities import assert_quantity

PERIOD = 1e-3
GAIN = 0.4
NOTHING = np.empty(0)


def integrator(delay):
    """G = GAIN z^-delay/(z - 1)."""
    zero = np.zeros(1)
    return SampledPlant(
        np.array([[0.0]]), np.ones(1), np.array([GAIN]), zero, zero, 0.0, 0.0, 0.0, PERIOD, delay, 1, 1.0, 1.0
    )


def closed_poles(kp, ki_period, rule, delay):
    """Roots of z^delay (z - 1)^2 + GAIN (kp (z - 1) + Ki T shape)."""
    shape = {BACKWARD: [1.0, 0.0], FORWARD: [0.0, 1.0], TRAPEZOID: [0.5, 0.5]}[rule]
    controller = kp * np.array([1.0, -1.0]) + ki_period * np.array(shape)
    return np.roots(np.polyadd(np.concatenate(([1.0, -2.0, 1.0], np.zeros(delay))), GAIN * controller))


def edge_of(delay):
    return stability_edge(integrator(delay), loop_grid(PERIOD, 1, peaks=NOTHING, spreads=NOTHING), 1.0)[1]


@pytest.mark.parametrize(("rule", "share"), [(BACKWARD, 0.5), (FORWARD, -0.5), (TRAPEZOID, 0.0)])
@pytest.mark.parametrize("delay", [0, 1, 3])
def test_on_the_edge_a_pole_is_on_the_circle_at_its_frequency(rule, share, delay):
    edge = edge_of(delay)
    for k in range(50, edge.w.size, 25):
        poles = closed_poles(edge.x[k] - share * edge.y[k], edge.y[k], rule, delay)
        wanted = np.exp(1j * edge.w[k] * PERIOD)
        assert_quantity(np.abs(poles - wanted).min(), 0.0, atol=1e-6, unit="1", why="a nearly double root near 1")


@pytest.mark.parametrize("delay", [0, 1, 2])
def test_the_line_at_the_nyquist_frequency_has_a_pole_at_minus_one(delay):
    last = edge_of(delay).last
    assert_quantity(last, 2.0 * (-1.0) ** delay / GAIN, rtol=1e-9, unit="V/A", why="-1/G(-1) by hand")
    for ki_period in (0.1, 1.0):
        poles = closed_poles(last, ki_period, TRAPEZOID, delay)
        assert_quantity(np.abs(poles + 1.0).min(), 0.0, atol=1e-7, unit="1", why="roots of a short polynomial")


def outside(x, y, delay):
    return int(np.sum(np.abs(closed_poles(x, y, TRAPEZOID, delay)) > 1.0))


@pytest.mark.parametrize("delay", [1, 2])
def test_two_poles_fewer_are_outside_to_the_right(delay):
    edge = edge_of(delay)
    for k in range(edge.w.size // 2, edge.w.size - 1, 9):
        along = np.array([edge.x[k + 1] - edge.x[k - 1], edge.y[k + 1] - edge.y[k - 1]])
        right = np.array([along[1], -along[0]]) * 0.02
        here = np.array([edge.x[k], edge.y[k]])
        if abs(edge.x[k] - edge.last) < 0.02 * abs(edge.last):
            continue
        assert outside(*(here - right), delay) - outside(*(here + right), delay) == 2


def test_beyond_the_line_one_pole_more_is_outside_below_the_end_of_the_edge_and_one_less_above():
    edge = edge_of(0)
    for y, more in ((edge.y[-1] * 0.5, 1), (edge.y[-1] * 1.5, -1)):
        before, beyond = outside(edge.last * 0.99, y, 0), outside(edge.last * 1.01, y, 0)
        assert beyond - before == more


def test_points_are_put_in_where_the_plant_turns_and_only_above_the_lowest():
    # A pair at a fifth of the Nyquist frequency whose width the even grid steps over.
    turn, size = 0.2 * math.pi, math.exp(-2e-3)
    pair = size * np.array([[math.cos(turn), -math.sin(turn)], [math.sin(turn), math.cos(turn)]]) - np.eye(2)
    zero = np.zeros(2)
    plant = SampledPlant(
        pair, np.array([1.0, 0.0]), np.array([0.0, 0.01]), zero, zero, 0.5, 0.0, 0.0, PERIOD, 0, 1, 1.0, 1.0
    )
    grid = loop_grid(PERIOD, 1, peaks=NOTHING, spreads=NOTHING)
    edge = stability_edge(plant, grid, 1.0)[1]
    assert edge.w.size > grid.w.size + 10
    assert np.all(np.diff(edge.w) > 0.0)
    control = edge.x + 1j * edge.y * np.array([slope(w, PERIOD) for w in edge.w])
    assert not any(apart(first, second) for first, second in itertools.pairwise(control))
    left = stability_edge(plant, grid, 2.0 * turn / PERIOD)[1]
    assert np.array_equal(left.w, grid.w[:-1])


def test_what_is_apart():
    assert not apart(1.0 + 0j, 1.1 + 0.1j)
    assert apart(1.0 + 0j, 1.0 + 0.5j)
    assert apart(1.0 + 0j, 1.8 + 0j)
    assert apart(1.0 + 0j, -1.0 + 0j)
    assert not apart(1.0 + 0j, complex(math.inf, 0.0))
