"""What the estimates say a log should have been, over what it was: the check that an eye can make of a fit."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.coast_down import falling
from gainbench.evidence.driven import has_motion, smoothed_speed
from gainbench.evidence.estimate import Estimate, EstimateName
from gainbench.evidence.friction_curve import with_sign_of
from gainbench.evidence.log import Log
from gainbench.evidence.motion_model import MotionModel, Shape
from gainbench.evidence.output_error import Model
from gainbench.evidence.prepared import Record, prepare, stretches, thin, without_clipped
from gainbench.evidence.shaft_fit import MOST_ROWS as SHAFT_ROWS
from gainbench.evidence.shifting import soften
from gainbench.evidence.smoothing import speed_of
from gainbench.evidence.winding_fit import MOST_ROWS as WINDING_ROWS
from gainbench.evidence.winding_model import WindingModel
from gainbench.model import Experiment, Sheet, SignalName
from gainbench.plant import Plant, refer

Array = NDArray[np.float64]

_COARSE = np.arange(-12.5, 12.0, 1.0)
_FINE = np.arange(-0.75, 0.76, 0.25)
"""Dead times that are tried, in samples."""
_FEWEST = 60


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FittedTrace:
    """One signal of a log, and the same signal as the estimates have it; unbroken pieces laid end to end."""

    signal: SignalName
    step: float
    """From sample to sample [s]."""
    bounds: NDArray[np.int64]
    """First sample of each unbroken piece and n at the end, shape (n_pieces + 1,)."""
    measured: Array
    """SI, shape (n,)."""
    fitted: Array
    """SI, shape (n,)."""
    free_running: bool
    """Whether a model ran over each piece from a fitted start; False where it is put together row by row."""

    @property
    def time(self) -> Array:
        """From the first sample on [s], shape (n,)."""
        return self.step * np.arange(self.measured.size, dtype=np.float64)

    @property
    def residual(self) -> Array:
        """Measured less fitted, shape (n,)."""
        return self.measured - self.fitted

    @property
    def fit_percent(self) -> float:
        """``100 (1 - |residual|/|measured - its mean|)``."""
        around = float(np.linalg.norm(self.measured - self.measured.mean()))
        return 100.0 * (1.0 - float(np.linalg.norm(self.residual)) / around) if around > 0.0 else 0.0


def fitted_traces(
    sheet: Sheet, log: Log, *, experiment: Experiment, estimates: Mapping[EstimateName, Estimate]
) -> tuple[FittedTrace, ...]:
    """Run the models of a log with what was identified, from all logs together.

    The current under the logged voltage, ``L di/dt = v - R i - Ke w``, and the speed under the logged drive,
    ``J dw/dt = drive - b w - Tc sgn(w) - offset``, each over whole unbroken pieces from a fitted start and with a
    fitted dead time; a fit restarts its model more often, so that its own percentage is the higher one. A no-load run
    is put together row by row, ``i = (b w + Tc sgn(w) + offset)/Kt`` and ``v = R i + Ke w``, which holds while the
    speed is steady. What is not among the estimates is the sheet's.

    Parameters
    ----------
    sheet : Sheet
        For what the estimates do not tell.
    log : Log
        As it was identified from, cut as it was.
    experiment : Experiment
        What it was; step checks and frequency responses have no such traces.
    estimates : mapping
        Of :class:`gainbench.evidence.estimate.Identification`.

    Returns
    -------
    tuple of FittedTrace
        Speed, current, voltage; none for what the log does not hold.
    """
    record = without_clipped(prepare(log))
    if record.size < _FEWEST:
        return ()
    values = _Values(refer(sheet.rig), estimates)
    if experiment is Experiment.COAST_DOWN:
        return (_coasting(record, values),) if has_motion(record) else ()
    if experiment is Experiment.LOCKED_ROTOR:
        return _current(record, values, turning=False)
    if experiment is Experiment.NO_LOAD:
        return _steady(record, values) if has_motion(record) else ()
    if experiment is Experiment.DRIVEN and has_motion(record):
        if _unsigned(record) is not None:
            return _steady(record, values)
        return (*_speed(record, values), *_current(record, values, turning=True))
    return ()


class _Values:
    """Estimates, and the sheet's values for what is not estimated."""

    def __init__(self, plant: Plant, estimates: Mapping[EstimateName, Estimate]) -> None:
        name = EstimateName
        self._estimates = estimates
        self.resistance = self._or(name.RESISTANCE, plant.resistance)
        self.inductance = self._or(name.INDUCTANCE, plant.inductance)
        self.back_emf = self._or(name.BACK_EMF_CONSTANT, plant.back_emf)
        self.torque = self._or(name.TORQUE_CONSTANT, plant.torque)
        self.inertia = self._or(name.INERTIA, plant.inertia)
        self.viscous = max(0.0, self._or(name.VISCOUS_FRICTION, plant.viscous))
        even = self._or(name.COULOMB_FRICTION, plant.coulomb)
        offset = self._or(name.TORQUE_OFFSET, 0.0)
        forward, backward = even + offset, even - offset
        if name.COULOMB_FRICTION not in estimates:
            forward = self._or(name.COULOMB_FRICTION_FORWARD, self._or(name.COULOMB_FRICTION_BACKWARD, forward))
            backward = self._or(name.COULOMB_FRICTION_BACKWARD, self._or(name.COULOMB_FRICTION_FORWARD, backward))
        self.forward, self.backward = forward, backward
        """Drag of both directions [N m]."""

    def _or(self, name: EstimateName, believed: float) -> float:
        return self._estimates[name].value if name in self._estimates else believed


