"""The named tuples that the response kernels share: plain scalars and arrays, SI, no numba."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

BACKWARD = 0
FORWARD = 1
TRAPEZOID = 2


class PiLaw(NamedTuple):
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


class PiInputs(NamedTuple):
    """What a PI controller reads at its tick."""

    reference: float
    measured: float
    addend: float
    """Added to the sum before the clamp: the feedforward."""
    limit: float
    """Of the clamp, >= 0."""


class PiOutput(NamedTuple):
    """What a PI controller puts out."""

    value: float
    clamped: bool


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
    """Ticks from a speed tick to its current reference, below ``divisor``."""
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
    """The duty in ticks; a tick at or beyond the last is never reached."""

    reference: float
    """[rad/s], with its sign."""
    reference_tick: int
    reference_at: float
    """[s]."""
    ramp: float
    """[rad/s^2]; 0 is a step."""
    stop_tick: int
    stop_at: float
    """[s]."""
    stop_ramp: float
    """[rad/s^2]; 0 is a step."""
    stop_size: float
    """Size of the reference when the stop begins [rad/s]."""
    load_tick: int
    """First tick whose interval carries the load step."""


class Start(NamedTuple):
    """The equilibrium that the duty starts from."""

    current: float
    """[A]."""
    voltage: float
    """[V]."""
    twist: float
    """[rad]."""


class Layout(NamedTuple):
    """Where the states of the plant's state space are; -1 where there is none."""

    filtered: int
    load_speed: int
    """-1 where rigid."""
    twist: int
    angle: int


class PlantState(NamedTuple):
    """The plant's state; those that a plant lacks stay 0."""

    current: float
    """[A]."""
    speed: float
    """Of the motor [rad/s]."""
    filtered: float
    """Current behind the analogue filter [A]."""
    load_speed: float
    """[rad/s]."""
    twist: float
    """[rad]."""
    angle: float
    """Of the motor [rad]."""


class Heading(NamedTuple):
    """Way of each body that something switches for: 1 forwards, -1 backwards, 0 at rest; 1 where nothing does."""

    motor: int
    load: int


class Drag(NamedTuple):
    """Torque against each body where it moves backwards and forwards: its Coulomb friction and the load it carries.

    Where both are one, nothing switches with the direction.
    """

    motor_backwards: float
    """[N m], as the next three; backwards is at most forwards."""
    motor_forwards: float
    load_backwards: float
    load_forwards: float


class Inputs(NamedTuple):
    """What is constant over a piece of the motion."""

    voltage: float
    """[V]."""
    motor_drag: float
    """[N m]."""
    load_drag: float
    """[N m]; 0 where rigid."""


class Flow(NamedTuple):
    """The plant's equations: ``ab`` is the rate of a by b, SI.

    i current, w motor speed, f filtered current, l load speed, t twist; v voltage, d the body's own drag.
    """

    elastic: bool
    ii: float
    iw: float
    iv: float
    wi: float
    ww: float
    wl: float
    wt: float
    wd: float
    fi: float
    ff: float
    lw: float
    ll: float
    lt: float
    ld: float


class Row(NamedTuple):
    """Change of one state over a step, by what it comes from."""

    current: float
    speed: float
    load_speed: float
    twist: float
    voltage: float
    motor_drag: float
    load_drag: float


class Step(NamedTuple):
    """Change of the plant over an exact step of constant inputs."""

    width: float
    """[s]."""
    current: Row
    speed: Row
    filtered: Row
    filtered_self: float
    """Change of the filtered current by itself."""
    load_speed: Row
    twist: Row
    angle: Row
    charge: Row
    """The integral of the current."""


class Motion(NamedTuple):
    """Steps of the plant over the two segments of a tick, and over binary parts of them, computed where needed."""

    matrix: NDArray[np.float64]
    """dx/dt by states (in the order of PlantState, then the charge) and inputs, shape (7, 10)."""
    width: NDArray[np.float64]
    """Length of each segment [s], shape (2,)."""
    fine: int
    """A segment is 2^fine pieces that are short against the plant."""
    terms: int
    """Of the power series over a piece."""
    ladder: NDArray[np.float64]
    """Change over 1, 2, 4, ... pieces by segment and resting bodies, shape (2, 4, fine + 1, 7, 8)."""
    built: NDArray[np.bool_]
    """Which ladders are built, shape (2, 4)."""
    series: NDArray[np.float64]
    """Scratch: coefficients of states and charge over a piece, shape (terms + 1, 7)."""


class Run(NamedTuple):
    """All that a run of the duty starts from."""

    plant: tuple[NDArray[np.float64], NDArray[np.float64]]
    """``dx/dt = a x + b u`` of :func:`gainbench.plant.state_space`, shapes (n, n) and (n, 3)."""
    layout: Layout
    sampling: Sampling
    current_law: PiLaw
    speed_law: PiLaw
    script: Script
    start: Start
    drags: tuple[Drag, Drag]
    """Without and with the load step."""


class Tally(NamedTuple):
    """What the tick loop adds up."""

    peak_current: float
    """[A]."""
    squares: float
    """Sum of the squared currents at the ticks [A^2]."""
    peak_voltage: float
    """[V]."""
    current_clamps: int
    """Speed ticks whose clamp acted."""
    voltage_clamps: int
    """Ticks whose clamp acted."""
    returned: float
    """Integral of -v i where v i < 0 [J, without the 3/2 of pm-sine]."""
