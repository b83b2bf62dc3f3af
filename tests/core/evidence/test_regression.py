"""Robust linear regression."""

from __future__ import annotations

import numpy as np

from gainbench.evidence.confidence import quantile
from gainbench.evidence.regression import regress
from quantities import assert_quantity

RNG = np.random.default_rng(1)
X = RNG.standard_normal((3, 2000)) * np.array([[1.0], [1e-4], [1e5]])
TRUE = np.array([2.0, -3e4, 1e-5])


def test_an_exact_sum_is_taken_apart():
    found = regress(TRUE @ X, X)
    assert_quantity(found.values, TRUE, rtol=1e-9, unit="1", why="rounding")
    assert found.fit_percent > 99.999


def test_bounds_cover_the_truth_and_shrink_with_the_noise():
    y = TRUE @ X + 0.1 * RNG.standard_normal(X.shape[1])
    found = regress(y, X)
    half = quantile(found.spare) * np.sqrt(np.diag(found.covariance))
    assert np.all(np.abs(found.values - TRUE) < 2.0 * half)
    expected = 0.1 / np.sqrt(np.sum(X**2, axis=1))
    assert_quantity(np.sqrt(np.diag(found.covariance)), expected, rtol=0.4, unit="1", why="white noise, few blocks")


def test_some_wild_rows_do_not_move_it():
    y = TRUE @ X + 0.01 * RNG.standard_normal(X.shape[1])
    y[::50] += 300.0
    assert_quantity(regress(y, X).values, TRUE, rtol=0.02, unit="1", why="2 % of rows hold on with five deviations")


def test_a_column_of_zeros_is_left_at_zero():
    found = regress(2.0 * X[0], np.vstack((X[0], np.zeros(X.shape[1]))))
    assert_quantity(found.values, [2.0, 0.0], atol=1e-9, unit="1", why="rounding")
