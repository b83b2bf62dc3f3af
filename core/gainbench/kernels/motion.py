"""The continuous plant with Coulomb friction and a load torque that changes with the direction, advanced exactly.

While no body starts, stops or turns, the plant is linear with constant inputs, and one matrix exponential is
exact. Where a body does within a segment, the instant is found by successive halving over exact partial steps,
and the rest of the segment runs in the new mode.
"""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from gainbench.kernels.linalg import expm_minus_identity
from gainbench.kernels.response_records import Layout, Motion

LEVELS = 40
"""Halvings of a segment: 50 us / 2^40 is 5e-17 s, below the rounding of any speed change."""
UNITS = 1 << LEVELS
EVENTS = 32
"""Pieces and events in one segment before its bodies are made to rest: beyond any drive, so that no loop can hang."""
SLACK = 1e-12
"""Share of the holding torque that a start needs in excess, so that an equilibrium on the edge rests."""

MOTOR_RESTS = 1
LOAD_RESTS = 2


@njit(cache=True, nogil=True, error_model="numpy")
def step_matrix(
    a: NDArray[np.float64], b: NDArray[np.float64], layout: Layout, resting: int, width: float
) -> NDArray[np.float64]:
    """exp - I of states, charge (the integral of the current) and inputs over ``width``, shape (n + 4, n + 4)."""
    n = a.shape[0]
    g = np.zeros((n + 4, n + 4))
    g[:n, :n] = a * width
    g[:n, n + 1 :] = b * width
    g[n, 0] = width
    if resting & MOTOR_RESTS:
        g[layout.speed, :] = 0.0
    if resting & LOAD_RESTS:
        g[layout.load_speed, :] = 0.0
    return expm_minus_identity(g)


@njit(cache=True, nogil=True, error_model="numpy")
def prepare_motion(
    a: NDArray[np.float64],
    b: NDArray[np.float64],
    layout: Layout,
    first: float,
    second: float,
    may_rest: tuple[bool, bool],
) -> Motion:
    """Steps over both segments (``first`` may be 0) in every mode that can occur."""
    n = a.shape[0]
    width = np.array([first, second])
    steps = np.zeros((2, 4, n + 4, n + 4))
    for resting in range(4):
        if (resting & MOTOR_RESTS and not may_rest[0]) or (resting & LOAD_RESTS and not may_rest[1]):
            continue
        for segment in range(2):
            if width[segment] > 0.0:
                steps[segment, resting] = step_matrix(a, b, layout, resting, width[segment])
    levels = LEVELS if may_rest[0] or may_rest[1] else 0
    return Motion(
        a,
        b,
        layout,
        width,
        steps,
        np.empty((2, 4, levels, n + 4, n + 4)),
        np.zeros((2, 4), dtype=np.bool_),
        np.zeros((2, 2)),
        np.zeros(2, dtype=np.int64),
        np.zeros(n),
        np.zeros((3, n + 1)),
        np.zeros(3),
    )


@njit(cache=True, nogil=True, error_model="numpy")
def build_ladder(motion: Motion, segment: int, resting: int) -> None:
    """Steps over 1, 2, 4, ... units of a segment: (I + P)^2 = I + 2 P + P^2 keeps the small ones exact."""
    part = step_matrix(motion.a, motion.b, motion.layout, resting, motion.width[segment] / UNITS)
    size = part.shape[0]
    for level in range(LEVELS):
        motion.ladder[segment, resting, level] = part
        square = 2.0 * part
        for r in range(size):
            for m in range(size):
                factor = part[r, m]
                if factor != 0.0:
                    for c in range(size):
                        square[r, c] += factor * part[m, c]
        part = square
    motion.built[segment, resting] = True


@njit(cache=True, nogil=True, error_model="numpy")
def apply_step(
    step: NDArray[np.float64], x: NDArray[np.float64], u: NDArray[np.float64], y: NDArray[np.float64]
) -> None:
    """y[:n] = x after the step, y[n] = the charge that passed in it."""
    n = step.shape[0] - 4
    for r in range(n + 1):
        change = step[r, n + 1] * u[0] + step[r, n + 2] * u[1] + step[r, n + 3] * u[2]
        for c in range(n):
            change += step[r, c] * x[c]
        y[r] = x[r] + change if r < n else change


@njit(cache=True, nogil=True, error_model="numpy")
def returned(voltage: float, before: float, after: float, charge: float, width: float) -> float:
    """Integral of -v i where v i < 0; where the current changes sign it is split as a straight line."""
    if voltage * before >= 0.0 and voltage * after >= 0.0:
        return 0.0
    if voltage * before <= 0.0 and voltage * after <= 0.0:
        return -voltage * charge
    back = before if voltage * before < 0.0 else after
    return -voltage * 0.5 * width * back * abs(back) / (abs(before) + abs(after))


@njit(cache=True, nogil=True, error_model="numpy")
def speed_row(motion: Motion, body: int) -> int:
    """Index of the body's speed."""
    return motion.layout.speed if body == 0 else motion.layout.load_speed


@njit(cache=True, nogil=True, error_model="numpy")
def held(motion: Motion, body: int) -> bool:
    """Whether something switches with the body's direction."""
    return bool(motion.drag[body, 1] > motion.drag[body, 0])


@njit(cache=True, nogil=True, error_model="numpy")
def starting(motion: Motion, body: int, x: NDArray[np.float64]) -> int:
    """Way a resting body would accelerate with the torques of that motion; 0 if it stays."""
    row = speed_row(motion, body)
    pull = 0.0
    for c in range(motion.a.shape[0]):
        pull += motion.a[row, c] * x[c]
    gain = motion.b[row, 1 + body]
    forwards, backwards = gain * motion.drag[body, 1], gain * motion.drag[body, 0]
    if pull + forwards > SLACK * abs(forwards):
        return 1
    if pull + backwards < -SLACK * abs(backwards):
        return -1
    return 0


