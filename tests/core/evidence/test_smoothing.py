"""Smoothed motion: derivatives of a known motion, and the frequency where noise takes over."""

from __future__ import annotations

import numpy as np

from gainbench.evidence.smoothing import motion_of, noise_cut, smooth, speed_of
from quantities import assert_quantity

STEP = 1e-3
TIME = STEP * np.arange(8000)
ANGLE = 2.0 * np.sin(5.0 * TIME)
INSIDE = slice(200, -200)


def test_derivatives_of_a_sine():
    found = motion_of(ANGLE, STEP, angle=True, cut=100.0)
    why = "central differences: (w h)^2/6"
    assert_quantity(found.speed[INSIDE], 10.0 * np.cos(5.0 * TIME)[INSIDE], atol=1e-4, unit="rad/s", why=why)
    assert_quantity(found.acceleration[INSIDE], -25.0 * ANGLE[INSIDE], atol=2e-3, unit="rad/s^2", why=why)


def test_a_clean_signal_is_cut_at_a_tenth_of_its_rate():
    assert_quantity(noise_cut(ANGLE, STEP, integrated=2), 100.0, rtol=1e-12, unit="Hz", why="the limit itself")


def test_noise_lowers_the_cut_and_the_error():
    rng = np.random.default_rng(2)
    noisy = ANGLE + 0.02 * rng.standard_normal(ANGLE.size)
    cut = noise_cut(noisy, STEP, integrated=2)
    assert cut < 40.0
    truth = 10.0 * np.cos(5.0 * TIME)
    low, high = (motion_of(noisy, STEP, angle=True, cut=one).speed - truth for one in (cut, 100.0))
    assert np.std(low[INSIDE]) < 0.3 * np.std(high[INSIDE])
    spread = motion_of(noisy, STEP, angle=True, cut=cut).noise
    assert 0.3 < spread / np.std(low[INSIDE]) < 3.0


def test_smoothing_has_no_phase():
    assert_quantity(smooth(ANGLE, STEP, cut=50.0)[INSIDE], ANGLE[INSIDE], atol=1e-5, unit="rad", why="5 of 314 rad/s")


def test_speed_of_pieces_does_not_mix_them():
    both = np.concatenate((ANGLE, ANGLE + 100.0))
    found = speed_of(both, STEP, angle=True, bounds=np.array([0, ANGLE.size, both.size]))
    assert_quantity(found[: ANGLE.size], found[ANGLE.size :], atol=1e-9, unit="rad/s", why="the same motion twice")
