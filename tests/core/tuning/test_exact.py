"""Crossover and margin: met to rounding, refused only where nothing meets them, and what is named as nearest is met."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.margins import open_loop, read_loop
from gainbench.model import Firmware, IntegratorRule
from gainbench.plant import refer
from gainbench.results import Gains
from gainbench.sampling import current_loop, hardware
from gainbench.tuning.exact import (
    crossover_grid,
    crossover_margin,
    gains_for,
    holds,
    largest_margin,
    nearest_crossover,
)
from quantities import assert_quantity
from rigs import fixed_sheet


def loop_of(name, rule=IntegratorRule.BACKWARD):
    sheet = fixed_sheet(name)
    return current_loop(hardware(refer(sheet.rig), sheet.rig.stage), Firmware(integrator=rule))


@pytest.fixture(scope="module")
def loop():
    return loop_of("plain")


@pytest.mark.parametrize("rule", list(IntegratorRule))
@pytest.mark.parametrize("name", ["plain", "sine", "elastic"])
def test_sixty_degrees_are_sixty_degrees(name, rule):
    loop = loop_of(name, rule)
    crossover, margin = math.tau * 450.0, math.radians(60.0)
    design = crossover_margin(loop, crossover=crossover, margin=margin)
    assert design.refusal is None
    assert design.asked_crossover == crossover
    there = open_loop(loop, design.gains, frequency=np.array([crossover]))[0]
    assert_quantity(abs(there), 1.0, rtol=1e-12, unit="1", why="two linear equations")
    assert_quantity(np.angle(-there), margin, rtol=1e-12, unit="rad", why="two linear equations")
    figures = read_loop(loop, design.gains).figures
    assert_quantity(figures.crossover_hz, 450.0, rtol=1e-10, unit="Hz", why="refined to rounding")
    assert_quantity(figures.phase_margin_deg, 60.0, rtol=1e-10, unit="deg", why="refined to rounding")


@pytest.mark.parametrize(
    ("crossover_hz", "margin_deg", "words"),
    [
        (1400.0, 60.0, "with a proportional part alone"),
        (4500.0, 10.0, "already turned the phase"),
        (1.0, 30.0, "even an integral part alone"),
        (5000.0, 30.0, "half the rate"),
        (9000.0, 30.0, "half the rate"),
    ],
)
def test_a_refusal_says_what_limits(loop, crossover_hz, margin_deg, words):
    design = crossover_margin(loop, crossover=math.tau * crossover_hz, margin=math.radians(margin_deg))
    assert design.gains is None
    assert words in design.refusal.reason
    assert f"{crossover_hz:.4g} Hz" in design.refusal.reason


@pytest.mark.parametrize(("crossover_hz", "margin_deg"), [(1400.0, 60.0), (4500.0, 10.0), (1.0, 30.0), (9000.0, 45.0)])
def test_the_nearest_crossover_is_met_and_nothing_nearer_is(loop, crossover_hz, margin_deg):
    asked, margin = math.tau * crossover_hz, math.radians(margin_deg)
    nearest = nearest_crossover(loop, asked, margin=margin)
    assert nearest is not None
    assert holds(loop, gains_for(loop, nearest, margin=margin))
    # Brute force between the two, closer by at least a ten-thousandth.
    between = np.geomspace(nearest, min(asked, 0.9999 * math.tau * 5000.0), 400)[1:]
    between = between[np.abs(np.log(between / nearest)) > 1e-4]
    assert not any(holds(loop, gains_for(loop, float(w), margin=margin)) for w in between)


@pytest.mark.parametrize("crossover_hz", [300.0, 900.0, 1400.0])
def test_the_largest_margin_is_met_and_no_larger_is(loop, crossover_hz):
    asked = math.tau * crossover_hz
    largest = largest_margin(loop, asked)
    assert largest is not None
    assert holds(loop, gains_for(loop, asked, margin=largest))
    larger = np.linspace(largest, math.pi / 2.0, 200)[1:]
    larger = larger[larger > largest + 1e-5]
    assert not any(holds(loop, gains_for(loop, asked, margin=float(value))) for value in larger)


def test_there_is_no_margin_where_delay_has_taken_everything(loop):
    assert largest_margin(loop, math.tau * 4900.0) is None
    assert largest_margin(loop, math.tau * 5000.0) is None
    assert gains_for(loop, math.tau * 5000.0, margin=1.0) is None


def test_only_positive_finite_gains_hold(loop):
    assert holds(loop, Gains(kp=3.0, ki=100.0))
    assert not holds(loop, Gains(kp=0.0, ki=100.0))
    assert not holds(loop, Gains(kp=3.0, ki=0.0))
    assert not holds(loop, Gains(kp=math.nan, ki=1.0))
    assert not holds(loop, Gains(kp=1.0, ki=math.inf))
    assert not holds(loop, Gains(kp=500.0, ki=100.0))
    assert not holds(loop, None)


def test_the_grid_spans_the_loop(loop):
    grid = crossover_grid(loop)
    assert np.all(np.diff(grid) > 0.0)
    assert 0.999 < grid[-1] * loop.plant.period / math.pi < 1.0


def test_w1_crossover_of_one_kilohertz_with_ninety_degrees():
    # W1: R = 2 ohm, L = 5.2 mH, crossover 1 kHz, the zero on the lag: Ki = 1050.0, Kp = 2.73 behind a converter gain of
    # 12, exact 1047.198 and 2.72271. Mohan, Electric Drives, feedback controllers (from memory). At 4 MHz
    # without update delay the sampled loop is the continuous one.
    from dataclasses import replace

    sheet = fixed_sheet("plain")
    machine = replace(sheet.rig.machine, resistance=2.0, inductance=5.2e-3, rotor_inertia=1e3)
    stage = replace(sheet.rig.stage, pwm_frequency=4e6, current_rate=4e6, speed_rate=4e4, update_delay=0.0)
    rig = replace(sheet.rig, machine=machine, stage=stage)
    loop = current_loop(hardware(refer(rig), stage), Firmware())
    # Ninety degrees less the half sample at 1 kHz, 0.045 degrees.
    margin = math.radians(90.0) - math.pi * 1000.0 / 4e6
    design = crossover_margin(loop, crossover=math.tau * 1000.0, margin=margin)
    assert_quantity(design.gains.kp / 12.0, 2.72271, rtol=2e-3, unit="V/A", why="half a sample left over")
    assert_quantity(design.gains.ki / 12.0, 1047.198, rtol=2e-3, unit="V/(A s)", why="half a sample left over")
