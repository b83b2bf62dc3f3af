"""Every method of every loop is reached, and what a method lacks is said."""

from __future__ import annotations

import math

import pytest

from gainbench.model import CURRENT_METHODS, SPEED_METHODS, DesignMethod, Firmware, HandGains, LoopAims, SpeedAims
from gainbench.plant import refer
from gainbench.results import Gains, LoopFigures
from gainbench.sampling import current_loop, hardware, speed_loop
from gainbench.tuning import Design, design_current, design_speed
from rigs import fixed_sheet

TARGETS = {
    "phase_margin": math.radians(60.0),
    "natural_frequency": math.tau * 300.0,
    "damping": 0.8,
    "hand": HandGains(kp=3.0, ki=1000.0),
}
CURRENT = Gains(kp=3.0, ki=2000.0)


@pytest.fixture(scope="module")
def bench():
    sheet = fixed_sheet("plain")
    plant = refer(sheet.rig)
    own = hardware(plant, sheet.rig.stage)
    inner = current_loop(own, Firmware())
    outer = speed_loop(own, plant, stage=sheet.rig.stage, firmware=Firmware(), current=CURRENT)
    return plant, sheet.rig.stage, inner, outer


@pytest.mark.parametrize("method", CURRENT_METHODS)
def test_methods_of_the_current_loop(bench, method):
    plant, stage, inner, _ = bench
    aims = LoopAims(method=method, crossover=math.tau * 400.0, bandwidth=math.tau * 700.0, **TARGETS)
    design = design_current(aims, plant, stage=stage, loop=inner)
    assert design.gains is not None
    assert design.gains.kp > 0.0
    with pytest.raises(ValueError, match=r"needs|method"):
        design_current(LoopAims(method=DesignMethod.SYMMETRIC_OPTIMUM), plant, stage=stage, loop=inner)
    if method is not DesignMethod.MAGNITUDE_OPTIMUM:
        with pytest.raises(ValueError, match="needs"):
            design_current(LoopAims(method=method), plant, stage=stage, loop=inner)


@pytest.mark.parametrize("method", SPEED_METHODS)
def test_methods_of_the_speed_loop(bench, method):
    plant, stage, inner, outer = bench
    aims = SpeedAims(
        method=method,
        crossover=math.tau * 40.0,
        bandwidth=math.tau * 60.0,
        spread=2.5,
        **{**TARGETS, "natural_frequency": 200.0},
    )
    figures = LoopFigures(stable=True, crossover_hz=400.0)
    design = design_speed(aims, plant, stage=stage, loop=outer, current=figures)
    assert design.gains is not None
    assert design.gains.ki > 0.0
    with pytest.raises(ValueError, match="needs"):
        design_speed(SpeedAims(method=method), plant, stage=stage, loop=outer, current=figures)
    with pytest.raises(ValueError, match="method"):
        design_speed(SpeedAims(method=DesignMethod.MAGNITUDE_OPTIMUM), plant, stage=stage, loop=outer, current=figures)
    assert inner.rule == outer.rule


@pytest.mark.parametrize(
    "method", [DesignMethod.CROSSOVER_MARGIN, DesignMethod.BANDWIDTH_MARGIN, DesignMethod.SYMMETRIC_OPTIMUM]
)
def test_without_current_gains_the_speed_loop_waits(bench, method):
    plant, stage, _, _ = bench
    aims = SpeedAims(method=method, crossover=250.0, bandwidth=300.0, spread=2.0, phase_margin=1.0)
    design = design_speed(aims, plant, stage=stage, loop=None, current=None)
    assert design.gains is None
    assert "no gains" in design.refusal.reason


def test_the_symmetric_optimum_needs_a_current_crossover(bench):
    plant, stage, _, outer = bench
    aims = SpeedAims(method=DesignMethod.SYMMETRIC_OPTIMUM, spread=2.0)
    design = design_speed(aims, plant, stage=stage, loop=outer, current=LoopFigures(stable=False))
    assert "crossover" in design.refusal.reason


def test_gains_by_hand_need_no_loop(bench):
    plant, stage, _, _ = bench
    aims = SpeedAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=0.2, ki=4.0))
    assert design_speed(aims, plant, stage=stage, loop=None, current=None) == Design(gains=Gains(kp=0.2, ki=4.0))
