"""Projections, block sums and the disturbance behind a residual."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.kernels.identify_reduce import block_sums, project, unroll
from quantities import assert_quantity

RNG = np.random.default_rng(1)
BOUNDS = np.array([0, 30, 31, 100])


@pytest.mark.parametrize("count", [1, 2])
def test_projection_is_that_of_least_squares(count):
    rows, nuisance = RNG.standard_normal((3, 100)), RNG.standard_normal((count, 100))
    before, directions = rows.copy(), nuisance.copy()
    moved = project(rows, nuisance, BOUNDS)
    for segment in (0, 2):
        span = slice(BOUNDS[segment], BOUNDS[segment + 1])
        z = directions[:, span].T
        for row in range(3):
            found = np.linalg.lstsq(z, before[row, span], rcond=None)[0]
            assert_quantity(rows[row, span], before[row, span] - z @ found, atol=1e-12, unit="1", why="rounding")
        wanted = np.linalg.lstsq(z, before[0, span], rcond=None)[0]
        assert_quantity(moved[segment], wanted, atol=1e-12, unit="1", why="rounding")


def test_a_direction_of_nothing_takes_nothing():
    rows = RNG.standard_normal((2, 100))
    before = rows.copy()
    assert not project(rows, np.zeros((1, 100)), BOUNDS).any()
    assert np.array_equal(rows, before)


def test_block_sums_add_up():
    rows = RNG.standard_normal((4, 1003))
    scores, information = block_sums(rows, 40)
    assert_quantity(scores.sum(axis=0), rows[1:] @ rows[0], rtol=1e-10, unit="1", why="rounding of sums")
    assert_quantity(information.sum(axis=0), rows[1:] @ rows[1:].T, rtol=1e-10, unit="1", why="rounding of sums")
    first = slice(0, 1003 // 40)
    assert_quantity(scores[0], rows[1:, first] @ rows[0, first], rtol=1e-10, unit="1", why="rounding of sums")


@pytest.mark.parametrize("keep", [0.0, 0.6, 0.999])
def test_scores_are_those_of_the_disturbance(keep):
    rows = RNG.standard_normal((3, 100))
    # A residual that begins at zero in each segment, as one behind a fitted start nearly does.
    rows[0, BOUNDS[:-1]] = 0.0
    found = unroll(rows, BOUNDS, keep)
    assert_quantity(found[1:] @ found[0], rows[1:] @ rows[0], rtol=1e-9, unit="1", why="rounding of sums")
    assert_quantity(found[0, 1:30], rows[0, 1:30] - keep * rows[0, :29], atol=1e-15, unit="1", why="the definition")
