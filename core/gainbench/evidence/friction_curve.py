"""Friction over speed from steady running: what the drive has to give while nothing is accelerated."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.estimate import EstimateName, Ratio, Told
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.prepared import Record, thin
from gainbench.evidence.regression import regress
from gainbench.evidence.shaft_fit import MOST_ROWS, ShaftRows, shaft_rows
from gainbench.evidence.telling import tell, without
from gainbench.model import SignalName

Array = NDArray[np.float64]

_QUIET = 4.0
"""Times the usual acceleration up to which a row is steady."""
_SHARE = 0.03
"""Of the largest acceleration up to which it is steady in any case."""
_FEWEST = 20
_UNSIGNED_FIT = 60.0
"""Fit in percent below which a current that was given the sign of the speed is not the one that flowed."""
_ZERO = 0.02


def with_sign_of(speed: Array, current: Array) -> Array | None:
    """The current with the sign of the speed, where the log has it without a sign; None where it has one."""
    size = float(np.abs(current).max(initial=0.0))
    both = min(np.mean(speed > 0.0), np.mean(speed < 0.0)) > 0.05
    if size == 0.0 or not both or float(current.min()) < -1e-6 * size:
        return None
    return np.asarray(current * np.sign(speed))


def steady(rows: ShaftRows) -> NDArray[np.bool_]:
    """Which rows have next to no acceleration."""
    rate = np.abs(rows.acceleration)
    if rate.size == 0:
        return np.zeros(0, dtype=np.bool_)
    limit = max(_QUIET * 1.4826 * float(np.median(rate)), _SHARE * float(rate.max()))
    whole = (rows.forward > 0.99) | (rows.backward > 0.99)
    return np.asarray((rate <= limit) & whole)


def friction_curve(record: Record, drive: Array, *, per: EstimateName | None, signed: bool, unloaded: bool) -> Outcome:
    """Fit ``drive = J dw/dt + b w + Tc sgn(w) + offset`` over the steady rows.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s].
    drive : ndarray, shape (n,)
        Torque [N m], or the current [A] that makes it.
    per : EstimateName, optional
        What turns a current into a torque.
    signed : bool
        False where the drive was given the sign of the speed: what accelerates is then not known.
    unloaded : bool
        Whether a constant torque is ruled out, so that turning one way tells Coulomb friction.

    Returns
    -------
    Outcome
        Frictions; the fit and the regression are the same.
    """
    name = SignalName.SPEED if record.has(SignalName.SPEED) else SignalName.ANGLE
    signals = {name: record.signals[name], SignalName.TORQUE: drive}
    work = Record(name=record.name, step=record.step, bounds=record.bounds, signals=signals, remarks=())
    work = thin(work, -(-work.size // MOST_ROWS))
    rows = shaft_rows(work, work.signals[SignalName.TORQUE])
    keep = steady(rows)
    if keep.sum() < _FEWEST:
        return Outcome(remarks=("it did not run steadily long enough to tell friction",))
    way = (rows.forward - rows.backward)[keep]
    both = rows.both_ways
    names = [EstimateName.VISCOUS_FRICTION]
    columns = [rows.speed[keep], way]
    ahead = rows.forward.sum() >= rows.backward.sum()
    if both or unloaded:
        names.append(EstimateName.COULOMB_FRICTION)
    else:
        names.append(EstimateName.COULOMB_FRICTION_FORWARD if ahead else EstimateName.COULOMB_FRICTION_BACKWARD)
    if both:
        names.append(EstimateName.TORQUE_OFFSET)
        columns.append(np.ones_like(way))
    if signed:
        names.append(EstimateName.INERTIA)
        columns.append(rows.acceleration[keep])
    target = rows.drive[keep]
    found = regress(target, np.array(columns))
    if not signed and found.fit_percent < _UNSIGNED_FIT:
        words = "the current has no sign, and this run brakes with it: it tells nothing; log the current with its sign"
        return Outcome(fit_percent=found.fit_percent, remarks=(words,))
    size = float(np.sqrt(np.mean(target**2)))
    speed = float(np.sqrt(np.mean(rows.speed[keep] ** 2)))
    floors = np.array([_ZERO * size / speed, *[_ZERO * size] * (1 + int(both)), *([0.0] if signed else [])])
    ratios = tuple(Ratio(of=one, per=per) for one in names)
    told, untold = tell(ratios, found.values, found.covariance, spare=found.spare, floors=floors)
    told = without(told, [EstimateName.INERTIA])
    remarks = [one for one in untold if "inertia" not in one]
    fitted: list[Told] = [told]
    if both:
        fitted.append(_by_way(rows, keep, per=per, size=size, speed=speed))
    return Outcome(fitted=tuple(fitted), linear=tuple(fitted), fit_percent=found.fit_percent, remarks=tuple(remarks))


def _by_way(rows: ShaftRows, keep: NDArray[np.bool_], *, per: EstimateName | None, size: float, speed: float) -> Told:
    forward, backward = (rows.forward > 0.5)[keep], (rows.backward > 0.5)[keep]
    w = rows.speed[keep]
    found = regress(rows.drive[keep], np.array([w * forward, 1.0 * forward, w * backward, -1.0 * backward]))
    names = (
        EstimateName.VISCOUS_FRICTION_FORWARD,
        EstimateName.COULOMB_FRICTION_FORWARD,
        EstimateName.VISCOUS_FRICTION_BACKWARD,
        EstimateName.COULOMB_FRICTION_BACKWARD,
    )
    floors = _ZERO * size * np.array([1.0 / speed, 1.0, 1.0 / speed, 1.0])
    ratios = tuple(Ratio(of=one, per=per) for one in names)
    return tell(ratios, found.values, found.covariance, spare=found.spare, floors=floors)[0]
