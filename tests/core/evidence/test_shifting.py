"""Delays by parts of a sample."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.evidence.shifting import delayed, soften
from quantities import assert_quantity

WHOLE = np.array([0, 600])
AT = np.arange(600.0)


@pytest.mark.parametrize("shift", [0.0, 3.0, -2.0, -0.5, 0.25, 7.8, -13.4])
def test_a_sine_comes_later_by_the_shift(shift):
    found = delayed(np.sin(0.3 * AT), shift, WHOLE)
    inside = slice(60, -60)
    assert_quantity(found[inside], np.sin(0.3 * (AT - shift))[inside], atol=2e-4, unit="1", why="ripple of the window")


def test_ends_hold():
    assert delayed(AT, 5.0, WHOLE)[:5].tolist() == [0.0] * 5
    assert delayed(AT, -5.0, WHOLE)[-5:].tolist() == [599.0] * 5
    assert set(delayed(AT, 1e4, WHOLE)) == {0.0}
    assert set(delayed(AT, -1e4, WHOLE)) == {599.0}


def test_softened_noise_is_as_strong_at_half_a_sample_as_at_none():
    noise = soften(np.random.default_rng(3).standard_normal(200_000), np.array([0, 200_000]))
    sizes = [np.mean(delayed(noise, shift, np.array([0, 200_000]))[50:-50] ** 2) for shift in (0.0, -0.5)]
    assert_quantity(sizes[1], sizes[0], rtol=1e-4, unit="1", why="what the binomial filter leaves near Nyquist")


def test_softening_leaves_a_line_and_ends_the_alternation():
    assert_quantity(soften(AT, WHOLE), AT, atol=1e-9, unit="1", why="rounding; symmetric taps")
    found = soften(np.cos(np.pi * AT), WHOLE)
    assert_quantity(found[4:-4], 0.0, atol=1e-12, unit="1", why="zero of the filter")


def test_pieces_do_not_mix():
    two = np.array([0, 300, 600])
    steps = np.where(AT < 300, 0.0, 1.0)
    assert set(delayed(soften(steps, two), 0.4, two).round(9)) == {0.0, 1.0}
