"""The phase ledger: it adds up to the open loop's phase, and each entry is what it says, by another way."""

from __future__ import annotations

import cmath
import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.assessed import assessed_loop
from gainbench.ledger import current_ledger, phase_ledger, speed_ledger
from gainbench.margins import open_loop, plant_response
from gainbench.model import DesignMethod, Firmware, HandGains, IntegratorRule, SpeedSensor
from gainbench.plant import refer, state_space
from gainbench.results import Gains
from gainbench.sampling import current_loop, hardware, speed_loop
from quantities import assert_quantity
from rigs import FIXED, fixed_sheet, random_sheets

CURRENT = ("plant", "pi", "update-delay", "hold", "current-filter")
SPEED = (
    "plant", "pi", "closed-current-loop", "feedforward", "speed-delay", "speed-window", "speed-hold", "speed-filter",
)  # fmt: skip


def apart(first, second):
    """Difference of two angles [deg]."""
    return math.remainder(first - second, 360.0)


def ledgers(sheet):
    assessment = assess(sheet, simulated=False)
    for name in ("current", "speed"):
        ledger = phase_ledger(assessment, name)
        if ledger is not None and getattr(assessment, name).gains is not None:
            yield assessment, name, ledger


@pytest.mark.parametrize("seed", [21, 22])
def test_entries_add_up_to_the_phase_of_the_open_loop(seed):
    for sheet in random_sheets(seed, 25):
        for assessment, name, ledger in ledgers(sheet):
            own = getattr(assessment, name)
            loop = assessed_loop(assessment, name)
            there = open_loop(loop, own.gains, frequency=np.array([ledger.frequency]))[0]
            off = apart(ledger.total, math.degrees(cmath.phase(there)))
            assert_quantity(off, 0.0, atol=1e-9, unit="deg", why="the sum of exact parts")
            # Followed from far below, where the phase is known, no turn is lost.
            way = np.geomspace(1e-3 * ledger.frequency, ledger.frequency, 2000)
            followed = np.unwrap(np.angle(open_loop(loop, own.gains, frequency=way)))[-1]
            assert_quantity(ledger.total, math.degrees(followed), atol=1e-6, unit="deg", why="sums of 2000 steps")


@pytest.mark.parametrize("name", FIXED)
def test_what_is_left_is_the_margin(name):
    for assessment, which, ledger in ledgers(fixed_sheet(name)):
        figures = getattr(assessment, which).figures
        assert tuple(one.name for one in ledger.entries) == (CURRENT if which == "current" else SPEED)
        assert all(one.what for one in ledger.entries)
        assert ledger.loop == which
        assert_quantity(ledger.frequency, math.tau * figures.crossover_hz, rtol=1e-14, unit="rad/s", why="the same")
        assert_quantity(ledger.margin, 60.0, atol=1e-8, unit="deg", why="designed for, refined to rounding")


def test_entries_are_their_formulas():
    # At 18 Hz: a window of 3 periods of 0.5 ms, and the continuous train by its state space.
    assessment = assess(fixed_sheet("elastic"))
    ledger = phase_ledger(assessment, "speed")
    w = ledger.frequency
    wanted = -math.degrees(w * 3 * 0.5e-3 / 2.0)
    assert_quantity(ledger.entry("speed-window").degrees, wanted, rtol=1e-12, unit="deg", why="half the window")
    space = state_space(assessment.plant)
    states = np.arange(1, space.a.shape[0] - 1)
    a, b = space.a[np.ix_(states, states)], -space.b[states, 1]
    response = np.linalg.solve(1j * w * np.eye(states.size) - a, b)[0]
    assert_quantity(
        ledger.entry("plant").degrees, math.degrees(cmath.phase(response)), atol=1e-9, unit="deg", why="4 by 4 solve"
    )
    for entry in ("feedforward", "speed-delay", "speed-filter"):
        assert ledger.entry(entry).degrees == 0.0


