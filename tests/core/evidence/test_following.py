"""Predictors that follow the measured motion: their gains, and how close they come to the bound of what can be told."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.evidence.confidence import Parts
from gainbench.evidence.following import noise_floor, steady_gains, with_floor
from gainbench.evidence.prepared import prepare
from gainbench.evidence.shaft_fit import fit_shaft
from gainbench.model import SignalName
from identified import ONE, RATE, log_of, some_motion
from quantities import assert_quantity

KEEP, STEP = 0.99, 1e-3


def test_the_gain_of_a_measured_speed_solves_its_own_equation():
    drive, noise = 1e-4, 4e-2
    gain, angle = steady_gains(np.array([drive, noise, 0.0]), keep=KEEP, step=STEP, is_angle=False)
    assert angle == 0.0
    ahead = gain * noise / (1.0 - gain)
    again = KEEP**2 * (1.0 - gain) * ahead + drive
    assert_quantity(again, ahead, rtol=1e-12, unit="rad^2/s^2", why="the steady Riccati equation")


def test_the_gains_of_a_measured_angle_are_the_best_there_are():
    drive, noise = 1e-2, 1.0
    best = np.array(steady_gains(np.array([drive, 0.0, noise]), keep=KEEP, step=STEP, is_angle=True))

    def error(gains: np.ndarray) -> float:
        """Steady variance of what the filter foretells of the angle, by stepping its covariance."""
        flow = np.array([[KEEP, 0.0], [0.5 * (1.0 + KEEP), 1.0]])
        enters = np.array([1.0, 0.5])
        own, moved = np.zeros((2, 2)), np.array([gains[0] * STEP, gains[1]])
        closed = flow @ (np.eye(2) - np.outer(moved, [0.0, 1.0]))
        fed = flow @ moved
        for _ in range(2000):
            own = closed @ own @ closed.T + drive * np.outer(enters, enters) + noise * np.outer(fed, fed)
        return float(own[1, 1])

    least = error(best)
    for nudge in ([1.1, 1.0], [0.9, 1.0], [1.0, 1.1], [1.0, 0.9]):
        assert error(best * nudge) > least


def test_without_noise_on_the_drive_it_runs_freely():
    assert steady_gains(np.array([0.0, 1.0, 0.0]), keep=KEEP, step=STEP, is_angle=False) == (0.0, 0.0)


def test_the_noise_floor_is_the_variance_of_white_noise():
    rng = np.random.default_rng(1)
    slow = np.cumsum(np.repeat(rng.uniform(-1.0, 1.0, 200), 100)) * 0.01
    found = noise_floor(slow + 0.3 * rng.standard_normal(slow.size))
    assert_quantity(found, 0.09, rtol=0.15, unit="1", why="a median over some hundred lines")


@pytest.mark.parametrize(("told", "spare", "own", "between"), [(1.0, 4.0, 2.0, True), (1.0, 400.0, 9.0, False)])
def test_a_floor_counts_where_it_agrees(told, spare, own, between):
    found = with_floor(Parts(variances=np.array([told, 1.0, 0.0]), spare=spare), own)
    assert bool(told < found.variances[0] < own) is between
    assert (found.spare > spare) is between


def test_friction_comes_close_to_what_can_be_told():
    motion = some_motion(seconds=3.0)
    current, speed = motion.current[0], motion.speed[0]
    rate = ONE.inertia[0] / ONE.constant[0]
    # The Cramer-Rao bound of b/Kt with white noise on both signals: the sensitivities of the steady predictor.
    noises = [0.01 * float(np.sqrt(np.mean(one**2))) for one in (current, speed)]
    keep = float(np.exp(-ONE.viscous[0] / ONE.inertia[0] / RATE))
    gain, _ = steady_gains(
        np.array([(noises[0] / rate / RATE) ** 2, noises[1] ** 2, 0.0]), keep=keep, step=1.0 / RATE, is_angle=False
    )
    way = np.sign(speed)
    columns = -np.array([np.gradient(speed, 1.0 / RATE), speed, way, np.ones_like(way)]) / rate / RATE
    moved = np.zeros_like(columns)
    for k in range(1, speed.size):
        moved[:, k] = 0.0 if way[k] != way[k - 1] else keep * (1.0 - gain) * moved[:, k - 1] + columns[:, k - 1]
    information = moved @ moved.T * (1.0 - gain) / noises[1] ** 2
    bound = float(np.sqrt(np.linalg.inv(information)[1, 1]))
    off, spread = [], []
    for seed in range(12):
        log = log_of(motion, only=("current", "speed"), decibel=40.0, seed=seed)
        record = prepare(log)
        told = fit_shaft(record, record.signals[SignalName.CURRENT], per=None).fitted[0]
        off.append(float(told.values[1]) - ONE.viscous[0] / ONE.constant[0])
        spread.append(float(np.sqrt(told.covariance[1, 1])))
    assert np.sqrt(np.mean(np.square(off))) < 1.6 * bound, "a dozen runs: the root mean square to some twenty percent"
    assert 0.8 * bound < np.mean(spread) < 1.6 * bound
