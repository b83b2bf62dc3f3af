"""Lags between columns."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.evidence.lag import best_lag


def signals(seed: int = 1) -> np.ndarray:
    rng = np.random.default_rng(seed)
    return np.stack([np.convolve(rng.standard_normal(6000), np.ones(9) / 9.0, mode="same") for _ in range(3)])


@pytest.mark.parametrize("lag", [-20, -3, 0, 1, 15, 80])
def test_a_moved_target_is_found(lag):
    columns = signals()
    acts = 2.0 * columns[0] - columns[1] + 0.3 * columns[2]
    noise = 0.05 * np.random.default_rng(2).standard_normal(acts.size)
    # The target acts ``lag`` samples later than it is stamped.
    assert best_lag(np.roll(acts, -lag) + noise, columns, step=1e-3) == lag


def test_without_a_gain_there_is_no_lag():
    assert best_lag(np.random.default_rng(3).standard_normal(6000), signals(), step=1e-3) == 0


def test_too_short_or_empty_columns_have_none():
    assert best_lag(np.arange(12.0), np.arange(24.0).reshape(2, 12), step=1e-3) == 0
    assert best_lag(np.ones(6000), np.zeros((2, 6000)), step=1e-3) == 0
