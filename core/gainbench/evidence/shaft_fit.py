"""Inertia, friction and offset from a drive and the motion it makes."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.estimate import EstimateName, Ratio, Told
from gainbench.evidence.following import fit_following
from gainbench.evidence.lag import best_lag
from gainbench.evidence.motion_model import MotionModel, Shape
from gainbench.evidence.output_error import Fit, fit_output
from gainbench.evidence.prepared import Record, thin, thinned
from gainbench.evidence.regression import Regression, regress
from gainbench.evidence.shifting import soften
from gainbench.evidence.smoothing import motion_of, noise_cut
from gainbench.evidence.telling import dead_time_remark, tell, without
from gainbench.evidence.winding_fit import outlier_remark
from gainbench.model import SignalName

Array = NDArray[np.float64]

MOST_ROWS = 25_000
"""Of a motion that is fitted; longer logs are thinned behind an anti-alias filter."""
THINNED_ROWS = 18_000
"""That longer ones are thinned to."""
_ENDS = 3
"""Rows at either end of a piece that the filters reach beyond."""
_NOISES = 3.0
"""Standard deviations of its noise below which a speed has no direction."""
_ONE_WAY = 0.03
"""Share of the moving rows below which a direction was not driven."""
_FEWEST = 20
"""Rows of the regression."""
_STEADY = 0.1
"""Share of the highest speed within which it runs at one speed."""
_SURE_AGAINST = 5.0
"""Standard deviations below zero that an inertia is surely negative."""
_AGAINST_FIT = 20.0
"""Fit in percent above which the motion has to do with the drive."""
_FACTOR = 1e3
_SHIFTS = 12.0
_ZERO = 0.02
"""Share of the drive's own size to within which a friction or an offset counts as told although it may be zero."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ShaftEvidence:
    """What a log tells of inertia and friction."""

    fitted: tuple[Told, ...]
    linear: tuple[Told, ...]
    fit_percent: float
    remarks: tuple[str, ...]
    late: float = 0.0
    """Seconds by which the motion is stamped later than the drive; 0 where no dead time was found."""
    against: bool = False
    """Whether the motion goes against the drive: one of both has the wrong sign."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ShaftRows:
    """The equation of motion, row by row, smoothed and thinned."""

    drive: Array
    """shape (n,), in the drive's unit."""
    acceleration: Array
    """[rad/s^2]."""
    speed: Array
    """[rad/s]."""
    forward: Array
    """Share of the row's time in which it turned forwards, 0 to 1."""
    backward: Array
    lag: int
    """Samples by which the drive acts later than stamped."""
    smoothed: Array
    """Speed at every sample of the record [rad/s]."""
    slow: float
    """Speed below which there is no direction [rad/s]."""

    @property
    def both_ways(self) -> bool:
        """Whether it turned forwards and backwards."""
        moving = self.forward.sum() + self.backward.sum()
        return bool(moving > 0.0 and min(self.forward.sum(), self.backward.sum()) > _ONE_WAY * moving)


def shaft_rows(record: Record, drive: Array) -> ShaftRows:
    """Smooth a motion and lay its equation out in rows.

    As published for a positioning axis: Butterworth of order 4 run both ways, central differences, decimation of every
    column; the cut is where the signal sinks into noise, at most a tenth of the rate.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s].
    drive : ndarray, shape (n,)
        Torque [N m], or what is proportional to it.

    Returns
    -------
    ShaftRows
        SI.

    References
    ----------
    A. Janot, M. Gautier, M. Brunot, Data Set and Reference Models of EMPS, 2019, section on the inverse dynamic model.
    """
    is_angle = not record.has(SignalName.SPEED)
    signal = record.signals[SignalName.ANGLE if is_angle else SignalName.SPEED]
    spans = [(int(first), int(last)) for first, last in itertools.pairwise(record.bounds)]
    cut = float(np.median([noise_cut(signal[a:b], record.step, integrated=2 if is_angle else 1) for a, b in spans]))
    factor = max(1, round(1.0 / (cut * record.step)))
    motions = [motion_of(signal[a:b], record.step, angle=is_angle, cut=cut) for a, b in spans]
    speed = np.concatenate([one.speed for one in motions])
    slow = _NOISES * max(one.noise for one in motions)
    found: list[list[Array]] = []
    columns_of = [
        [one.acceleration, one.speed, (one.speed > slow).astype(np.float64), (one.speed < -slow).astype(np.float64)]
        for one in motions
    ]
    first, last = max(spans, key=lambda span: span[1] - span[0])
    longest = columns_of[spans.index((first, last))]
    lag = best_lag(drive[first:last], np.array(longest), step=record.step)
    for (a, b), columns in zip(spans, columns_of, strict=True):
        moved = drive[a:b][np.clip(np.arange(b - a) - lag, 0, b - a - 1)]
        rows = [thinned(column, factor) for column in (moved, *columns)]
        keep = rows[3] + rows[4] > 0.5
        if keep.size > 4 * _ENDS:
            keep[:_ENDS] = keep[-_ENDS:] = False
        found.append([row[keep] for row in rows])
    parts = [np.concatenate([one[index] for one in found]) for index in range(5)]
    return ShaftRows(
        drive=parts[0],
        acceleration=parts[1],
        speed=parts[2],
        forward=parts[3],
        backward=parts[4],
        lag=lag,
        smoothed=speed,
        slow=slow,
    )


