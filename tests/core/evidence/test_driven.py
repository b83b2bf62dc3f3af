"""Driven runs: every mix of columns, dead times, spikes, one direction, and what is refused."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from bench_logs import run
from gainbench.errors import LogError
from gainbench.evidence.driven import driven, has_motion, smoothed_speed
from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.identify import identify
from gainbench.evidence.log import Log
from gainbench.evidence.prepared import prepare
from gainbench.model import Experiment, SignalName
from gainbench.plant import refer
from identified import ONE, TRUE, log_of, sheet_of, some_motion
from quantities import assert_quantity

WHY = "50 dB of noise over 8000 rows, and frictions that are a tenth of the torque"


@pytest.fixture(scope="module")
def motion():
    return some_motion()


@pytest.fixture(scope="module")
def full(motion):
    return log_of(motion, only=("voltage", "current", "angle"))


def estimates(log: Log, *, off: float = 1.5):
    return identify(sheet_of(Experiment.DRIVEN, off=off), [log])


def check(found, *, rtol: float = 0.02, only=tuple(TRUE)):
    for name in only:
        got = found.estimates[EstimateName(name)]
        assert_quantity(got.value, TRUE[name], rtol=rtol, unit=EstimateName(name).si, why=WHY)


def test_voltage_current_and_angle_tell_all(full):
    found = estimates(full)
    assert {name.value for name in found.estimates} == set(TRUE)
    check(found, rtol=0.03)
    check(found, rtol=2e-3, only=("resistance", "back_emf_constant", "inertia"))
    assert found.runs[0].fit_percent > 95.0


def test_the_sheet_is_only_where_it_begins(full):
    low, high = (estimates(full, off=off).estimates for off in (0.5, 1.5))
    for name, one in low.items():
        assert_quantity(one.value, high[name].value, rtol=5e-3, unit=name.si, why="one optimum from two starts")


def test_current_alone_rests_on_the_torque_constant(motion):
    found = estimates(log_of(motion, only=("current", "speed")), off=1.0)
    check(found, only=("inertia", "viscous_friction", "coulomb_friction", "torque_offset"), rtol=0.03)
    assert EstimateName.RESISTANCE not in found.estimates
    assert any("torque constant" in one for one in found.runs[0].remarks)


def test_a_torque_needs_no_constant(motion):
    log = log_of(motion, only=("current", "speed"))
    torque = {SignalName.TORQUE: 0.052 * log.signals[SignalName.CURRENT]}
    found = estimates(Log(name="t.csv", time=log.time, signals=dict(log.signals) | torque), off=1.5)
    check(found, only=("inertia", "viscous_friction", "coulomb_friction", "torque_constant"), rtol=0.03)
    assert not any("rest on" in one for one in found.runs[0].remarks)


def test_voltage_alone_tells_what_the_sheet_helps_it_to(motion):
    found = estimates(log_of(motion, only=("voltage", "speed")), off=1.0)
    check(found, only=("inertia", "coulomb_friction"), rtol=0.04)
    assert EstimateName.VISCOUS_FRICTION not in found.estimates
    assert any("cannot be told" in one for one in found.runs[0].remarks)


@pytest.mark.parametrize("which", [SignalName.VOLTAGE, SignalName.ANGLE])
def test_a_dead_time_between_columns_is_found_and_said(full, which):
    rows = 12
    signals = dict(full.signals)
    values = signals[which]
    if which is SignalName.VOLTAGE:
        signals[which] = np.concatenate((values[rows:], np.repeat(values[-1], rows)))
    else:
        signals[which] = np.concatenate((np.repeat(values[0], rows), values[:-rows]))
    found = estimates(Log(name="late.csv", time=full.time, signals=signals))
    check(found, only=("resistance", "inductance", "back_emf_constant", "inertia", "coulomb_friction"), rtol=0.02)
    said = next(one for one in found.runs[0].remarks if one.startswith("dead time"))
    assert abs(float(said.partition("acts ")[2].partition(" ms")[0]) - 6.0) < 0.5


def test_spikes_are_told_and_do_no_harm(full):
    rng = np.random.default_rng(1)
    signals = {}
    for name, values in full.signals.items():
        broken = values.copy()
        at = rng.choice(np.arange(20, 7900), 20, replace=False)
        broken[at] += rng.choice([-1.0, 1.0], 20) * np.ptp(values)
        signals[name] = broken
    found = estimates(Log(name="spikes.csv", time=full.time, signals=signals))
    check(found, rtol=0.03)
    assert sum("spike" in one for one in found.runs[0].remarks) == 3


def test_one_direction_does_not_tell_friction_from_an_offset():
    found = estimates(log_of(some_motion(one_way=True), only=("voltage", "current", "speed")))
    names = set(found.estimates)
    assert EstimateName.COULOMB_FRICTION not in names
    assert EstimateName.TORQUE_OFFSET not in names
    check(found, only=("inertia", "coulomb_friction_forward", "viscous_friction"), rtol=0.03)
    assert any("one way only" in one for one in found.runs[0].remarks)


def test_a_current_without_sign_tells_friction_and_no_inertia(motion):
    held = np.repeat([6.0, 14.0, -6.0, -14.0, 10.0, -10.0], 3000)[None]
    steady = log_of(run(ONE, held, rate=2000.0), only=("current", "speed"))
    signals = dict(steady.signals)
    signals[SignalName.CURRENT] = np.abs(signals[SignalName.CURRENT])
    found = estimates(Log(name="unsigned.csv", time=steady.time, signals=signals), off=1.0)
    check(found, only=("viscous_friction", "coulomb_friction"), rtol=0.1)
    assert EstimateName.INERTIA not in found.estimates
    assert any("no sign" in one for one in found.runs[0].remarks)


def test_a_rotor_that_rests_tells_nothing():
    time = np.arange(1000) * 1e-3
    still = {SignalName.CURRENT: np.sin(time), SignalName.SPEED: np.zeros(1000)}
    found = estimates(Log(name="still.csv", time=time, signals=still))
    assert found.estimates == {}
    assert any("nothing moved" in one for one in found.runs[0].remarks)


@pytest.mark.parametrize(
    ("kept", "wanted"), [(("voltage", "current"), "speed or angle"), (("speed",), "torque, current")]
)
def test_columns_that_do_not_do_are_refused(motion, kept, wanted):
    record = prepare(log_of(motion, only=kept))
    with pytest.raises(LogError, match=wanted):
        driven(record, refer(sheet_of(Experiment.DRIVEN).rig))


def test_speed_comes_from_an_angle_too(full, motion):
    record = prepare(full)
    assert has_motion(record)
    off = smoothed_speed(record) - motion.speed[0]
    assert np.std(off[100:-100]) < 0.02 * np.std(motion.speed[0])


def test_gaps_are_no_motion(full):
    keep = np.ones(full.time.size, dtype=bool)
    keep[3000:3400] = False
    log = Log(name="gap.csv", time=full.time[keep], signals={name: one[keep] for name, one in full.signals.items()})
    assert len(log.pieces) == 2
    check(estimates(replace(log)), rtol=0.04)
