"""The reference model judged by what needs no library: identities, closed forms, and its own two routes."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.model import Firmware, IntegratorRule, MachineKind, Sheet, SpeedSensor, WindupRule
from oracle_bench import Bench, Body, continuous, read_bench
from oracle_design import design
from oracle_figures import locked_step, loop_figures
from oracle_loops import PI, current_loop, current_poles, is_stable
from oracle_motion import Motion
from oracle_response import outcome, respond
from quantities import assert_quantity
from rigs import FIXED, fixed_sheet, random_sheets

SHEETS = [*(fixed_sheet(name) for name in FIXED), *random_sheets(7, 40)]


@pytest.mark.parametrize("sheet", SHEETS, ids=lambda sheet: sheet.title)
def test_closed_loop_poles_belong_to_the_open_loop(sheet: Sheet) -> None:
    """det(z - A closed)/det(z - A open) = 1 + L(z): poles and responses come from two separate walks."""
    verdict = design(sheet, figures=False)
    rule = sheet.aims.firmware.integrator
    for side in (verdict.current, verdict.speed):
        if side is None or side.gains is None:
            continue
        assert side.poles is not None
        opened = [*side.loop.plant.poles(), 1.0] + ([0.0] if rule is IntegratorRule.TRAPEZOID else [])
        assert len(opened) == len(side.poles)
        for z in (1.3 * np.exp(0.4j), 1.2 * np.exp(2.5j), -1.5 + 0j):
            wanted = np.prod(z - side.poles) / np.prod(z - np.array(opened))
            # The responses take any complex frequency: z = exp(j omega T).
            omega = np.array([np.log(z) / (1j * side.loop.T)])
            L = side.loop.open(side.gains)(omega)[0]
            assert pytest.approx(wanted, rel=1e-6) == 1.0 + L


@pytest.mark.parametrize("kh", [0.25, 0.5, 0.9, 1.1])
def test_integrator_with_one_sample_of_delay(kh: float) -> None:
    """L = Kh/(z (z - 1)) on a winding without resistance: PM = 90 deg - 3 asin(Kh/2), GM = 1/Kh, stable below 1.

    Derived in closed form from the loop.
    """
    bench = replace(_winding(), R=1e-9)
    gains = PI(kp=kh * bench.L / bench.Ts, ki=0.0)
    loop = current_loop(bench, rule=IntegratorRule.BACKWARD)
    stable = is_stable(current_poles(bench, gains, rule=IntegratorRule.BACKWARD))
    assert stable == (kh < 1.0)
    if not stable:
        return
    figures = loop_figures(loop, gains)
    margin = 90.0 - 3.0 * math.degrees(math.asin(kh / 2.0))
    crossover = 2.0 * math.asin(kh / 2.0) / bench.Ts / math.tau
    why = "the resistance is not quite nothing"
    assert_quantity(figures.phase_margin_deg, margin, atol=1e-4, unit="deg", why=why)
    assert_quantity(figures.crossover_hz, crossover, rtol=1e-6, unit="Hz", why=why)
    assert_quantity(figures.gain_margin_db, -20.0 * math.log10(kh), atol=1e-4, unit="dB", why=why)
    assert_quantity(figures.delay_margin_s, math.radians(margin) / (math.tau * crossover), rtol=1e-5, unit="s", why=why)


def test_locked_step_of_the_exact_optimum() -> None:
    """Kh = 1/3 overshoots by exactly 1/27: the sequence 0, 0, 1/3, 2/3, 8/9, 1, 28/27."""
    bench = replace(_winding(), R=1e-9)
    step = locked_step(bench, PI(kp=bench.L / (3.0 * bench.Ts), ki=0.0), rule=IntegratorRule.BACKWARD, settled=1e-6)
    assert_quantity(step.overshoot_percent, 100.0 / 27.0, atol=1e-4, unit="%", why="resistance is not quite nothing")
    # On the straight lines 0 - 1/3 (from tick 1) and 8/9 - 1 (from tick 4).
    rise = (4.0 + (0.9 - 8.0 / 9.0) * 9.0) - (1.0 + 0.3)
    assert_quantity(step.rise_s, rise * bench.Ts, rtol=1e-6, unit="s", why="resistance is not quite nothing")


@pytest.mark.parametrize("sensor", [SpeedSensor.IDEAL, SpeedSensor.ENCODER])
@pytest.mark.parametrize("share", [0.02, 0.15, 0.4])
def test_sine_injected_into_the_law_finds_the_open_loop(sensor: SpeedSensor, share: float) -> None:
    """The time response and the lifted loop are written apart; a sine on the current reference ties them together."""
    sheet = fixed_sheet("sine" if share < 0.3 else "plain")
    stage = replace(sheet.rig.stage, speed_sensor=sensor, encoder_counts=10**9, current_limit=1e6, bus_voltage=1e6)
    rig = replace(sheet.rig, stage=stage, machine=replace(sheet.rig.machine, coulomb_friction=0.0))
    sheet = replace(sheet, rig=rig)
    verdict = design(sheet, figures=False)
    bench, speed = verdict.bench, verdict.speed
    assert verdict.current.gains is not None
    assert speed is not None
    assert speed.gains is not None
    periods, settle = 400, 300
    turns = round(share * periods)
    omega = math.tau * turns / periods / bench.Tw
    history = respond(
        bench,
        verdict.current.gains,
        speed.gains,
        firmware=sheet.aims.firmware,
        duty=replace(sheet.duty, reference_speed=0.0, load_step=0.0, length=(settle + periods) * bench.Tw),
        load_torque=0.0,
        weight=1.0,
        injected=lambda n: math.sin(omega * n * bench.Tw),
    )
    n = np.arange(settle, settle + periods)
    wave = np.exp(-1j * omega * n * bench.Tw)
    total = history.current_reference[n * bench.N + bench.speed_delay]
    own = total - np.sin(omega * n * bench.Tw)
    L = -np.sum(own * wave) / np.sum(total * wave)
    wanted = speed.loop.open(speed.gains)(np.array([omega]))[0]
    assert pytest.approx(wanted, rel=2e-4) == L


def test_coast_down_to_rest() -> None:
    """J dw/dt = -B w - Tc stops at (J/B) ln(1 + B w0/Tc) = 3.942287 s (K10, closed form)."""
    body = Body(inertia=1e-4, viscous=2e-5, coulomb=5e-3, carries_load=True)
    bench = replace(_winding(), Ke=1e-12, Kt=1e-12, bodies=(body,))
    motion = Motion(bench=bench, x=np.zeros(3), load=0.0, ways=[1])
    motion.x[motion.at["w"]] = 300.0
    ticks = 0
    while motion.ways[0] != 0:
        motion.run(0.0, 1e-3)
        ticks += 1
    assert ticks == 3943
    travelled = 300.0 * 5.0 - 5e-3 / 2e-5 * 3.9422868
    assert_quantity(motion.value("theta"), travelled, atol=1e-4, unit="rad", why="the published digits of the time")


def test_breakaway_waits_for_its_torque() -> None:
    """A resting body leaves when Kt i passes its friction: i = (V/R)(1 - exp(-t R/L)) in closed form."""
    bench = replace(_winding(), bodies=(Body(inertia=1e-4, viscous=0.0, coulomb=0.03, carries_load=True),))
    leaves = -bench.L / bench.R * math.log(1.0 - 0.03 / bench.Kt * bench.R / 6.0)
    motion = Motion(bench=bench, x=np.zeros(3), load=0.0, ways=[0])
    motion.run(6.0, leaves * (1.0 - 1e-9))
    assert motion.ways == [0]
    motion.run(6.0, leaves * 1e-3)
    assert motion.ways == [1]
    assert 0.0 < motion.value("w") < 1e-4


def test_energy_that_comes_back() -> None:
    """A turning machine on a lower voltage gives back the integral of -v i; against Simpson's rule on 2,000 points."""
    bench = replace(_winding(), bodies=(Body(inertia=1e-4, viscous=0.0, coulomb=0.0, carries_load=True),))
    motion = Motion(bench=bench, x=np.array([2.0, 300.0, 0.0]), load=0.0, ways=[1])
    for _ in range(50):
        motion.run(5.0, 1e-4)
    plant = continuous(bench)
    F, G = plant.step(2.5e-6)
    x, currents = np.array([2.0, 300.0, 0.0]), []
    for _ in range(2001):
        currents.append(x[0])
        x = F @ x + G @ np.array([5.0, 0.0, 0.0])
    given = np.clip(-5.0 * np.array(currents), 0.0, None)
    simpson = 2.5e-6 / 3.0 * float(given[0] + given[-1] + 4.0 * given[1:-1:2].sum() + 2.0 * given[2:-1:2].sum())
    assert_quantity(motion.returned, simpson, rtol=1e-5, unit="J", why="the corner where the current turns")


