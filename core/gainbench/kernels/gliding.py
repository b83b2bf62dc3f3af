"""A segment of a tick in which no body leaves its way: the step over it and the test for it, by a table of constants.

The innermost loop reads constants from an array, so that its registers are left to what changes from tick to tick.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.bodies import inputs_of, load_switches, motor_switches, resting_bodies, start_bounds
from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.motion import read_flow, read_step
from gainbench.kernels.response_records import Drag, Heading, Inputs, Motion, PlantState, Row

WEIGHTS = 6
"""Of a row: current, motor speed, load speed, twist, voltage; the last stands by itself and is the drag's part."""
CURRENT = 0 * WEIGHTS
SPEED = 1 * WEIGHTS
FILTERED = 2 * WEIGHTS
LOAD_SPEED = 3 * WEIGHTS
TWIST = 4 * WEIGHTS
ANGLE = 5 * WEIGHTS
"""Rows: change of each state over the segment."""
MOTOR_PULL = 6 * WEIGHTS
LOAD_PULL = 7 * WEIGHTS
"""Rows: change of a body's speed over the segment if its acceleration stayed; without its drag where it rests."""
FILTERED_SELF = 8 * WEIGHTS
"""Weight of the filtered current in its own change."""
MOTOR_WAY = FILTERED_SELF + 1
LOAD_WAY = FILTERED_SELF + 2
"""1 or -1 for a moving body that something switches for, else 0."""
MOTOR_LOW = FILTERED_SELF + 3
MOTOR_HIGH = FILTERED_SELF + 4
LOAD_LOW = FILTERED_SELF + 5
LOAD_HIGH = FILTERED_SELF + 6
"""Pulls beyond which a resting body starts; infinite for any other."""
SIZE = FILTERED_SELF + 7
"""Of a table."""


@compiled
def put_row(table: NDArray[np.float64], row: int, weights: Row, u: Inputs, scale: float) -> None:
    """Write a row of a table, ``scale`` times ``weights``, its drags as they are in ``u``."""
    table[row] = weights.current * scale
    table[row + 1] = weights.speed * scale
    table[row + 2] = weights.load_speed * scale
    table[row + 3] = weights.twist * scale
    table[row + 4] = weights.voltage * scale
    table[row + 5] = (weights.motor_drag * u.motor_drag + weights.load_drag * u.load_drag) * scale


@compiled
def fill_table(
    table: NDArray[np.float64], motion: Motion, elastic: bool, drag: Drag, heading: Heading, segment: int
) -> bool:
    """Fill the table of one segment for a mode; whether a body rests in it that may start."""
    flow, width = read_flow(motion.matrix, elastic), motion.width[segment]
    step = read_step(motion, segment, resting_bodies(flow, heading), motion.fine)
    u = inputs_of(drag, heading, 0.0)
    put_row(table, int(np.int64(CURRENT)), step.current, u, 1.0)
    put_row(table, int(np.int64(SPEED)), step.speed, u, 1.0)
    put_row(table, int(np.int64(FILTERED)), step.filtered, u, 1.0)
    put_row(table, int(np.int64(LOAD_SPEED)), step.load_speed, u, 1.0)
    put_row(table, int(np.int64(TWIST)), step.twist, u, 1.0)
    put_row(table, int(np.int64(ANGLE)), step.angle, u, 1.0)
    table[FILTERED_SELF] = step.filtered_self

    motor, load = motor_switches(drag), load_switches(flow, drag)
    motor_rests, load_rests = motor and heading.motor == 0, load and heading.load == 0
    motor_own, load_own = 0.0 if motor_rests else flow.wd, 0.0 if load_rests else flow.ld
    pull = Row(flow.wi, flow.ww, flow.wl, flow.wt, 0.0, motor_own, 0.0)
    put_row(table, int(np.int64(MOTOR_PULL)), pull, u, width)
    pull = Row(0.0, flow.lw, flow.ll, flow.lt, 0.0, 0.0, load_own)
    put_row(table, int(np.int64(LOAD_PULL)), pull, u, width)
    table[MOTOR_WAY] = float(heading.motor) if motor else 0.0
    table[LOAD_WAY] = float(heading.load) if load else 0.0
    table[MOTOR_LOW] = table[LOAD_LOW] = -np.inf
    table[MOTOR_HIGH] = table[LOAD_HIGH] = np.inf
    if motor_rests:
        low, high = start_bounds(flow.wd, drag.motor_backwards, drag.motor_forwards)
        table[MOTOR_LOW], table[MOTOR_HIGH] = low * width, high * width
    if load_rests:
        low, high = start_bounds(flow.ld, drag.load_backwards, drag.load_forwards)
        table[LOAD_LOW], table[LOAD_HIGH] = low * width, high * width
    return motor_rests or load_rests


@inlined
def change_by(table: NDArray[np.float64], row: int, elastic: bool, x: PlantState, voltage: float) -> float:
    """A row's sum for a state and a voltage."""
    value = (table[row] * x.current + table[row + 1] * x.speed) + (table[row + 4] * voltage + table[row + 5])
    if elastic:
        value += table[row + 2] * x.load_speed + table[row + 3] * x.twist
    return float(value)


@inlined
def pull_by(table: NDArray[np.float64], row: int, elastic: bool, x: PlantState) -> float:
    """A row's sum for a state, of a row without a weight for the voltage."""
    value = table[row] * x.current + table[row + 1] * x.speed + table[row + 5]
    if elastic:
        value += table[row + 2] * x.load_speed + table[row + 3] * x.twist
    return float(value)


@inlined
def glide(table: NDArray[np.float64], elastic: bool, filtered: bool, x: PlantState, voltage: float) -> PlantState:
    """The state after the segment if no body leaves its way."""
    behind, load_speed, twist = x.filtered, x.load_speed, x.twist
    if filtered:
        behind += table[FILTERED_SELF] * behind + change_by(table, FILTERED, elastic, x, voltage)
    if elastic:
        load_speed += change_by(table, LOAD_SPEED, elastic, x, voltage)
        twist += change_by(table, TWIST, elastic, x, voltage)
    return PlantState(
        x.current + change_by(table, CURRENT, elastic, x, voltage),
        x.speed + change_by(table, SPEED, elastic, x, voltage),
        behind,
        load_speed,
        twist,
        x.angle + change_by(table, ANGLE, elastic, x, voltage),
    )


@inlined
def strays(table: NDArray[np.float64], elastic: bool, rests: bool, x: PlantState, y: PlantState) -> bool:
    """Whether a body may start, stop or turn on the way from x to y; the contrary of :func:`bodies.eventless`."""
    # One way out: with more of them the table would be counted at every tick.
    aimed = x.speed + pull_by(table, MOTOR_PULL, elastic, x)
    astray = (y.speed * table[MOTOR_WAY] < 0.0) | (aimed * table[MOTOR_WAY] < 0.0)
    if elastic:
        aimed = x.load_speed + pull_by(table, LOAD_PULL, elastic, x)
        astray |= (y.load_speed * table[LOAD_WAY] < 0.0) | (aimed * table[LOAD_WAY] < 0.0)
    if rests:
        pull = pull_by(table, MOTOR_PULL, elastic, y)
        astray |= (pull < table[MOTOR_LOW]) | (pull > table[MOTOR_HIGH])
        if elastic:
            pull = pull_by(table, LOAD_PULL, elastic, y)
            astray |= (pull < table[LOAD_LOW]) | (pull > table[LOAD_HIGH])
    return bool(astray)
