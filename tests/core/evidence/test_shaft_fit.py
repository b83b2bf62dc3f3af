"""Rows of the equation of motion, and the fit's own choices."""

from __future__ import annotations

import numpy as np

from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.motion_model import Shape
from gainbench.evidence.prepared import prepare
from gainbench.evidence.regression import regress
from gainbench.evidence.shaft_fit import fit_shaft, shaft_columns, shaft_names, shaft_rows, without
from gainbench.model import SignalName
from identified import TRUE, log_of, some_motion
from quantities import assert_quantity

LOG = log_of(some_motion(), only=("current", "angle"))
RECORD = prepare(LOG)
DRIVE = 0.052 * RECORD.signals[SignalName.CURRENT]


def test_rows_satisfy_the_equation_of_motion():
    rows = shaft_rows(RECORD, DRIVE)
    assert rows.both_ways
    found = regress(rows.drive, np.vstack((rows.acceleration, shaft_columns(rows, Shape.EVEN))))
    for name, value in zip(shaft_names(Shape.EVEN, rows), found.values, strict=True):
        assert_quantity(value, TRUE[name.value], rtol=0.03, unit=name.si, why="50 dB of noise, counts of an encoder")


def test_by_way_has_drags_of_its_own():
    rows = shaft_rows(RECORD, DRIVE)
    names = shaft_names(Shape.BY_WAY, rows)
    assert len(names) == 1 + Shape.BY_WAY.count
    assert shaft_columns(rows, Shape.BY_WAY).shape[0] == Shape.BY_WAY.count


def test_the_inertia_is_told_once():
    found = fit_shaft(RECORD, DRIVE, per=None)
    told = [ratio.of for one in found.fitted for ratio in one.ratios]
    assert told.count(EstimateName.INERTIA) == 1
    assert len(set(told)) == len(told)
    assert found.late == 0.0


def test_leaving_one_out_keeps_the_others_covariance():
    even = fit_shaft(RECORD, DRIVE, per=None).fitted[0]
    fewer = without(even, EstimateName.INERTIA)
    assert np.array_equal(fewer.covariance, even.covariance[1:, 1:])
