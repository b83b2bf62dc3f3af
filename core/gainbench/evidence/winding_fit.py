"""Resistance, inductance and back-EMF constant from voltage, current and, where it turns, speed."""

from __future__ import annotations

import itertools
from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.estimate import Estimate, EstimateName, Ratio, Told
from gainbench.evidence.input_noise import input_noise, undrawn
from gainbench.evidence.lag import best_lag
from gainbench.evidence.output_error import Fit, fit_output
from gainbench.evidence.prepared import Record, stretches, thinned
from gainbench.evidence.regression import Regression, regress
from gainbench.evidence.shifting import delayed, soften
from gainbench.evidence.smoothing import noise_cut, smooth, speed_of
from gainbench.evidence.telling import dead_time_remark, tell, without
from gainbench.evidence.winding_model import WindingModel
from gainbench.model import SignalName

Array = NDArray[np.float64]

MOST_ROWS = 15_000
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
_TOO_SLOW = 3.0
"""Time constants L/R from row to row above which an inductance does not show."""
_APART, _PER_APART = 0.6, 0.1
"""Time constants from row to row above which an inductance is doubtful, and its share for each that it is more."""
_PER_TIME_CONSTANT = 2.0
"""Rows in a time constant that an inductance takes."""
_OF_CONSTANT = 0.25
"""Of a resistance's doubt that goes on to the back-EMF constant, by share of both."""
_SURE_AGAINST = 5.0
"""Standard deviations that something is surely not zero."""
_OFFSET = 0.01
"""Share of the voltage's size below which an offset does not matter."""
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
    against: tuple[EstimateName, ...] = ()
    """Of resistance and back-EMF constant what comes out negative: a column has the wrong sign."""
    offset: float = 0.0
    """What voltage and current are off against each other by [V]; 0 where there is surely nothing."""


def fit_winding(
    record: Record,
    *,
    turning: bool,
    start: Array,
    late: float = 0.0,
    share: float = 0.0,
    earlier: Mapping[EstimateName, Estimate] | None = None,
) -> WindingEvidence:
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
    share : float
        The winding's time constant over the mechanical one as they are believed to be, a pure number.
    earlier : mapping, optional
        What other logs tell, SI: where this one does not tell a resistance or an inductance, theirs with its doubt is
        taken, so that what is left can be told.

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
    ratio = float(start[0] / start[1]) * work.step
    linear, lag, offset = _steady(own, work, share) if ratio > _TOO_SLOW else _linear(own)
    against = _against(linear, steady=ratio > _TOO_SLOW)
    if against:
        nothing = Told(ratios=(), values=np.zeros(0), covariance=np.zeros((0, 0)), spare=1.0)
        values = linear.values.copy()
        return WindingEvidence(
            fitted=nothing, linear=nothing, fit_percent=0.0, remarks=(), values=values, against=against
        )
    remarks = []
    if offset:
        signals[SignalName.VOLTAGE] = signals[SignalName.VOLTAGE] - offset
        own = replace(own, signals=signals)
        remarks.append(
            f"voltage and current are off against each other by {offset:.3g} V: it was taken out; where the current is"
            " what is off, the torque offset holds it as well"
        )
    if own.size < record.size:
        remarks.append(
            f"the winding was fitted to {own.bounds.size - 1} stretches of the log: {own.size} of {record.size} rows"
        )
    if ratio > _TOO_SLOW:
        return replace(_by_steady(linear, start, work.step, remarks, earlier=earlier or {}), offset=offset)
    found = _fitted(own, linear, lag, believed=start, remarks=remarks, earlier=earlier or {})
    if found.values[0] * work.step / found.values[1] > _TOO_SLOW:
        steady, _, _ = _steady(own, work, share)
        found = _by_steady(steady, start, work.step, remarks, earlier=earlier or {})
    return replace(found, offset=offset)


def _against(linear: Regression, *, steady: bool) -> tuple[EstimateName, ...]:
    """Which of resistance and constant are surely negative."""
    if linear.fit_percent < _MOVES:
        return ()
    names = (
        (EstimateName.RESISTANCE, EstimateName.BACK_EMF_CONSTANT)
        if steady
        else (EstimateName.RESISTANCE, EstimateName.INDUCTANCE, EstimateName.BACK_EMF_CONSTANT)
    )
    deviation = np.sqrt(np.maximum(np.diag(linear.covariance), 0.0))
    return tuple(
        name
        for name, value, own in zip(names, linear.values, deviation, strict=False)
        if name is not EstimateName.INDUCTANCE and value + _SURE_AGAINST * own < 0.0
    )


def _steady(work: Record, whole: Record, share: float) -> tuple[Regression, int, float]:
    """``v = R i + Ke w`` row by row, for rows that are far apart against the winding's time constant.

    A current that falls while the motor gains speed lowers the voltage by ``L di/dt``, a share of ``R i`` that is the
    winding's time constant over the mechanical one. Rows this far apart do not show it: it is doubt.
    """
    columns = [work.signals[SignalName.CURRENT]]
    if SignalName.SPEED in work.signals:
        # A smoothed speed would lag behind what is measured in the very row.
        columns.append(
            whole.signals[SignalName.SPEED]
            if whole.has(SignalName.SPEED)
            else np.concatenate(
                [np.gradient(whole.signals[SignalName.ANGLE][a:b], work.step) for a, b in _spans(whole)]
            )
        )
    found, offset = _with_offset(work.signals[SignalName.VOLTAGE], np.array(columns))
    doubt = np.array([share, _OF_CONSTANT * share])[: found.values.size] * found.values
    return replace(found, covariance=found.covariance + np.diag(doubt**2)), 0, offset


