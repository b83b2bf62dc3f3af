"""The table of a mode: its step is the exact step, and its test for events is that of the bodies."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from drives import ELASTIC, RIGID, matrix_of
from gainbench.kernels.bodies import eventless, inputs_of, resting_bodies
from gainbench.kernels.gliding import MOTOR_HIGH, MOTOR_LOW, MOTOR_WAY, SIZE, fill_table, glide, put_row, strays
from gainbench.kernels.motion import prepare_motion, read_flow, read_step, stride
from gainbench.kernels.response_records import Drag, Heading, Inputs, PlantState, Row
from quantities import assert_quantity

WIDTH = 50e-6
FRICTION = Drag(-0.03, 0.05, -0.02, 0.04)
FREE = Drag(0.01, 0.01, 0.02, 0.02)
HEADINGS = [Heading(motor, load) for motor in (-1, 0, 1) for load in (-1, 0, 1)]


def own(drag, plant):
    """A rigid train has no load body that a drag could act on."""
    return drag if plant.elastic else drag._replace(load_backwards=0.0, load_forwards=0.0)


def table_of(plant, drag, heading):
    """The table of a second segment, whether a body rests, and the plant's motion and flow."""
    matrix, drag = matrix_of(plant), own(drag, plant)
    motion, table = prepare_motion(matrix, 0.0, WIDTH), np.full(SIZE, np.nan)
    rests = fill_table(table, motion, plant.elastic, drag, heading, 1)
    return table, rests, motion, read_flow(matrix, plant.elastic)


def test_a_row_weighs_the_drags_beforehand():
    table = np.zeros(6)
    put_row(table, 0, Row(1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0), Inputs(9.0, 0.5, -1.0), 2.0)
    assert list(table) == [2.0, 4.0, 6.0, 8.0, 10.0, -8.0]


@pytest.mark.parametrize("plant", [RIGID, replace(RIGID, filter_time=40e-6), ELASTIC])
@pytest.mark.parametrize("heading", HEADINGS)
def test_gliding_is_the_exact_step(plant, heading):
    x = PlantState(1.5, 80.0, 1.4 if plant.filter_time else 0.0, 79.0, 2e-3, 3.0)
    if not plant.elastic:
        x = x._replace(load_speed=0.0, twist=0.0)
    table, _, motion, flow = table_of(plant, FRICTION, heading)
    step = read_step(motion, 1, resting_bodies(flow, heading), motion.fine)
    wanted = stride(step, flow, x, inputs_of(own(FRICTION, plant), heading, -7.0))
    got = glide(table, plant.elastic, plant.filter_time > 0.0, x, -7.0)
    assert_quantity(got, wanted, rtol=1e-14, atol=1e-16, unit="SI", why="the order of a short sum")


def test_bounds_are_there_for_a_body_that_rests_only():
    table, rests, _, _ = table_of(RIGID, FRICTION, Heading(0, 1))
    assert rests
    assert table[MOTOR_WAY] == 0.0
    # -0.03 N m and 0.05 N m on 71 g cm^2 for 50 us.
    assert table[MOTOR_LOW] == pytest.approx(-0.03 / 7.1e-5 * WIDTH, rel=1e-11)
    assert table[MOTOR_HIGH] == pytest.approx(0.05 / 7.1e-5 * WIDTH, rel=1e-11)
    table, rests, _, _ = table_of(RIGID, FRICTION, Heading(-1, 1))
    assert not rests
    assert (table[MOTOR_WAY], table[MOTOR_LOW], table[MOTOR_HIGH]) == (-1.0, -np.inf, np.inf)
    table, rests, _, _ = table_of(RIGID, FREE, Heading(1, 1))
    assert not rests
    assert (table[MOTOR_WAY], table[MOTOR_LOW], table[MOTOR_HIGH]) == (0.0, -np.inf, np.inf)


@given(
    current=st.floats(-3.0, 3.0),
    speed=st.floats(-0.2, 0.2),
    load_speed=st.floats(-0.2, 0.2),
    twist=st.floats(-0.02, 0.02),
    voltage=st.floats(-40.0, 40.0),
    heading=st.sampled_from(HEADINGS),
    plant=st.sampled_from([RIGID, ELASTIC]),
    drag=st.sampled_from([FRICTION, FREE]),
)
def test_a_body_strays_where_the_segment_is_not_eventless(
    current, speed, load_speed, twist, voltage, heading, plant, drag
):
    if not plant.elastic:
        heading, load_speed, twist = Heading(heading.motor, 1), 0.0, 0.0
    if drag is FREE:
        heading = Heading(1, 1)
    x = PlantState(current, speed if heading.motor else 0.0, 0.0, load_speed if heading.load else 0.0, twist, 0.0)
    table, rests, _, flow = table_of(plant, drag, heading)
    y = glide(table, plant.elastic, False, x, voltage)
    drag = own(drag, plant)
    u = inputs_of(drag, heading, voltage)
    assert strays(table, plant.elastic, rests, x, y) is not eventless(flow, drag, heading, x, y, u, WIDTH)