def shaft_columns(rows: ShaftRows, shape: Shape) -> Array:
    """Columns of the regression on a shape of friction, without the acceleration; SI, shape (count, n)."""
    way = rows.forward - rows.backward
    if shape is Shape.EVEN:
        return np.array([rows.speed, way, np.ones_like(way)])
    if shape is Shape.ONE_WAY:
        return np.array([rows.speed, way])
    forward, backward = rows.forward > 0.5, rows.backward > 0.5
    return np.array([rows.speed * forward, rows.forward, rows.speed * backward, -rows.backward])


def shaft_names(shape: Shape, rows: ShaftRows) -> tuple[EstimateName, ...]:
    """Names of a shape's parameters, inertia first."""
    name = EstimateName
    if shape is Shape.EVEN:
        return (name.INERTIA, name.VISCOUS_FRICTION, name.COULOMB_FRICTION, name.TORQUE_OFFSET)
    if shape is Shape.BY_WAY:
        return (
            name.INERTIA,
            name.VISCOUS_FRICTION_FORWARD,
            name.COULOMB_FRICTION_FORWARD,
            name.VISCOUS_FRICTION_BACKWARD,
            name.COULOMB_FRICTION_BACKWARD,
        )
    ahead = rows.forward.sum() >= rows.backward.sum()
    drag = name.COULOMB_FRICTION_FORWARD if ahead else name.COULOMB_FRICTION_BACKWARD
    return (name.INERTIA, name.VISCOUS_FRICTION, drag)


