"""Passes over a speed trace, on traces short enough to read."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.kernels.response_figures import LANES, NEVER, load_ticks, size_figures, step_ticks


def test_step_of_either_sign():
    speed = np.array([0.0, 1.0, 5.0, 9.0, 11.0, 10.1, 10.0])
    expected = (1.0, 1, 3, 4)
    assert tuple(step_ticks(speed, 10.0, 0, 7, 0.2)) == expected
    assert tuple(step_ticks(-speed, -10.0, 0, 7, 0.2)) == expected


def test_only_the_window_counts():
    speed = np.array([50.0, 0.0, 10.0, 10.0, 50.0])
    assert tuple(step_ticks(speed, 10.0, 1, 4, 0.2)) == (0.0, 2, 2, 1)


def test_a_speed_that_never_comes_near():
    assert tuple(step_ticks(np.zeros(4), 10.0, 0, 4, 0.2)) == (0.0, NEVER, NEVER, 3)
    assert tuple(step_ticks(np.array([0.0, 5.0, 5.0]), 10.0, 0, 3, 0.2)) == (0.0, 1, NEVER, 2)


def test_a_speed_that_is_there_at_once():
    assert tuple(step_ticks(np.full(3, 10.0), 10.0, 0, 3, 0.2)) == (0.0, 0, 0, NEVER)


def test_the_load_moves_the_speed_away_from_the_reference_in_force():
    speed = np.array([9.0, 10.0, 7.0, 9.0, 10.1])
    reference = np.array([0.0, 10.0, 9.0, 10.0, 10.0])
    assert tuple(load_ticks(speed, reference, 1, 5, 0.2)) == (2.0, 3)
    assert tuple(load_ticks(speed, reference, 1, 2, 0.2)) == (0.0, NEVER)


@pytest.mark.parametrize("ticks", [1, LANES - 1, LANES, 3 * LANES + 5])
def test_figures_do_not_depend_on_how_many_ticks_are_taken_at_once(ticks):
    numbers = np.random.default_rng(ticks)
    speed, reference = numbers.normal(size=ticks), numbers.normal(size=ticks)
    squares, size = size_figures(speed)
    assert squares == pytest.approx(np.sum(speed**2), rel=1e-13)
    assert size == np.abs(speed).max()
    assert size_figures(np.stack([reference, speed])[1]) == (squares, size)
    assert step_ticks(speed, 0.1, 0, ticks, 0.2).excess == max(0.0, speed.max() - 0.1)
    distance = np.abs(speed - reference)
    load = load_ticks(speed, reference, 0, ticks, 0.2)
    assert load.dip == distance.max()
    assert load.outside == max(np.flatnonzero(distance > 0.2), default=NEVER)
