"""Which way each body moves, or whether it rests: Coulomb friction and a load torque that changes with the direction.

A body at rest starts only if it would accelerate that way with the torques of that motion: its friction, and the
efficiency of that direction. A moving body whose speed goes through zero comes to rest, at exactly zero, until it is
found to start again.
"""

from __future__ import annotations

from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.motion import LOAD_RESTS, MOTOR_RESTS
from gainbench.kernels.response_records import Drag, Flow, Heading, Inputs, PlantState

SLACK = 1e-12
"""Share of the holding torque that a start needs in excess, so that an equilibrium on the edge rests."""
STILL = 1e-6
"""Speed below which a body that starts and stops without end is made to rest [rad/s]."""


@inlined
def motor_pull(flow: Flow, x: PlantState) -> float:
    """Acceleration of the motor's body by everything but its own drag [rad/s^2]."""
    value = flow.wi * x.current + flow.ww * x.speed
    if flow.elastic:
        value += flow.wl * x.load_speed + flow.wt * x.twist
    return value


@inlined
def load_pull(flow: Flow, x: PlantState) -> float:
    """Acceleration of the load's body by everything but its own drag [rad/s^2]."""
    return flow.lw * x.speed + flow.ll * x.load_speed + flow.lt * x.twist


@inlined
def start_bounds(weight: float, backwards: float, forwards: float) -> tuple[float, float]:
    """Accelerations below and above which a body at rest starts [rad/s^2], of its drags and what one weighs there."""
    low, high = -weight * backwards, -weight * forwards
    return low - SLACK * abs(low), high + SLACK * abs(high)


@inlined
def start_way(pull: float, bounds: tuple[float, float]) -> int:
    """Way a resting body would accelerate; 0 if it stays."""
    if pull > bounds[1]:
        return 1
    if pull < bounds[0]:
        return -1
    return 0


@inlined
def motor_start(flow: Flow, drag: Drag, x: PlantState) -> int:
    """Way the resting motor body would start; 0 if it stays."""
    return start_way(motor_pull(flow, x), start_bounds(flow.wd, drag.motor_backwards, drag.motor_forwards))


@inlined
def load_start(flow: Flow, drag: Drag, x: PlantState) -> int:
    """Way the resting load body would start; 0 if it stays."""
    return start_way(load_pull(flow, x), start_bounds(flow.ld, drag.load_backwards, drag.load_forwards))


@inlined
def motor_switches(drag: Drag) -> bool:
    """Whether something switches with the direction of the motor's body."""
    return drag.motor_forwards > drag.motor_backwards


@inlined
def load_switches(flow: Flow, drag: Drag) -> bool:
    """Whether something switches with the direction of a load body."""
    return flow.elastic and drag.load_forwards > drag.load_backwards


@inlined
def in_mode(flow: Flow, drag: Drag, heading: Heading, x: PlantState) -> bool:
    """Whether every body still moves, or rests, the way its heading says."""
    if motor_switches(drag):
        if heading.motor == 0:
            if motor_start(flow, drag, x) != 0:
                return False
        elif x.speed * heading.motor < 0.0:
            return False
    if load_switches(flow, drag):
        if heading.load == 0:
            if load_start(flow, drag, x) != 0:
                return False
        elif x.load_speed * heading.load < 0.0:
            return False
    return True


@inlined
def eventless(flow: Flow, drag: Drag, heading: Heading, x: PlantState, y: PlantState, u: Inputs, time: float) -> bool:
    """Whether no body starts, stops or turns on the way from x to y.

    A dip through zero and back does not show at the end: a body that brakes hard enough at x to stop within ``time``
    counts as one that may.
    """
    if not in_mode(flow, drag, heading, y):
        return False
    if motor_switches(drag) and heading.motor != 0:
        aimed = x.speed + (motor_pull(flow, x) + flow.wd * u.motor_drag) * time
        if aimed * heading.motor < 0.0:
            return False
    if load_switches(flow, drag) and heading.load != 0:
        aimed = x.load_speed + (load_pull(flow, x) + flow.ld * u.load_drag) * time
        if aimed * heading.load < 0.0:
            return False
    return True


@inlined
def resting_bodies(flow: Flow, heading: Heading) -> int:
    """Which bodies rest: MOTOR_RESTS, LOAD_RESTS, their sum, or 0."""
    resting = MOTOR_RESTS if heading.motor == 0 else 0
    if flow.elastic and heading.load == 0:
        resting |= LOAD_RESTS
    return resting


@inlined
def inputs_of(drag: Drag, heading: Heading, voltage: float) -> Inputs:
    """Inputs in force; a drag is without meaning where its body rests."""
    return Inputs(
        voltage,
        drag.motor_backwards if heading.motor < 0 else drag.motor_forwards,
        drag.load_backwards if heading.load < 0 else drag.load_forwards,
    )


@compiled
def depart(flow: Flow, drag: Drag, x: PlantState) -> Heading:
    """Heading of each body: the way it moves, or would start from rest; 0 if it stays, 1 where nothing switches."""
    motor = load = 1
    if motor_switches(drag):
        motor = motor_start(flow, drag, x) if x.speed == 0.0 else (1 if x.speed > 0.0 else -1)
    if load_switches(flow, drag):
        load = load_start(flow, drag, x) if x.load_speed == 0.0 else (1 if x.load_speed > 0.0 else -1)
    return Heading(motor, load)


@compiled
def halt(flow: Flow, drag: Drag, heading: Heading, x: PlantState) -> tuple[Heading, PlantState]:
    """Bodies whose speed went through zero rest, until they are found to start."""
    motor, load = heading.motor, heading.load
    speed, load_speed = x.speed, x.load_speed
    if motor_switches(drag) and speed * motor < 0.0:
        motor, speed = 0, 0.0
    if load_switches(flow, drag) and load_speed * load < 0.0:
        load, load_speed = 0, 0.0
    return Heading(motor, load), PlantState(x.current, speed, x.filtered, load_speed, x.twist, x.angle)


@compiled
def calm(flow: Flow, drag: Drag, heading: Heading, x: PlantState) -> tuple[Heading, PlantState]:
    """Bodies that all but rest are made to rest."""
    motor, load = heading.motor, heading.load
    speed, load_speed = x.speed, x.load_speed
    if motor_switches(drag) and abs(speed) < STILL:
        motor, speed = 0, 0.0
    if load_switches(flow, drag) and abs(load_speed) < STILL:
        load, load_speed = 0, 0.0
    return Heading(motor, load), PlantState(x.current, speed, x.filtered, load_speed, x.twist, x.angle)
