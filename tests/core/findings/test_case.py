"""The case that is judged."""

from __future__ import annotations


def test_loops_by_name(bench):
    case = bench.case()
    assert case.loop("current") is case.current
    assert case.loop("speed") is case.speed


def test_figures_only_of_stable_loops(bench):
    quiet = bench.case()
    assert quiet.stable_figures("speed") is quiet.speed.figures
    assert quiet.stable_figures("current") is quiet.current.figures
    assert bench.case(speed_loop={"figures": bench.unstable}).stable_figures("speed") is None
    assert bench.case(speed_loop={"gains": None, "figures": None}).stable_figures("speed") is None
    assert bench.case(speed_loop={"figures": bench.unstable}).stable_figures("current") is not None