def _by_steady(
    linear: Regression, believed: Array, step: float, remarks: list[str], *, earlier: Mapping[EstimateName, Estimate]
) -> WindingEvidence:
    """Resistance and constant without an inductance, and which rate that takes."""
    turns = linear.values.size > 1
    names = (EstimateName.RESISTANCE, *((EstimateName.BACK_EMF_CONSTANT,) if turns else ()))
    told, untold = _told_with(linear.values, linear.covariance, names=names, spare=linear.spare, earlier=earlier)
    wanted = _PER_TIME_CONSTANT * float(believed[0] / believed[1])
    said = (
        f"too slow for the inductance: the log has {1.0 / step:.4g} rows a second; with a time constant L/R of about"
        f" {1e3 * float(believed[1] / believed[0]):.3g} ms it takes {wanted:.2g} and more"
    )
    return WindingEvidence(
        fitted=told,
        linear=told,
        fit_percent=linear.fit_percent,
        remarks=(*remarks, said, *untold),
        values=np.insert(linear.values, 1, float(believed[1])),
    )


def _with_offset(target: Array, columns: Array) -> tuple[Regression, float]:
    """A regression, and the constant that the target is off by; zero where there is surely none."""
    plain = regress(target, columns)
    more = regress(target, np.vstack((columns, np.ones(target.size))))
    offset, deviation = float(more.values[-1]), float(np.sqrt(max(more.covariance[-1, -1], 0.0)))
    size = float(np.sqrt(np.mean(target**2)))
    if abs(offset) < max(_SURE_AGAINST * deviation, _OFFSET * size):
        return plain, 0.0
    return replace(more, values=more.values[:-1], covariance=more.covariance[:-1, :-1]), offset


def _linear(work: Record) -> tuple[Regression, int, float]:
    current = work.signals[SignalName.CURRENT]
    cut = float(np.median([noise_cut(current[first:last], work.step, integrated=1) for first, last in _spans(work)]))
    factor = max(1, int(0.9 / (cut * work.step)))
    turns = SignalName.SPEED in work.signals
    rows: list[Array] = []
    targets: list[Array] = []
    lag: int | None = None
    # The longest piece first: it tells the lag.
    for first, last in sorted(_spans(work), key=lambda span: span[0] - span[1]):
        smoothed = smooth(current[first:last], work.step, cut=cut)
        columns = [smoothed, np.gradient(smoothed, work.step)]
        if turns:
            columns.append(smooth(work.signals[SignalName.SPEED][first:last], work.step, cut=cut))
        voltage = smooth(work.signals[SignalName.VOLTAGE][first:last], work.step, cut=cut)
        if lag is None:
            lag = best_lag(voltage, np.array(columns), step=work.step, better=_MUCH_BETTER)
        voltage = _moved(voltage, lag)
        keep = slice(_ENDS, -_ENDS) if (last - first) // factor > 4 * _ENDS else slice(None)
        rows.append(np.array([thinned(column, factor)[keep] for column in columns]))
        targets.append(thinned(voltage, factor)[keep])
    found, offset = _with_offset(np.concatenate(targets), np.hstack(rows))
    return found, lag or 0, offset


def _spans(work: Record) -> list[tuple[int, int]]:
    return [(int(first), int(last)) for first, last in itertools.pairwise(work.bounds)]


def _moved(values: Array, lag: int) -> Array:
    """A signal as it acts, ``lag`` samples after its stamps, its ends held."""
    return values[np.clip(np.arange(values.size) - lag, 0, values.size - 1)]


def _fitted(
    work: Record,
    linear: Regression,
    lag: int,
    *,
    believed: Array,
    remarks: list[str],
    earlier: Mapping[EstimateName, Estimate],
) -> WindingEvidence:
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
    apart = float(values[0] * work.step / values[1])
    if apart > _APART:
        # Rows this far apart do not show when between them the voltage stepped.
        covariance[1, 1] += (_PER_APART * (apart - _APART) * float(values[1])) ** 2
    if fit.fit_percent < _MOVES:
        # What moves is noise, and noise on the voltage looks like an excitation; a locked rotor's level still tells R.
        still = 0 if turns else 1
        covariance[still:, :] = covariance[:, still:] = 0.0
        covariance[range(still, count), range(still, count)] = values[still:count] ** 2
    fitted, untold = _told_with(values[:count], covariance, names=names, spare=fit.spare, earlier=earlier)
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


def _told_with(
    values: Array,
    covariance: Array,
    *,
    names: tuple[EstimateName, ...],
    spare: float,
    earlier: Mapping[EstimateName, Estimate],
) -> tuple[Told, list[str]]:
    """What is told, with what other logs tell of a resistance and an inductance that this one does not.

    Theirs come in as by the update of a Kalman filter; they are not told again.
    """
    ratios = tuple(Ratio(of=name) for name in names)
    floors = np.zeros(len(names))
    told, untold = tell(ratios, values, covariance, spare=spare, floors=floors)
    borrowed = [
        name
        for name in (EstimateName.RESISTANCE, EstimateName.INDUCTANCE)
        if name in names and name in earlier and all(name is not ratio.of for ratio in told.ratios)
    ]
    if not borrowed:
        return told, untold
    for name in borrowed:
        at = names.index(name)
        own = (0.25 * (earlier[name].high - earlier[name].low)) ** 2
        gain = covariance[:, at] / max(float(covariance[at, at]) + own, 1e-300)
        values = values + gain * (earlier[name].value - values[at])
        covariance = covariance - np.outer(gain, covariance[at])
    told, untold = tell(ratios, values, covariance, spare=spare, floors=floors)
    words = [
        f"this log does not tell the {name.words}: that of other logs, {earlier[name].value:.4g} {name.si}, was taken"
        " with its doubt"
        for name in borrowed
    ]
    return without(told, borrowed), [*words, *untold]


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
