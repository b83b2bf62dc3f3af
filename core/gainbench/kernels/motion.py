"""Exact steps of the continuous plant: the equations by their coefficients, and their matrix exponentials.

While no body starts, stops or turns, the plant is linear with constant inputs, and one matrix exponential is exact.
What a step needs travels as scalars: arrays in the innermost loop would be counted at every touch.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.linalg import expm_minus_identity
from gainbench.kernels.response_records import Flow, Inputs, Layout, Motion, PlantState, Row, Step

STATES = 7
"""The six of PlantState and the charge, the integral of the current."""
INPUTS = 3
"""Voltage and the drag on either body."""
FILTERED = 2
CHARGE = 6
"""States that have a rule of their own."""
SIZE = STATES + INPUTS
SHORT = 2.0
"""A piece is short where the plant's rate times its length is at most this: its series loses no digit that counts."""
NEGLECT = 1e-18
"""Share of the motion below which a term of the series is left out."""

MOTOR_RESTS = 1
LOAD_RESTS = 2

FIRST = np.int64(0)
SECOND = np.int64(1)
"""Segments of a tick."""


@compiled
def flow_matrix(a: NDArray[np.float64], b: NDArray[np.float64], layout: Layout) -> NDArray[np.float64]:
    """The plant's matrices in the order of PlantState, charge and inputs, shape (7, 10)."""
    place = np.array([0, 1, layout.filtered, layout.load_speed, layout.twist, layout.angle])
    matrix = np.zeros((STATES, SIZE))
    for row in range(6):
        if place[row] >= 0:
            for column in range(6):
                if place[column] >= 0:
                    matrix[row, column] = a[place[row], place[column]]
            for column in range(INPUTS):
                matrix[row, STATES + column] = b[place[row], column]
    matrix[CHARGE, 0] = 1.0
    return matrix


@compiled
def read_flow(matrix: NDArray[np.float64], elastic: bool) -> Flow:
    """The entries of a plant's matrix that are not 0 or 1 by definition."""
    return Flow(
        elastic,
        matrix[0, 0],
        matrix[0, 1],
        matrix[0, 7],
        matrix[1, 0],
        matrix[1, 1],
        matrix[1, 3],
        matrix[1, 4],
        matrix[1, 8],
        matrix[2, 0],
        matrix[2, 2],
        matrix[3, 1],
        matrix[3, 3],
        matrix[3, 4],
        matrix[3, 9],
    )


@compiled
def plant_rate(matrix: NDArray[np.float64], filtered: bool) -> float:
    """Bound on the plant's own rates [1/s]: its largest row sum, scaled so that each pair of states couples alike.

    The filtered current, which drives nothing, can be left out.
    """
    rate = 0.0
    for row in range(6):
        if row == FILTERED and not filtered:
            continue
        own = abs(matrix[row, row])
        for column in range(6):
            if column != row:
                own += np.sqrt(abs(matrix[row, column] * matrix[column, row]))
        rate = max(rate, own)
    return rate


@compiled
def prepare_motion(matrix: NDArray[np.float64], first: float, second: float) -> Motion:
    """The plant over segments of these lengths [s]; ``first`` may be 0. No step is computed yet."""
    span = plant_rate(matrix, True) * max(first, second)
    fine = 0
    while span > SHORT:
        span *= 0.5
        fine += 1
    terms = 2
    size = span * span * 0.5
    while size > NEGLECT:
        terms += 1
        size *= span / terms
    # One more: a constant input drives the states by one order less than they drive each other.
    terms += 1
    return Motion(
        matrix,
        np.array([first, second]),
        fine,
        terms,
        np.empty((2, 4, fine + 1, STATES, 8)),
        np.zeros((2, 4), dtype=np.bool_),
        np.zeros((terms + 1, STATES)),
    )


@compiled
def build_ladder(motion: Motion, segment: int, resting: int) -> None:
    """Changes over 1, 2, 4, ... pieces of a segment: (I + P)^2 = I + 2 P + P^2 keeps the small ones exact."""
    part = np.zeros((SIZE, SIZE))
    width = motion.width[segment] / (1 << motion.fine)
    for row in range(STATES):
        if not ((row == 1 and resting & MOTOR_RESTS) or (row == 3 and resting & LOAD_RESTS)):
            for column in range(SIZE):
                part[row, column] = motion.matrix[row, column] * width
    part = expm_minus_identity(part)
    for level in range(motion.fine + 1):
        for row in range(STATES):
            for column in range(5):
                motion.ladder[segment, resting, level, row, column] = part[row, column]
            for column in range(INPUTS):
                motion.ladder[segment, resting, level, row, 5 + column] = part[row, STATES + column]
        if level < motion.fine:
            square = 2.0 * part
            for row in range(STATES):
                for inner in range(STATES):
                    factor = part[row, inner]
                    if factor != 0.0:
                        for column in range(SIZE):
                            square[row, column] += factor * part[inner, column]
            part = square
    motion.built[segment, resting] = True


@compiled
def read_row(step: NDArray[np.float64], row: int) -> Row:
    """One row of a step."""
    return Row(step[row, 0], step[row, 1], step[row, 3], step[row, 4], step[row, 5], step[row, 6], step[row, 7])


@compiled
def read_step(motion: Motion, segment: int, resting: int, level: int) -> Step:
    """The step over 2^level pieces of a segment in a mode."""
    if not motion.built[segment, resting]:
        build_ladder(motion, segment, resting)
    step = motion.ladder[segment, resting, level]
    return Step(
        motion.width[segment] / (1 << (motion.fine - level)),
        read_row(step, 0),
        read_row(step, 1),
        read_row(step, 2),
        step[2, 2],
        read_row(step, 3),
        read_row(step, 4),
        read_row(step, 5),
        read_row(step, CHARGE),
    )


@inlined
def change(row: Row, elastic: bool, x: PlantState, u: Inputs) -> float:
    """Change of one state, or the charge, over a step."""
    value = row.current * x.current + row.speed * x.speed + row.voltage * u.voltage + row.motor_drag * u.motor_drag
    if elastic:
        value += row.load_speed * x.load_speed + row.twist * x.twist + row.load_drag * u.load_drag
    return value


@inlined
def stride(step: Step, flow: Flow, x: PlantState, u: Inputs) -> PlantState:
    """The state after a step."""
    elastic = flow.elastic
    filtered, load_speed, twist = x.filtered, x.load_speed, x.twist
    if flow.fi != 0.0:
        filtered += step.filtered_self * filtered + change(step.filtered, elastic, x, u)
    if elastic:
        load_speed += change(step.load_speed, elastic, x, u)
        twist += change(step.twist, elastic, x, u)
    return PlantState(
        x.current + change(step.current, elastic, x, u),
        x.speed + change(step.speed, elastic, x, u),
        filtered,
        load_speed,
        twist,
        x.angle + change(step.angle, elastic, x, u),
    )
