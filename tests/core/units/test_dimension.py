from __future__ import annotations

import math

import pytest

from gainbench.units import Dimension, parse


@pytest.mark.parametrize("dimension", list(Dimension))
def test_example_is_taken(dimension: Dimension) -> None:
    assert math.isfinite(parse(dimension.example, dimension))


@pytest.mark.parametrize("dimension", list(Dimension))
def test_units_for_people_rise(dimension: Dimension) -> None:
    if dimension is Dimension.TEMPERATURE:
        return
    sizes = [parse(f"1 {unit}", dimension) for unit in dimension.people]
    assert sizes == sorted(sizes)
    assert parse(f"1 {dimension.unit}", dimension) == 1.0