def test_delays_and_filters_are_their_formulas():
    # sine: update delay 1.35 of 0.1 ms, current filter 30 us, speed delay 2 ticks, speed filter 0.4 ms at 2 kHz.
    assessment = assess(fixed_sheet("sine"))
    current, speed = phase_ledger(assessment, "current"), phase_ledger(assessment, "speed")
    w = current.frequency
    for entry, radians in (("update-delay", -w * 1.35e-4), ("current-filter", -math.atan(w * 3e-5))):
        assert_quantity(current.entry(entry).degrees, math.degrees(radians), rtol=1e-12, unit="deg", why="closed form")
    space = state_space(assessment.plant)
    response = np.linalg.solve(1j * w * np.eye(2) - space.a[:2, :2], space.b[:2, 0])[0]
    assert_quantity(
        current.entry("plant").degrees, math.degrees(cmath.phase(response)), atol=1e-9, unit="deg", why="2 by 2 solve"
    )
    w = speed.frequency
    z = cmath.exp(1j * w * 5e-4)
    low_pass = (1.0 - math.exp(-5.0 / 4.0)) / (1.0 - math.exp(-5.0 / 4.0) / z)
    for entry, radians in (("speed-delay", -w * 2e-4), ("speed-filter", cmath.phase(low_pass))):
        assert_quantity(speed.entry(entry).degrees, math.degrees(radians), rtol=1e-12, unit="deg", why="closed form")
    plain = replace(assessment.sheet.aims.firmware, back_emf_feedforward=False)
    own = hardware(assessment.plant, assessment.sheet.rig.stage)
    without, with_it = (
        plant_response(
            speed_loop(
                own,
                assessment.plant,
                stage=assessment.sheet.rig.stage,
                firmware=firmware,
                current=assessment.current.gains,
            ),
            np.array([w]),
        )[0]
        for firmware in (plain, assessment.sheet.aims.firmware)
    )
    wanted = math.degrees(cmath.phase(with_it / without))
    assert wanted != 0.0
    assert_quantity(speed.entry("feedforward").degrees, wanted, atol=1e-12, unit="deg", why="the same difference")


@pytest.mark.parametrize(("rule", "share"), [("backward", 0.5), ("forward", -0.5), ("trapezoid", 0.0)])
def test_the_integrators_rule_is_in_the_controllers_entry(rule, share):
    sheet = fixed_sheet("plain")
    plant, gains = refer(sheet.rig), Gains(kp=3.0, ki=2500.0)
    w = math.tau * 700.0
    firmware = Firmware(integrator=IntegratorRule(rule))
    ledger = current_ledger(plant, sheet.rig.stage, firmware=firmware, frequency=w, gains=gains)
    ki_period = 2500.0 * 1e-4
    wanted = cmath.phase(complex(3.0 + share * ki_period, -0.5 * ki_period / math.tan(0.5 * w * 1e-4)))
    assert_quantity(ledger.entry("pi").degrees, math.degrees(wanted), rtol=1e-12, unit="deg", why="closed form")


def folded_current(sheet, w, *, terms):
    """The current loop's plant at exp(j w Ts) as the sum of what sampling folds onto w, without library kernels."""
    plant, stage = refer(sheet.rig), sheet.rig.stage
    space, period = state_space(plant), stage.current_period
    size = space.a.shape[0] - 1
    total = 0.0
    for k in range(-terms, terms + 1):
        s = 1j * (w + k * math.tau / period)
        response = np.linalg.solve(s * np.eye(size) - space.a[:size, :size], space.b[:size, 0])
        hold = (1.0 - cmath.exp(-s * period)) / (s * period)
        total += response[space.sampled_current] * hold * cmath.exp(-s * stage.update_delay * period)
    return total


@pytest.mark.parametrize("hertz", [300.0, 1500.0, 3500.0])
def test_the_hold_of_the_current_loop_is_half_a_period_and_what_is_folded(hertz):
    sheet = fixed_sheet("sine")
    w = math.tau * hertz
    ledger = current_ledger(
        refer(sheet.rig), sheet.rig.stage, firmware=sheet.aims.firmware, frequency=w, gains=Gains(kp=3.0, ki=2500.0)
    )
    folded = folded_current(sheet, w, terms=400)
    alone = folded_current(sheet, w, terms=0)
    wanted = -math.degrees(0.5 * w * 1e-4) + math.degrees(cmath.phase(folded / alone))
    assert_quantity(ledger.entry("hold").degrees, wanted, atol=2e-3, unit="deg", why="400 terms that fall by 1/k^3")


