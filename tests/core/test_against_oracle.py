"""The library against the reference model: gains, figures, locked step and response of many sheets.

The reference model was written from the loop law alone, with plain matrices, dense grids and a Python loop over the
ticks; it shares no code with the library's loops.
"""

from __future__ import annotations

import math
from dataclasses import replace
from functools import cache

import pytest

from comparing import compare_loop, compare_response, compare_step, starts
from gainbench.assess import Assessment, assess
from gainbench.model import (
    DesignMethod,
    Firmware,
    HandGains,
    IntegratorRule,
    LoopAims,
    Sheet,
    SpeedAims,
    WindupRule,
)
from gainbench.plant import refer
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet, demo_sheet_names
from oracle_bench import read_bench
from oracle_design import Verdict, design
from rigs import FIXED, fixed_sheet, random_sheets


def _demos() -> list[Sheet]:
    return [parse_sheet(demo_sheet(name).read_text(encoding="utf-8"), name).sheet for name in demo_sheet_names()]


SHEETS = [*_demos(), *(fixed_sheet(name) for name in FIXED), *random_sheets(11, 40)]


@cache
def _library(sheet: Sheet) -> Assessment:
    return assess(sheet)


@cache
def _oracle(sheet: Sheet) -> Verdict:
    return design(sheet)


def _titles(sheet: Sheet) -> str:
    return sheet.title


@pytest.mark.parametrize("sheet", SHEETS, ids=_titles)
def test_values_at_the_motor_shaft(sheet: Sheet) -> None:
    plant, bench = refer(sheet.rig), read_bench(sheet)
    pairs = [
        (plant.resistance, bench.R),
        (plant.inductance, bench.L),
        (plant.back_emf, bench.Ke),
        (plant.torque, bench.Kt),
        (plant.inertia, bench.inertia),
        (plant.viscous, bench.viscous),
        (plant.motor_inertia, bench.bodies[0].inertia),
        (plant.motor_coulomb, bench.bodies[0].coulomb),
        (plant.load_coulomb, bench.bodies[1].coulomb if plant.elastic else 0.0),
        (plant.stiffness, bench.stiffness),
        (plant.damping, bench.damping),
        (plant.current_limit, bench.current_limit),
        (plant.voltage_limit, bench.voltage_limit),
        (plant.power_factor, bench.power_factor),
        (plant.braking_torque(1.0), bench.load_at_shaft(1.0, 1)),
        (plant.driving_torque(1.0), -bench.load_at_shaft(-1.0, 1)),
    ]
    for mine, other in pairs:
        assert mine == pytest.approx(other, rel=1e-12, abs=0.0)


@pytest.mark.parametrize("sheet", SHEETS, ids=_titles)
def test_gains_and_figures(sheet: Sheet) -> None:
    library, oracle = _library(sheet), _oracle(sheet)
    compare_loop(library.current, oracle.current)
    if oracle.speed is not None:
        compare_loop(library.speed, oracle.speed)
    else:
        assert library.speed.gains is None or sheet.aims.speed.method is DesignMethod.BY_HAND


@pytest.mark.parametrize("sheet", SHEETS, ids=_titles)
def test_locked_step(sheet: Sheet) -> None:
    compare_step(_library(sheet).locked_step, _oracle(sheet).step)


@pytest.mark.parametrize("sheet", SHEETS[:30], ids=_titles)
def test_response(sheet: Sheet) -> None:
    found, verdict = _library(sheet), _oracle(sheet)
    holds = verdict.speed is not None and verdict.speed.gains is not None and verdict.speed.stable
    if holds and verdict.current.stable and starts(sheet, verdict.bench):
        compare_response(found)
    else:
        assert found.response is None


def _with(sheet: Sheet, *, current: LoopAims | None = None, speed: SpeedAims | None = None) -> Sheet:
    aims = sheet.aims
    return replace(sheet, aims=replace(aims, current=current or aims.current, speed=speed or aims.speed))


def _method_sheets() -> list[Sheet]:
    """Every design method on rigid, elastic and field-oriented drives."""
    found = []
    for name in ("plain", "elastic", "sine"):
        base = fixed_sheet(name)
        margin = math.radians(55.0)
        for current in (
            LoopAims(method=DesignMethod.BANDWIDTH_MARGIN, bandwidth=math.tau * 900.0, phase_margin=margin),
            LoopAims(method=DesignMethod.LAG_CANCELLATION, crossover=math.tau * 400.0),
            LoopAims(method=DesignMethod.MAGNITUDE_OPTIMUM),
            LoopAims(method=DesignMethod.POLE_PLACEMENT, natural_frequency=math.tau * 300.0, damping=0.9),
            LoopAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=3.0, ti=1.5e-3)),
            LoopAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=3.0, ki=0.2, ki_has_period=True)),
        ):
            found.append(_with(base, current=current))
        for speed in (
            SpeedAims(method=DesignMethod.BANDWIDTH_MARGIN, bandwidth=math.tau * 30.0, phase_margin=margin),
            SpeedAims(method=DesignMethod.LAG_CANCELLATION, crossover=math.tau * 12.0),
            SpeedAims(method=DesignMethod.SYMMETRIC_OPTIMUM, spread=3.0),
            SpeedAims(method=DesignMethod.POLE_PLACEMENT, natural_frequency=math.tau * 12.0, damping=0.8),
            SpeedAims(
                method=DesignMethod.BY_HAND,
                hand=HandGains(kp=6e-3, ki=0.3, kp_is_torque=True, ki_is_torque=True),
            ),
            SpeedAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=0.1, wi=20.0)),
        ):
            found.append(_with(base, speed=speed))
    return [
        replace(sheet, title=f"{sheet.title} {sheet.aims.current.method} {sheet.aims.speed.method} {k}")
        for k, sheet in enumerate(found)
    ]


@pytest.mark.parametrize("sheet", _method_sheets(), ids=_titles)
def test_every_design_method(sheet: Sheet) -> None:
    library, oracle = _library(sheet), _oracle(sheet)
    compare_loop(library.current, oracle.current)
    assert oracle.speed is not None
    compare_loop(library.speed, oracle.speed)


@pytest.mark.parametrize("windup", list(WindupRule))
@pytest.mark.parametrize("integrator", list(IntegratorRule))
def test_response_on_its_limits(integrator: IntegratorRule, windup: WindupRule) -> None:
    """A duty that sits on both limits: every integrator rule with every windup rule, and the feedforward in the sum."""
    base = fixed_sheet("plain")
    firmware = Firmware(integrator=integrator, windup=windup, back_emf_feedforward=True)
    stage = replace(base.rig.stage, bus_voltage=9.0, current_limit=6.0)
    train = replace(base.rig.train, load_coulomb_friction=5e-3)
    duty = replace(base.duty, reference_speed=-115.0, load_step=-0.12, stop_at=0.2, length=0.26)
    sheet = replace(
        base,
        title=f"limits {integrator} {windup}",
        rig=replace(base.rig, stage=stage, train=train),
        aims=replace(base.aims, firmware=firmware),
        duty=duty,
    )
    test_response(sheet)
    response = _library(sheet).response
    assert response is not None
    assert response.figures.current_limited_s > 0.0
    assert response.figures.voltage_limited_s > 0.0
    assert response.figures.returned_energy_j > 0.0
