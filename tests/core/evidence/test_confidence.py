"""Covariances for coloured residuals: against what repeated experiments scatter by."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import lfilter

from gainbench.evidence.confidence import (
    block_covariance,
    disturbance_spectrum,
    not_negative,
    quantile,
    spectral_covariance,
    wider,
)
from quantities import assert_quantity

N, MEMORY = 4000, 0.9
RIDGE = np.zeros(2)
WHOLE = np.array([0, N])


def columns() -> np.ndarray:
    at = np.arange(N)
    return np.stack((np.sin(0.01 * at), np.sign(np.sin(0.037 * at))))


def residuals(count: int) -> np.ndarray:
    """Noise with memory."""
    return lfilter([1.0], [1.0, -MEMORY], np.random.default_rng(5).standard_normal((count, N)), axis=1)


@pytest.mark.parametrize("kind", ["blocks", "spectrum"])
def test_the_covariance_is_the_scatter_of_repeated_fits(kind):
    x = columns()
    noise = residuals(400)
    estimates = noise @ x.T @ np.linalg.inv(x @ x.T)
    found = []
    for one in noise[:40]:
        rows = np.vstack((one, x))
        if kind == "blocks":
            found.append(block_covariance(rows, ridge=RIDGE))
        else:
            disturbance = one - MEMORY * np.concatenate(([0.0], one[:-1]))
            found.append(spectral_covariance(rows, WHOLE, keep=MEMORY, ridge=RIDGE, disturbance=disturbance))
    why = "400 repeats tell a deviation to 4 %, 40 covariances more than that"
    deviation = np.sqrt(np.diag(np.mean(found, axis=0)))
    assert_quantity(deviation, estimates.std(axis=0), rtol=0.15, unit="1", why=why)
    white = np.sqrt(np.diag(np.linalg.inv(x @ x.T)) * np.mean(noise**2))
    assert np.all(deviation > 2.0 * white), "white formulas fall short: that is what this is for"


def test_one_block_that_holds_all_is_not_trusted_alone():
    rng = np.random.default_rng(6)
    pulse = np.zeros(N)
    pulse[1000:1040] = 1.0
    found = [
        block_covariance(np.vstack((rng.standard_normal(N), pulse, np.ones(N))), ridge=RIDGE)[0, 0] for _ in range(40)
    ]
    ratio = float(np.sqrt(np.mean(found) * 40.0))
    assert 0.9 < ratio < 2.0, "forty samples of unit noise: at most on the wide side"


def test_a_spectrum_that_falls_to_nothing_is_told_at_zero():
    rng = np.random.default_rng(7)
    drive, measured = 0.01 * rng.standard_normal(20_000), rng.standard_normal(20_001)
    disturbance = drive + np.diff(measured)
    # As a softened record has it.
    soft = np.convolve(disturbance, np.array([1.0, 4.0, 6.0, 4.0, 1.0]) / 16.0, mode="same")
    found = disturbance_spectrum(soft, 1.0, at=np.array([0.0, 0.1]))
    assert 0.3 < found[0] / 1e-4 < 3.0
    expected = (1e-4 + 4.0 * np.sin(np.pi * 0.1) ** 2) * np.cos(np.pi * 0.1) ** 8
    assert_quantity(found[1], expected, rtol=0.1, unit="1", why="hundreds of lines are averaged there")


def test_not_negative_is_least_squares_inside_and_stops_at_zero():
    rng = np.random.default_rng(8)
    x = rng.standard_normal((500, 3))
    inside = not_negative(x, x @ [1.0, 2.0, 0.5])
    assert_quantity(inside, [1.0, 2.0, 0.5], rtol=1e-9, unit="1", why="an exact target")
    assert not_negative(x, x @ [1.0, -2.0, 0.5])[1] == 0.0


def test_wider_takes_the_larger_variance_of_each():
    first, second = np.array([[4.0, 1.0], [1.0, 9.0]]), np.diag([16.0, 1.0])
    found = wider(first, second)
    assert_quantity(found, [[16.0, 2.0], [2.0, 9.0]], rtol=1e-12, unit="1", why="scaled by two and one")


def test_quantiles():
    # Student's table: 2.228 for 10, 1.960 for very many (from memory).
    assert_quantity(quantile(10.0), 2.228, atol=5e-4, unit="1", why="three decimals in the table")
    assert_quantity(quantile(1e9), 1.960, atol=5e-4, unit="1", why="three decimals in the table")
    assert quantile(0.5) == quantile(2.0)
