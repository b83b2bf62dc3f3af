"""What counts as told, and the words for what does not."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np

from gainbench.evidence.estimate import EstimateName, Ratio
from gainbench.evidence.telling import dead_time_remark, tell

RATIOS = (
    Ratio(of=EstimateName.INERTIA),
    Ratio(of=EstimateName.VISCOUS_FRICTION),
    Ratio(of=EstimateName.COULOMB_FRICTION, per=EstimateName.TORQUE_CONSTANT),
)


def told(values, deviations, floors=(0.0, 0.0, 0.0)):
    return tell(RATIOS, np.array(values), np.diag(np.square(deviations)), spare=1e9, floors=np.array(floors))


def test_what_is_sure_is_told():
    found, remarks = told([1.0, 2.0, 3.0], [0.1, 0.2, 0.3])
    assert found.ratios == RATIOS
    assert not remarks


def test_what_may_be_anything_is_named_and_left_out():
    found, remarks = told([1.0, 2.0, 3.0], [0.4, 0.2, 0.3])
    assert [one.of for one in found.ratios] == [EstimateName.VISCOUS_FRICTION, EstimateName.COULOMB_FRICTION]
    assert found.covariance.shape == (2, 2)
    assert len(remarks) == 1
    assert "does not tell the inertia" in remarks[0]
    assert "kg*m^2" in remarks[0]


def test_a_friction_that_is_zero_is_told_where_that_is_sure():
    assert not told([1.0, 0.0, 3.0], [0.1, 0.01, 0.3], floors=[0.0, 0.05, 0.0])[1]
    assert told([1.0, 0.0, 3.0], [0.1, 0.1, 0.3], floors=[0.0, 0.05, 0.0])[1]


def test_what_cannot_be_below_zero_is_not_told_there():
    assert "inertia" in told([-1.0, 2.0, 3.0], [0.01, 0.2, 0.3])[1][0]


def test_no_number_is_not_told():
    assert "any value" in told([np.nan, 2.0, 3.0], [0.1, 0.2, 0.3])[1][0]


def dead_time(shift, deviation):
    fit = SimpleNamespace(values=np.array([1.0, shift]), covariance=np.diag([1.0, deviation**2]))
    return dead_time_remark("voltage", "current", fit, 1e-3)


def test_a_dead_time_is_said_with_who_is_late():
    assert "the voltage acts 3 ms (3.00 samples) later" in dead_time(3.0, 0.1)[0]
    assert "the current acts 4 ms (4.00 samples) later" in dead_time(-4.0, 0.1)[0]


def test_the_way_a_signal_is_held_is_no_dead_time():
    assert not dead_time(-0.5, 1e-3)
    assert not dead_time(0.2, 1e-3)
    assert not dead_time(2.0, 1.0), "not sure"
