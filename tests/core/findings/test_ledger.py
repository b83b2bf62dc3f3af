"""What costs most of the phase is named where a margin is thin or lag refuses a target, with what changing it gives."""

from __future__ import annotations

import math
import re
from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.findings.ledger import cost_of, costliest, costliest_lag
from gainbench.ledger import current_ledger, phase_ledger, speed_ledger
from gainbench.model import DesignMethod, HandGains, SpeedSensor
from quantities import assert_quantity
from rigs import fixed_sheet

HAND = {"method": DesignMethod.BY_HAND, "crossover": None, "phase_margin": None}


def drive(*, stage=None, speed=None, current=None):
    sheet = fixed_sheet("plain")
    rig = replace(sheet.rig, stage=replace(sheet.rig.stage, **(stage or {})))
    aims = replace(
        sheet.aims,
        speed=replace(sheet.aims.speed, **(speed or {})),
        current=replace(sheet.aims.current, **(current or {})),
    )
    return replace(sheet, rig=rig, aims=aims)


ENCODER = {"speed_sensor": SpeedSensor.ENCODER, "encoder_counts": 4096}
FAST = {**HAND, "hand": HandGains(kp=0.5, ki=5.0)}


def given_back(first, second, name):
    """How much less one drive takes beside plant and controller, where the first has its crossover [deg]."""
    ledger = phase_ledger(assess(first, simulated=False), name)
    w = ledger.frequency
    other = assess(second, simulated=False)
    stage, firmware = second.rig.stage, second.aims.firmware
    if name == "current":
        found = current_ledger(other.plant, stage, firmware=firmware, frequency=w, gains=other.current.gains)
    else:
        found = speed_ledger(
            other.plant,
            stage,
            firmware=firmware,
            frequency=w,
            current=other.current.gains,
            gains=other.speed.gains,
        )
    return found.total - ledger.total


@pytest.mark.parametrize(
    ("name", "words", "before", "after"),
    [
        (
            "speed",
            "the speed window",
            {"stage": {**ENCODER, "speed_window": 12}, "speed": FAST},
            {"stage": {**ENCODER, "speed_window": 1}, "speed": FAST},
        ),
        (
            "speed",
            "the speed filter",
            {"stage": {"speed_filter": 1e-3}, "speed": FAST},
            {"stage": {"speed_filter": 5e-4}, "speed": FAST},
        ),
        ("speed", "the speed delay", {"stage": {"speed_delay": 4}, "speed": FAST}, {"speed": FAST}),
        (
            "speed",
            "the hold of half a speed period",
            {"stage": {"speed_rate": 500.0}, "speed": FAST},
            {"stage": {"speed_rate": 1000.0}, "speed": FAST},
        ),
        (
            "speed",
            "the hold of half a speed period",
            {"stage": {**ENCODER, "speed_rate": 500.0}, "speed": FAST},
            {"stage": {**ENCODER, "speed_rate": 1000.0}, "speed": FAST},
        ),
        (
            "current",
            "the update delay",
            {"stage": {"update_delay": 2.0}, "current": {**HAND, "hand": HandGains(kp=5.0, ki=500.0)}},
            {"stage": {"update_delay": 1.0}, "current": {**HAND, "hand": HandGains(kp=5.0, ki=500.0)}},
        ),
        (
            "current",
            "the current filter",
            {"stage": {"current_filter": 3e-4}, "current": {**HAND, "hand": HandGains(kp=5.0, ki=500.0)}},
            {"stage": {"current_filter": 1.5e-4}, "current": {**HAND, "hand": HandGains(kp=5.0, ki=500.0)}},
        ),
        (
            "current",
            "the hold of half a current period",
            {"stage": {"update_delay": 0.2}, "current": {**HAND, "hand": HandGains(kp=9.0, ki=500.0)}},
            {
                "stage": {"update_delay": 0.2, "current_rate": 20e3, "pwm_frequency": 10e3},
                "current": {**HAND, "hand": HandGains(kp=9.0, ki=500.0)},
            },
        ),
        (
            "speed",
            "the integral part",
            {"speed": {**HAND, "hand": HandGains(kp=0.1, ki=10.0)}},
            {"speed": {**HAND, "hand": HandGains(kp=0.1, ki=5.0)}},
        ),
    ],
)
def test_the_change_gives_what_it_says(name, words, before, after):
    sheet = drive(**before)
    cost = costliest(assess(sheet, simulated=False), name)
    assert words in cost.reason
    told = float(re.search(r"would give back about ([\d.]+) deg", cost.advice)[1])
    given = given_back(sheet, drive(**after), name)
    assert_quantity(told, given, rtol=0.06, atol=0.1, unit="deg", why="told in one decimal, folding left out")


