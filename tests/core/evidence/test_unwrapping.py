"""Angles that begin anew."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.errors import LogError
from gainbench.evidence.unwrapping import unwrapped
from quantities import assert_quantity

TIME = np.arange(4000) * 1e-3
ANGLE = 40.0 * np.sin(3.0 * TIME) + 25.0 * TIME
EXACT = "whole turns are added, with no rounding but that of sums"


@pytest.mark.parametrize("span", [2.0 * np.pi, np.pi, 20.0])
def test_a_wrap_of_any_span_is_laid_out(span):
    found, said = unwrapped(np.mod(ANGLE, span), "a.csv")
    assert "wraps" in said
    # Spans that are no turn are told by the motion on both sides of each step.
    close = 1e-9 if np.isclose(span, 2.0 * np.pi) else 5e-3
    assert_quantity(np.diff(found), np.diff(ANGLE), atol=close, unit="rad", why=EXACT)


def test_both_ways_and_centred():
    found, _ = unwrapped(np.mod(ANGLE + np.pi, 2.0 * np.pi) - np.pi, "a.csv")
    assert_quantity(found - found[0], ANGLE - ANGLE[0], atol=1e-9, unit="rad", why=EXACT)


def test_a_reset_goes_on_as_it_was():
    reset = ANGLE - np.where(TIME > 2.0, ANGLE[2001], 0.0)
    found, said = unwrapped(reset, "a.csv")
    assert "was reset once" in said
    assert_quantity(found - found[0], ANGLE - ANGLE[0], atol=1e-2, unit="rad", why="one step taken from its neighbours")


@pytest.mark.parametrize("angle", [ANGLE, np.zeros(100), ANGLE + (TIME == 1.0) * 500.0])
def test_what_does_not_begin_anew_stays(angle):
    found, said = unwrapped(angle, "a.csv")
    assert said == ""
    assert found is angle


def test_too_fast_to_know_the_way():
    with pytest.raises(LogError, match="log it faster"):
        unwrapped(np.mod(2.5 * np.arange(500.0), 6.0), "a.csv")


def test_a_rest_where_it_wraps_goes_there_and_back():
    rng = np.random.default_rng(1)
    rest = 12.0 * np.pi + 1e-3 * rng.choice([-1.0, 1.0], 200)
    angle = np.concatenate((np.linspace(0.0, 12.0 * np.pi, 1000), rest, np.linspace(12.0 * np.pi, 0.0, 1000)))
    found, _ = unwrapped(np.mod(angle, 2.0 * np.pi), "a.csv")
    assert_quantity(found - found[0], angle - angle[0], atol=1e-9, unit="rad", why=EXACT)
