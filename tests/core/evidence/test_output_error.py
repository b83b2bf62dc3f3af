"""The fitting machine on a small model whose answer is known."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np

from gainbench.evidence.confidence import quantile
from gainbench.evidence.output_error import Outputs, fit_output, segment_bounds
from quantities import assert_quantity

DRIVE = np.repeat(np.random.default_rng(1).uniform(-1.0, 1.0, 100), 40)
TRUE = np.array([0.95, 0.3])


@dataclass
class Lag:
    """y[k+1] = a y[k] + b u[k], whose start is unknown."""

    measured: np.ndarray
    pieces: np.ndarray
    size: np.ndarray

    def keep(self, values: np.ndarray) -> float:
        return float(values[0])

    def first_starts(self, bounds: np.ndarray) -> np.ndarray:
        return self.measured[bounds[:-1]][:, None]

    def once(self, values: np.ndarray, bounds: np.ndarray, starts: np.ndarray) -> np.ndarray:
        out = np.empty(self.measured.size)
        for number, (first, last) in enumerate(itertools.pairwise(bounds)):
            state = starts[number, 0]
            for k in range(first, last):
                out[k] = state
                state = values[0] * state + values[1] * DRIVE[k]
        return out

    def run(self, values: np.ndarray, bounds: np.ndarray, *, starts: np.ndarray, nudge: float) -> Outputs:
        base = self.once(values, bounds, starts)
        moved = [self.once(values + nudge * self.size * row, bounds, starts) for row in np.eye(2)] if nudge else []
        start = self.once(values, bounds, starts + 1.0) - base
        sensitivities = np.array([(one - base) / nudge for one in moved]).reshape(-1, base.size)
        return Outputs(output=base, sensitivities=sensitivities, nuisance=start[None])


def model(noise: float, *, seed: int = 2, pieces: tuple[int, ...] = (0, 4000)) -> Lag:
    exact = Lag(measured=np.zeros(DRIVE.size), pieces=np.array(pieces), size=np.array([1.0, 1.0]))
    truth = exact.once(TRUE, exact.pieces, np.full((len(pieces) - 1, 1), 2.0))
    measured = truth + noise * np.random.default_rng(seed).standard_normal(truth.size)
    return Lag(measured=measured, pieces=exact.pieces, size=exact.size)


BOUNDS = {"lower": np.array([0.0, 0.0]), "upper": np.array([0.999, 10.0])}
START = np.array([0.8, 0.5])


def test_an_exact_log_gives_exact_parameters():
    found = fit_output(model(0.0), START, **BOUNDS)
    assert_quantity(found.values, TRUE, rtol=1e-5, unit="1", why="where the minimiser stops")
    assert found.fit_percent > 99.9


def test_noise_is_covered_by_the_bounds():
    inside = []
    for seed in range(30):
        found = fit_output(model(0.1, seed=seed), START, **BOUNDS)
        half = quantile(found.spare) * np.sqrt(np.diag(found.covariance))
        inside.append(np.abs(found.values - TRUE) < half)
    assert 0.85 <= np.mean(inside) <= 1.0, "95 % of 60, give or take two deviations and a half"


def test_a_clean_log_takes_long_segments_and_a_disturbed_one_short_ones():
    clean = fit_output(model(0.1), START, **BOUNDS)
    disturbed = model(0.0)
    walk = np.cumsum(0.05 * np.random.default_rng(4).standard_normal(DRIVE.size))
    disturbed.measured = disturbed.measured + walk
    short = fit_output(disturbed, START, **BOUNDS)
    assert short.segment < clean.segment


def test_single_outliers_are_left_out():
    spoiled = model(0.02)
    at = np.arange(37, 4000, 210)
    spoiled.measured[at] += 3.0
    found = fit_output(spoiled, START, **BOUNDS)
    assert at.size <= found.outliers <= 2 * at.size
    assert_quantity(found.values, TRUE, rtol=5e-3, unit="1", why="noise of 0.02 over 4000 samples")


def test_bounds_hold():
    found = fit_output(model(0.01), START, lower=np.array([0.0, 0.0]), upper=np.array([0.9, 10.0]))
    assert found.values[0] <= 0.9


def test_segments_follow_the_pieces():
    bounds = segment_bounds(np.array([0, 100, 1000]), 200)
    assert bounds[0] == 0
    assert 100 in bounds
    assert bounds[-1] == 1000
    assert np.diff(bounds).max() <= 300