def test_the_current_loop_inside_may_cost_most():
    slow = {"current": {"crossover": math.tau * 90.0}, "speed": {**HAND, "hand": HandGains(kp=0.35, ki=0.5)}}
    assert "a current loop twice as fast" in costliest(assess(drive(**slow), simulated=False), "speed").advice


def test_a_feedforward_that_costs_most_is_named():
    assessment = assess(fixed_sheet("sine"), simulated=False)
    ledger = phase_ledger(assessment, "speed")
    entries = tuple(replace(one, degrees=-40.0) if one.name == "feedforward" else one for one in ledger.entries)
    cost = cost_of(replace(ledger, entries=entries), assessment.sheet.rig.stage)
    assert cost.name == "feedforward"
    assert "the back-EMF feedforward takes most" in cost.reason
    assert cost.advice == "leaving back_emf_feedforward out would give back about 40.0 deg"


def test_a_window_beyond_its_null_gives_nothing_back():
    sheet = drive(stage={**ENCODER, "speed_window": 4})
    ledger = phase_ledger(assess(sheet, simulated=False), "speed")
    # A null stands at 500 Hz; a little above it the window takes next to nothing, and one period takes 45 deg.
    entries = tuple(replace(one, degrees=-20.0 if one.name == "speed-window" else 0.0) for one in ledger.entries)
    assert cost_of(replace(ledger, entries=entries, frequency=math.tau * 520.0), sheet.rig.stage) is None


def test_next_to_nothing_is_not_told():
    weak = {**HAND, "hand": HandGains(kp=0.005, ki=0.0)}
    assert costliest(assess(drive(speed=weak), simulated=False), "speed") is None


def test_a_thin_margin_names_what_costs_most(bench):
    found = bench.only("speed-phase-margin-thin", speed={"phase_margin_deg": 40.0})
    assert "takes most at 60.0 Hz" in found.reason
    # Designed for its margin, the integral part takes what is left: more margin is all there is to ask for.
    assert "would give back" not in found.advice
    by_hand = {"asked_crossover": None}
    found = bench.only("speed-phase-margin-thin", speed={"phase_margin_deg": 40.0}, speed_loop=by_hand)
    assert re.search(r"half the Ki would give back about \d+\.\d deg$", found.advice)
    slow = bench.one(
        "speed-phase-margin-thin", speed={"phase_margin_deg": 40.0}, stage={"speed_window": 16}, speed_loop=by_hand
    )
    assert "the speed window takes most" in slow.reason
    assert re.search(r"a speed_window of 1 would give back about \d+\.\d deg$", slow.advice)


def test_lag_that_refuses_a_target_is_named():
    sheet = drive(stage={**ENCODER, "speed_window": 16}, speed={"crossover": math.tau * 60.0})
    assessment = assess(sheet)
    assert assessment.speed.gains is None
    (found,) = (one for one in assessment.findings if one.code == "speed-loop-refused")
    assert "the speed window takes most at 60.0 Hz, 86.4 deg" in found.advice
    assert found.advice.endswith("a speed_window of 1 would give back about 81.0 deg")
    margin = sheet.aims.speed.phase_margin
    assert costliest_lag(assessment, "speed", margin=margin).name == "speed-window"


def test_a_target_that_something_else_refuses_names_no_lag():
    # At 0.1 Hz, below the corner of the friction, even an integral alone leaves more than the 10 deg asked for.
    assessment = assess(drive(speed={"crossover": math.tau * 0.1, "phase_margin": np.radians(10.0)}))
    (found,) = (one for one in assessment.findings if one.code == "speed-loop-refused")
    assert "takes most" not in found.advice
    assert costliest_lag(assessment, "speed", margin=np.radians(10.0)) is None


def test_without_a_ledger_nothing_is_told():
    waiting = assess(drive(current={"crossover": math.tau * 4900.0}))
    assert costliest(waiting, "speed") is None
    assert costliest_lag(waiting, "speed", margin=1.0) is None
