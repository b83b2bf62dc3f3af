"""Pieces of margins at one crossover, against the roots of a polynomial written down by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.lifting import BACKWARD, FORWARD, TRAPEZOID
from gainbench.kernels.loop_grid import loop_grid
from gainbench.kernels.loop_records import SampledPlant
from gainbench.kernels.reach import PIECES, Ellipse, positive_span, put_in, reach
from gainbench.kernels.stability_edge import slope, stability_edge
from quantities import assert_quantity

PERIOD = 1e-3
GAIN = 0.4
NOTHING = np.empty(0)
SHARES = {BACKWARD: 0.5, FORWARD: -0.5, TRAPEZOID: 0.0}


def pieces(delay, rule, crossover):
    """Of G = GAIN z^-delay/(z - 1)."""
    zero = np.zeros(1)
    plant = SampledPlant(
        np.array([[0.0]]), np.ones(1), np.array([GAIN]), zero, zero, 0.0, 0.0, 0.0, PERIOD, delay, 1, 1.0, 1.0
    )
    reduced, edge = stability_edge(plant, loop_grid(PERIOD, 1, peaks=NOTHING, spreads=NOTHING), 1.0)
    return reach(reduced, edge, rule, crossover)


def gains(delay, rule, w, margin):
    z = np.exp(1j * w * PERIOD)
    controller = -np.exp(1j * margin) * (z - 1.0) * z**delay / GAIN
    ki_period = controller.imag / slope(w, PERIOD)
    return controller.real - SHARES[rule] * ki_period, ki_period


def outside(kp, ki_period, rule, delay):
    shape = {BACKWARD: [1.0, 0.0], FORWARD: [0.0, 1.0], TRAPEZOID: [0.5, 0.5]}[rule]
    controller = kp * np.array([1.0, -1.0]) + ki_period * np.array(shape)
    poles = np.roots(np.polyadd(np.concatenate(([1.0, -2.0, 1.0], np.zeros(delay))), GAIN * controller))
    return int(np.sum(np.abs(poles) > 1.0))


@pytest.mark.parametrize("rule", list(SHARES))
@pytest.mark.parametrize("delay", [0, 1, 2, 5])
def test_poles_outside_are_those_of_the_polynomial(delay, rule):
    crossover = np.geomspace(20.0, 0.97 * math.pi / PERIOD, 40)
    span, count = pieces(delay, rule, crossover)
    seen = set()
    for w, own, found in zip(crossover, span, count, strict=True):
        for (low, high), poles in zip(own, found, strict=True):
            if math.isnan(low):
                break
            for part in (0.02, 0.5, 0.98):
                kp, ki_period = gains(delay, rule, w, low + part * (high - low))
                assert kp > 0.0
                assert ki_period > 0.0
                assert outside(kp, ki_period, rule, delay) == poles
                seen.add(poles)
    assert 0 in seen
    if delay == 5:
        assert {2, 4} <= seen


@pytest.mark.parametrize("rule", list(SHARES))
def test_at_the_ends_of_the_positive_span_one_gain_is_zero(rule):
    for w in (50.0, 400.0, 1200.0):
        own = -(np.exp(1j * w * PERIOD) - 1.0) * np.exp(2j * w * PERIOD) / GAIN
        low, high = positive_span(Ellipse(w, float(np.angle(own)), abs(own) ** 2, slope(w, PERIOD)), rule)
        for end, gain in ((low, 0), (high, 1)):
            if 0.0 < end < 0.5 * math.pi:
                value = gains(2, rule, w, end)[gain] * GAIN
                assert_quantity(value, 0.0, atol=1e-12, unit="1", why="the closed form of that end")


def test_a_resonance_cuts_the_span_in_pieces_that_join_and_change_at_their_ends():
    # G = GAIN/(z - 1) - q/(z^2 - 2 r cos(t) z + r^2): an integrator beside a lightly damped pair.
    turn, size, push = 0.3 * math.pi, 0.995, 0.05
    pair = size * np.array([[math.cos(turn), -math.sin(turn)], [math.sin(turn), math.cos(turn)]]) - np.eye(2)
    m = np.zeros((3, 3))
    m[1:, 1:] = pair
    zero = np.zeros(3)
    b0 = np.array([GAIN, 0.0, push])
    plant = SampledPlant(m, np.array([1.0, 1.0, 0.0]), b0, zero, zero, 0.0, 0.0, 0.0, PERIOD, 1, 1, 1.0, 1.0)
    peaks, spreads = np.array([turn / PERIOD]), np.array([-math.log(size) / PERIOD])
    reduced, edge = stability_edge(plant, loop_grid(PERIOD, 1, peaks=peaks, spreads=spreads), 1.0)
    crossover = np.geomspace(30.0, 3000.0, 90)
    span, count = reach(reduced, edge, BACKWARD, crossover)
    assert span.shape == (90, PIECES, 2)
    starts, ends = span[:, 1:, 0], span[:, :-1, 1]
    both = ~np.isnan(starts)
    assert both.any()
    assert_quantity(starts[both], ends[both], unit="rad", why="the same number")
    assert np.all(np.abs(count[:, 1:] - count[:, :-1])[both] >= 1)
    quadratic = np.array([1.0, -2.0 * size * math.cos(turn), size**2])
    above = np.polysub(GAIN * quadratic, push * size * math.sin(turn) * np.array([1.0, -1.0]))
    below = np.convolve([1.0, -1.0], quadratic)
    for w, own, found in zip(crossover, span, count, strict=True):
        z = np.exp(1j * w * PERIOD)
        response = np.polyval(above, z) / np.polyval(below, z) / z
        for (low, high), poles in zip(own, found, strict=True):
            if math.isnan(low):
                break
            for part in (0.03, 0.97):
                controller = -np.exp(1j * (low + part * (high - low))) / response
                ki_period = controller.imag / slope(w, PERIOD)
                kp = controller.real - 0.5 * ki_period
                pi = np.array([kp + ki_period, -kp])
                closed = np.polyadd(np.convolve(np.append(below, 0.0), [1.0, -1.0]), np.convolve(above, pi))
                assert int(np.sum(np.abs(np.roots(closed)) > 1.0)) == poles


def test_crossings_are_put_in_where_they_belong():
    margin, change = np.zeros(6), np.zeros(6, dtype=np.int64)
    count = 0
    for place, by in ((0.5, 2), (0.1, -2), (0.9, 1), (0.5, -1)):
        count = put_in(margin, change, count, place, by)
    assert count == 4
    assert margin[:4].tolist() == [0.1, 0.5, 0.5, 0.9]
    assert change[:4].tolist() == [-2, 2, -1, 1]


def test_a_plant_that_is_zero_gives_nothing():
    zero = np.zeros(1)
    plant = SampledPlant(np.array([[0.0]]), zero, zero, zero, zero, 0.0, 0.0, 0.0, PERIOD, 0, 1, 1.0, 1.0)
    reduced, edge = stability_edge(plant, loop_grid(PERIOD, 1, peaks=NOTHING, spreads=NOTHING), 1.0)
    span, _ = reach(reduced, edge, BACKWARD, np.array([100.0]))
    assert np.isnan(span).all()
