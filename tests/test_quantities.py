"""The comparison that the other tests rest on must itself be able to fail."""

from __future__ import annotations

import math

import numpy as np
import pytest

from quantities import assert_quantity


@pytest.mark.parametrize(
    ("actual", "reference", "rtol", "atol"),
    [
        (1.0, 1.0, 0.0, 0.0),
        (1.009, 1.0, 0.01, 0.0),
        (-1.009, -1.0, 0.01, 0.0),
        (0.5, 0.0, 0.0, 0.5),
        ([1.0, 2.0], [1.0, 2.1], 0.0, 0.11),
        ([1.0, 1.05], 1.0, 0.0, 0.06),
        (1 << 60, float(1 << 60), 0.0, 0.0),
    ],
)
def test_what_is_within_passes(actual, reference, rtol, atol):
    assert_quantity(actual, reference, rtol=rtol, atol=atol, unit="A", why="made for this test")


@pytest.mark.parametrize(
    ("actual", "reference", "rtol", "atol"),
    [
        (1.0 + 1e-15, 1.0, 0.0, 0.0),
        (1.011, 1.0, 0.01, 0.0),
        (-1.0, 1.0, 0.5, 0.0),
        (math.nan, 1.0, 1.0, 1.0),
        (math.inf, 1.0, 1.0, 1.0),
        ([1.0, math.nan], [1.0, 1.0], 0.1, 0.1),
        ([1.0, 2.0], [1.0, 3.0], 0.0, 0.5),
        ([1.0, 2.0], [1.0, 2.0, 3.0], 0.1, 0.1),
        (1.0, [1.0, 1.0], 0.1, 0.1),
    ],
)
def test_what_is_outside_fails(actual, reference, rtol, atol):
    with pytest.raises(AssertionError):
        assert_quantity(actual, reference, rtol=rtol, atol=atol, unit="A", why="made for this test")


def test_the_message_names_place_numbers_unit_and_reason():
    told = r"5 ohm is not 4 ohm at \[1\] \(1 of 3 outside\).*\(three digits printed\)"
    with pytest.raises(AssertionError, match=told):
        assert_quantity(np.array([1.0, 5.0, 2.0]), [1.0, 4.0, 2.0], atol=0.1, unit="ohm", why="three digits printed")


@pytest.mark.parametrize(
    "mistake",
    [
        {"unit": "", "why": "made for this test"},
        {"unit": "A", "why": ""},
        {"unit": "A", "why": "made for this test", "rtol": -1e-3},
        {"unit": "A", "why": "made for this test", "atol": math.inf},
        {"unit": "A", "why": "made for this test", "atol": math.nan},
    ],
)
def test_a_tolerance_without_unit_reason_or_size_is_refused(mistake):
    with pytest.raises(ValueError, match="tolerance"):
        assert_quantity(1.0, 1.0, **mistake)


def test_a_reference_must_be_finite():
    with pytest.raises(ValueError, match="finite"):
        assert_quantity(1.0, math.nan, atol=1.0, unit="A", why="made for this test")
