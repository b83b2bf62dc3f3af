"""Signals that look wrong: constant ones, and ones that sit on a limit of the measurement or the drive."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

import numpy as np
from numpy.typing import NDArray

from gainbench.model import SignalName

_NEVER_CLIPPED = frozenset([SignalName.ANGLE, SignalName.SPEED_REFERENCE, SignalName.CURRENT_REFERENCE])
"""A reference rests where it was put, and an angle where the rotor stands."""
_MOST_FLAT = 0.3
"""Share of equal neighbours away from the limits above which a signal is a staircase, whose top is no clipping."""
_LEAST_SHARE = 0.002
_LEAST_SAMPLES = 5
_LONG_RUN = 3
_UNITS = {
    SignalName.VOLTAGE: "V",
    SignalName.CURRENT: "A",
    SignalName.TORQUE: "N*m",
    SignalName.SPEED: "rad/s",
    SignalName.ANGLE: "rad",
    SignalName.SPEED_REFERENCE: "rad/s",
    SignalName.CURRENT_REFERENCE: "A",
}


def suspicions(signals: Mapping[SignalName, NDArray[np.float64]]) -> Iterator[str]:
    """What looks wrong in signals.

    Parameters
    ----------
    signals : mapping
        Finite values in SI, each of shape (n,).

    Yields
    ------
    str
        A remark for each signal that is constant, or sits on its largest or smallest value.
    """
    for signal, values in signals.items():
        low, high = float(values.min()), float(values.max())
        if low == high:
            yield f"{signal} is constant at {low:.6g} {_UNITS[signal]}"
        elif signal not in _NEVER_CLIPPED:
            for word, limit in (("largest", high), ("smallest", low)):
                sitting = samples_on_limit(values, limit)
                if sitting:
                    yield (
                        f"{signal} sits on its {word} value, {limit:.6g} {_UNITS[signal]}, for {sitting} samples:"
                        " clipped or saturated"
                    )


def samples_on_limit(values: NDArray[np.float64], limit: float) -> int:
    """How many samples are cut off at a limit.

    A signal is cut off where it stays on its extreme value for three samples and more, again and again, although it
    moves from sample to sample elsewhere. Rest at zero and staircases are not cut off.

    Parameters
    ----------
    values : ndarray, shape (n,)
        In the signal's unit.
    limit : float
        The largest or the smallest of the values, in the same unit.

    Returns
    -------
    int
        0 where the signal is not cut off there.
    """
    if limit == 0.0:
        return 0
    on = values == limit
    extreme = on | (values == values.min()) | (values == values.max())
    moving = ~(extreme[1:] | extreme[:-1])
    if not moving.any() or np.mean(values[1:][moving] == values[:-1][moving]) > _MOST_FLAT:
        return 0
    edges = np.flatnonzero(np.diff(np.concatenate(([False], on, [False])).astype(np.int8)))
    runs = edges[1::2] - edges[::2]
    sitting = int(runs[runs >= _LONG_RUN].sum())
    return sitting if sitting >= max(_LEAST_SAMPLES, _LEAST_SHARE * values.size) else 0


def cut_off(values: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Which samples of a measured signal are cut off at its largest or smallest value.

    Parameters
    ----------
    values : ndarray, shape (n,)
        In the signal's unit.

    Returns
    -------
    ndarray of bool, shape (n,)
    """
    found = np.zeros(values.size, dtype=np.bool_)
    for limit in (float(values.max()), float(values.min())):
        if samples_on_limit(values, limit):
            found |= values == limit
    return found
