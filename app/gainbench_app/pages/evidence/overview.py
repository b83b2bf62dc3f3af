"""What is drawn of a log: the lowest and the highest value in each of a few thousand stretches, never every row."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence import Log
from gainbench.model import SignalName

Array = NDArray[np.float64]

BUCKETS = 4000
"""More than the widest screen has columns."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Envelope:
    """A curve between its lowest and highest values; both are the same where every row is kept."""

    x: Array
    """Rising, shape (n,)."""
    low: Array
    high: Array

    def reduced(self, buckets: int) -> Envelope:
        """The same with fewer stretches."""
        starts = _starts(self.x.size, buckets)
        if starts is None:
            return self
        return Envelope(
            x=self.x[starts], low=np.minimum.reduceat(self.low, starts), high=np.maximum.reduceat(self.high, starts)
        )

    def line(self) -> tuple[Array, Array]:
        """Points of one line through all of it."""
        if np.array_equal(self.low, self.high):
            return self.x, self.low
        return np.repeat(self.x, 2), np.stack((self.low, self.high), axis=1).ravel()


def envelope(x: Array, values: Array, *, buckets: int = BUCKETS) -> Envelope:
    """Reduce a curve, so that no peak is lost."""
    return Envelope(x=x, low=values, high=values).reduced(2 * buckets if x.size <= 2 * buckets else buckets)


def _starts(count: int, buckets: int) -> NDArray[np.int64] | None:
    if count <= buckets:
        return None
    return np.unique(np.linspace(0, count, buckets + 1)[:-1].astype(np.int64))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LogOverview:
    """What the page shows of a log that was read."""

    rows: int
    length: float
    """[s]."""
    rate: float
    """[Hz]."""
    pieces: int
    signals: Mapping[SignalName, Envelope]
    """SI over the log's own time [s]."""
    remarks: tuple[str, ...]


def overview(log: Log) -> LogOverview:
    """Look at a whole log once."""
    return LogOverview(
        rows=log.time.size,
        length=log.length,
        rate=log.rate,
        pieces=len(log.pieces),
        signals={name: envelope(log.time, values) for name, values in log.signals.items()},
        remarks=log.remarks,
    )