def fit_shaft(record: Record, drive: Array, *, per: EstimateName | None) -> ShaftEvidence:
    """Fit ``J dw/dt = drive - b w - Tc sgn(w) - offset``, evenly and by direction.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s].
    drive : ndarray, shape (n,)
        Torque [N m], or the current [A] that makes it.
    per : EstimateName, optional
        What turns the drive into a torque, where the drive is a current: the estimates are then over it.

    Returns
    -------
    ShaftEvidence
        SI.
    """
    name = SignalName.SPEED if record.has(SignalName.SPEED) else SignalName.ANGLE
    signals = {name: record.signals[name], SignalName.TORQUE: drive}
    work = Record(name=record.name, step=record.step, bounds=record.bounds, signals=signals, remarks=())
    work = thin(work, -(-work.size // THINNED_ROWS) if work.size > MOST_ROWS else 1)
    rows = shaft_rows(work, work.signals[SignalName.TORQUE])
    if rows.drive.size < _FEWEST:
        return ShaftEvidence(fitted=(), linear=(), fit_percent=0.0, remarks=(_too_little(work, rows),))
    if not np.any(rows.drive):
        return ShaftEvidence(fitted=(), linear=(), fit_percent=0.0, remarks=("the drive is zero throughout",))
    shapes = (Shape.EVEN, Shape.BY_WAY) if rows.both_ways else (Shape.ONE_WAY,)
    if _goes_against(rows, shapes[0]):
        return ShaftEvidence(fitted=(), linear=(), fit_percent=0.0, remarks=(), against=True)
    fitted: list[Told] = []
    linear: list[Told] = []
    remarks: list[str] = []
    percent = late = 0.0
    segment: int | None = None
    for shape in shapes:
        first = regress(rows.drive, np.vstack((rows.acceleration, shaft_columns(rows, shape))))
        fit = _output_error(work, rows, shape, first, segment=segment)
        segment = fit.segment
        names = shaft_names(shape, rows)
        ratios = tuple(Ratio(of=one, per=per) for one in names)
        floors = _floors(names, rows)
        count = len(names)
        told, untold = tell(ratios, fit.values[:count], fit.covariance[:count, :count], spare=fit.spare, floors=floors)
        begun, _ = tell(ratios, first.values, first.covariance, spare=first.spare, floors=floors)
        if shape is Shape.BY_WAY:
            told, begun = without(told, [EstimateName.INERTIA]), without(begun, [EstimateName.INERTIA])
            untold = [one for one in untold if "inertia" not in one]
        else:
            percent = fit.fit_percent
            answer = name.value
            dead = dead_time_remark("drive", answer, fit, work.step)
            late = (float(fit.values[-1]) + 0.5) * work.step if dead else 0.0
            untold += dead + outlier_remark(fit, answer)
        fitted.append(told)
        linear.append(begun)
        remarks += untold
    if not rows.both_ways:
        remarks.append(
            "it turned one way only: Coulomb friction and a constant torque cannot be told apart, and"
            f" {shaft_names(Shape.ONE_WAY, rows)[-1].value} holds the sum of both"
        )
    return ShaftEvidence(
        fitted=tuple(fitted), linear=tuple(linear), fit_percent=percent, remarks=tuple(remarks), late=late
    )


def _too_little(work: Record, rows: ShaftRows) -> str:
    """Why there are too few rows: it rests, or it was logged too slowly."""
    if not np.any(np.abs(rows.smoothed) > rows.slow):
        return "nothing moved: this log tells nothing of inertia and friction"
    if float(np.ptp(rows.smoothed)) < _STEADY * float(np.abs(rows.smoothed).max()):
        return (
            "it ran at one speed all the time: nothing tells inertia from friction; record steps of speed or voltage,"
            " or call the experiment no-load"
        )
    return (
        f"too few rows for inertia and friction: the log has {work.size}, {1.0 / work.step:.4g} a second; record some"
        " hundred rows and more, ten and more in each mechanical time constant"
    )


def _goes_against(rows: ShaftRows, shape: Shape) -> bool:
    """Whether the acceleration is surely against the drive."""
    found = regress(rows.drive, np.vstack((rows.acceleration, shaft_columns(rows, shape))))
    return bool(
        found.values[0] + _SURE_AGAINST * np.sqrt(found.covariance[0, 0]) < 0.0 and found.fit_percent > _AGAINST_FIT
    )


def _floors(names: tuple[EstimateName, ...], rows: ShaftRows) -> Array:
    """What may be zero counts as told to within these [SI]."""
    drive = float(np.sqrt(np.mean(rows.drive**2)))
    speed = float(np.sqrt(np.mean(rows.speed**2)))
    floors = []
    for name in names:
        if name is EstimateName.INERTIA:
            floors.append(0.0)
        elif "viscous" in name.value:
            floors.append(_ZERO * drive / speed)
        else:
            floors.append(_ZERO * drive)
    return np.array(floors)


def _output_error(work: Record, rows: ShaftRows, shape: Shape, first: Regression, *, segment: int | None) -> Fit:
    drive = max(float(np.sqrt(np.mean(rows.drive**2))), 1e-300)
    speed = max(float(np.sqrt(np.mean(rows.speed**2))), 1e-300)
    rate = max(float(np.sqrt(np.mean(rows.acceleration**2))), 1e-300)
    start = first.values.copy()
    if not start[0] > 1e-3 * drive / rate:
        start[0] = drive / rate
    viscous = {Shape.EVEN: [1], Shape.ONE_WAY: [1], Shape.BY_WAY: [1, 3]}[shape]
    start[viscous] = np.maximum(start[viscous], 0.0)
    size = np.array([drive / rate, *[drive] * shape.count, 1.0])
    size[viscous] = drive / speed
    shift = rows.lag - 0.5
    lower, upper = np.full(size.size, -np.inf), np.full(size.size, np.inf)
    lower[0], upper[0] = start[0] / _FACTOR, start[0] * _FACTOR
    lower[viscous] = 0.0
    if shape is Shape.EVEN:
        lower[2] = 0.0
        start[2] = max(start[2], 0.0)
    lower[-1], upper[-1] = shift - _SHIFTS, shift + _SHIFTS
    is_angle = not work.has(SignalName.SPEED)
    model = MotionModel(
        recorded=soften(work.signals[SignalName.ANGLE if is_angle else SignalName.SPEED], work.bounds),
        is_angle=is_angle,
        speed=rows.smoothed,
        drive=soften(work.signals[SignalName.TORQUE], work.bounds),
        step=work.step,
        pieces=work.bounds,
        shape=shape,
        size=size,
    )
    free = fit_output(model, np.append(start, shift), lower=lower, upper=upper, segment=segment)
    return fit_following(model, free, drive=work.signals[SignalName.TORQUE], lower=lower, upper=upper)
