"""Noise on the drive, told from noise on the answer, and what it does to a fit."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest
from scipy.signal import lfilter

from gainbench.evidence.input_noise import input_noise, softened, undrawn
from gainbench.evidence.shifting import soften
from quantities import assert_quantity

N, KEEP = 60_000, 0.85
PIECES = np.array([0, N])


@pytest.mark.parametrize(("drive", "answer"), [(0.1, 0.0), (0.1, 0.1), (0.05, 0.2)])
def test_both_noises_are_told_apart(drive, answer):
    rng = np.random.default_rng(1)
    residual = lfilter([1.0], [1.0, -KEEP], drive * rng.standard_normal(N)) + answer * rng.standard_normal(N)
    fit = SimpleNamespace(residual=soften(residual, PIECES), bounds=PIECES)
    assert_quantity(input_noise(fit, KEEP), drive**2, rtol=0.15, unit="A^2", why="spectra of 470 stretches")


def test_softening_is_a_power_of_the_cosine():
    # (1 + z^-1)^4/16 has the size cos(pi f)^4.
    f = np.linspace(0.0, 0.5, 7)
    expected = np.abs((1.0 + np.exp(-2j * np.pi * f)) / 2.0) ** 8
    assert_quantity(softened(f), expected, atol=1e-15, unit="1", why="rounding")


def test_values_move_back_to_where_more_noise_passes():
    # Noise draws towards the larger inductance; without noise nothing moves.
    fit = SimpleNamespace(values=np.array([0.5, 1e-3, 0.0]), residual=np.zeros(1000), information=1e3 * np.eye(3))
    size = np.array([0.5, 1e-3, 1.0])
    same = undrawn(fit, size=size, noise=0.0, step=2e-4)
    moved = undrawn(fit, size=size, noise=1e-2, step=2e-4)
    assert np.array_equal(same, fit.values)
    assert moved[1] < fit.values[1]
    assert moved[0] < fit.values[0]
