"""Driven runs: any excitation, with voltage, current or torque, and the motion that it makes."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError
from gainbench.evidence.estimate import Estimate, EstimateName, Ratio, Told
from gainbench.evidence.friction_curve import friction_curve, with_sign_of
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.prepared import Record
from gainbench.evidence.regression import regress
from gainbench.evidence.shaft_fit import fit_shaft
from gainbench.evidence.smoothing import speed_of
from gainbench.evidence.telling import tell, without
from gainbench.evidence.winding_fit import fit_winding
from gainbench.model import SignalName
from gainbench.plant import Plant

Array = NDArray[np.float64]

_WIDEST = 0.5
"""Share of a value that its doubt may be for it to be told."""
_GUESSED = 0.2
"""Share to which a correction that rests on the sheet's values is trusted."""


def smoothed_speed(record: Record) -> Array:
    """Speed at every sample of a record, from its speed or its angle [rad/s]."""
    is_angle = not record.has(SignalName.SPEED)
    signal = record.signals[SignalName.ANGLE if is_angle else SignalName.SPEED]
    return speed_of(signal, record.step, angle=is_angle, bounds=record.bounds)


def has_motion(record: Record) -> bool:
    """Whether a record holds a speed or an angle."""
    return record.has(SignalName.SPEED) or record.has(SignalName.ANGLE)


def driven(record: Record, plant: Plant, *, earlier: Mapping[EstimateName, Estimate] | None = None) -> Outcome:
    """Identify from a driven run.

    With torque, or with current and the torque constant: inertia, friction evenly and by direction, offset. With
    voltage and current as well R, L and Ke. With voltage alone the sheet's R and Ke turn it into a torque. A dead time
    between the columns is fitted and said.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s], and voltage [V], current [A] or torque [N m].
    plant : Plant
        As the sheet has it: for what the log cannot tell, and to begin from.
    earlier : mapping, optional
        What other logs tell, SI: before the sheet for what this one cannot tell.

    Returns
    -------
    Outcome
        SI.

    Raises
    ------
    LogError
        If the columns do not do for this experiment.
    """
    if not has_motion(record):
        raise LogError(
            f"{record.name}: a driven run takes a column of speed or angle, and this log has none; map one to it in"
            " [evidence.columns], or call the experiment locked-rotor if the rotor was held"
        )
    drives = [name for name in (SignalName.TORQUE, SignalName.CURRENT, SignalName.VOLTAGE) if record.has(name)]
    if not drives:
        raise LogError(
            f"{record.name}: a driven run takes a column of torque, current or voltage, and this log has none; map one"
            " to it in [evidence.columns], or call the experiment coast-down if nothing drove it"
        )
    if drives[0] is SignalName.VOLTAGE:
        return _by_voltage(record, plant)
    fitted: list[Told] = []
    linear: list[Told] = []
    remarks: list[str] = []
    electrical = np.array([plant.resistance, plant.inductance, plant.back_emf])
    if drives[0] is SignalName.CURRENT and float(record.signals[SignalName.CURRENT].min()) >= 0.0:
        unsigned = with_sign_of(smoothed_speed(record), record.signals[SignalName.CURRENT])
        if unsigned is not None:
            return unsigned_current(record, unsigned)
    per = None if drives[0] is SignalName.TORQUE else EstimateName.TORQUE_CONSTANT
    shaft = fit_shaft(record, record.signals[drives[0]], per=per)
    offset = 0.0
    if shaft.against and not record.has(SignalName.CURRENT, SignalName.VOLTAGE):
        refuse_signs(record.name, drives[0].value, "motion")
    if record.has(SignalName.CURRENT, SignalName.VOLTAGE):
        start = np.array([plant.resistance, plant.inductance])
        late = shaft.late / record.step if drives[0] is SignalName.CURRENT else 0.0
        share = plant.inductance * plant.torque * plant.back_emf / (plant.resistance**2 * plant.inertia)
        winding = fit_winding(record, turning=True, start=start, late=late, share=share, earlier=earlier)
        if shaft.against or winding.against:
            refuse_signs(record.name, *_wrong(winding.against, against=shaft.against))
        electrical = winding.values
        offset = winding.offset / float(winding.values[0])
        fitted.append(winding.fitted)
        linear.append(winding.linear)
        remarks += winding.remarks
    if drives[0] is SignalName.TORQUE and record.has(SignalName.CURRENT):
        constant = _torque_constant(record)
        fitted.append(constant)
        linear.append(constant)
    mechanical, by_regression = shaft.fitted, shaft.linear
    if per is not None and offset:
        mechanical, said = _without_offset(mechanical, offset)
        by_regression, _ = _without_offset(by_regression, offset)
        remarks += said
    if per is not None:
        mechanical = tuple(_between_samples(told, electrical, plant, step=record.step) for told in mechanical)
    return Outcome(
        fitted=(*fitted, *mechanical),
        linear=(*linear, *by_regression),
        fit_percent=shaft.fit_percent,
        remarks=(*remarks, *shaft.remarks),
    )


def _without_offset(told: Sequence[Told], offset: float) -> tuple[tuple[Told, ...], list[str]]:
    """The same without what an offset of the current [A] would be most of: constant torques in either direction."""
    constant = {
        EstimateName.TORQUE_OFFSET,
        EstimateName.COULOMB_FRICTION_FORWARD,
        EstimateName.COULOMB_FRICTION_BACKWARD,
    }
    found, lost = [], []
    for one in told:
        covariance = one.covariance.copy()
        keep = []
        for index, ratio in enumerate(one.ratios):
            if ratio.of in constant:
                covariance[index, index] += offset**2
                if 2.0 * abs(offset) > _WIDEST * abs(float(one.values[index])):
                    lost.append(ratio.of.words)
                    continue
            keep.append(index)
        found.append(
            Told(
                ratios=tuple(one.ratios[index] for index in keep),
                values=one.values[keep],
                covariance=covariance[np.ix_(keep, keep)],
                spare=one.spare,
            )
        )
    remarks = [
        f"an offset of the current by {abs(offset):.3g} A would be most of it: {one} is not told" for one in lost
    ]
    return tuple(found), remarks


