"""A map for bandwidth and margin fills what a bandwidth leads to: no more behind a resonance, no less elsewhere."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.assessed import assessed_loop
from gainbench.bandwidth_reach import FINE, QUICK, with_own_bandwidth
from gainbench.margins import read_loop
from gainbench.reach import reach_map
from gainbench.sheetfile import parse_sheet
from gainbench.tuning.bandwidth import crossover_for_bandwidth, reached_bandwidth
from gainbench.tuning.exact import gains_for

DAMPED = {"train.shaft_damping": "720 mN*m*s/rad"}


def loop_of(demo_texts, name, values=None, *, loop="speed"):
    document = parse_sheet(demo_texts[name], f"{name}.bench.toml")
    sheet = (document.with_values(values) if values else document).sheet
    return assessed_loop(assess(sheet, simulated=False), loop)


def maps_of(sampled, *, step=FINE):
    whole = reach_map(sampled, lowest=math.pi / sampled.plant.period * 1e-3, columns=60)
    return whole, with_own_bandwidth(sampled, whole, step=step)


def filled(reach, column, margin):
    return bool(np.any((reach.low[column] <= margin) & (margin <= reach.high[column])))


def leads_back(sampled, crossover, margin):
    """By the design itself: the bandwidth of the place leads to the place."""
    bandwidth = reached_bandwidth(sampled, crossover, margin=margin)
    if bandwidth is None:
        return False
    found = crossover_for_bandwidth(sampled, bandwidth, margin=margin)
    return found is not None and abs(found / crossover - 1.0) < 1e-4


@pytest.mark.parametrize(
    ("name", "values", "loop", "share"),
    [
        ("sieve-drum", None, "speed", 0.0),
        ("label-unwinder", None, "speed", 0.0),
        # Where the bandwidth jumps from one fall to another, between two crossovers of the map.
        ("sieve-drum", DAMPED, "speed", 0.04),
        ("sieve-drum", None, "current", 0.04),
    ],
)
def test_it_fills_what_the_design_comes_back_to(demo_texts, name, values, loop, share):
    sampled = loop_of(demo_texts, name, values, loop=loop)
    whole, own = maps_of(sampled)
    wrong = places = 0
    for column in range(0, whole.crossover.size, 4):
        for margin in np.radians(np.arange(2.0, 90.0, 9.0)):
            if filled(whole, column, margin):
                back = leads_back(sampled, float(whole.crossover[column]), float(margin))
                places += 1
                wrong += filled(own, column, margin) is not back
            else:
                assert not filled(own, column, margin)
    assert places > 60
    assert wrong <= share * places


def test_behind_a_resonance_the_loop_has_crossed_over_before(demo_texts):
    sampled = loop_of(demo_texts, "sieve-drum")
    whole, own = maps_of(sampled)
    behind = whole.crossover > math.tau * 120.0
    assert np.any(~np.isnan(whole.low[behind]))
    assert np.all(np.isnan(own.low[behind]))
    gains = gains_for(sampled, math.tau * 230.0, margin=math.radians(50.0))
    assert read_loop(sampled, gains).figures.crossover_hz < 120.0


def test_a_well_damped_resonance_leaves_an_area_behind_a_gap(demo_texts):
    _, own = maps_of(loop_of(demo_texts, "sieve-drum", DAMPED))
    margin = math.radians(20.0)
    hertz = own.crossover / math.tau
    there = np.array([filled(own, column, margin) for column in range(hertz.size)])
    assert there[(hertz > 230.0) & (hertz < 400.0)].all()
    assert not there[(hertz > 140.0) & (hertz < 190.0)].any()
    assert there[(hertz > 20.0) & (hertz < 80.0)].all()


def test_edges_that_are_those_of_the_map_stay_exact(demo_texts):
    whole, own = maps_of(loop_of(demo_texts, "label-unwinder"), step=QUICK)
    # Parts narrower than the step are not looked at.
    wide = whole.high[:, 0] - whole.low[:, 0] > QUICK
    assert wide.sum() > 40
    assert np.array_equal(own.low[wide, 0], whole.low[wide, 0])
    assert np.array_equal(own.high[wide, 0], whole.high[wide, 0])
    assert not own.low.flags.writeable
