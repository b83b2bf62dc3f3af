"""Resistance, inductance and back-EMF constant from voltage, current and, where it turns, speed."""

from __future__ import annotations

import itertools
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.estimate import EstimateName, Ratio, Told
from gainbench.evidence.input_noise import input_noise, undrawn
from gainbench.evidence.lag import best_lag
from gainbench.evidence.output_error import Fit, fit_output
from gainbench.evidence.prepared import Record, stretches, thinned
from gainbench.evidence.regression import Regression, regress
from gainbench.evidence.shifting import delayed, soften
from gainbench.evidence.smoothing import noise_cut, smooth, speed_of
from gainbench.evidence.telling import dead_time_remark, tell
from gainbench.evidence.winding_model import WindingModel
from gainbench.model import SignalName

Array = NDArray[np.float64]

MOST_ROWS = 30_000
"""Of a winding that is fitted."""
_MOVES = 20.0
"""Fit in percent below which the current did not move enough to tell more than a resistance."""
_MUCH_BETTER = 0.4
"""Share of the squares that a lag must leave to be begun with: some of a winding's own lag looks like one."""
_ENDS = 3
"""Rows at either end of a piece that the filters reach beyond."""
_FACTOR = 30.0
"""By which a resistance, an inductance and a constant may leave their start in the fit."""
_STRAIGHT, _STEPPED = -0.5, 0.0
"""Dead times in samples of a voltage that goes straight from sample to sample, and of one that steps at them."""
_SURE_SHIFT = 0.3
"""Standard deviation in samples above which a dead time is not told."""
_SIGNS = 4.0
_SHIFTS = 12.0
"""Samples by which the dead time may leave its start."""


@dataclass(frozen=True, slots=True, kw_only=True)
class WindingEvidence:
    """What a log tells of the winding."""

    fitted: Told
    linear: Told
    fit_percent: float
    remarks: tuple[str, ...]
    values: Array
    """R [ohm], L [H] and, where it turns, Ke [V s/rad], as fitted, told or not."""


def fit_winding(record: Record, *, turning: bool, start: Array, late: float = 0.0) -> WindingEvidence:
    """Fit ``v = R i + L di/dt + Ke w``: linear regression on smoothed signals, then the output error of the current.

    A long log is stood for by stretches of it, every row of them: a winding is too fast to be thinned.

    Parameters
    ----------
    record : Record
        With voltage [V] and current [A], and with a speed [rad/s] or an angle [rad] where it turned.
    turning : bool
        False where the rotor was locked.
    start : ndarray, shape (2,)
        R [ohm] and L [H] as they are believed to be: only for where the regression gives none.
    late : float
        Samples by which the motion is stamped later than the current, in the record's own.

    Returns
    -------
    WindingEvidence
        SI.
    """
    work = stretches(record, MOST_ROWS, by=SignalName.CURRENT)
    signals = {name: work.signals[name] for name in (SignalName.VOLTAGE, SignalName.CURRENT)}
    if turning:
        is_angle = not work.has(SignalName.SPEED)
        signal = work.signals[SignalName.ANGLE if is_angle else SignalName.SPEED]
        speed = speed_of(signal, work.step, angle=is_angle, bounds=work.bounds)
        signals[SignalName.SPEED] = delayed(speed, -late, work.bounds) if late else speed
    own = Record(name=work.name, step=work.step, bounds=work.bounds, signals=signals, remarks=())
    linear, lag = _linear(own)
    remarks = []
    if own.size < record.size:
        remarks.append(
            f"the winding was fitted to {own.bounds.size - 1} stretches of the log: {own.size} of {record.size} rows"
        )
    return _fitted(own, linear, lag, believed=start, remarks=remarks)


def _linear(work: Record) -> tuple[Regression, int]:
    current = work.signals[SignalName.CURRENT]
    cut = float(np.median([noise_cut(current[first:last], work.step, integrated=1) for first, last in _spans(work)]))
    factor = max(1, int(0.9 / (cut * work.step)))
    turns = SignalName.SPEED in work.signals
    rows: list[Array] = []
    targets: list[Array] = []
    lag = 0
    for number, (first, last) in enumerate(_spans(work)):
        smoothed = smooth(current[first:last], work.step, cut=cut)
        columns = [smoothed, np.gradient(smoothed, work.step)]
        if turns:
            columns.append(smooth(work.signals[SignalName.SPEED][first:last], work.step, cut=cut))
        voltage = smooth(work.signals[SignalName.VOLTAGE][first:last], work.step, cut=cut)
        if number == 0:
            lag = best_lag(voltage, np.array(columns), step=work.step, better=_MUCH_BETTER)
        voltage = _moved(voltage, lag)
        keep = slice(_ENDS, -_ENDS) if (last - first) // factor > 4 * _ENDS else slice(None)
        rows.append(np.array([thinned(column, factor)[keep] for column in columns]))
        targets.append(thinned(voltage, factor)[keep])
    return regress(np.concatenate(targets), np.hstack(rows)), lag


