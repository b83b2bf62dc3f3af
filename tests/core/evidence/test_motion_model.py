"""The motion as a model: shapes of friction, dead time, sensitivities."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.evidence.motion_model import MotionModel, Shape
from quantities import assert_quantity

N, STEP = 400, 1e-3
DRIVE = 0.2 * np.sin(0.03 * np.arange(N))
VALUES = {
    Shape.EVEN: np.array([2e-4, 1e-4, 0.03, -0.01, -0.5]),
    Shape.BY_WAY: np.array([2e-4, 1e-4, 0.02, 1e-4, 0.04, -0.5]),
    Shape.ONE_WAY: np.array([2e-4, 1e-4, 0.02, -0.5]),
}


def model(shape: Shape, *, angle: bool = False) -> MotionModel:
    return MotionModel(
        recorded=np.zeros(N), is_angle=angle, speed=np.zeros(N), drive=DRIVE, step=STEP, pieces=np.array([0, N]),
        shape=shape, size=np.abs(VALUES[shape]),
    )  # fmt: skip


def run(shape: Shape, values: np.ndarray, *, angle: bool = False, nudge: float = 0.0):
    bounds = np.array([0, 150, N])
    return model(shape, angle=angle).run(values, bounds, starts=np.array([[0.0], [12.0]]), nudge=nudge)


def test_even_and_by_way_are_the_same_friction_in_other_words():
    even, by_way = run(Shape.EVEN, VALUES[Shape.EVEN]), run(Shape.BY_WAY, VALUES[Shape.BY_WAY])
    assert_quantity(by_way.output, even.output, atol=1e-12, unit="rad/s", why="the same equation")


@pytest.mark.parametrize("shape", Shape)
@pytest.mark.parametrize("angle", [False, True])
def test_sensitivities_are_differences(shape, angle):
    values = VALUES[shape]
    found = run(shape, values, angle=angle, nudge=1e-6)
    for index in range(values.size):
        moved = values.copy()
        moved[index] += 1e-4 * abs(values[index])
        difference = (run(shape, moved, angle=angle).output - run(shape, values, angle=angle).output) / 1e-4
        scale = np.abs(difference).max()
        assert_quantity(
            found.sensitivities[index], difference, atol=0.02 * scale, unit="rad/s", why="a larger step of the same"
        )


def test_an_angle_is_compared_by_its_growth():
    speed, grown = run(Shape.EVEN, VALUES[Shape.EVEN]), run(Shape.EVEN, VALUES[Shape.EVEN], angle=True)
    between = 0.5 * (speed.output[1:] + speed.output[:-1])
    inside = np.setdiff1d(np.arange(1, N), [150])
    assert_quantity(grown.output[inside], between[inside - 1], atol=0.1, unit="rad/s", why="mean of a bent line")


def test_memory_of_the_speed():
    keep = model(Shape.EVEN).keep(VALUES[Shape.EVEN])
    assert_quantity(keep, np.exp(-0.5e-3), rtol=1e-12, unit="1", why="b h/J")


def test_coasting_has_neither_inertia_nor_dead_time():
    coasting = MotionModel(
        recorded=np.zeros(N), is_angle=False, speed=np.full(N, 9.0), drive=None, step=STEP, pieces=np.array([0, N]),
        shape=Shape.ONE_WAY, size=np.ones(2),
    )  # fmt: skip
    bounds = np.array([0, N])
    found = coasting.run(np.array([0.5, 10.0]), bounds, starts=coasting.first_starts(bounds), nudge=0.0).output
    t = STEP * np.arange(N)
    assert_quantity(found, 29.0 * np.exp(-0.5 * t) - 20.0, rtol=1e-9, unit="rad/s", why="the closed form")
