"""Many frequencies at once give what one after the other does."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.frequency import hessenberg, plant_response
from gainbench.kernels.frequency_batch import BLOCK, is_fed, plant_over
from gainbench.kernels.loop_grid import half_turns
from gainbench.kernels.loop_records import SampledPlant
from quantities import assert_quantity

PERIOD = 1e-3
ROUNDING = "the same elimination, with products in another order"


def drawn(size, *, fed, shift, window, filter_gain):
    """Any plant: nothing of it needs to be stable."""
    random = np.random.default_rng(size + 10 * shift + 100 * window)
    return SampledPlant(
        0.3 * random.standard_normal((size, size)),
        random.standard_normal(size),
        random.standard_normal(size),
        random.standard_normal(size),
        0.1 * random.standard_normal(size) if fed else np.zeros(size),
        0.2,
        0.1,
        0.05 if fed else 0.0,
        PERIOD,
        shift,
        window,
        0.7,
        filter_gain,
    )


@pytest.mark.parametrize("size", [1, 2, 5, 9])
@pytest.mark.parametrize("fed", [False, True])
@pytest.mark.parametrize(("shift", "window", "filter_gain"), [(0, 1, 1.0), (2, 1, 0.4), (1, 5, 1.0), (0, 3, 0.2)])
@pytest.mark.parametrize("count", [1, BLOCK, 2 * BLOCK + 7])
def test_a_block_is_one_elimination_after_the_other(size, fed, shift, window, filter_gain, count):
    plant = drawn(size, fed=fed, shift=shift, window=window, filter_gain=filter_gain)
    assert is_fed(plant) == fed
    w = np.geomspace(1e-4, 1.0, count) * math.pi / PERIOD
    got = plant_over(hessenberg(plant), half_turns(w, PERIOD))
    wanted = plant_response(plant, w)
    assert_quantity(np.abs(got / wanted - 1.0), 0.0, atol=1e-10, unit="1", why=ROUNDING)


def test_rows_are_exchanged_where_the_first_pivot_is_small():
    # The first diagonal entry is zero at the Nyquist frequency, where z - 1 = -2.
    nothing = np.zeros(2)
    plant = SampledPlant(
        np.array([[-2.0, 1.0], [1.0, -0.5]]), np.array([1.0, 2.0]), np.array([1.0, 0.5]), nothing, nothing,
        0.0, 0.0, 0.0, PERIOD, 0, 1, 1.0, 1.0,
    )  # fmt: skip
    w = np.array([math.pi / PERIOD])
    got = plant_over(hessenberg(plant), half_turns(w, PERIOD))
    exact = plant.c @ np.linalg.solve(-2.0 * np.eye(2) - plant.m, plant.b0)
    assert_quantity(abs(got[0] / exact - 1.0), 0.0, atol=1e-12, unit="1", why=ROUNDING)