def _spans(work: Record) -> list[tuple[int, int]]:
    return [(int(first), int(last)) for first, last in itertools.pairwise(work.bounds)]


def _moved(values: Array, lag: int) -> Array:
    """A signal as it acts, ``lag`` samples after its stamps, its ends held."""
    return values[np.clip(np.arange(values.size) - lag, 0, values.size - 1)]


def _fitted(work: Record, linear: Regression, lag: int, *, believed: Array, remarks: list[str]) -> WindingEvidence:
    turns = SignalName.SPEED in work.signals
    current, voltage = work.signals[SignalName.CURRENT], work.signals[SignalName.VOLTAGE]
    start = linear.values.copy()
    start[:2] = np.where(start[:2] > 0.0, start[:2], believed)
    if turns:
        start[2] = abs(start[2]) or 1e-3
    size = np.append(start, 1.0)
    shift = lag - 0.5
    lower, upper = np.append(start / _FACTOR, shift - _SHIFTS), np.append(start * _FACTOR, shift + _SHIFTS)
    model = WindingModel(
        measured=soften(current, work.bounds),
        voltage=soften(voltage, work.bounds),
        speed=soften(work.signals[SignalName.SPEED], work.bounds) if turns else None,
        step=work.step,
        pieces=work.bounds,
        size=size,
    )
    fit = fit_output(model, np.append(start, shift), lower=lower, upper=upper)
    fit = _with_held_voltage(model, fit, lower=lower, upper=upper)
    noise = input_noise(fit, model.keep(fit.values))
    values = np.clip(undrawn(fit, size=size, noise=noise, step=work.step), lower, upper)
    names = (EstimateName.RESISTANCE, EstimateName.INDUCTANCE, *((EstimateName.BACK_EMF_CONSTANT,) if turns else ()))
    ratios = tuple(Ratio(of=name) for name in names)
    count = len(ratios)
    floors = np.zeros(count)
    covariance = fit.covariance[:count, :count].copy()
    if fit.fit_percent < _MOVES:
        # What moves is noise, and noise on the voltage looks like an excitation.
        covariance[1:, :] = covariance[:, 1:] = 0.0
        covariance[range(1, count), range(1, count)] = values[1:count] ** 2
    fitted, untold = tell(ratios, values[:count], covariance, spare=fit.spare, floors=floors)
    first, _ = tell(ratios, linear.values, linear.covariance, spare=linear.spare, floors=floors)
    remarks = [
        *remarks,
        *untold,
        *dead_time_remark("voltage", "current", fit, work.step),
        *outlier_remark(fit, "current"),
    ]
    return WindingEvidence(
        fitted=fitted,
        linear=first,
        fit_percent=fit.fit_percent,
        remarks=tuple(remarks),
        values=values[:count],
    )


def _with_held_voltage(model: WindingModel, fit: Fit, *, lower: Array, upper: Array) -> Fit:
    """The fit itself where it tells the dead time; else without one, between the two ways a voltage may be held.

    An excitation that is slow against the winding does not tell an inductance from a dead time. Then there is none, and
    the voltage either steps at its samples or goes straight from one to the next: what is between both is doubt.
    """
    deviation = float(np.sqrt(max(fit.covariance[-1, -1], 0.0)))
    far = max(_STRAIGHT - fit.values[-1], fit.values[-1] - _STEPPED, 0.0)
    if deviation < _SURE_SHIFT or far > _SIGNS * deviation:
        return fit
    # A dead time of next to no size is as good as known.
    known = replace(model, size=np.append(model.size[:-1], 1e-9))
    both = []
    for shift in (_STRAIGHT, _STEPPED):
        low, high = np.append(lower[:-1], shift - 1e-9), np.append(upper[:-1], shift + 1e-9)
        both.append(fit_output(known, np.append(fit.values[:-1], shift), lower=low, upper=high, segment=fit.segment))
    apart = 0.5 * (both[0].values - both[1].values)
    apart[-1] = 0.0
    middle = both[0]
    return replace(
        middle,
        values=0.5 * (both[0].values + both[1].values),
        covariance=middle.covariance + np.outer(apart, apart) / 3.0,
    )


def outlier_remark(fit: Fit, signal: str) -> list[str]:
    """What is to be said of outliers, in words."""
    if not fit.outliers:
        return []
    return [f"{signal}: {fit.outliers} sample{'s' if fit.outliers > 1 else ''} far off the fit left out"]
