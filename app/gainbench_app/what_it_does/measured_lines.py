"""Measured steps as lines of the time plots: cut to what is shown, one extreme pair per column, beads on a grid."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.model import Duty, SignalName
from gainbench_app.what_it_does.measured_logs import MeasuredStep
from gainbench_app.what_it_does.measured_marks import Bead
from gainbench_app.what_it_does.spans import Span
from gainbench_app.what_it_does.traces import Array, decimated

PANELS = (SignalName.SPEED, SignalName.CURRENT, SignalName.VOLTAGE)
"""What each panel of the time plots shows, from top to bottom."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MeasuredLine:
    """One signal of one log, in the units of its axis."""

    log: int
    """Place of the log among those that are shown."""
    x: Array
    """[s], at most two points per column."""
    y: Array
    bead_x: Array
    bead_y: Array
    lowest: float
    highest: float


def signal_of(step: MeasuredStep, signal: SignalName) -> Array | None:
    """A signal of a log; its speed may come of its angle."""
    return step.step.speed if signal is SignalName.SPEED else step.step.signals.get(signal)


def measured_lines(
    steps: tuple[MeasuredStep, ...], *, duty: Duty, span: Span, speed_size: float, columns: int, bead: float
) -> tuple[tuple[MeasuredLine, ...], ...]:
    """The lines of each panel.

    Parameters
    ----------
    steps : tuple of MeasuredStep
        Each is shifted so that its step begins with that of the duty.
    duty : Duty
        Of the sheet.
    span : Span
        What is shown.
    speed_size : float
        The unit of speed [rad/s].
    columns : int
        Pixel columns.
    bead : float
        From bead to bead, in columns.

    Returns
    -------
    tuple
        For speed, current and voltage; a signal that a log does not hold has no line.
    """
    found: tuple[list[MeasuredLine], ...] = ([], [], [])
    for place, one in enumerate(steps):
        time = one.step.time + one.step.shift_to(duty)
        first = max(0, int(np.searchsorted(time, span.start)) - 1)
        last = min(time.size, int(np.searchsorted(time, span.stop)) + 1)
        if last - first < 2:
            continue
        cut = slice(first, last)
        beads = _beads(time[cut], span.length * bead / columns, place % len(Bead) / len(Bead))
        for lines, signal in zip(found, PANELS, strict=True):
            values = signal_of(one, signal)
            if values is None:
                continue
            shown = values[cut] / (speed_size if signal is SignalName.SPEED else 1.0)
            drawn = decimated(time[cut], shown, columns=columns, least_ripple=math.inf)
            lines.append(
                MeasuredLine(
                    log=place,
                    x=drawn.x,
                    y=drawn.y,
                    bead_x=time[cut][beads],
                    bead_y=shown[beads],
                    lowest=drawn.lowest,
                    highest=drawn.highest,
                )
            )
    return tuple(tuple(lines) for lines in found)


def _beads(time: Array, gap: float, part: float) -> NDArray[np.intp]:
    """Indices of the samples nearest to multiples of a gap, so that beads stay on their samples while a span moves.

    The part of a gap keeps those of one log beside those of another.
    """
    first, last = math.ceil(time[0] / gap - part), math.floor(time[-1] / gap - part)
    grid = (np.arange(first, last + 1) + part) * gap
    after = np.clip(np.searchsorted(time, grid), 1, time.size - 1)
    nearest = after - (grid - time[after - 1] < time[after] - grid)
    return np.unique(nearest)


def value_at(step: MeasuredStep, signal: SignalName, instant: float, *, duty: Duty) -> float | None:
    """What a log holds at an instant of the duty, None before its start, after its end or without the signal."""
    values, time = signal_of(step, signal), step.step.time
    at = instant - step.step.shift_to(duty)
    if values is None or not time[0] <= at <= time[-1]:
        return None
    return float(values[min(int(np.searchsorted(time, at)), time.size - 1)])