@njit(cache=True, nogil=True, error_model="numpy")
def in_mode(motion: Motion, bodies: int, x: NDArray[np.float64]) -> bool:
    """Whether every body still moves, or rests, the way the mode says."""
    for body in range(bodies):
        if held(motion, body):
            heading = motion.heading[body]
            if heading == 0:
                if starting(motion, body, x) != 0:
                    return False
            elif x[speed_row(motion, body)] * heading < 0.0:
                return False
    return True


@njit(cache=True, nogil=True, error_model="numpy")
def enter_mode(motion: Motion, bodies: int, voltage: float) -> int:
    """Let resting bodies start that would; set the inputs; return which bodies rest."""
    resting = 0
    motion.torques[0] = voltage
    for body in range(bodies):
        torque = motion.drag[body, 1]
        if held(motion, body):
            if motion.heading[body] == 0:
                motion.heading[body] = starting(motion, body, motion.state)
            if motion.heading[body] == 0:
                resting |= 1 << body
            elif motion.heading[body] < 0:
                torque = motion.drag[body, 0]
        motion.torques[1 + body] = torque
    return resting


@njit(cache=True, nogil=True, error_model="numpy")
def near_reversal(motion: Motion, bodies: int, time: float) -> bool:
    """Whether a moving body brakes hard enough now to stop within ``time``, whatever its speed at the end."""
    for body in range(bodies):
        if held(motion, body) and motion.heading[body] != 0:
            row = speed_row(motion, body)
            slope = motion.b[row, 1 + body] * motion.torques[1 + body]
            for c in range(motion.a.shape[0]):
                slope += motion.a[row, c] * motion.state[c]
            if (motion.state[row] + slope * time) * motion.heading[body] < 0.0:
                return True
    return False


@njit(cache=True, nogil=True, error_model="numpy")
def stop_reversed(motion: Motion, bodies: int) -> None:
    """Bodies whose speed went through zero rest, at exactly zero, until they are found to start."""
    for body in range(bodies):
        row = speed_row(motion, body)
        if held(motion, body) and motion.state[row] * motion.heading[body] < 0.0:
            motion.state[row] = 0.0
            motion.heading[body] = 0


@njit(cache=True, nogil=True, error_model="numpy")
def leap(motion: Motion, segment: int, resting: int, units: int) -> None:
    """motion.trial[0] = state and charge after ``units`` of the segment, without looking for events."""
    x, y, z = motion.trial[1], motion.trial[0], motion.trial[2]
    n = motion.state.size
    if units == UNITS:
        apply_step(motion.steps[segment, resting], motion.state, motion.torques, y)
        return
    if not motion.built[segment, resting]:
        build_ladder(motion, segment, resting)
    charge = 0.0
    x[:n] = motion.state
    for level in range(LEVELS):
        if units & (1 << level):
            apply_step(motion.ladder[segment, resting, level], x[:n], motion.torques, z)
            charge += z[n]
            x[:n] = z[:n]
    y[:n] = x[:n]
    y[n] = charge


@njit(cache=True, nogil=True, error_model="numpy")
def accept(motion: Motion, voltage: float, width: float) -> float:
    """Take the trial as the state; return the energy given back on the way [J, without the 3/2 of pm-sine]."""
    n = motion.state.size
    given = returned(voltage, motion.state[0], motion.trial[0, 0], motion.trial[0, n], width)
    motion.state[:] = motion.trial[0, :n]
    return given


@njit(cache=True, nogil=True, error_model="numpy")
def travel(motion: Motion, segment: int, voltage: float) -> float:
    """Advance motion.state and motion.heading over one segment with constant voltage; return the energy given back."""
    bodies = 1 if motion.layout.load_speed < 0 else 2
    unit = motion.width[segment] / UNITS
    units = UNITS
    given = 0.0
    for _ in range(EVENTS):
        resting = enter_mode(motion, bodies, voltage)
        piece = units
        # A dip through zero and back would not show at the end of the segment: look in shorter pieces.
        if near_reversal(motion, bodies, units * unit):
            piece = min(units, UNITS >> 3)
        leap(motion, segment, resting, piece)
        if in_mode(motion, bodies, motion.trial[0]):
            given += accept(motion, voltage, piece * unit)
            units -= piece
            if units == 0:
                return given
            continue
        if not motion.built[segment, resting]:
            build_ladder(motion, segment, resting)
        ladder = motion.ladder[segment, resting]
        left = piece
        for level in range(LEVELS - 1, -1, -1):
            size = 1 << level
            if size < left:
                apply_step(ladder[level], motion.state, motion.torques, motion.trial[0])
                if in_mode(motion, bodies, motion.trial[0]):
                    given += accept(motion, voltage, size * unit)
                    left -= size
                    units -= size
        apply_step(ladder[0], motion.state, motion.torques, motion.trial[0])
        given += accept(motion, voltage, unit)
        units -= 1
        stop_reversed(motion, bodies)
        if units == 0:
            return given
    for body in range(bodies):
        if held(motion, body) and abs(motion.state[speed_row(motion, body)]) < 1e-6:
            motion.state[speed_row(motion, body)] = 0.0
            motion.heading[body] = 0
    resting = 0
    for body in range(bodies):
        if held(motion, body) and motion.heading[body] == 0:
            resting |= 1 << body
    leap(motion, segment, resting, units)
    given += accept(motion, voltage, units * unit)
    stop_reversed(motion, bodies)
    return given
