"""Identification as a whole: measured axes and motors from outside, and two hundred simulated benches."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from bench_logs import noisy, run, some_benches, stepped_voltage
from gainbench.errors import LogError
from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.identify import identify
from gainbench.evidence.log import Log
from gainbench.evidence.reading import read_log
from gainbench.model import Experiment, SignalName
from gainbench.sheetfile import parse_sheet
from identified import RATE, TRUE, log_of, sheet_of, some_motion
from quantities import assert_quantity

EMPS = """
[[evidence]]
log = "DATA_EMPS.mat"
experiment = "driven"
[evidence.columns]
time = { column = "t", unit = "s" }
angle = { column = "qm", unit = "rad" }
torque = { column = "vir", unit = "N*m", scale = 35.15065188 }
"""
# A. Janot, M. Gautier, M. Brunot, Data Set and Reference Models of EMPS, 2019: metres for radians, newtons for N*m.
PUBLISHED = {
    "inertia": 95.1089,
    "viscous_friction": 203.5034,
    "coulomb_friction": 20.3935,
    "torque_offset": -3.1648,
    "viscous_friction_forward": 166.7061,
    "coulomb_friction_forward": 20.1440,
    "viscous_friction_backward": 240.4236,
    "coulomb_friction_backward": 20.6277,
}
BETWEEN_RUNS = {"inertia": 0.01, "viscous_friction": 0.03, "coulomb_friction": 0.03}
"""Spread between runs of that axis, as its authors' other runs show it."""

GEARMOTORS = """
[[evidence]]
log = "data_for_identification_without_integral.csv"
experiment = "{experiment}"
[evidence.columns]
time = {{ column = "t", unit = "ms" }}
speed = {{ column = "m{motor}vel", unit = "rad/s" }}
current = {{ column = "m{motor}cur", unit = "A" }}
"""
# Repository BrOleg5/research-wheel-slippage: its authors' estimates of three 24 V gearmotors, 0.0514 N m/A.
COULOMB = {1: 8.13e-3, 2: 6.97e-3, 3: 8.09e-3}


def from_files(text: str, folder: Path):
    sheet = parse_sheet(text, "x.bench.toml").sheet
    return identify(sheet, [read_log(folder / one.log, one.columns) for one in sheet.evidence])


@pytest.fixture(scope="module")
def emps(outside_data, demo_texts):
    return from_files(demo_texts["label-unwinder"] + EMPS, outside_data / "emps")


@pytest.mark.parametrize("name", PUBLISHED)
def test_the_axis_by_regression(emps, name):
    found = emps.regression[EstimateName(name)].value
    share = 0.005 if name == "inertia" else 0.02
    assert_quantity(found, PUBLISHED[name], rtol=share, unit="SI", why="what is promised for the published method")


@pytest.mark.parametrize("name", PUBLISHED)
def test_the_axis_by_output_error(emps, name):
    found = emps.estimates[EstimateName(name)]
    assert_quantity(found.value, PUBLISHED[name], rtol=0.03, unit="SI", why="what is promised for the output error")
    assert found.low <= PUBLISHED[name] <= found.high


@pytest.mark.parametrize("name", BETWEEN_RUNS)
def test_the_runs_bounds_cover_another_run_of_the_axis(emps, name):
    found = emps.estimates[EstimateName(name)]
    for other in (1.0 - BETWEEN_RUNS[name], 1.0 + BETWEEN_RUNS[name]):
        assert found.run_low <= other * PUBLISHED[name] <= found.run_high
    assert found.run_low < found.low < found.high < found.run_high


@pytest.mark.parametrize("motor", COULOMB)
@pytest.mark.parametrize("experiment", ["driven", "no-load"])
def test_three_gearmotors(outside_data, demo_texts, motor, experiment):
    text = demo_texts["label-unwinder"].replace('torque_constant = "52 mN*m/A"', 'torque_constant = "0.0514 N*m/A"')
    found = from_files(text + GEARMOTORS.format(motor=motor, experiment=experiment), outside_data / "gearmotors")
    value = found.estimates[EstimateName.COULOMB_FRICTION].value
    assert_quantity(value, COULOMB[motor], rtol=0.15, unit="N*m", why="what is promised; plain least squares 5 to 11 %")
    assert EstimateName.INERTIA not in found.estimates
    assert any("irregular" in one for one in found.runs[0].remarks)


NAMES = {
    "resistance": "resistance",
    "inductance": "inductance",
    "back_emf_constant": "constant",
    "inertia": "inertia",
    "viscous_friction": "viscous",
    "coulomb_friction": "coulomb",
    "torque_offset": "offset",
}


def test_two_hundred_benches_are_covered_by_their_own_bounds():
    count, rows = 200, 5000
    rng = np.random.default_rng(11)
    benches = some_benches(count, rng)
    motions = run(benches, stepped_voltage(count, rows, RATE, rng=rng), rate=RATE)
    voltage, current = noisy(motions.voltage, 40.0, rng), noisy(motions.current, 40.0, rng)
    speed = noisy(motions.speed, 40.0, rng)
    covered = {name: [] for name in NAMES}
    off = {name: [] for name in NAMES}
    for bench in range(count):
        # Speeds in steps of a coarse sensor, currents of a converter of 11 bits.
        step = 2.0 * np.abs(current[bench]).max() / 2048.0
        signals = {
            SignalName.VOLTAGE: voltage[bench],
            SignalName.CURRENT: step * np.round(current[bench] / step),
            SignalName.SPEED: 0.05 * np.round(speed[bench] / 0.05),
        }
        sheet = sheet_of(Experiment.DRIVEN, off=(0.5, 1.5)[bench % 2], benches=benches, bench=bench)
        found = identify(sheet, [Log(name="b.csv", time=motions.time, signals=signals)]).estimates
        for name, own in NAMES.items():
            true = float(getattr(benches, own)[bench])
            one = found[EstimateName(name)]
            covered[name].append(one.low <= true <= one.high)
            off[name].append(one.value / true - 1.0)
    shares = {name: float(np.mean(one)) for name, one in covered.items()}
    assert all(0.90 <= share <= 0.99 for share in shares.values()), shares
    typical = {name: float(np.sqrt(np.mean(np.square(one)))) for name, one in off.items()}
    assert all(one < 0.02 for one in typical.values()), typical


def test_logs_of_all_kinds_go_together():
    sheet = sheet_of(Experiment.DRIVEN, Experiment.DRIVEN)
    logs = [log_of(some_motion(seed=seed), only=("voltage", "current", "angle")) for seed in (3, 9)]
    both = identify(sheet, logs)
    assert len(both.runs) == 2
    single = identify(replace(sheet, evidence=sheet.evidence[:1]), logs[:1])
    for name in (EstimateName.INERTIA, EstimateName.RESISTANCE):
        assert_quantity(both.estimates[name].value, TRUE[name.value], rtol=5e-3, unit=name.si, why="two logs")
        wide = single.estimates[name].high - single.estimates[name].low
        assert both.estimates[name].high - both.estimates[name].low < wide


def test_a_sheet_without_evidence_is_told_how_to_get_some():
    with pytest.raises(LogError, match="evidence"):
        identify(replace(sheet_of(Experiment.DRIVEN), evidence=()), [])


def test_logs_and_tables_must_match():
    with pytest.raises(ValueError, match="0 logs for 1"):
        identify(sheet_of(Experiment.DRIVEN), [])
