"""Angles that begin anew: wrapped at a turn or at a counter's end, or reset once, laid out to one long angle."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError

Array = NDArray[np.float64]

_FEWEST = 16
_HALF = 0.45
"""Share of the signal's range that a step has at least where it wraps."""
_STANDS_OUT = 20.0
"""Times the usual step that a reset is at least."""
_USUAL = 0.2
"""Share of a jump that the usual step may be."""
_WHOLE = 0.8
"""Share of the range below which a single jump is a reset."""
_ALIKE = 0.05
"""Share by which the spans that single wraps give may differ."""
_FASTEST = 0.35
"""Share of a wrap that may be turned from sample to sample, so that the way is known."""
_NATURAL = 0.01
"""Share by which a span may miss a whole turn to be one."""


def unwrapped(angle: Array, name: str) -> tuple[Array, str]:
    """An angle without the steps at which it begins anew, and what is to be said of them.

    A wrap steps by ``M`` against the motion; ``M`` is told by the step and the motion on both sides of it. Steps of
    other sizes are resets: there the motion goes on as it was.

    Parameters
    ----------
    angle : ndarray, shape (n,)
        As it was logged [rad].
    name : str
        The file's name, for messages.

    Returns
    -------
    angle : ndarray, shape (n,)
        [rad].
    remark : str
        Empty where nothing had to be done.

    Raises
    ------
    LogError
        If it turns so far between two samples that the way is not known.
    """
    steps = np.diff(angle)
    if steps.size < _FEWEST:
        return angle, ""
    size = np.abs(steps)
    span = float(np.ptp(angle))
    usual = float(np.percentile(size, 90.0))
    jumps = np.flatnonzero(size > _HALF * span)
    if jumps.size > 2 and usual > _HALF * _FASTEST * span:
        raise LogError(
            f"{name}: the angle begins anew {jumps.size} times, up to every few samples, so that its way between them"
            " is not known; log it faster, log the speed, or log an angle that goes on counting"
        )
    if not jumps.size or span <= 0.0:
        jumps = np.flatnonzero((size > _STANDS_OUT * float(np.percentile(size, 99.0))) & (size > 0.02 * span))
    # A spike goes there and back from one sample to the next; so does a rotor that rests where it wraps.
    paired = np.isin(jumps + 1, jumps) | np.isin(jumps - 1, jumps)
    alone = jumps[~paired]
    if not alone.size or usual > _USUAL * float(size[alone].min()):
        return angle, ""
    quiet = np.where(np.isin(np.arange(steps.size), jumps), np.nan, steps)
    around = np.array([_middle(quiet[max(0, at - 2) : at + 3]) for at in jumps])
    spans = np.abs(steps[jumps] - around)
    middle = float(np.median(spans[~paired]))
    alike = np.abs(spans - middle) <= _ALIKE * middle
    if not np.all(alike[~paired]) or (alone.size == 1 and middle < _WHOLE * span):
        keep = ~paired
        return _without(angle, jumps[keep], (around - steps[jumps])[keep]), _said("was reset", alone.size, middle)
    turn = 2.0 * np.pi
    whole = round(middle / turn)
    exact = float(spans[alike].mean())
    if whole > 0 and abs(middle - whole * turn) <= _NATURAL * middle:
        exact = whole * turn
    added = -np.sign(steps[jumps] - around)[alike] * exact
    return _without(angle, jumps[alike], added), _said("wraps", int(alike.sum()), exact)


def _middle(steps: Array) -> float:
    """Mean of the steps that are no jumps, 0 where there are none."""
    own = steps[np.isfinite(steps)]
    return float(own.mean()) if own.size else 0.0


def _without(angle: Array, jumps: NDArray[np.intp], added: Array) -> Array:
    """The angle with something added from each of some steps on."""
    moved = np.zeros(angle.size)
    np.add.at(moved, jumps + 1, added)
    return np.asarray(angle + np.cumsum(moved))


def _said(what: str, count: int, span: float) -> str:
    times = "once" if count == 1 else f"{count} times"
    return f"angle {what} {times}, by {span:.4g} rad: laid out to an angle that goes on"
