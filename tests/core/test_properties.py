"""What must hold for any drive: targets met exactly, refusals that are true, and no number that is none.

Two thousand drives drawn by chance. Half of the refusals come from a harsher set, whose targets were pushed about.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, fields, is_dataclass, replace
from functools import cache

import numpy as np
import pytest

from gainbench.assess import Assessment, assess
from gainbench.margins import open_loop
from gainbench.model import Duty, Sheet
from gainbench.plant import refer
from gainbench.results import Gains, LoopAssessment
from gainbench.sampling import Loop, current_loop, hardware, speed_loop
from oracle_bench import read_bench
from oracle_design import design, margin_gains
from oracle_loops import PI, Complex, current_poles, is_stable, speed_poles
from oracle_loops import Loop as OracleLoop
from oracle_loops import current_loop as oracle_current_loop
from oracle_loops import speed_loop as oracle_speed_loop
from rigs import random_sheets

COUNT = 2000
HARSH = 150
MET = 1e-6
"""Relative on the size of L, and in rad on its angle: the targets are met to rounding."""


@cache
def _drives() -> list[Sheet]:
    """The duty is cut short: what is looked at here are the loops, and that no response is without numbers."""
    return [replace(sheet, duty=_short(sheet)) for sheet in random_sheets(2026, COUNT)]


def _short(sheet: Sheet) -> Duty:
    length = min(sheet.duty.length, 800.0 / sheet.rig.stage.current_rate)
    return replace(sheet.duty, length=length, reference_at=0.0, load_at=0.5 * length, stop_at=None)


@cache
def _assessments() -> list[Assessment]:
    return [assess(sheet) for sheet in _drives()]


@cache
def _harsh() -> list[Assessment]:
    rng = np.random.default_rng(5)
    found = []
    for sheet in random_sheets(77, HARSH):
        aims = sheet.aims
        assert aims.current.crossover is not None
        assert aims.speed.crossover is not None
        current = replace(
            aims.current,
            crossover=aims.current.crossover * float(rng.choice([1.0, 1.0, 3.0, 10.0, 0.03])),
            phase_margin=math.radians(rng.uniform(20.0, 89.0)),
        )
        speed = replace(
            aims.speed,
            crossover=aims.speed.crossover * float(rng.choice([0.05, 1.0, 2.0, 4.0, 8.0])),
            phase_margin=math.radians(rng.uniform(20.0, 89.0)),
        )
        harsh = replace(aims, current=current, speed=speed)
        found.append(assess(replace(sheet, duty=_short(sheet), aims=harsh)))
    return found


def _loops(found: Assessment) -> Iterator[tuple[LoopAssessment, Loop]]:
    """The library's own loops that have gains."""
    sheet, firmware = found.sheet, found.sheet.aims.firmware
    plant, stage = refer(sheet.rig), sheet.rig.stage
    own = hardware(plant, stage)
    if found.current.gains is None:
        return
    yield found.current, current_loop(own, firmware)
    if found.speed.gains is not None:
        outer = speed_loop(own, plant, stage=stage, firmware=firmware, current=found.current.gains)
        yield found.speed, outer


def _off(L: complex, margin: float) -> float:
    return max(abs(abs(L) - 1.0), abs(float(np.angle(-L * np.exp(-1j * margin)))))


def test_targets_are_met_on_the_librarys_own_loop() -> None:
    for found in _assessments():
        margins = (found.sheet.aims.current.phase_margin, found.sheet.aims.speed.phase_margin)
        for (side, loop), margin in zip(_loops(found), margins, strict=False):
            assert side.gains is not None
            assert side.asked_crossover is not None
            assert margin is not None
            L = open_loop(loop, side.gains, frequency=np.array([side.asked_crossover]))[0]
            assert _off(complex(L), margin) < MET, found.sheet.title


def test_targets_are_met_on_the_reference_loop() -> None:
    for found in _assessments()[::20]:
        if found.current.gains is None:
            continue
        aims, bench = found.sheet.aims, read_bench(found.sheet)
        rule = aims.firmware.integrator
        inner = _pi(found.current.gains)
        sides = [(found.current, aims.current, oracle_current_loop(bench, rule=rule))]
        if found.speed.gains is not None:
            outer = oracle_speed_loop(bench, inner, rule=rule, feedforward=aims.firmware.back_emf_feedforward)
            sides.append((found.speed, aims.speed, outer))
        for side, asked, loop in sides:
            assert side.gains is not None
            assert asked.phase_margin is not None
            L = loop.open(_pi(side.gains))(np.array([asked.crossover]))[0]
            assert _off(complex(L), asked.phase_margin) < MET, found.sheet.title


def test_plausible_targets_are_mostly_met() -> None:
    met = [
        found.current.figures is not None
        and found.speed.figures is not None
        and found.current.figures.stable
        and found.speed.figures.stable
        for found in _assessments()
    ]
    assert sum(met) >= 0.8 * COUNT


def test_what_is_designed_is_stable() -> None:
    for found in [*_assessments(), *_harsh()]:
        for side in (found.current, found.speed):
            if side.gains is not None:
                assert side.gains.kp > 0.0
                assert side.gains.ki > 0.0
                assert side.figures is not None
                assert side.figures.stable, found.sheet.title


def test_every_refusal_is_true() -> None:
    """The one pair of gains is not positive, or a pole of the reference loop is outside the circle."""
    refused = 0
    for found in [*_assessments(), *_harsh()]:
        if found.current.refusal is None and found.speed.refusal is None:
            continue
        verdict = design(found.sheet, figures=False)
        sides = [(found.current, verdict.current)] + ([] if verdict.speed is None else [(found.speed, verdict.speed)])
        for mine, other in sides:
            assert (mine.gains is None) == (mine.refusal is not None)
            if mine.refusal is None:
                continue
            refused += 1
            trial = other.trial
            assert trial is not None
            assert trial.kp <= 0.0 or trial.ki <= 0.0 or not other.stable, found.sheet.title
            assert other.gains is None
    assert refused >= 40


