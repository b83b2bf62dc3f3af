"""Coast-down runs: friction over inertia from the way the speed falls while nothing drives."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError
from gainbench.evidence.driven import has_motion
from gainbench.evidence.estimate import EstimateName, Ratio, Told
from gainbench.evidence.motion_model import MotionModel, Shape
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.output_error import fit_output
from gainbench.evidence.prepared import Record, thin
from gainbench.evidence.regression import regress
from gainbench.evidence.shaft_fit import MOST_ROWS
from gainbench.evidence.shifting import soften
from gainbench.evidence.smoothing import motion_of, noise_cut
from gainbench.evidence.telling import tell
from gainbench.model import SignalName

Array = NDArray[np.float64]

_TOP = 0.97
"""Share of the highest speed from which on it coasts."""
_END = 0.02
"""Share of the highest speed below which the end is left out: what holds a rotor last is no longer sliding friction."""
_FEWEST = 30
_FELL = 0.3
"""Share of its speed that a rotor must have lost."""
_ZERO = 0.02


def coast_down(record: Record) -> Outcome:
    """Fit ``dw/dt = -(b w + Tc)/J`` to the speed from its highest value on.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s].

    Returns
    -------
    Outcome
        Viscous and Coulomb friction over inertia.

    Raises
    ------
    LogError
        If there is no motion in the log, or none that falls.
    """
    if not has_motion(record):
        raise LogError(
            f"{record.name}: a coast-down takes a column of speed or angle, and this log has none; map one to it in"
            " [evidence.columns]"
        )
    fall = falling(record)
    return _fitted(fall.signal, fall.speed, fall.bounds, fall.work.step, fall.is_angle)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Fall:
    """What of a record coasts, each piece turned so that it falls from a positive speed."""

    work: Record
    """The record, thinned where it is long."""
    is_angle: bool
    signal: Array
    """Angle [rad] or speed [rad/s] as recorded, shape (n,)."""
    speed: Array
    """Smoothed [rad/s], shape (n,)."""
    bounds: NDArray[np.int64]
    """First sample of each piece, and n at the end."""


def falling(record: Record) -> Fall:
    """Find what coasts in a record: each piece from its highest speed on, without the very last of it.

    Parameters
    ----------
    record : Record
        With an angle [rad] or a speed [rad/s].

    Returns
    -------
    Fall
        SI.

    Raises
    ------
    LogError
        If nothing falls.
    """
    is_angle = not record.has(SignalName.SPEED)
    name = SignalName.ANGLE if is_angle else SignalName.SPEED
    work = thin(record, -(-record.size // MOST_ROWS))
    signal, step = work.signals[name], work.step
    spans = [(int(first), int(last)) for first, last in itertools.pairwise(work.bounds)]
    cut = float(np.median([noise_cut(signal[a:b], step, integrated=2 if is_angle else 1) for a, b in spans]))
    speeds = [motion_of(signal[a:b], step, angle=is_angle, cut=cut).speed for a, b in spans]
    highest = max(float(np.abs(speed).max()) for speed in speeds)
    pieces: list[Array] = []
    smooth: list[Array] = []
    for (a, _), speed in zip(spans, speeds, strict=True):
        first, last, way = _fall(speed, highest)
        if last - first >= _FEWEST:
            pieces.append(way * signal[a + first : a + last])
            smooth.append(way * speed[first:last])
    if not pieces:
        raise LogError(
            f"{record.name}: nothing coasts down in this log: the speed must fall from its highest value by a third and"
            " more, with the terminals open"
        )
    bounds = np.concatenate(([0], np.cumsum([piece.size for piece in pieces]))).astype(np.int64)
    return Fall(
        work=work,
        is_angle=is_angle,
        signal=np.concatenate(pieces),
        speed=np.concatenate(smooth),
        bounds=bounds,
    )


def _fall(speed: Array, highest: float) -> tuple[int, int, float]:
    """First and last sample of the fall from the highest speed, and the sign of that speed."""
    size = np.abs(speed)
    high = np.flatnonzero(size >= _TOP * size.max())
    first = int(high[-1])
    low = np.flatnonzero(size[first:] < _END * highest)
    last = first + int(low[0]) if low.size else speed.size
    if size[first:last].size == 0 or size[first:last].min() > (1.0 - _FELL) * size.max():
        return first, first, 1.0
    return first, last, float(np.sign(speed[first]))


def _fitted(signal: Array, speed: Array, bounds: NDArray[np.int64], step: float, is_angle: bool) -> Outcome:
    # In integral form no noise is differentiated: what the speed has lost against what it has turned and the time.
    lost, turned, time = [], [], []
    for first, last in itertools.pairwise(bounds):
        piece = speed[first:last]
        lost.append(piece[0] - piece)
        turned.append(np.concatenate(([0.0], np.cumsum(0.5 * (piece[1:] + piece[:-1])) * step)))
        time.append(step * np.arange(piece.size))
    linear = regress(np.concatenate(lost), np.array([np.concatenate(turned), np.concatenate(time)]))
    top, length = float(speed.max()), float(step * speed.size)
    size = np.array([1.0 / length, top / length])
    start = np.clip(linear.values, 1e-3 * size, None)
    model = MotionModel(
        recorded=soften(signal, bounds),
        is_angle=is_angle,
        speed=speed,
        drive=None,
        step=step,
        pieces=bounds,
        shape=Shape.ONE_WAY,
        size=size,
    )
    fit = fit_output(model, start, lower=np.zeros(2), upper=np.full(2, np.inf))
    names = (EstimateName.VISCOUS_FRICTION, EstimateName.COULOMB_FRICTION)
    ratios = tuple(Ratio(of=one, per=EstimateName.INERTIA) for one in names)
    floors = _ZERO * size
    told, remarks = tell(ratios, fit.values, fit.covariance, spare=fit.spare, floors=floors)
    begun, _ = tell(ratios, linear.values, linear.covariance, spare=linear.spare, floors=floors)
    found: tuple[Told, ...] = (told,)
    return Outcome(fitted=found, linear=(begun,), fit_percent=fit.fit_percent, remarks=tuple(remarks))