@pytest.mark.parametrize("hertz", [20.0, 200.0, 700.0])
@pytest.mark.parametrize("name", ["plain", "elastic"])
def test_closed_current_loop_and_speed_hold_by_what_is_folded(name, hertz):
    # theta at the speed ticks: staircase of current references, closed current loop, train, folded at the speed rate.
    sheet = fixed_sheet(name)
    stage = replace(sheet.rig.stage, speed_sensor=SpeedSensor.ENCODER, encoder_counts=4096, speed_delay=3)
    plant, firmware, gains = refer(sheet.rig), Firmware(), Gains(kp=3.0, ki=2500.0)
    w, fast, slow = math.tau * hertz, 1e-4, 5e-4
    space = state_space(plant)
    inner = current_loop(hardware(plant, stage), firmware)
    size = space.a.shape[0] - 1

    def term(k):
        s = 1j * (w + k * math.tau / slow)
        states = np.linalg.solve(s * np.eye(size) - space.a[:size, :size], space.b[:size, 0])
        # One tick's frequency, folded to where the fast loop's response is known.
        turn = math.remainder((s * fast).imag, math.tau)
        response = plant_response(inner, np.array([abs(turn) / fast]))[0]
        z = cmath.exp(s * fast)
        controller = 3.0 + 2500.0 * fast * z / (z - 1.0)
        response = response if turn > 0.0 else response.conjugate()
        voltage = controller / (1.0 + controller * response) * cmath.exp(-s * stage.update_delay * fast)
        hold = (1.0 - cmath.exp(-s * slow)) / (s * slow) * cmath.exp(-s * 3.0 * fast)
        return s, states, voltage, hold

    _, states, voltage, _ = term(0)
    ledger = speed_ledger(plant, stage, firmware=firmware, frequency=w, current=gains, gains=Gains(kp=0.3, ki=12.0))
    inside = math.degrees(cmath.phase(states[0] * voltage))
    off = apart(ledger.entry("closed-current-loop").degrees, inside)
    assert_quantity(off, 0.0, atol=1e-9, unit="deg", why="the same response by a solve")
    parts = [(one[1][1] * one[2] * one[3] / one[0]) for one in map(term, [0, *range(-60, 0), *range(1, 61)])]
    folded = math.degrees(cmath.phase(sum(parts) / parts[0]))
    wanted = -math.degrees(0.5 * w * slow) + folded
    assert_quantity(
        ledger.entry("speed-hold").degrees, wanted, atol=1e-3, unit="deg", why="60 terms that fall by 1/k^4"
    )


def test_a_window_gives_half_a_turn_back_at_each_null():
    sheet = fixed_sheet("plain")
    stage = replace(sheet.rig.stage, speed_sensor=SpeedSensor.ENCODER, encoder_counts=1000, speed_window=8)
    gains = Gains(kp=3.0, ki=2500.0)
    for w in (500.0, 2000.0, 5000.0):
        ledger = speed_ledger(refer(sheet.rig), stage, firmware=Firmware(), frequency=w, current=gains, gains=None)
        s = 1j * w
        wanted = math.degrees(cmath.phase((1.0 - cmath.exp(-8.0 * s * 5e-4)) / s))
        assert_quantity(ledger.entry("speed-window").degrees, wanted, atol=1e-9, unit="deg", why="the quotient itself")


def changed(sheet, **speed):
    return replace(sheet, aims=replace(sheet.aims, speed=replace(sheet.aims.speed, **speed)))


def test_without_gains_the_ledger_shows_what_is_left_for_a_controller():
    sheet = fixed_sheet("plain")
    assessment = assess(changed(sheet, crossover=math.tau * 300.0))
    assert assessment.speed.gains is None
    ledger = phase_ledger(assessment, "speed")
    assert tuple(one.name for one in ledger.entries) == tuple(name for name in SPEED if name != "pi")
    assert_quantity(ledger.frequency, math.tau * 300.0, rtol=1e-15, unit="rad/s", why="as asked")
    there = plant_response(assessed_loop(assessment, "speed"), np.array([ledger.frequency]))[0]
    off = apart(ledger.margin, 180.0 + math.degrees(cmath.phase(there)))
    assert_quantity(off, 0.0, atol=1e-9, unit="deg", why="the sum of exact parts")
    beyond = assess(changed(sheet, crossover=math.tau * 1500.0))
    assert phase_ledger(beyond, "speed") is None


def test_an_unstable_loop_has_a_ledger_at_its_first_crossover():
    hand = HandGains(kp=6.0, ki=100.0)
    assessment = assess(changed(fixed_sheet("plain"), method=DesignMethod.BY_HAND, hand=hand))
    assert not assessment.speed.figures.stable
    ledger = phase_ledger(assessment, "speed")
    loop = assessed_loop(assessment, "speed")
    there = open_loop(loop, assessment.speed.gains, frequency=np.array([ledger.frequency]))[0]
    assert_quantity(abs(there), 1.0, rtol=1e-9, unit="1", why="halved down to rounding")
    assert ledger.margin < 0.0
    weak = assess(changed(fixed_sheet("plain"), method=DesignMethod.BY_HAND, hand=HandGains(kp=1e-9, ki=0.0)))
    assert phase_ledger(weak, "speed") is None


def test_there_is_no_ledger_around_a_current_loop_without_gains():
    sheet = fixed_sheet("plain")
    current = replace(sheet.aims.current, crossover=math.tau * 4900.0)
    assessment = assess(replace(sheet, aims=replace(sheet.aims, current=current)))
    assert phase_ledger(assessment, "speed") is None
    assert phase_ledger(assessment, "current").margin < 0.0


def test_an_entry_that_is_not_there_is_told():
    ledger = phase_ledger(assess(fixed_sheet("plain")), "current")
    with pytest.raises(KeyError):
        ledger.entry("speed-window")
