"""Made-up sheets to try the library on: plausible drives drawn by chance from a seed, and a few written by hand.

A drive is drawn as one consistent set of values (power, speed, voltage, time constants) and then stated in the
conventions of its kind, so that every kind meets every convention.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TypeVar

import numpy as np

from gainbench.model import (
    Aims,
    BackEmfValues,
    CurrentValues,
    DesignMethod,
    Duty,
    Firmware,
    IntegratorRule,
    LoopAims,
    Machine,
    MachineKind,
    Rig,
    Sheet,
    SpeedAims,
    SpeedSensor,
    Stage,
    Train,
    TrainKind,
    WindingValues,
    WindupRule,
)

T = TypeVar("T")

MAX_TICKS = 3000
MIN_TICKS = 400


@dataclass(frozen=True, kw_only=True)
class _Drive:
    """One drive in the terms of the equations."""

    kind: MachineKind
    bus: float
    speed: float
    torque: float
    current: float
    Ke: float
    R: float
    L: float
    J: float
    viscous: float
    coulomb: float


def random_sheets(seed: int, count: int) -> list[Sheet]:
    """Plausible sheets with crossover-margin aims on both loops; the same for the same seed."""
    rng = np.random.default_rng(seed)
    return [_sheet(rng, f"chance {seed}/{k}") for k in range(count)]


def _log(rng: np.random.Generator, low: float, high: float) -> float:
    return float(np.exp(rng.uniform(math.log(low), math.log(high))))


def _pick(rng: np.random.Generator, *choices: T) -> T:
    return choices[int(rng.integers(len(choices)))]


def _drive(rng: np.random.Generator) -> _Drive:
    kind = _pick(rng, *MachineKind)
    power = _log(rng, 1.0, 1e4)
    speed = _log(rng, 1000.0, 8000.0 if power < 1000.0 else 4000.0) * math.tau / 60.0
    bus = _pick(rng, 12.0, 24.0, 48.0) if power < 300.0 else _pick(rng, 48.0, 96.0) if power < 1500.0 else 0.0
    bus = bus or _pick(rng, 325.0, 560.0)
    sine = kind is MachineKind.PM_SINE
    volts = 0.95 * bus / (math.sqrt(3.0) if sine else 1.0)
    torque = power / speed
    Ke = volts * rng.uniform(0.6, 0.8) / speed
    Kt = 1.5 * Ke if sine else Ke
    current = torque / Kt
    R = volts / (current * _log(rng, 6.0, 25.0))
    L = R * _log(rng, 3e-4, 8e-3)
    J = _log(rng, 2e-3, 2e-2) * Kt * Ke / R
    return _Drive(
        kind=kind,
        bus=bus,
        speed=speed,
        torque=torque,
        current=current,
        Ke=Ke,
        R=R,
        L=L,
        J=J,
        viscous=_pick(rng, 0.0, 0.02, 0.05) * torque / speed,
        coulomb=_pick(rng, 0.0, 0.01, 0.04) * torque,
    )


def _machine(rng: np.random.Generator, drive: _Drive) -> Machine:
    """State a drive in one of the conventions of its kind."""
    common = Machine(
        kind=drive.kind,
        resistance=drive.R,
        inductance=drive.L,
        rotor_inertia=drive.J,
        viscous_friction=drive.viscous,
        coulomb_friction=drive.coulomb,
    )
    if drive.kind is MachineKind.BRUSHED_DC or drive.kind is MachineKind.PM_BLOCK:
        match int(rng.integers(3)):
            case 0:
                common = replace(common, torque_constant=drive.Ke)
            case 1:
                common = replace(common, back_emf_constant=drive.Ke)
            case _:
                common = replace(common, speed_constant=1.0 / drive.Ke)
    if drive.kind is MachineKind.BRUSHED_DC:
        return common
    winding = _pick(rng, *WindingValues)
    common = replace(common, pole_pairs=int(rng.integers(1, 9)), winding_values=winding)
    if drive.kind is MachineKind.PM_BLOCK:
        size = 0.5 if winding is WindingValues.PHASE else 1.0
        return replace(common, resistance=drive.R * size, inductance=drive.L * size)
    size = 2.0 if winding is WindingValues.LINE_TO_LINE else 1.0
    ampere = _pick(rng, *CurrentValues)
    common = replace(common, resistance=drive.R * size, inductance=drive.L * size, current_values=ampere)
    if rng.random() < 0.5:
        return replace(common, torque_constant=1.5 * drive.Ke * _ampere(common))
    volt = _pick(rng, *BackEmfValues)
    peak = {
        BackEmfValues.PHASE_PEAK: 1.0,
        BackEmfValues.PHASE_RMS: 1.0 / math.sqrt(2.0),
        BackEmfValues.LINE_TO_LINE_PEAK: math.sqrt(3.0),
        BackEmfValues.LINE_TO_LINE_RMS: math.sqrt(1.5),
    }[volt]
    return replace(common, back_emf_constant=drive.Ke * peak, back_emf_values=volt)


def _ampere(machine: Machine) -> float:
    """Peak amperes in one ampere of the sheet."""
    return math.sqrt(2.0) if machine.current_values is CurrentValues.RMS else 1.0


def _train(rng: np.random.Generator, drive: _Drive) -> Train:
    ratio = _pick(rng, 1.0, 1.0, _log(rng, 0.5, 30.0))
    efficiency = _pick(rng, 1.0, 1.0, rng.uniform(0.8, 0.99))
    share = _log(rng, 0.1, 6.0)
    load = share * drive.J * ratio**2
    train = Train(
        kind=_pick(rng, TrainKind.RIGID, TrainKind.RIGID, TrainKind.ELASTIC),
        load_inertia=load,
        ratio=ratio,
        efficiency=efficiency,
        coupling_inertia=_pick(rng, 0.0, 0.1 * drive.J),
        load_viscous_friction=_pick(rng, 0.0, 0.01 * drive.torque / drive.speed * ratio**2),
        load_coulomb_friction=_pick(rng, 0.0, 0.03 * drive.torque * ratio),
        load_torque=_pick(rng, 0.0, 0.0, 0.2, -0.2) * drive.torque * ratio,
    )
    if train.kind is TrainKind.RIGID:
        return train
    # Stated through the antiresonance and the damping of the load on its shaft.
    antiresonance, zeta = math.tau * _log(rng, 40.0, 400.0), _log(rng, 0.01, 0.08)
    return replace(train, shaft_stiffness=antiresonance**2 * load, shaft_damping=2.0 * zeta * antiresonance * load)


def _stage(rng: np.random.Generator, drive: _Drive, machine: Machine) -> Stage:
    current_rate = float(_pick(rng, 2000, 4000, 5000, 8000, 10000, 16000, 20000, 40000))
    # A current loop is not sampled slower than its winding can be controlled.
    while current_rate < 3.0 * drive.R / drive.L and current_rate < 40000.0:
        current_rate *= 2.0
    divisors = [n for n in (1, 2, 4, 5, 8, 10, 16, 20) if current_rate / n >= 500.0]
    divisor = _pick(rng, *divisors)
    pwm = current_rate * _pick(rng, 0.5, 1.0, 1.0, 2.0)
    delay = _pick(rng, 0.0, 0.5, 1.0, 1.0, 1.0, 1.5, 2.0, float(np.round(rng.uniform(0.0, 2.0), 3)))
    ideal = rng.random() < 0.35
    return Stage(
        bus_voltage=drive.bus,
        current_limit=drive.current * rng.uniform(1.5, 4.0) / _ampere(machine),
        pwm_frequency=pwm,
        current_rate=current_rate,
        speed_rate=current_rate / divisor,
        speed_sensor=SpeedSensor.IDEAL if ideal else SpeedSensor.ENCODER,
        encoder_counts=None if ideal else int(_pick(rng, 1000, 2048, 4096, 10000, 65536)),
        voltage_use=rng.uniform(0.85, 1.0),
        update_delay=delay,
        current_filter=_pick(rng, 0.0, 0.0, 0.2, 1.0) / current_rate,
        speed_delay=int(rng.integers(divisor)) if rng.random() < 0.4 else 0,
        speed_window=int(_pick(rng, 1, 1, 1, 2, 3, 8)),
        speed_filter=_pick(rng, 0.0, 0.0, 1.0, 3.0) * divisor / current_rate,
    )


def _aims(rng: np.random.Generator, train: Train, stage: Stage) -> Aims:
    """Aims whose phase the delays can mostly pay for."""
    Ts, Tw = stage.current_period, stage.speed_period
    margin = rng.uniform(40.0, 70.0)
    spare = math.radians(90.0 - margin - 6.0)
    lag = (stage.update_delay + 0.5) * Ts + stage.current_filter
    crossover = min(math.tau * stage.current_rate / rng.uniform(8.0, 25.0), rng.uniform(0.6, 0.95) * spare / lag)
    speed_margin = rng.uniform(40.0, 70.0)
    spare = math.radians(90.0 - speed_margin - 8.0)
    lag = 1.0 / crossover + Tw / 2.0 + stage.speed_delay * Ts + stage.speed_filter
    lag += stage.speed_window * Tw / 2.0 if stage.speed_sensor is SpeedSensor.ENCODER else 0.0
    speed = min(rng.uniform(0.3, 0.9) * spare / lag, math.tau * stage.speed_rate / 10.0)
    if train.shaft_stiffness is not None:
        speed = min(speed, rng.uniform(0.1, 0.3) * math.sqrt(train.shaft_stiffness / train.load_inertia))
    return Aims(
        current=LoopAims(method=DesignMethod.CROSSOVER_MARGIN, crossover=crossover, phase_margin=math.radians(margin)),
        speed=SpeedAims(
            method=DesignMethod.CROSSOVER_MARGIN,
            crossover=speed,
            phase_margin=math.radians(speed_margin),
            reference_weight=_pick(rng, 1.0, 1.0, 0.0, round(rng.uniform(0.0, 1.0), 2)),
        ),
        firmware=Firmware(
            integrator=_pick(rng, *IntegratorRule),
            windup=_pick(rng, *WindupRule),
            back_emf_feedforward=bool(rng.random() < 0.3),
        ),
    )


def _duty(rng: np.random.Generator, drive: _Drive, *, train: Train, stage: Stage, speed_crossover: float) -> Duty:
    """Start, load step, sometimes a stop, all on ticks of the speed loop."""
    Ts, N = stage.current_period, stage.speed_divisor
    ticks = int(min(MAX_TICKS, max(MIN_TICKS, 40.0 / speed_crossover / Ts)))
    periods = max(20, ticks // N)
    Tw = stage.speed_period
    reference = _pick(rng, 1.0, 1.0, -1.0) * rng.uniform(0.05, 0.6) * drive.speed
    begin, load, stop = (round(share * periods) * Tw for share in (0.05, 0.55, 0.8))
    span = load - begin
    return Duty(
        reference_speed=reference,
        length=periods * Tw,
        reference_at=begin,
        reference_ramp=_pick(rng, 0.0, 0.0, abs(reference) / (0.4 * span)),
        load_step=_pick(rng, 0.3, 0.3, -0.2, 0.0) * drive.torque * train.ratio,
        load_at=load,
        stop_at=_pick(rng, None, None, stop),
        stop_ramp=_pick(rng, 0.0, abs(reference) / (0.4 * span)),
    )


def _sheet(rng: np.random.Generator, title: str) -> Sheet:
    drive = _drive(rng)
    machine = _machine(rng, drive)
    train = _train(rng, drive)
    stage = _stage(rng, drive, machine)
    aims = _aims(rng, train, stage)
    assert aims.speed.crossover is not None
    duty = _duty(rng, drive, train=train, stage=stage, speed_crossover=aims.speed.crossover)
    return Sheet(title=title, rig=Rig(machine=machine, train=train, stage=stage), aims=aims, duty=duty)


def fixed_sheet(name: str) -> Sheet:
    """One of the sheets written by hand: ``plain``, ``elastic``, ``sine``, ``gravity``."""
    machine = Machine(
        kind=MachineKind.BRUSHED_DC,
        resistance=0.8,
        inductance=1.2e-3,
        torque_constant=0.06,
        rotor_inertia=4e-5,
        viscous_friction=3e-5,
    )
    train = Train(kind=TrainKind.RIGID, load_inertia=6e-5)
    stage = Stage(
        bus_voltage=36.0,
        current_limit=15.0,
        pwm_frequency=10e3,
        current_rate=10e3,
        speed_rate=2e3,
        speed_sensor=SpeedSensor.IDEAL,
    )
    margin = math.radians(60.0)
    aims = Aims(
        current=LoopAims(method=DesignMethod.CROSSOVER_MARGIN, crossover=math.tau * 500.0, phase_margin=margin),
        speed=SpeedAims(method=DesignMethod.CROSSOVER_MARGIN, crossover=math.tau * 40.0, phase_margin=margin),
    )
    duty = Duty(reference_speed=100.0, reference_at=0.01, load_step=0.05, load_at=0.15, length=0.3)
    match name:
        case "plain":
            pass
        case "elastic":
            train = Train(
                kind=TrainKind.ELASTIC,
                load_inertia=9e-4,
                ratio=3.0,
                efficiency=0.9,
                coupling_inertia=5e-6,
                load_viscous_friction=1e-4,
                load_coulomb_friction=0.02,
                shaft_stiffness=400.0,
                shaft_damping=0.05,
            )
            stage = replace(stage, speed_sensor=SpeedSensor.ENCODER, encoder_counts=4096, speed_window=3)
            speed = replace(aims.speed, crossover=math.tau * 18.0)
            aims = replace(aims, speed=speed, firmware=Firmware(integrator=IntegratorRule.TRAPEZOID))
        case "sine":
            machine = Machine(
                kind=MachineKind.PM_SINE,
                resistance=1.6,
                inductance=2.4e-3,
                winding_values=WindingValues.LINE_TO_LINE,
                pole_pairs=3,
                current_values=CurrentValues.RMS,
                back_emf_constant=0.09,
                back_emf_values=BackEmfValues.LINE_TO_LINE_RMS,
                rotor_inertia=4e-5,
                coulomb_friction=4e-3,
            )
            stage = replace(stage, update_delay=1.35, current_filter=3e-5, speed_delay=2, speed_filter=4e-4)
            firmware = Firmware(
                integrator=IntegratorRule.FORWARD, windup=WindupRule.BACK_CALCULATION, back_emf_feedforward=True
            )
            aims = replace(aims, firmware=firmware)
        case "gravity":
            train = replace(train, load_torque=0.15, efficiency=0.85, load_coulomb_friction=0.02)
            duty = replace(duty, reference_speed=-80.0, load_step=-0.1, stop_at=0.24)
        case _:
            raise KeyError(name)
    return Sheet(title=name, rig=Rig(machine=machine, train=train, stage=stage), aims=aims, duty=duty)


FIXED = ("plain", "elastic", "sine", "gravity")
