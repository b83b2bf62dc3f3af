"""Bandwidth and margin: both figures of the loop are those asked for, and what is named as nearest is met."""

from __future__ import annotations

import math

import pytest

from gainbench.margins import read_loop
from gainbench.model import Firmware
from gainbench.plant import refer
from gainbench.sampling import current_loop, hardware
from gainbench.tuning.bandwidth import bandwidth_margin, crossover_for_bandwidth, nearest_bandwidth, reached_bandwidth
from gainbench.tuning.exact import crossover_grid, gains_for, holds
from quantities import assert_quantity
from rigs import fixed_sheet


@pytest.fixture(scope="module")
def loop():
    sheet = fixed_sheet("plain")
    return current_loop(hardware(refer(sheet.rig), sheet.rig.stage), Firmware())


@pytest.mark.parametrize(("bandwidth_hz", "margin_deg"), [(1000.0, 60.0), (600.0, 45.0), (300.0, 75.0)])
def test_both_targets_are_figures_of_the_loop(loop, bandwidth_hz, margin_deg):
    design = bandwidth_margin(loop, bandwidth=math.tau * bandwidth_hz, margin=math.radians(margin_deg))
    figures = read_loop(loop, design.gains).figures
    assert_quantity(figures.bandwidth_hz, bandwidth_hz, rtol=1e-8, unit="Hz", why="halved down to rounding")
    assert_quantity(figures.phase_margin_deg, margin_deg, rtol=1e-8, unit="deg", why="two linear equations")
    assert_quantity(
        figures.crossover_hz * math.tau, design.asked_crossover, rtol=1e-8, unit="rad/s", why="the same root"
    )


def test_no_higher_crossover_has_the_bandwidth(loop):
    margin, bandwidth = math.radians(60.0), math.tau * 1000.0
    design = bandwidth_margin(loop, bandwidth=bandwidth, margin=margin)
    for w in crossover_grid(loop):
        if w > design.asked_crossover * 1.001:
            gains = gains_for(loop, float(w), margin=margin)
            if holds(loop, gains):
                reached = read_loop(loop, gains).figures.bandwidth_hz
                assert reached is None or abs(reached * math.tau / bandwidth - 1.0) > 1e-4


@pytest.mark.parametrize(("bandwidth_hz", "words"), [(4000.0, "leave no room"), (6000.0, "half the rate")])
def test_a_refusal_names_a_bandwidth_that_is_met(loop, bandwidth_hz, words):
    margin = math.radians(60.0)
    design = bandwidth_margin(loop, bandwidth=math.tau * bandwidth_hz, margin=margin)
    assert design.gains is None
    assert words in design.refusal.reason
    nearest = design.refusal.nearest_bandwidth
    assert nearest is not None
    again = bandwidth_margin(loop, bandwidth=nearest * 0.9999, margin=margin)
    assert again.gains is not None
    if design.refusal.largest_margin is not None:
        eased = bandwidth_margin(loop, bandwidth=math.tau * bandwidth_hz, margin=design.refusal.largest_margin)
        assert eased.gains is not None


def test_there_may_be_nothing_near():
    sheet = fixed_sheet("plain")
    loop = current_loop(hardware(refer(sheet.rig), sheet.rig.stage), Firmware())
    assert nearest_bandwidth(loop, math.tau * 500.0, margin=math.radians(60.0)) == pytest.approx(
        math.tau * 500.0, rel=1e-3
    )


def test_what_a_crossover_reaches_is_what_asks_for_it(loop):
    margin, crossover = math.radians(60.0), math.tau * 600.0
    bandwidth = reached_bandwidth(loop, crossover, margin=margin)
    figures = read_loop(loop, gains_for(loop, crossover, margin=margin)).figures
    assert bandwidth == figures.bandwidth_hz * math.tau
    design = bandwidth_margin(loop, bandwidth=bandwidth, margin=margin)
    assert_quantity(design.asked_crossover, crossover, rtol=1e-8, unit="rad/s", why="there and back")


def test_a_crossover_that_cannot_be_met_reaches_nothing(loop):
    assert reached_bandwidth(loop, 0.9 * math.pi / loop.plant.period, margin=math.radians(60.0)) is None


def test_the_crossover_alone_is_that_of_the_design(loop):
    margin = math.radians(60.0)
    design = bandwidth_margin(loop, bandwidth=math.tau * 600.0, margin=margin)
    assert crossover_for_bandwidth(loop, math.tau * 600.0, margin=margin) == design.asked_crossover
    assert crossover_for_bandwidth(loop, math.tau * 4000.0, margin=margin) is None
