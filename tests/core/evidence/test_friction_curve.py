"""Friction from steady rows."""

from __future__ import annotations

import numpy as np

from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.friction_curve import friction_curve, steady, with_sign_of
from gainbench.evidence.prepared import Record
from gainbench.evidence.shaft_fit import shaft_rows
from gainbench.model import SignalName
from quantities import assert_quantity

SPEED = np.repeat([20.0, 60.0, -20.0, -60.0], 1500) + 0.05 * np.random.default_rng(1).standard_normal(6000)
DRIVE = 1e-3 * SPEED + 0.04 * np.sign(SPEED) + 0.01


def record() -> Record:
    return Record(name="f.csv", step=1e-3, bounds=np.array([0, 6000]), signals={SignalName.SPEED: SPEED}, remarks=())


def test_a_known_curve_is_found():
    found = friction_curve(record(), DRIVE, per=None, signed=True, unloaded=False)
    values = {ratio.of: value for told in found.fitted for ratio, value in zip(told.ratios, told.values, strict=True)}
    expected = {
        EstimateName.VISCOUS_FRICTION: 1e-3,
        EstimateName.COULOMB_FRICTION: 0.04,
        EstimateName.TORQUE_OFFSET: 0.01,
        EstimateName.COULOMB_FRICTION_FORWARD: 0.05,
        EstimateName.COULOMB_FRICTION_BACKWARD: 0.03,
    }
    for name, value in expected.items():
        assert_quantity(values[name], value, rtol=0.01, unit=name.si, why="a little noise on 6000 rows")


def test_steps_are_not_steady():
    rows = shaft_rows(record(), DRIVE)
    kept = steady(rows)
    assert 0.5 < kept.mean() < 1.0
    assert np.abs(rows.acceleration[kept]).max() < 0.1 * np.abs(rows.acceleration).max()


def test_a_sign_is_given_only_where_there_is_none():
    size = np.abs(DRIVE)
    assert np.array_equal(with_sign_of(SPEED, size), size * np.sign(SPEED))
    assert with_sign_of(SPEED, DRIVE) is None
    assert with_sign_of(np.abs(SPEED), size) is None, "one way: the sign may be right"


def test_too_few_steady_rows_tell_nothing():
    short = Record(
        name="f.csv", step=1e-3, bounds=np.array([0, 12]), signals={SignalName.SPEED: SPEED[:12]}, remarks=()
    )
    found = friction_curve(short, DRIVE[:12], per=None, signed=True, unloaded=False)
    assert not found.fitted
    assert found.remarks
