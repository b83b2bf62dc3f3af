"""No-load runs: the friction curve, and the back-EMF constant from the voltage that turning takes."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError
from gainbench.evidence.driven import has_motion, smoothed_speed
from gainbench.evidence.estimate import Estimate, EstimateName, Ratio, Told
from gainbench.evidence.friction_curve import friction_curve, with_sign_of
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.prepared import Record, thin
from gainbench.evidence.regression import regress
from gainbench.evidence.shaft_fit import MOST_ROWS, shaft_rows
from gainbench.evidence.telling import tell
from gainbench.model import SignalName
from gainbench.plant import Plant

Array = NDArray[np.float64]

_FEWEST = 20
_GUESSED = 0.2
"""Share to which the sheet's resistance is trusted."""


def no_load(record: Record, plant: Plant, *, earlier: Mapping[EstimateName, Estimate] | None = None) -> Outcome:
    """Identify from a run without a load.

    Friction from torque, or from current and the torque constant, over its steady parts. The back-EMF constant from
    ``v - R i = Ke w`` with the resistance that other logs tell, or the sheet's, whose drop is small without a load.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s], and torque [N m] or current [A], or voltage [V], or both.
    plant : Plant
        As the sheet has it: its resistance is used where no other log tells one.
    earlier : mapping, optional
        What other logs tell, SI.

    Returns
    -------
    Outcome
        SI.

    Raises
    ------
    LogError
        If the columns do not do for this experiment.
    """
    drives = [name for name in (SignalName.TORQUE, SignalName.CURRENT) if record.has(name)]
    if not has_motion(record) or not (drives or record.has(SignalName.VOLTAGE)):
        raise LogError(
            f"{record.name}: a no-load run takes a column of speed or angle, and one of current, torque or voltage; map"
            " them in [evidence.columns]"
        )
    fitted: list[Told] = []
    remarks: list[str] = []
    percent: float | None = None
    if drives:
        drive = record.signals[drives[0]]
        unsigned = with_sign_of(smoothed_speed(record), drive) if drives[0] is SignalName.CURRENT else None
        if unsigned is not None:
            drive = unsigned
            remarks.append("the current has no sign and was given that of the speed")
        per = None if drives[0] is SignalName.TORQUE else EstimateName.TORQUE_CONSTANT
        found = friction_curve(record, drive, per=per, signed=unsigned is None, unloaded=True)
        fitted += found.fitted
        remarks += found.remarks
        percent = found.fit_percent
    if record.has(SignalName.VOLTAGE):
        current = record.signals.get(SignalName.CURRENT)
        constant, own, fit = _constant(record, plant, current, (earlier or {}).get(EstimateName.RESISTANCE))
        fitted.append(constant)
        remarks += own
        percent = fit if percent is None else percent
    return Outcome(fitted=tuple(fitted), linear=tuple(fitted), fit_percent=percent, remarks=tuple(remarks))


def _constant(
    record: Record, plant: Plant, current: Array | None, earlier: Estimate | None
) -> tuple[Told, list[str], float]:
    """The back-EMF constant over the steady rows, what is to be said of it, and how well it fits."""
    name = SignalName.SPEED if record.has(SignalName.SPEED) else SignalName.ANGLE
    drop = record.signals[SignalName.VOLTAGE]
    resistance = plant.resistance if earlier is None else earlier.value
    doubt = _GUESSED * resistance if earlier is None else 0.25 * (earlier.high - earlier.low)
    if current is not None:
        signed = with_sign_of(smoothed_speed(record), current)
        current = current if signed is None else signed
        drop = drop - resistance * current
    signals = {name: record.signals[name], SignalName.TORQUE: drop}
    work = Record(name=record.name, step=record.step, bounds=record.bounds, signals=signals, remarks=())
    work = thin(work, -(-work.size // MOST_ROWS))
    rows = shaft_rows(work, work.signals[SignalName.TORQUE])
    ratios = (Ratio(of=EstimateName.BACK_EMF_CONSTANT),)
    if rows.drive.size < _FEWEST:
        return Told(ratios=(), values=np.zeros(0), covariance=np.zeros((0, 0)), spare=1.0), ["nothing moved"], 0.0
    # The inductance's share rises with the acceleration, as the current does.
    found = regress(rows.drive, np.array([rows.speed, rows.acceleration]))
    covariance = found.covariance[:1, :1].copy()
    if current is not None:
        # What the constant moves by with the resistance: the current's own share of the speed.
        speed = smoothed_speed(record)
        covariance += (doubt * float(current @ speed) / max(float(speed @ speed), 1e-300)) ** 2
    told, remarks = tell(ratios, found.values[:1], covariance, spare=found.spare, floors=np.zeros(1))
    words = "no current was logged: the drop over the resistance is part of the back-EMF constant"
    whose = "the sheet's" if earlier is None else "the other logs'"
    used = f"the back-EMF constant rests on {whose} resistance, {resistance:.4g} ohm, and its doubt"
    return told, [*remarks, words if current is None else used], found.fit_percent
