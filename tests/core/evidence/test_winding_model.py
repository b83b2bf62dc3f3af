"""The winding as a model."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.evidence.winding_model import WindingModel
from quantities import assert_quantity

N, STEP = 300, 2e-4
RNG = np.random.default_rng(1)
VOLTAGE = np.repeat(RNG.uniform(-5.0, 5.0, 10), 30)
SPEED = 20.0 * np.sin(0.01 * np.arange(N))


def model(*, turning: bool) -> WindingModel:
    size = np.array([0.5, 1e-3, 0.05, 1.0] if turning else [0.5, 1e-3, 1.0])
    return WindingModel(
        measured=np.zeros(N), voltage=VOLTAGE, speed=SPEED if turning else None, step=STEP, pieces=np.array([0, N]),
        size=size,
    )  # fmt: skip


def values(turning: bool) -> np.ndarray:
    return np.array([0.5, 1e-3, 0.05, 0.0] if turning else [0.5, 1e-3, 0.0])


def run(turning: bool, at: np.ndarray, nudge: float = 0.0):
    return model(turning=turning).run(at, np.array([0, 100, N]), starts=np.array([[0.0], [1.0]]), nudge=nudge)


@pytest.mark.parametrize("turning", [False, True])
def test_sensitivities_are_differences(turning):
    at = values(turning)
    found = run(turning, at, 1e-6)
    size = model(turning=turning).size
    for index in range(at.size - 1):
        up, down = at.copy(), at.copy()
        up[index] += 1e-4 * size[index]
        down[index] -= 1e-4 * size[index]
        difference = (run(turning, up).output - run(turning, down).output) / 2e-4
        assert_quantity(
            found.sensitivities[index], difference, atol=1e-3 * np.abs(difference).max(), unit="A", why="second order"
        )


def test_a_dead_time_moves_the_voltage():
    late = values(False)
    late[-1] = 3.0
    found, plain = run(False, late).output, run(False, values(False)).output
    assert_quantity(found[3:100], plain[:97], atol=0.3, unit="A", why="but for the start, which holds the first value")


def test_memory_of_the_current():
    assert_quantity(model(turning=True).keep(values(True)), np.exp(-0.1), rtol=1e-12, unit="1", why="R h/L")
