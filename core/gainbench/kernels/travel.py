"""One segment of the plant's motion in which something may happen: a body starts or stops, or the current turns.

A segment is halved down to pieces that are short against the plant; the instant of an event is found on the power
series of the motion over its piece, and the rest of the segment runs in the new mode.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.bodies import calm, depart, eventless, halt, in_mode, inputs_of, resting_bodies
from gainbench.kernels.compiled import compiled
from gainbench.kernels.motion import change, read_step, stride
from gainbench.kernels.response_records import Drag, Flow, Heading, Inputs, Motion, PlantState
from gainbench.kernels.series import HALVINGS, build_series, series_energy, sign_kept, state_at

EVENTS = 32
"""Starts and stops in one segment before its bodies are made to rest: beyond any drive, so that no loop can hang."""
PARTS = 8
"""Looks into a piece in which a body brakes hard enough to stop and come back."""
NEVER = 2.0


@compiled
def event_share(
    series: NDArray[np.float64], flow: Flow, drag: Drag, heading: Heading, x: PlantState, u: Inputs, width: float
) -> float:
    """First share of the piece at which a body has left the mode; NEVER if none does."""
    if eventless(flow, drag, heading, x, state_at(series, flow, 1.0), u, width):
        return NEVER
    low = high = 0.0
    for part in range(1, PARTS + 1):
        low, high = high, part / PARTS
        if not in_mode(flow, drag, heading, state_at(series, flow, high)):
            break
        if part == PARTS:
            return NEVER
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        if in_mode(flow, drag, heading, state_at(series, flow, middle)):
            low = middle
        else:
            high = middle
    return high


@compiled
def travel(
    motion: Motion, flow: Flow, drag: Drag, segment: int, x: PlantState, voltage: float
) -> tuple[Heading, PlantState, float]:
    """Advance the plant over one segment with constant voltage, through every event in it.

    Parameters
    ----------
    motion : Motion
        The plant's steps.
    flow : Flow
        The plant's equations.
    drag : Drag
        As it is in this segment.
    segment : int
        0 or 1.
    x : PlantState
        State when the segment begins.
    voltage : float
        [V].

    Returns
    -------
    heading : Heading
        When the segment ends.
    state : PlantState
        When the segment ends.
    given : float
        Energy given back to the stage [J, without the 3/2 of pm-sine].
    """
    series = motion.series
    pieces = 1 << motion.fine
    piece = motion.width[segment] / pieces
    left = cap = pieces
    part = given = 0.0
    events = 0
    heading = depart(flow, drag, x)
    while left > 0 or part > 0.0:
        resting, u = resting_bodies(flow, heading), inputs_of(drag, heading, voltage)
        if part == 0.0:
            level = motion.fine
            while (1 << level) > min(left, cap):
                level -= 1
            if level == 0:
                left -= 1
                part = 1.0
            else:
                step = read_step(motion, segment, resting, level)
                y = stride(step, flow, x, u)
                kept = sign_kept(flow, x, y, voltage, step.width)
                if kept != 0 and (events > EVENTS or eventless(flow, drag, heading, x, y, u, step.width)):
                    if kept < 0:
                        given -= voltage * change(step.charge, flow.elastic, x, u)
                    x = y
                    left -= 1 << level
                else:
                    cap = 1 << (level - 1)
                continue
        build_series(series, flow, resting, x, u, piece * part)
        share = NEVER if events > EVENTS else event_share(series, flow, drag, heading, x, u, piece * part)
        end = min(share, 1.0)
        given += series_energy(series, voltage, end)
        x = state_at(series, flow, end)
        cap = pieces
        if share > 1.0:
            part = 0.0
            continue
        part *= 1.0 - share
        events += 1
        heading, x = halt(flow, drag, heading, x)
        if events > EVENTS:
            heading, x = calm(flow, drag, heading, x)
        else:
            heading = depart(flow, drag, x)
    heading, x = halt(flow, drag, heading, x)
    return heading, x, given
