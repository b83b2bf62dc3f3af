"""The design methods of the reference model, each from its line in the table of methods."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq

from gainbench.model import DesignMethod, Firmware, HandGains, LoopAims, Sheet, SpeedAims
from oracle_bench import Bench, read_bench
from oracle_figures import Figures, Step, locked_step, loop_figures
from oracle_loops import (
    PI,
    Complex,
    Loop,
    controller,
    current_loop,
    current_poles,
    is_stable,
    speed_loop,
    speed_poles,
)

Poles = Callable[[PI], Complex]


def margin_gains(loop: Loop, crossover: float, *, margin: float) -> PI:
    """The one pair that puts L on the unit circle at the crossover [rad/s], ``margin`` [rad] above -180 degrees.

    Two real linear equations: ``Re`` and ``Im`` of ``(Kp + Ki c) P = -exp(j margin)``. The gains may be negative.
    """
    omega = np.array([crossover])
    P, c = loop.plant.response(omega, loop.T)[0], controller(loop.rule, omega, loop.T)[0]
    target = -np.exp(1j * margin)
    system = np.array([[P.real, (c * P).real], [P.imag, (c * P).imag]])
    kp, ki = np.linalg.solve(system, np.array([target.real, target.imag]))
    return PI(kp=float(kp), ki=float(ki))


def bandwidth_gains(loop: Loop, bandwidth: float, *, margin: float, stable: Callable[[PI], bool]) -> PI | None:
    """The stable pair of highest crossover whose bandwidth [rad/s] is the one asked for, with the margin there."""

    def excess(crossover: float) -> float:
        L = loop.open(margin_gains(loop, crossover, margin=margin))(np.array([bandwidth]))[0]
        return float(np.log(np.abs(L / (1.0 + L))) + 0.5 * math.log(2.0))

    trial = np.geomspace(bandwidth / 50.0, loop.nyquist * (1.0 - 1e-9), 600)
    values = [excess(float(w)) for w in trial]
    for k in reversed(range(len(trial) - 1)):
        if (values[k] > 0.0) == (values[k + 1] > 0.0):
            continue
        crossover = float(brentq(excess, trial[k], trial[k + 1], xtol=1e-12 * trial[k], rtol=1e-13))
        gains = margin_gains(loop, crossover, margin=margin)
        if gains.kp <= 0.0 or gains.ki <= 0.0 or not stable(gains):
            continue
        figures = loop_figures(loop, gains)
        met = figures.bandwidth_hz is not None and abs(figures.bandwidth_hz * math.tau / bandwidth - 1.0) < 1e-6
        first = figures.crossover_hz is not None and abs(figures.crossover_hz * math.tau / crossover - 1.0) < 1e-6
        if met and first:
            return gains
    return None


def hand_gains(hand: HandGains, *, T: float, Kt: float) -> PI:
    """Gains as typed, in amperes and without the period."""
    kp = hand.kp / Kt if hand.kp_is_torque else hand.kp
    if hand.ti is not None:
        return PI(kp=kp, ki=kp / hand.ti)
    if hand.wi is not None:
        return PI(kp=kp, ki=kp * hand.wi)
    assert hand.ki is not None
    ki = hand.ki / Kt if hand.ki_is_torque else hand.ki
    return PI(kp=kp, ki=ki / T if hand.ki_has_period else ki)


@dataclass(frozen=True, kw_only=True)
class Side:
    """One loop: gains None where none meet the targets."""

    loop: Loop
    gains: PI | None
    trial: PI | None
    """What the two linear equations gave, usable or not (crossover-margin)."""
    poles: Complex | None
    """Of the closed loop with ``gains``, or with ``trial``."""
    stable: bool
    figures: Figures | None


@dataclass(frozen=True, kw_only=True)
class Verdict:
    """Both loops of a sheet as the reference model sees them; speed is None where the current loop has no gains."""

    bench: Bench
    current: Side
    speed: Side | None
    step: Step | None


def design(sheet: Sheet, *, figures: bool = True) -> Verdict:
    """Design and judge both loops of a sheet."""
    bench, firmware = read_bench(sheet), sheet.aims.firmware
    rule = firmware.integrator
    inner = current_loop(bench, rule=rule)

    def inner_poles(gains: PI) -> Complex:
        return current_poles(bench, gains, rule=rule)

    aims = sheet.aims.current
    gains, trial = _current_gains(aims, bench, loop=inner, poles=inner_poles)
    current = _side(inner, gains, trial, poles=inner_poles, figures=figures)
    if gains is None:
        return Verdict(bench=bench, current=current, speed=None, step=None)
    step = locked_step(bench, gains, rule=rule) if figures and current.stable else None
    speed = _speed_side(sheet.aims.speed, bench, current=current, firmware=firmware, figures=figures)
    return Verdict(bench=bench, current=current, speed=speed, step=step)


def _side(loop: Loop, gains: PI | None, trial: PI | None, *, poles: Poles, figures: bool) -> Side:
    used = gains or trial
    found = poles(used) if used is not None else None
    stable = found is not None and is_stable(found)
    judged = loop_figures(loop, gains, poles=found) if figures and gains is not None and stable else None
    return Side(loop=loop, gains=gains, trial=trial, poles=found, stable=stable, figures=judged)


def _usable(trial: PI, poles: Poles) -> PI | None:
    return trial if trial.kp > 0.0 and trial.ki > 0.0 and is_stable(poles(trial)) else None


def _current_gains(aims: LoopAims, bench: Bench, *, loop: Loop, poles: Poles) -> tuple[PI | None, PI | None]:
    R, L = bench.R, bench.L
    match aims.method:
        case DesignMethod.CROSSOVER_MARGIN:
            assert aims.crossover is not None
            assert aims.phase_margin is not None
            trial = margin_gains(loop, aims.crossover, margin=aims.phase_margin)
            return _usable(trial, poles), trial
        case DesignMethod.BANDWIDTH_MARGIN:
            assert aims.bandwidth is not None
            assert aims.phase_margin is not None
            return bandwidth_gains(
                loop, aims.bandwidth, margin=aims.phase_margin, stable=lambda g: is_stable(poles(g))
            ), None
        case DesignMethod.LAG_CANCELLATION:
            assert aims.crossover is not None
            return PI(kp=aims.crossover * L, ki=aims.crossover * R), None
        case DesignMethod.MAGNITUDE_OPTIMUM:
            T = (bench.delay + 0.5) * bench.Ts + bench.Tf_current
            return PI(kp=L / (2.0 * T), ki=R / (2.0 * T)), None
        case DesignMethod.POLE_PLACEMENT:
            assert aims.natural_frequency is not None
            assert aims.damping is not None
            w0 = aims.natural_frequency
            return PI(kp=2.0 * aims.damping * w0 * L - R, ki=w0 * w0 * L), None
    assert aims.hand is not None
    return hand_gains(aims.hand, T=bench.Ts, Kt=bench.Kt), None


def _speed_side(aims: SpeedAims, bench: Bench, *, current: Side, firmware: Firmware, figures: bool) -> Side:
    rule, feedforward = firmware.integrator, firmware.back_emf_feedforward
    inner = current.gains
    assert inner is not None
    loop = speed_loop(bench, inner, rule=rule, feedforward=feedforward)

    def poles(gains: PI) -> Complex:
        return speed_poles(bench, inner, gains, rule=rule, feedforward=feedforward)

    J, b, Kt = bench.inertia, bench.viscous, bench.Kt
    gains: PI | None
    trial: PI | None = None
    match aims.method:
        case DesignMethod.CROSSOVER_MARGIN:
            assert aims.crossover is not None
            assert aims.phase_margin is not None
            trial = margin_gains(loop, aims.crossover, margin=aims.phase_margin)
            gains = _usable(trial, poles)
        case DesignMethod.BANDWIDTH_MARGIN:
            assert aims.bandwidth is not None
            assert aims.phase_margin is not None
            gains = bandwidth_gains(
                loop, aims.bandwidth, margin=aims.phase_margin, stable=lambda g: is_stable(poles(g))
            )
        case DesignMethod.LAG_CANCELLATION:
            assert aims.crossover is not None
            gains = PI(kp=aims.crossover * J / Kt, ki=aims.crossover * b / Kt) if b > 0.0 else None
        case DesignMethod.SYMMETRIC_OPTIMUM:
            assert aims.spread is not None
            judged = current.figures or loop_figures(current.loop, inner)
            assert judged.crossover_hz is not None
            T = 1.0 / (math.tau * judged.crossover_hz) + bench.Tw / 2.0 + bench.speed_delay * bench.Ts + bench.Tf_speed
            T += bench.window * bench.Tw / 2.0 if bench.counts else 0.0
            kp = J / (aims.spread * Kt * T)
            gains = PI(kp=kp, ki=kp / (aims.spread**2 * T))
        case DesignMethod.POLE_PLACEMENT:
            assert aims.natural_frequency is not None
            assert aims.damping is not None
            w0 = aims.natural_frequency
            gains = PI(kp=(2.0 * aims.damping * w0 * J - b) / Kt, ki=w0 * w0 * J / Kt)
        case _:
            assert aims.hand is not None
            gains = hand_gains(aims.hand, T=bench.Tw, Kt=Kt)
    return _side(loop, gains, trial, poles=poles, figures=figures)
