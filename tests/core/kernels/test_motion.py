"""Exact steps of the plant, against a general library's exponential and published sampled models."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.linalg import expm

from drives import ELASTIC, RIGID, matrix_of
from gainbench.kernels.motion import (
    CHARGE,
    LOAD_RESTS,
    MOTOR_RESTS,
    plant_rate,
    prepare_motion,
    read_flow,
    read_step,
    stride,
)
from gainbench.kernels.response_records import Inputs, PlantState
from quantities import assert_quantity

ROUNDING = "rounding of a few products"


def steady(matrix, x: PlantState, u: Inputs, time: float, resting: int = 0):
    """State and charge after a time, by a dense exponential."""
    whole = np.zeros((10, 10))
    whole[:7] = matrix
    if resting & MOTOR_RESTS:
        whole[1] = 0.0
    if resting & LOAD_RESTS:
        whole[3] = 0.0
    return (expm(whole * time) @ np.array([*x, 0.0, *u]))[:7]


X = PlantState(1.5, 80.0, 1.4, 79.0, 2e-3, 3.0)
U = Inputs(12.0, 0.02, 0.03)


@pytest.mark.parametrize(
    "plant", [RIGID, replace(RIGID, filter_time=3e-5), ELASTIC], ids=["rigid", "filter", "elastic"]
)
@pytest.mark.parametrize("resting", [0, MOTOR_RESTS, LOAD_RESTS])
def test_a_step_is_the_exponential(plant, resting):
    if resting == LOAD_RESTS and not plant.elastic:
        resting = 0
    x = X if plant.elastic else X._replace(load_speed=0.0, twist=0.0)
    x = x if plant.filter_time > 0.0 else x._replace(filtered=0.0)
    u = U if plant.elastic else U._replace(load_drag=0.0)
    matrix = matrix_of(plant)
    motion, flow = prepare_motion(matrix, 15e-6, 35e-6), read_flow(matrix, plant.elastic)
    if resting & MOTOR_RESTS:
        x = x._replace(speed=0.0)
    if resting & LOAD_RESTS:
        x = x._replace(load_speed=0.0)
    for segment, time in ((0, 15e-6), (1, 35e-6)):
        step = read_step(motion, segment, resting, motion.fine)
        assert step.width == pytest.approx(time, rel=1e-14)
        wanted = steady(matrix, x, u, time, resting)
        assert_quantity(stride(step, flow, x, u), wanted[:6], rtol=1e-13, atol=1e-15, unit="SI", why=ROUNDING)
    charge = step.charge
    got = charge.current * x.current + charge.speed * x.speed + charge.voltage * u.voltage
    got += charge.motor_drag * u.motor_drag + charge.load_speed * x.load_speed + charge.twist * x.twist
    got += charge.load_drag * u.load_drag
    assert_quantity(got, wanted[CHARGE], rtol=1e-12, unit="A s", why=ROUNDING)


@pytest.mark.parametrize("plant", [RIGID, replace(RIGID, filter_time=3e-5), ELASTIC, replace(ELASTIC, filter_time=0.0)])
def test_the_coefficients_are_all_there_is_in_the_plant(plant):
    # What read_flow leaves out is 0, or 1 or -1 by definition: else series and steps would part ways.
    left = matrix_of(plant).copy()
    for row, column in ((0, 0), (0, 1), (0, 7), (1, 0), (1, 1), (1, 3), (1, 4), (1, 8), (2, 0), (2, 2)):
        left[row, column] = 0.0
    for row, column in ((3, 1), (3, 3), (3, 4), (3, 9)):
        left[row, column] = 0.0
    assert left[5, 1] == 1.0
    assert left[CHARGE, 0] == 1.0
    if plant.elastic:
        assert left[4, 1] == 1.0
        assert left[4, 3] == -1.0
    # A rigid body takes the load's drag with its own; the kernels put both into the motor's.
    assert plant.elastic or left[1, 9] == matrix_of(plant)[1, 8]
    left[5, 1] = left[CHARGE, 0] = left[4, 1] = left[4, 3] = 0.0
    left[1, 9] *= plant.elastic
    assert not left.any()


TUTORIAL = replace(
    RIGID, resistance=1.0, inductance=0.5, back_emf=0.01, torque=0.01, motor_inertia=0.01, motor_viscous=0.1
)
"""DC Motor Speed, Control Tutorials, Univ. of Michigan, Carnegie Mellon, Univ. of Detroit Mercy."""


def test_e2_poles_of_the_tutorial_motor():
    # E2 (read in a mirror copy): -2.003 and -9.997, rounded to three digits after the point.
    a = matrix_of(TUTORIAL)[:2, :2]
    assert_quantity(sorted(np.linalg.eigvals(a)), [-9.997, -2.003], atol=5.1e-4, unit="1/s", why="published digits")


def test_e3_e4_sampled_model_of_the_tutorial_motor():
    # E3 (read in a mirror copy): 0.0020586 (z + 0.8189)/((z - 0.9047)(z - 0.6066)), hold over 0.05 s;
    # E4: (0.002059 z + 0.001686)/(z^2 - 1.511 z + 0.5488), the same multiplied out.
    motion = prepare_motion(matrix_of(TUTORIAL), 0.0, 0.05)
    step = read_step(motion, 1, 0, motion.fine)
    a = np.eye(2) + np.array([[row.current, row.speed] for row in (step.current, step.speed)])
    b = np.array([step.current.voltage, step.speed.voltage])
    poles = sorted(np.linalg.eigvals(a))
    assert_quantity(poles, [0.6066, 0.9047], atol=5e-5, unit="1", why="published digits")
    # y[1] z + (y[2] + a1 y[1]) over the characteristic polynomial, from the first two samples after an impulse.
    first, second = b[1], (a @ b)[1]
    numerator = [first, second - np.trace(a) * first]
    assert_quantity(numerator, [0.0020586, 0.001686], atol=5e-7, unit="1", why="published digits")
    assert_quantity(-numerator[1] / numerator[0], -0.8189, atol=5e-5, unit="1", why="published digits")
    assert_quantity([np.trace(a), np.linalg.det(a)], [1.511, 0.5488], atol=5e-4, unit="1", why="published digits")


def test_e10_a_stiff_plant_is_halved_into_short_pieces():
    # E10: the position variant of the same tutorials; its poles are 0, -59.226 and -1.4545e6 1/s.
    stiff = replace(
        RIGID, resistance=4.0, inductance=2.75e-6, back_emf=0.0274, torque=0.0274, motor_inertia=3.2284e-6,
        motor_viscous=3.5077e-6,
    )  # fmt: skip
    matrix = matrix_of(stiff)
    poles = sorted(np.linalg.eigvals(matrix[:2, :2]))
    assert_quantity(poles, [-1.4545e6, -59.226], rtol=5e-5, unit="1/s", why="published digits")
    assert plant_rate(matrix, True) >= 1.4545e6
    motion, flow = prepare_motion(matrix, 0.0, 1e-3), read_flow(matrix, False)
    assert motion.fine == 10
    x, u = PlantState(1.5, 80.0, 0.0, 0.0, 0.0, 3.0), Inputs(12.0, 0.002, 0.0)
    for level in range(motion.fine + 1):
        step = read_step(motion, 1, 0, level)
        assert step.width == pytest.approx(1e-3 / 2 ** (motion.fine - level), rel=1e-15)
        wanted = steady(matrix, x, u, step.width)
        # The dense exponential itself is good to 1e-16 of a norm of 1455, squared ten times.
        assert_quantity(stride(step, flow, x, u), wanted[:6], rtol=1e-11, atol=1e-12, unit="SI", why=ROUNDING)


def test_the_filtered_current_can_be_left_out_of_the_rate():
    matrix = matrix_of(replace(ELASTIC, filter_time=1e-6))
    assert plant_rate(matrix, True) >= 1e6
    assert plant_rate(matrix, False) == plant_rate(matrix_of(replace(ELASTIC, filter_time=0.0)), True)
