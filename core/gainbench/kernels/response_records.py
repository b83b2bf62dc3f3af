"""The named tuples that the response kernel takes: plain scalars and arrays, SI, no numba."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

BACKWARD = 0
FORWARD = 1
TRAPEZOID = 2


class PiRule(NamedTuple):
    """A PI controller's parameters."""

    kp: float
    """Proportional gain, output unit per input unit."""
    ki_period: float
    """Ki times the controller's period."""
    weight: float
    """Of the reference in the proportional part."""
    rule: int
    """BACKWARD, FORWARD or TRAPEZOID."""
    hold: bool
    """True holds the integrator at the clamp, False calculates it back."""
    relief: float
    """min(1, T Ki/Kp), of back-calculation."""


class PiState(NamedTuple):
    """A PI controller's state."""

    integral: float
    """In the unit of the output."""
    error: float
    """The previous tick's error."""


class Sampling(NamedTuple):
    """The sampled law around the two PI controllers."""

    ticks: int
    divisor: int
    """N, current ticks per speed tick."""
    period: float
    """Ts [s]."""
    held_ticks: int
    """Whole periods of the update delay, 0 to 2."""
    held_part: float
    """The rest of the update delay in periods, 0 to below 1."""
    reference_delay: int
    """Ticks from a speed tick to its current reference."""
    counts_per_radian: float
    """Of the encoder; 0 is the ideal sensor."""
    window: int
    """In speed periods."""
    filter_gain: float
    """1 - exp(-Tw/Tf); 1 without a filter."""
    feedforward: float
    """Ke [V s/rad] where the back EMF is fed forward, else 0."""
    current_limit: float
    """[A]."""
    voltage_limit: float
    """[V]."""
    reactance: float
    """p L of pm-sine, whose q axis shares the voltage with w p L i [V s/(rad A)]; else 0."""


class Script(NamedTuple):
    """The duty in ticks."""

    reference: float
    """[rad/s], with its sign."""
    reference_tick: int
    reference_at: float
    """[s]."""
    ramp: float
    """[rad/s^2]; 0 is a step."""
    stop_tick: int
    """Beyond the last tick where the duty has no stop."""
    stop_at: float
    """[s]."""
    stop_ramp: float
    """[rad/s^2]; 0 is a step."""
    stop_size: float
    """Size of the reference when the stop begins [rad/s]."""
    load_tick: int
    """First tick whose interval carries the load step; beyond the last tick without one."""


class Start(NamedTuple):
    """The equilibrium that the duty starts from."""

    current: float
    """[A]."""
    voltage: float
    """[V]."""
    twist: float
    """[rad]."""


class Layout(NamedTuple):
    """Where the plant's states are; -1 where there is none."""

    speed: int
    load_speed: int
    """-1 where rigid."""
    twist: int
    sampled: int
    """Of the current that is sampled."""


class Motion(NamedTuple):
    """Exact steps of the plant over the segments of a tick, and over their binary parts around events.

    ``drag[body, way]`` is the torque against the body where it moves backwards (way 0) or forwards (way 1): its
    Coulomb friction and the load torque it carries. Where both are one, the body is free: nothing switches.
    """

    a: NDArray[np.float64]
    """shape (n, n)."""
    b: NDArray[np.float64]
    """shape (n, 3): voltage, torque on the motor body, torque on the load body."""
    layout: Layout
    width: NDArray[np.float64]
    """Length of each segment [s], shape (2,)."""
    steps: NDArray[np.float64]
    """exp - I over a segment by segment and resting bodies, shape (2, 4, n + 4, n + 4)."""
    ladder: NDArray[np.float64]
    """The same over binary parts of a segment, built where needed, shape (2, 4, LEVELS, n + 4, n + 4)."""
    built: NDArray[np.bool_]
    """Which ladders are built, shape (2, 4)."""
    drag: NDArray[np.float64]
    """[N m], shape (2, 2)."""
    heading: NDArray[np.int64]
    """Of each body: 1 forwards, -1 backwards, 0 at rest; without meaning where free. Shape (2,)."""
    state: NDArray[np.float64]
    """shape (n,)."""
    trial: NDArray[np.float64]
    """Scratch, shape (3, n + 1)."""
    torques: NDArray[np.float64]
    """Scratch: the inputs in force, shape (3,)."""