def refuse_signs(name: str, *signals: str) -> None:
    """Say which column has the wrong sign.

    Parameters
    ----------
    name : str
        The file's name.
    *signals : str
        One signal, or those of which one has it.

    Raises
    ------
    LogError
        Always.
    """
    one = len(signals) == 1
    which = f"the {signals[0]} has" if one else f"the {' or the '.join(signals)} has"
    raise LogError(
        f"{name}: {which} the wrong sign: resistance, constant or inertia come out negative with it; positive current"
        " has to accelerate towards positive speed, and positive voltage to drive positive current. Give"
        f" {'its' if one else 'one'} column scale = -1 in [evidence.columns]"
    )


def _wrong(negative: tuple[EstimateName, ...], *, against: bool) -> tuple[str, ...]:
    """Which signal turns the signs of just these: of v = R i + Ke w, and of the acceleration over the current."""
    resistance, constant = (one in negative for one in (EstimateName.RESISTANCE, EstimateName.BACK_EMF_CONSTANT))
    if resistance and constant and not against:
        return ("voltage",)
    if constant and against and not resistance:
        return ("speed or angle",)
    if resistance and against and not constant:
        return ("current",)
    return ("voltage", "current", "motion")


def _between_samples(told: Told, electrical: Array, plant: Plant, *, step: float) -> Told:
    """The same with the inertia's variance raised by what a current may do between its samples.

    Where a voltage steps, the slope of the current breaks by ``dV/L``; the sum over samples is off by ``h^2/12`` of it,
    against the ``dV/R`` over the mechanical time constant that the step makes in all.
    """
    _, inductance, constant = electrical
    covariance = told.covariance.copy()
    for index, ratio in enumerate(told.ratios):
        if ratio.of is EstimateName.INERTIA:
            inertia = float(told.values[index]) * constant * plant.torque / plant.back_emf
            share = step**2 / 12.0 * constant**2 * (plant.torque / plant.back_emf) / (inductance * inertia)
            covariance[index, index] += (min(share, 0.1) * float(told.values[index])) ** 2
    return Told(ratios=told.ratios, values=told.values, covariance=covariance, spare=told.spare)


def unsigned_current(record: Record, current: Array) -> Outcome:
    """What a log tells whose current has no sign: friction, from its steady parts.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s].
    current : ndarray, shape (n,)
        With the sign of the speed [A].
    """
    found = friction_curve(record, current, per=EstimateName.TORQUE_CONSTANT, signed=False, unloaded=False)
    remark = (
        "the current has no sign and was given that of the speed: that holds only while it runs steadily, so that"
        " inertia cannot be told"
    )
    return Outcome(
        fitted=found.fitted, linear=found.linear, fit_percent=found.fit_percent, remarks=(remark, *found.remarks)
    )


def _torque_constant(record: Record) -> Told:
    current, torque = record.signals[SignalName.CURRENT], record.signals[SignalName.TORQUE]
    found = regress(torque, np.array([current, np.ones_like(current)]))
    ratios = (Ratio(of=EstimateName.TORQUE_CONSTANT),)
    return tell(ratios, found.values[:1], found.covariance[:1, :1], spare=found.spare, floors=np.zeros(1))[0]


def _by_voltage(record: Record, plant: Plant) -> Outcome:
    """The winding taken as R and Ke: Kt v/R drives, and Kt Ke/R brakes as viscous friction does."""
    gain = plant.torque / plant.resistance
    shaft = fit_shaft(record, record.signals[SignalName.VOLTAGE] * gain, per=None)
    viscous = {
        EstimateName.VISCOUS_FRICTION,
        EstimateName.VISCOUS_FRICTION_FORWARD,
        EstimateName.VISCOUS_FRICTION_BACKWARD,
    }
    remark = (
        "the log has no current: the sheet's resistance and torque constant turned the voltage into a torque, and"
        " resistance, inductance, constant and viscous friction cannot be told"
    )
    # The current lags behind the voltage that is left: to first order the inertia looks smaller by Kt Ke L/R^2.
    hidden = gain * plant.back_emf * plant.inductance / plant.resistance
    kept = [_heavier(without(told, viscous), hidden) for told in shaft.fitted]
    begun = [_heavier(without(told, viscous), hidden) for told in shaft.linear]
    # The winding's own lag looks like a dead time.
    own = abs(shaft.late - plant.inductance / plant.resistance) < 1.5 * record.step
    remarks = [one for one in shaft.remarks if "viscous" not in one and not (own and one.startswith("dead time"))]
    return Outcome(fitted=tuple(kept), linear=tuple(begun), fit_percent=shaft.fit_percent, remarks=(remark, *remarks))


def _heavier(told: Told, hidden: float) -> Told:
    """The same with an inertia that is larger, and less sure by a fifth of what was added [kg m^2]."""
    values, covariance = told.values.copy(), told.covariance.copy()
    for index, ratio in enumerate(told.ratios):
        if ratio.of is EstimateName.INERTIA:
            values[index] += hidden
            covariance[index, index] += (_GUESSED * hidden) ** 2
    return Told(ratios=told.ratios, values=values, covariance=covariance, spare=told.spare)
