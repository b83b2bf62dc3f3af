"""Several logs together."""

from __future__ import annotations

import numpy as np

from gainbench.evidence.combining import Known, combine
from gainbench.evidence.estimate import EstimateName, Ratio, Told
from quantities import assert_quantity

KNOWN = Known(torque_constant=0.1, inertia=2e-4, torque_factor=1.0)
NAME = EstimateName
EXACT = "weights and sums of a handful of numbers"


def told(*parts, spare=1e9):
    """(of, per, value, deviation) each."""
    return Told(
        ratios=tuple(Ratio(of=of, per=per) for of, per, _, _ in parts),
        values=np.array([value for *_, value, _ in parts]),
        covariance=np.diag([deviation**2 for *_, deviation in parts]),
        spare=spare,
    )


def test_one_log_is_passed_on_with_both_intervals():
    found = combine([told((NAME.RESISTANCE, None, 2.0, 0.01))], KNOWN).estimates[NAME.RESISTANCE]
    assert_quantity(found.value, 2.0, rtol=1e-9, unit="ohm", why=EXACT)
    assert_quantity(found.high - found.value, 1.96 * 0.01, rtol=1e-3, unit="ohm", why="two sides of a normal")
    # 2 % between runs, as eight runs would show it: Student's 2.306 (from memory).
    run = np.hypot(1.96 * 0.01, 2.306 * 0.04)
    assert_quantity(found.run_high - found.value, run, rtol=1e-3, unit="ohm", why="three decimals of the table")
    assert_quantity(found.value - found.run_low, run, rtol=1e-3, unit="ohm", why="three decimals of the table")


def test_a_ratio_takes_what_another_log_tells_and_its_doubt():
    logs = [
        told((NAME.BACK_EMF_CONSTANT, None, 0.05, 5e-4)),
        told((NAME.INERTIA, NAME.TORQUE_CONSTANT, 4e-3, 1e-9)),
    ]
    found = combine(logs, KNOWN)
    inertia = found.estimates[NAME.INERTIA]
    assert_quantity(inertia.value, 2e-4, rtol=1e-6, unit="kg*m^2", why=EXACT)
    assert_quantity((inertia.high - inertia.value) / inertia.value, 0.0196, rtol=1e-2, unit="1", why="the constant's")
    assert found.borrowed == ()
    assert found.estimates[NAME.TORQUE_CONSTANT].value == found.estimates[NAME.BACK_EMF_CONSTANT].value


def test_without_it_the_sheet_is_borrowed_from():
    found = combine([told((NAME.INERTIA, NAME.TORQUE_CONSTANT, 4e-3, 1e-5))], KNOWN)
    assert_quantity(found.estimates[NAME.INERTIA].value, 4e-4, rtol=1e-9, unit="kg*m^2", why=EXACT)
    assert found.borrowed == (NAME.TORQUE_CONSTANT,)
    assert NAME.BACK_EMF_CONSTANT not in found.estimates


def test_the_q_axis_has_one_and_a_half():
    known = Known(torque_constant=0.15, inertia=1e-4, torque_factor=1.5)
    logs = [
        told((NAME.BACK_EMF_CONSTANT, None, 0.1, 1e-4)),
        told((NAME.COULOMB_FRICTION, NAME.TORQUE_CONSTANT, 2.0, 1e-3)),
    ]
    found = combine(logs, known).estimates
    assert_quantity(found[NAME.TORQUE_CONSTANT].value, 0.15, rtol=1e-9, unit="N*m/A", why=EXACT)
    assert_quantity(found[NAME.COULOMB_FRICTION].value, 0.3, rtol=1e-6, unit="N*m", why=EXACT)


def test_two_logs_are_between_their_values_and_scatter_widens_the_run():
    near = [told((NAME.INERTIA, None, 1e-4 * one, 1e-8)) for one in (0.999, 1.001)]
    far = [told((NAME.INERTIA, None, 1e-4 * one, 1e-8)) for one in (0.9, 1.1)]
    close, wide = combine(near, KNOWN).estimates[NAME.INERTIA], combine(far, KNOWN).estimates[NAME.INERTIA]
    assert_quantity(wide.value, 1e-4, rtol=1e-6, unit="kg*m^2", why="the same weight for both")
    assert wide.run_high - wide.run_low > 3.0 * (close.run_high - close.run_low)
    assert_quantity(wide.high - wide.low, close.high - close.low, rtol=1e-6, unit="kg*m^2", why="the fits are the same")


def test_coasting_takes_the_inertia_of_another_log():
    logs = [
        told((NAME.VISCOUS_FRICTION, NAME.INERTIA, 0.5, 1e-4), (NAME.COULOMB_FRICTION, NAME.INERTIA, 100.0, 0.1)),
        told((NAME.INERTIA, None, 3e-4, 1e-8)),
    ]
    found = combine(logs, KNOWN).estimates
    assert_quantity(found[NAME.VISCOUS_FRICTION].value, 1.5e-4, rtol=1e-5, unit="N*m*s/rad", why=EXACT)
    assert_quantity(found[NAME.COULOMB_FRICTION].value, 3e-2, rtol=1e-5, unit="N*m", why=EXACT)


def test_nothing_told_is_nothing():
    empty = Told(ratios=(), values=np.zeros(0), covariance=np.zeros((0, 0)), spare=1.0)
    assert combine([empty], KNOWN).estimates == {}