def test_clamped_integrators_come_back() -> None:
    """Both windup rules overshoot less than an integrator that ran on through the same clamp (R9, from memory)."""
    sheet = fixed_sheet("plain")
    verdict = design(sheet, figures=False)
    assert verdict.current.gains is not None
    assert verdict.speed is not None
    assert verdict.speed.gains is not None
    found = {}
    for name, rule, limit in (
        ("free", WindupRule.HOLD, 1e6),
        ("hold", WindupRule.HOLD, 4.0),
        ("back", WindupRule.BACK_CALCULATION, 4.0),
    ):
        bench = replace(verdict.bench, current_limit=limit, voltage_limit=1e6)
        history = respond(
            bench,
            verdict.current.gains,
            verdict.speed.gains,
            firmware=Firmware(windup=rule),
            duty=sheet.duty,
            load_torque=0.0,
            weight=1.0,
        )
        found[name] = outcome(history, bench, sheet.duty)
    assert found["free"].current_limited_s == 0.0
    for name in ("hold", "back"):
        assert found[name].current_limited_s > 0.0
        assert found[name].overshoot_percent < found["free"].overshoot_percent
        assert_quantity(found[name].peak_current_a, 4.0, rtol=0.25, unit="A", why="the current loop's own overshoot")


def _winding() -> Bench:
    """A bench of which only the winding matters: nothing turns."""
    sheet = fixed_sheet("plain")
    assert sheet.rig.machine.kind is MachineKind.BRUSHED_DC
    return replace(read_bench(sheet), bodies=(Body(inertia=1e6, viscous=0.0, coulomb=0.0, carries_load=True),))