def _unsigned(record: Record) -> Array | None:
    """The current with the sign of the speed, where it has none of its own."""
    if record.has(SignalName.TORQUE) or not record.has(SignalName.CURRENT):
        return None
    current = record.signals[SignalName.CURRENT]
    return with_sign_of(smoothed_speed(record), current) if float(current.min()) >= 0.0 else None


def _motion(record: Record) -> SignalName:
    return SignalName.SPEED if record.has(SignalName.SPEED) else SignalName.ANGLE


def _speed(record: Record, values: _Values) -> tuple[FittedTrace, ...]:
    """The speed under torque, current or voltage, in the order in which a fit takes them."""
    viscous, inertia = values.viscous, values.inertia
    if record.has(SignalName.TORQUE):
        drive = record.signals[SignalName.TORQUE]
    elif record.has(SignalName.CURRENT):
        drive = values.torque * record.signals[SignalName.CURRENT]
    elif record.has(SignalName.VOLTAGE):
        gain = values.torque / values.resistance
        drive = gain * record.signals[SignalName.VOLTAGE]
        viscous = viscous + gain * values.back_emf
        inertia = max(0.1 * inertia, inertia - gain * values.back_emf * values.inductance / values.resistance)
    else:
        return ()
    name = _motion(record)
    signals = {name: record.signals[name], SignalName.TORQUE: drive}
    work = Record(name=record.name, step=record.step, bounds=record.bounds, signals=signals, remarks=())
    work = thin(work, -(-work.size // SHAFT_ROWS))
    model = MotionModel(
        recorded=soften(work.signals[name], work.bounds),
        is_angle=name is SignalName.ANGLE,
        speed=speed_of(work.signals[name], work.step, angle=name is SignalName.ANGLE, bounds=work.bounds),
        drive=soften(work.signals[SignalName.TORQUE], work.bounds),
        step=work.step,
        pieces=work.bounds,
        shape=Shape.BY_WAY,
        size=np.ones(6),
    )
    known = np.array([inertia, viscous, values.forward, viscous, values.backward])
    return (_shifted(model, known, signal=SignalName.SPEED, step=work.step),)


def _current(record: Record, values: _Values, *, turning: bool) -> tuple[FittedTrace, ...]:
    if not record.has(SignalName.CURRENT, SignalName.VOLTAGE):
        return ()
    work = stretches(record, WINDING_ROWS, by=SignalName.CURRENT)
    speed = soften(smoothed_speed(work), work.bounds) if turning else None
    model = WindingModel(
        measured=soften(work.signals[SignalName.CURRENT], work.bounds),
        voltage=soften(work.signals[SignalName.VOLTAGE], work.bounds),
        speed=speed,
        step=work.step,
        pieces=work.bounds,
        size=np.ones(4 if turning else 3),
    )
    known = np.array([values.resistance, values.inductance, *([values.back_emf] if turning else [])])
    return (_shifted(model, known, signal=SignalName.CURRENT, step=work.step),)


def _coasting(record: Record, values: _Values) -> FittedTrace:
    """The speed from its highest value on, as the fit of a coast-down sees it."""
    fall = falling(record)
    work = fall.work
    model = MotionModel(
        recorded=soften(fall.signal, fall.bounds),
        is_angle=fall.is_angle,
        speed=fall.speed,
        drive=None,
        step=work.step,
        pieces=fall.bounds,
        shape=Shape.ONE_WAY,
        size=np.ones(2),
    )
    known = np.array([values.viscous, 0.5 * (values.forward + values.backward)]) / values.inertia
    return FittedTrace(
        signal=SignalName.SPEED,
        step=work.step,
        bounds=fall.bounds,
        measured=model.measured,
        fitted=_output(model, known),
        free_running=True,
    )


def _steady(record: Record, values: _Values) -> tuple[FittedTrace, ...]:
    """Drive and voltage, row by row, as if the speed stood still at each."""
    name = _motion(record)
    drives = [one for one in (SignalName.TORQUE, SignalName.CURRENT) if record.has(one)]
    signals = dict(record.signals)
    unsigned = _unsigned(record)
    if unsigned is not None:
        signals[SignalName.CURRENT] = unsigned
    work = Record(name=record.name, step=record.step, bounds=record.bounds, signals=signals, remarks=())
    work = thin(work, -(-work.size // SHAFT_ROWS))
    speed = speed_of(work.signals[name], work.step, angle=name is SignalName.ANGLE, bounds=work.bounds)
    found = []
    if drives:
        torque = values.viscous * speed + np.where(speed > 0.0, values.forward, -values.backward)
        if drives[0] is SignalName.CURRENT:
            torque = torque / values.torque
        found.append((drives[0], torque))
    if work.has(SignalName.VOLTAGE):
        drop = values.resistance * work.signals[SignalName.CURRENT] if work.has(SignalName.CURRENT) else 0.0
        found.append((SignalName.VOLTAGE, drop + values.back_emf * speed))
    return tuple(
        FittedTrace(
            signal=signal,
            step=work.step,
            bounds=work.bounds,
            measured=work.signals[signal],
            fitted=np.asarray(fitted),
            free_running=False,
        )
        for signal, fitted in found
    )


def _shifted(model: Model, known: Array, *, signal: SignalName, step: float) -> FittedTrace:
    """The model's run with the dead time that lies best on the log."""

    def off(shift: float) -> float:
        return float(np.linalg.norm(model.measured - _output(model, np.append(known, shift))))

    middle = min(_COARSE, key=off)
    shift = min(middle + _FINE, key=off)
    return FittedTrace(
        signal=signal,
        step=step,
        bounds=model.pieces,
        measured=model.measured,
        fitted=_output(model, np.append(known, shift)),
        free_running=True,
    )


def _output(model: Model, values: Array) -> Array:
    """The output over whole pieces, from starts that lie best on the log."""
    from gainbench.kernels.identify_reduce import project

    starts = model.first_starts(model.pieces)
    for last in (False, True):
        found = model.run(values, model.pieces, starts=starts, nudge=0.0)
        if last:
            break
        rows = np.ascontiguousarray((model.measured - found.output)[None])
        starts = starts + project(rows, found.nuisance, model.pieces)
    return found.output
