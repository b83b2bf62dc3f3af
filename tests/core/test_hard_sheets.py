"""The library against the reference model where drives are awkward: friction, losses, limits, gains that are off."""

from __future__ import annotations

import math
from functools import cache

import pytest

from comparing import compare_loop, compare_response, compare_step, starts
from gainbench.assess import Assessment, assess
from gainbench.model import Sheet
from hard_rigs import bandwidth_aims, hard_duties, scaled_gains
from oracle_bench import read_bench
from oracle_design import design
from quantities import assert_quantity


@cache
def _duties() -> list[Assessment]:
    return [assess(sheet) for sheet in hard_duties(500, 60)]


@pytest.mark.parametrize("k", range(60))
def test_duty(k: int) -> None:
    found = _duties()[k]
    begins = starts(found.sheet, read_bench(found.sheet))
    stable = all(side.figures is not None and side.figures.stable for side in (found.current, found.speed))
    assert (found.response is not None) == (begins and stable)
    if found.response is not None:
        compare_response(found)


def test_the_duties_are_hard() -> None:
    """They stick, they sit on both limits, they give energy back, and they start where they may not."""
    figures = [found.response.figures for found in _duties() if found.response is not None]
    assert 30 <= len(figures) < 60
    assert sum(one.current_limited_s > 0.0 for one in figures) > 5
    assert sum(one.voltage_limited_s > 0.0 for one in figures) > 5
    assert sum(one.returned_energy_j > 0.0 for one in figures) > 10
    resting = [
        found
        for found in _duties()
        if found.response is not None and found.response.trace.speed[0] == found.response.trace.speed[-1] == 0.0
    ]
    assert len(resting) > 2
    for name in ("overshoot_percent", "rise_time_s", "settling_time_s", "load_dip_rad_s", "recovery_time_s"):
        given = [getattr(one, name) is not None for one in figures]
        assert any(given)
        assert not all(given)


@cache
def _scaled() -> list[Sheet]:
    return scaled_gains(100, 40)


@pytest.mark.parametrize("k", range(35))
def test_gains_by_hand(k: int) -> None:
    sheet = _scaled()[k]
    library, oracle = assess(sheet), design(sheet)
    compare_loop(library.current, oracle.current)
    assert oracle.speed is not None
    compare_loop(library.speed, oracle.speed)
    compare_step(library.locked_step, oracle.step)


def test_some_loops_by_hand_are_unstable() -> None:
    verdicts = [design(sheet, figures=False) for sheet in _scaled()]
    unstable = sum(verdict.speed is not None and not verdict.speed.stable for verdict in verdicts)
    assert 3 <= unstable <= len(verdicts) - 10


@cache
def _bandwidths() -> list[Sheet]:
    return bandwidth_aims(904, 24)


@pytest.mark.parametrize("k", range(24))
def test_bandwidth_and_margin(k: int) -> None:
    """The highest crossover of several, by search over all of them; or a refusal where there is none."""
    sheet = _bandwidths()[k]
    library, oracle = assess(sheet), design(sheet)
    compare_loop(library.current, oracle.current)
    if oracle.speed is not None:
        compare_loop(library.speed, oracle.speed)
    for side, aims in ((library.current, sheet.aims.current), (library.speed, sheet.aims.speed)):
        if aims.bandwidth is not None and side.figures is not None:
            assert_quantity(side.figures.bandwidth_hz, aims.bandwidth / math.tau, rtol=1e-6, unit="Hz", why="exact")
