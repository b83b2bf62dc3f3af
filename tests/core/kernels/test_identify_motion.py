"""The motion kernel against closed forms and a fine integration."""

from __future__ import annotations

import numpy as np

from gainbench.kernels.identify_motion import COLUMNS, run_motion
from quantities import assert_quantity

STEP = 1e-3
SET = np.array([[2e-4, 1e-4, 0.03, 2e-4, 0.04]])
SOURCE = np.zeros(1, dtype=np.int64)


def motion(torque: np.ndarray, speed: float, *, angle: bool, sets: np.ndarray = SET) -> np.ndarray:
    out = np.empty((1, torque.size))
    bounds = np.array([0, torque.size])
    start = np.array([[[speed, 0.0]]])
    run_motion(torque[None], STEP, sets, SOURCE, bounds, start, angle, np.zeros(torque.size), np.zeros(2), out)
    return out[0]


def test_coasting_is_the_closed_form_until_it_rests():
    t = STEP * np.arange(1200)
    end = 0.03 / 1e-4
    expected = np.maximum((50.0 + end) * np.exp(-0.5 * t) - end, 0.0)
    found = motion(np.zeros(t.size), 50.0, angle=False)
    assert_quantity(found, expected, atol=1e-9, unit="rad/s", why="exact steps")
    assert found[-1] == 0.0


def test_it_starts_and_turns_as_a_fine_integration_does():
    rng = np.random.default_rng(1)
    torque = np.repeat(rng.uniform(-0.2, 0.2, 60), 20)
    fine = 400
    inertia, viscous_f, drag_f, viscous_b, drag_b = SET[0]
    speed = angle = 0.0
    speeds, angles = [], []
    for value in torque:
        speeds.append(speed)
        angles.append(angle)
        for _ in range(fine):
            if speed > 0.0 or (speed == 0.0 and value > drag_f):
                rate = (value - drag_f - viscous_f * speed) / inertia
            elif speed < 0.0 or (speed == 0.0 and -value > drag_b):
                rate = (value + drag_b - viscous_b * speed) / inertia
            else:
                rate = 0.0
            after = speed + rate * STEP / fine
            if speed * after < 0.0:
                after = 0.0
            angle += 0.5 * (speed + after) * STEP / fine
            speed = after
    why = "Euler steps of 2.5 us over 1.2 s"
    assert_quantity(motion(torque, 0.0, angle=False), speeds, atol=0.05, unit="rad/s", why=why)
    assert_quantity(motion(torque, 0.0, angle=True), angles, atol=0.02, unit="rad", why=why)
    assert min(speeds) < 0.0 < max(speeds)


def test_it_stays_at_rest_within_friction():
    assert not motion(np.full(50, 0.029), 0.0, angle=False).any()
    assert not motion(np.full(50, -0.039), 0.0, angle=False).any()
    assert motion(np.full(50, -0.041), 0.0, angle=False)[-1] < 0.0


def test_sets_and_segments_are_apart():
    sets = np.vstack((SET, SET * 1.1))
    assert sets.shape[1] == COLUMNS
    torque = np.vstack((np.full(100, 0.1), np.full(100, 0.2)))
    out = np.empty((2, 100))
    starts = np.zeros((2, 2, 2))
    starts[:, 1, 0] = -7.0
    run_motion(torque, STEP, sets, np.array([0, 1]), np.array([0, 40, 100]), starts, False, torque[0], np.zeros(2), out)
    assert_quantity(out[0, :40], motion(torque[0], 0.0, angle=False)[:40], unit="rad/s", why="the same steps")
    assert_quantity(
        out[1, 40:], motion(torque[1], -7.0, angle=False, sets=sets[1:])[:60], unit="rad/s", why="the same steps"
    )


def test_without_viscous_friction_it_is_uniformly_accelerated():
    found = motion(np.full(100, 0.13), 0.0, angle=True, sets=np.array([[2e-4, 0.0, 0.03, 0.0, 0.03]]))
    t = STEP * np.arange(100)
    assert_quantity(found, 250.0 * t**2, rtol=1e-9, atol=1e-12, unit="rad", why="half of 500 rad/s^2 by t^2")


def test_a_motion_that_follows_is_drawn_to_what_was_measured():
    torque, measured, out = np.zeros(200), np.full(200, 8.0), np.empty((1, 200))
    free = np.array([[2e-4, 0.0, 0.0, 0.0, 0.0]])
    run_motion(torque[None], STEP, free, SOURCE, np.array([0, 200]), np.zeros((1, 1, 2)), False, measured,
               np.array([0.1, 0.0]), out)  # fmt: skip
    expected = 8.0 * (1.0 - 0.9 ** np.arange(200))
    assert_quantity(out[0], expected, atol=1e-9, unit="rad/s", why="a tenth of what is left at every sample")