def test_nearest_targets_can_be_met_and_nothing_nearer_can() -> None:
    looked = 0
    for found in _harsh():
        case = _refused(found)
        if case is None or looked >= 25:
            continue
        refusal, asked, title = case.side.refusal, case.crossover, found.sheet.title
        assert refusal is not None
        nearest, largest = refusal.nearest_crossover, refusal.largest_margin
        if nearest is not None:
            looked += 1
            away = 1.0 if nearest > asked else -1.0
            assert case.meets(nearest * (1.0 + away * 1e-5), case.margin), title
            span = abs(math.log(nearest / asked))
            for share in (0.05, 0.2, 0.4, 0.6, 0.8, 0.95, 0.999):
                for way in (1.0, -1.0):
                    assert not case.meets(asked * math.exp(way * share * span), case.margin), (title, share, way)
        if largest is not None and largest > 0.0:
            assert case.meets(asked, largest - 1e-5), title
        if largest is not None and largest < math.pi / 2.0 - 1e-4:
            for share in (1e-4, 0.1, 0.3, 0.6, 0.9):
                assert not case.meets(asked, largest + share * (math.pi / 2.0 - largest)), (title, share)
    assert looked >= 10


@dataclass(frozen=True, kw_only=True)
class Refused:
    """A loop that was refused, as the reference model has it, with its poles and its targets."""

    side: LoopAssessment
    loop: OracleLoop
    poles: Callable[[PI], Complex]
    crossover: float
    margin: float

    def meets(self, crossover: float, margin: float) -> bool:
        """Whether the reference model finds positive gains with a stable loop."""
        if crossover >= self.loop.nyquist:
            return False
        gains = margin_gains(self.loop, crossover, margin=margin)
        return gains.kp > 0.0 and gains.ki > 0.0 and is_stable(self.poles(gains))


def _refused(found: Assessment) -> Refused | None:
    aims, bench = found.sheet.aims, read_bench(found.sheet)
    rule, feedforward = aims.firmware.integrator, aims.firmware.back_emf_feedforward
    current, speed = aims.current, aims.speed
    if found.current.refusal is not None:
        assert current.crossover is not None
        assert current.phase_margin is not None
        return Refused(
            side=found.current,
            loop=oracle_current_loop(bench, rule=rule),
            poles=lambda gains: current_poles(bench, gains, rule=rule),
            crossover=current.crossover,
            margin=current.phase_margin,
        )
    if found.speed.refusal is None or found.current.gains is None:
        return None
    inner = _pi(found.current.gains)
    assert speed.crossover is not None
    assert speed.phase_margin is not None
    return Refused(
        side=found.speed,
        loop=oracle_speed_loop(bench, inner, rule=rule, feedforward=feedforward),
        poles=lambda gains: speed_poles(bench, inner, gains, rule=rule, feedforward=feedforward),
        crossover=speed.crossover,
        margin=speed.phase_margin,
    )


def _pi(gains: Gains) -> PI:
    return PI(kp=gains.kp, ki=gains.ki)


def _numbers(value: object, path: str) -> Iterator[tuple[str, object]]:
    """Every number in a tree of dataclasses, tuples and arrays, with the way to it."""
    if isinstance(value, (float, int, np.ndarray)):
        yield path, value
    elif is_dataclass(value):
        for field in fields(value):
            yield from _numbers(getattr(value, field.name), f"{path}.{field.name}")
    elif isinstance(value, (tuple, list)):
        for k, one in enumerate(value):
            yield from _numbers(one, f"{path}[{k}]")


def test_no_number_is_none_or_infinite() -> None:
    arrays = 0
    for found in [*_assessments(), *_harsh()]:
        for path, value in _numbers(found, found.sheet.title):
            arrays += isinstance(value, np.ndarray)
            assert np.all(np.isfinite(value)), path
            if isinstance(value, np.ndarray):
                assert not value.flags.writeable, path
    assert arrays > 10 * COUNT


def test_margins_and_sensitivity_keep_their_bounds() -> None:
    """GM >= Ms/(Ms - 1) and PM >= 2 asin(1/(2 Ms)) (R5: Astrom & Hagglund, from memory)."""
    for found in _assessments():
        for side in (found.current, found.speed):
            if side.figures is None or side.figures.peak_sensitivity is None:
                continue
            peak = side.figures.peak_sensitivity
            assert peak >= 1.0
            if side.figures.gain_margin_db is not None and peak > 1.0:
                assert 10.0 ** (side.figures.gain_margin_db / 20.0) >= peak / (peak - 1.0) * (1.0 - 1e-6)
            if side.figures.phase_margin_deg is not None:
                bound = 2.0 * math.degrees(math.asin(1.0 / (2.0 * peak)))
                assert side.figures.phase_margin_deg >= bound - 1e-4


@pytest.mark.parametrize("k", range(0, COUNT, 400))
def test_the_same_sheet_gives_the_same_assessment(k: int) -> None:
    sheet = _drives()[k]
    again, before = assess(sheet), _assessments()[k]
    mine, other = list(_numbers(again, "")), list(_numbers(before, ""))
    assert len(mine) == len(other)
    for (path, value), (_, known) in zip(mine, other, strict=True):
        assert np.array_equal(np.asarray(value), np.asarray(known)), path
