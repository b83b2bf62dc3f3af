"""Sheets that are meant to be awkward: made from plausible ones by turning what they were spared."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from gainbench.model import DesignMethod, Duty, HandGains, LoopAims, Sheet, SpeedAims
from oracle_bench import read_bench
from oracle_design import design
from oracle_loops import PI
from rigs import random_sheets

TICKS = 1000


def hard_duties(seed: int, count: int) -> list[Sheet]:
    """Heavy friction, lossy trains, loads that drive, low voltage, and duties whose events come in any order."""
    rng = np.random.default_rng(seed)
    return [_hard_duty(rng, sheet) for sheet in random_sheets(seed, count)]


def _hard_duty(rng: np.random.Generator, sheet: Sheet) -> Sheet:
    bench = read_bench(sheet)
    torque, ratio = bench.current_limit * bench.Kt, sheet.rig.train.ratio
    machine = replace(sheet.rig.machine, coulomb_friction=float(rng.choice([0.0, 0.01, 0.2])) * torque)
    train = replace(
        sheet.rig.train,
        efficiency=float(rng.choice([1.0, 0.9, 0.5])),
        load_coulomb_friction=float(rng.choice([0.0, 0.02, 0.2])) * torque * ratio,
        load_torque=float(rng.choice([0.0, 0.1, -0.1, 0.3, -0.4])) * torque * ratio,
    )
    stage = replace(sheet.rig.stage, bus_voltage=sheet.rig.stage.bus_voltage * float(rng.choice([1.0, 0.3, 0.1])))
    periods = max(12, TICKS // bench.N)
    length = periods * bench.Tw

    def moment() -> float:
        """On a speed tick, or anywhere."""
        share = rng.uniform(0.0, 1.0)
        return float(rng.choice([round(share * periods) * bench.Tw, share * length]))

    reference = float(rng.choice([1.0, -1.0, 0.01, 0.0])) * abs(sheet.duty.reference_speed)
    duty = Duty(
        reference_speed=reference,
        length=length,
        reference_at=float(rng.choice([0.0, 0.1 * length])),
        reference_ramp=float(rng.choice([0.0, 4.0])) * abs(reference) / length,
        load_step=float(rng.choice([0.0, 0.3, -0.3, 0.6, -0.8])) * torque * ratio,
        load_at=moment(),
        stop_at=None if rng.random() < 0.5 else moment(),
        stop_ramp=float(rng.choice([0.0, 5.0])) * abs(reference) / length,
    )
    return replace(sheet, duty=duty, rig=replace(sheet.rig, machine=machine, train=train, stage=stage))


def scaled_gains(seed: int, count: int) -> list[Sheet]:
    """Gains by hand, well off those of a design: some of the loops are unstable, some barely stable."""
    rng = np.random.default_rng(seed)
    found = []
    for sheet in random_sheets(seed, count):
        verdict = design(sheet, figures=False)
        if verdict.current.gains is None or verdict.speed is None or verdict.speed.trial is None:
            continue
        current, speed = _off(rng, verdict.current.gains, 0.3, 2.5), _off(rng, verdict.speed.trial, 0.1, 8.0)
        aims = replace(
            sheet.aims,
            current=LoopAims(method=DesignMethod.BY_HAND, hand=current),
            speed=SpeedAims(method=DesignMethod.BY_HAND, hand=speed),
        )
        stage = replace(sheet.rig.stage, speed_window=int(rng.choice([1, 2, 8, 16])))
        duty = Duty(reference_speed=1.0, length=20.0 * stage.speed_period)
        found.append(replace(sheet, aims=aims, duty=duty, rig=replace(sheet.rig, stage=stage)))
    return found


def bandwidth_aims(seed: int, count: int) -> list[Sheet]:
    """Plausible drives with a bandwidth asked of one loop, the other as it was."""
    rng = np.random.default_rng(seed)
    found = []
    for k, sheet in enumerate(random_sheets(seed, count)):
        current, speed = sheet.aims.current, sheet.aims.speed
        assert current.crossover is not None
        assert speed.crossover is not None
        share, margin = rng.uniform(1.0, 3.0), math.radians(rng.uniform(30.0, 80.0))
        if k % 2:
            current = LoopAims(
                method=DesignMethod.BANDWIDTH_MARGIN, bandwidth=share * current.crossover, phase_margin=margin
            )
        else:
            speed = SpeedAims(
                method=DesignMethod.BANDWIDTH_MARGIN, bandwidth=share * speed.crossover, phase_margin=margin
            )
        duty = Duty(reference_speed=1.0, length=20.0 * sheet.rig.stage.speed_period)
        found.append(replace(sheet, duty=duty, aims=replace(sheet.aims, current=current, speed=speed)))
    return found


def _off(rng: np.random.Generator, gains: PI, low: float, high: float) -> HandGains:
    kp, ki = np.exp(rng.uniform(math.log(low), math.log(high), size=2))
    return HandGains(kp=abs(gains.kp) * float(kp), ki=abs(gains.ki) * float(ki))
