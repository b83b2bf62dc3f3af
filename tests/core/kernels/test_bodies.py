"""Which way a body moves or whether it rests: the edges of friction and of a load that drives or brakes."""

from __future__ import annotations

import pytest

from gainbench.kernels.bodies import (
    calm,
    depart,
    eventless,
    halt,
    in_mode,
    inputs_of,
    load_pull,
    motor_pull,
    resting_bodies,
    start_bounds,
    start_way,
)
from gainbench.kernels.motion import LOAD_RESTS, MOTOR_RESTS
from gainbench.kernels.response_records import Drag, Flow, Heading, Inputs, PlantState

# Inertia 1/2 of the motor, 1/3 of the load; Kt 1, stiffness 10, damping 1, viscous friction 0.5 and 0.
RIGID = Flow(False, -1.0, -1.0, 1.0, 2.0, -1.0, 0.0, 0.0, -2.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0)
ELASTIC = Flow(True, -1.0, -1.0, 1.0, 2.0, -3.0, 2.0, -20.0, -2.0, 0.0, 0.0, 3.0, -3.0, 30.0, -3.0)
FRICTION = Drag(-0.4, 0.4, -0.2, 0.2)
FREE = Drag(0.0, 0.0, 0.0, 0.0)


def state(current=0.0, speed=0.0, load_speed=0.0, twist=0.0):
    return PlantState(current, speed, 0.0, load_speed, twist, 0.0)


def test_pull_is_all_but_the_own_drag():
    x = state(current=1.0, speed=2.0, load_speed=-1.0, twist=0.1)
    assert motor_pull(RIGID, x) == 0.0
    assert motor_pull(ELASTIC, x) == 2.0 - 6.0 - 2.0 - 2.0
    assert load_pull(ELASTIC, x) == pytest.approx(6.0 + 3.0 + 3.0)


@pytest.mark.parametrize(
    ("pull", "backwards", "forwards", "way"),
    [
        (0.0, -1.0, 1.0, 0),
        (1.0, -1.0, 1.0, 0),
        (1.0 + 1e-11, -1.0, 1.0, 1),
        (-1.0, -1.0, 1.0, 0),
        (-1.0 - 1e-11, -1.0, 1.0, -1),
        # A load of 1 with half of it reaching the motor: it holds from 0.5 to 2 at the motor.
        (2.0, 0.5, 2.0, 0),
        (2.1, 0.5, 2.0, 1),
        (0.5, 0.5, 2.0, 0),
        (0.4, 0.5, 2.0, -1),
    ],
)
def test_a_body_at_rest_starts_against_the_torques_of_that_motion(pull, backwards, forwards, way):
    # The drags themselves, of a body of inertia 1.
    assert start_way(pull, start_bounds(-1.0, backwards, forwards)) == way


@pytest.mark.parametrize(
    ("heading", "x", "right"),
    [
        (0, state(current=0.4), True),
        (0, state(current=0.41), False),
        (0, state(current=-0.41), False),
        (1, state(speed=0.1), True),
        (1, state(speed=0.0), True),
        (1, state(speed=-0.1), False),
        (-1, state(speed=-0.1), True),
        (-1, state(speed=0.1), False),
    ],
)
def test_a_mode_holds_while_the_body_goes_that_way(heading, x, right):
    assert in_mode(RIGID, FRICTION, Heading(heading, 1), x) is right
    assert in_mode(RIGID, FREE, Heading(heading, 1), x) is True


def test_the_load_body_has_a_mode_of_its_own():
    moving = state(speed=1.0, load_speed=-0.1, current=3.0)
    assert not in_mode(ELASTIC, FRICTION, Heading(1, 1), moving)
    assert in_mode(ELASTIC, FRICTION, Heading(1, -1), moving)


def test_headings_follow_from_the_state():
    assert depart(RIGID, FRICTION, state(speed=-1.0)) == Heading(-1, 1)
    assert depart(RIGID, FRICTION, state(current=1.0)) == Heading(1, 1)
    assert depart(RIGID, FRICTION, state(current=0.1)) == Heading(0, 1)
    assert depart(RIGID, FREE, state(speed=-1.0)) == Heading(1, 1)
    assert depart(ELASTIC, FRICTION, state(twist=-0.05, load_speed=0.0)) == Heading(1, -1)


def test_bodies_at_rest_are_told_by_bits():
    assert resting_bodies(RIGID, Heading(0, 0)) == MOTOR_RESTS
    assert resting_bodies(ELASTIC, Heading(0, 0)) == MOTOR_RESTS | LOAD_RESTS
    assert resting_bodies(ELASTIC, Heading(-1, 0)) == LOAD_RESTS
    assert resting_bodies(ELASTIC, Heading(1, -1)) == 0


def test_inputs_are_those_of_the_way():
    assert inputs_of(FRICTION, Heading(1, -1), 5.0) == Inputs(5.0, 0.4, -0.2)
    assert inputs_of(FRICTION, Heading(-1, 1), 5.0) == Inputs(5.0, -0.4, 0.2)


def test_a_body_that_went_through_zero_rests_at_exactly_zero():
    heading, x = halt(ELASTIC, FRICTION, Heading(1, 1), state(speed=-1e-9, load_speed=2.0))
    assert heading == Heading(0, 1)
    assert x == state(speed=0.0, load_speed=2.0)
    assert halt(RIGID, FREE, Heading(1, 1), state(speed=-1.0))[1] == state(speed=-1.0)


def test_bodies_that_all_but_rest_are_calmed():
    heading, x = calm(ELASTIC, FRICTION, Heading(1, -1), state(speed=1e-7, load_speed=-2.0))
    assert heading == Heading(0, -1)
    assert x == state(speed=0.0, load_speed=-2.0)


def test_a_body_that_could_stop_and_come_back_is_looked_at():
    # At 0.01 rad/s it brakes with 0.82 rad/s^2: within 0.1 s it may have been at rest.
    x, y, u = state(speed=0.01), state(speed=0.005), Inputs(0.0, 0.4, 0.0)
    assert eventless(RIGID, FRICTION, Heading(1, 1), x, y, u, 1e-3)
    assert not eventless(RIGID, FRICTION, Heading(1, 1), x, y, u, 0.1)
    assert eventless(RIGID, FREE, Heading(1, 1), x, y, u, 0.1)
