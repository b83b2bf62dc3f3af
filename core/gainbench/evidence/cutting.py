"""A part of a log: what lies between two instants."""

from __future__ import annotations

import math

import numpy as np

from gainbench.errors import LogError
from gainbench.evidence.log import Log


def cut_log(log: Log, *, start: float, stop: float) -> Log:
    """Keep the samples of a log from one instant to another, both included.

    Parameters
    ----------
    log : Log
        As it was read; it stays as it is.
    start, stop : float
        On the log's own time [s].

    Returns
    -------
    Log
        Its time begins at 0 again; one remark more says what was cut. The log itself where nothing is.

    Raises
    ------
    LogError
        If fewer than two samples are left.
    """
    if not (math.isfinite(start) and math.isfinite(stop) and start < stop):
        raise LogError(f"{log.name}: a span begins before it ends, {start:.6g} s to {stop:.6g} s does not")
    first = int(np.searchsorted(log.time, start, side="left"))
    last = int(np.searchsorted(log.time, stop, side="right"))
    if last - first < 2:
        raise LogError(
            f"{log.name}: {max(0, last - first)} samples lie between {start:.6g} s and {stop:.6g} s, at least two are"
            f" needed; the log goes from {log.time[0]:.6g} s to {log.time[-1]:.6g} s"
        )
    if first == 0 and last == log.time.size:
        return log
    words = (
        f"only {log.time[first]:.6g} s to {log.time[last - 1]:.6g} s of it was used:"
        f" {last - first} of {log.time.size} rows"
    )
    return Log(
        name=log.name,
        time=log.time[first:last] - log.time[first],
        signals={name: values[first:last] for name, values in log.signals.items()},
        remarks=(*log.remarks, words),
    )
