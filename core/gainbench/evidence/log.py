"""A log that was read: signals over time, in SI, with all that had to be repaired said in words."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError
from gainbench.model import SignalName

_GAP = 1.5
"""An interval this many times longer than the long ones among the usual ones is a gap."""
_USUAL = 90.0
"""Percentile of the intervals that counts as a long one among the usual ones: irregular loggers spread them."""
_JITTER = 0.05
"""Share of a period that stamps of a regular log may lie beside their even grid; rounded stamps do."""
_SAME_PERIOD = 0.01
"""Share by which the periods of two pieces of a regular log may differ."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Log:
    """Signals of one log over one time, read-only.

    Attributes
    ----------
    name : str
        The file's name, for messages.
    time : ndarray, shape (n,)
        Instants from the first stamp on [s], strictly rising; n is at least 2.
    signals : mapping
        Every signal but the time, SI, each finite and of shape (n,): ``voltage`` [V], ``current`` [A],
        ``torque`` [N m], ``speed`` [rad/s], ``angle`` [rad], and the references in the unit of their signal.
    remarks : tuple of str
        What was repaired or looks wrong: repeated stamps, gaps, missing samples, clipped signals, units.
    """

    name: str
    time: NDArray[np.float64]
    signals: Mapping[SignalName, NDArray[np.float64]]
    remarks: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        time = _read_only(self.time)
        signals = {SignalName(name): _read_only(values) for name, values in self.signals.items()}
        if time.ndim != 1 or time.size < 2 or not np.all(np.diff(time) > 0.0):
            raise ValueError("the time of a log has at least two instants and rises strictly")
        if SignalName.TIME in signals:
            raise ValueError("the time of a log is no signal")
        if any(values.shape != time.shape or not np.all(np.isfinite(values)) for values in signals.values()):
            raise ValueError("the signals of a log are finite and as long as its time")
        object.__setattr__(self, "time", time)
        object.__setattr__(self, "signals", MappingProxyType(signals))

    @property
    def length(self) -> float:
        """From the first instant to the last [s]."""
        return float(self.time[-1] - self.time[0])

    @property
    def period(self) -> float:
        """The usual interval between samples, their median [s]."""
        return float(np.median(np.diff(self.time)))

    @property
    def rate(self) -> float:
        """The usual rate, one over the median interval [Hz]."""
        return 1.0 / self.period

    @property
    def pieces(self) -> tuple[slice, ...]:
        """Index ranges of the unbroken pieces, in order; together they hold every sample."""
        ends = [*(int(index) + 1 for index in _breaks(self.time)), self.time.size]
        return tuple(slice(start, end) for start, end in zip([0, *ends[:-1]], ends, strict=True))

    @property
    def gaps(self) -> NDArray[np.float64]:
        """Lengths of the interruptions between the pieces [s], shape (pieces - 1,)."""
        return np.diff(self.time)[_breaks(self.time)]

    @property
    def is_regular(self) -> bool:
        """Whether every piece lies on an even grid of one common period, as far as rounded stamps can tell."""
        intervals = self.time.size - len(self.pieces)
        period = (self.length - float(self.gaps.sum())) / max(1, intervals)
        return intervals > 0 and all(_on_grid(self.time[piece], period) for piece in self.pieces)

    def has(self, *names: SignalName) -> bool:
        """Whether the log holds all of some signals."""
        return all(name in self.signals for name in names)


def _read_only(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """The values as floats that nobody can change, without a copy where they are so already."""
    floats = np.asarray(values, dtype=np.float64)
    if floats.flags.writeable:
        floats = floats.copy() if floats is values else floats
        floats.setflags(write=False)
    return floats


def _breaks(time: NDArray[np.float64]) -> NDArray[np.intp]:
    """Indices of the last sample before each gap."""
    intervals = np.diff(time)
    return np.flatnonzero(intervals > gap_length(intervals))


def gap_length(intervals: NDArray[np.float64]) -> float:
    """The interval above which samples are missing between two stamps.

    Parameters
    ----------
    intervals : ndarray, shape (n,)
        Between the stamps [s], n at least 1.

    Returns
    -------
    float
        One and a half times the longest of the usual intervals [s]: the median, or the 90th percentile where the
        logger spreads its stamps.
    """
    middle, long = np.percentile(intervals, [50.0, _USUAL])
    return _GAP * max(float(middle), float(long))


def _on_grid(stamps: NDArray[np.float64], period: float) -> bool:
    """Whether stamps lie on an even grid of their own, whose period is the common one."""
    count = stamps.size - 1
    if count == 0:
        return True
    own = float(stamps[-1] - stamps[0]) / count
    beside = stamps - stamps[0] - own * np.arange(stamps.size)
    # The ends of a short piece are rounded as well, so that its own period may be off by more.
    same = abs(own - period) <= period * (_SAME_PERIOD + 2.0 * _JITTER / count)
    return same and float(np.abs(beside).max()) <= 2.0 * _JITTER * period


def demand(log: Log, *, purpose: str, rate: float = 0.0, length: float = 0.0) -> None:
    """Refuse a log that is too slow or too short for what is asked of it.

    Parameters
    ----------
    log : Log
        The log.
    purpose : str
        What it is wanted for, ``"the inductance"``: it stands in the message after "for".
    rate : float
        The least rate that it takes [Hz].
    length : float
        The least length that it takes [s].

    Raises
    ------
    LogError
        With the rate or the length that the log has and the one that it takes.
    """
    if log.rate < rate:
        raise LogError(
            f"{log.name}: too slow for {purpose}: it has {log.rate:.4g} samples a second, it takes at least"
            f" {rate:.4g}; record it again with an interval of at most {1.0 / rate:.3g} s"
        )
    if log.length < length:
        raise LogError(
            f"{log.name}: too short for {purpose}: it is {log.length:.4g} s long, it takes at least {length:.4g} s;"
            " record a longer run"
        )
