"""Energy given back over a log of segments, against the search on the whole power series and against quadrature."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import quad

from drives import ELASTIC, RIGID, matrix_of
from gainbench.kernels.bodies import inputs_of, resting_bodies
from gainbench.kernels.motion import change, plant_rate, prepare_motion, read_flow, read_step, stride
from gainbench.kernels.response_records import Drag, Heading, PlantState
from gainbench.kernels.returned import (
    BRIEF,
    CURRENT_AFTER,
    CURRENT_BEFORE,
    GIVEN,
    LOAD_SPEED_BEFORE,
    LOGGED,
    SPEED_BEFORE,
    TWIST_BEFORE,
    VOLTAGE_DURING,
    Term,
    look_closer,
    new_log,
    newton_step,
    next_term,
    returned_energy,
    state_before,
    turning_energy,
)
from gainbench.kernels.series import build_series, series_energy, state_at
from gainbench.kernels.travel import travel
from quantities import assert_quantity

DRAG = Drag(0.03, 0.05, 0.02, 0.04)
ROUNDING = "rounding of a short sum"
SLOW = replace(RIGID, inductance=4e-3)
FAST = replace(RIGID, inductance=0.03e-3)
"""A segment of 50 us is brief for the first and longer than the eight terms reach for the second."""


FORWARDS = Heading(1, 1)


class Case:
    """Segments of 50 us with random states, of one mode."""

    def __init__(self, plant, count, *, heading=FORWARDS, width=50e-6, seed=1):
        matrix, numbers = matrix_of(plant), np.random.default_rng(seed)
        self.motion, self.flow = prepare_motion(matrix, 0.0, width), read_flow(matrix, plant.elastic)
        self.plant, self.heading = plant, heading
        self.resting = resting_bodies(self.flow, heading)
        self.step = read_step(self.motion, 1, self.resting, self.motion.fine)
        self.log, self.segments = new_log(), []
        for place in range(count):
            voltage = numbers.uniform(-30.0, 30.0)
            # About as far from zero as the voltage takes the current in a segment.
            current = numbers.uniform(-1.0, 1.0) * 30.0 * width / plant.inductance
            x = PlantState(
                current,
                numbers.uniform(0.0, 100.0) * abs(heading.motor),
                0.0,
                numbers.uniform(0.0, 100.0) * plant.elastic * abs(heading.load),
                numbers.uniform(-1e-2, 1e-2) * plant.elastic,
                0.0,
            )
            u = inputs_of(DRAG, heading, voltage)
            y = stride(self.step, self.flow, x, u)
            self.segments.append((x, u, y))
            self.log[CURRENT_BEFORE + place], self.log[SPEED_BEFORE + place] = x.current, x.speed
            self.log[VOLTAGE_DURING + place], self.log[CURRENT_AFTER + place] = voltage, y.current
            if plant.elastic:
                self.log[LOAD_SPEED_BEFORE + place], self.log[TWIST_BEFORE + place] = x.load_speed, x.twist

    def searched(self, x, u):
        """By the search on the whole series."""
        build_series(self.motion.series, self.flow, self.resting, x, u, self.step.width)
        return series_energy(self.motion.series, u.voltage, 1.0)

    def returned(self, count):
        return returned_energy(self.motion, self.plant.elastic, DRAG, self.heading, 1, self.log, count)


def test_a_log_keeps_what_drives_the_current():
    case = Case(ELASTIC, 3)
    x = case.segments[2][0]
    assert state_before(case.log, 2) == x
    assert state_before(new_log(), 5)[3:5] == (0.0, 0.0)


def test_terms_are_those_of_the_series():
    for plant, heading in ((RIGID, Heading(1, 1)), (ELASTIC, Heading(1, 1)), (ELASTIC, Heading(0, 0))):
        case = Case(plant, 1, heading=heading)
        x, u, _ = case.segments[0]
        build_series(case.motion.series, case.flow, case.resting, x, u, case.step.width)
        term = Term(x.current, x.speed, x.load_speed, x.twist)
        for order in range(1, 6):
            driven = u if order == 1 else u._replace(voltage=0.0, motor_drag=0.0, load_drag=0.0)
            term = next_term(case.flow, case.resting, term, driven, case.step.width / order)
            wanted = case.motion.series[order, [0, 1, 3, 4]]
            assert_quantity(term, wanted, rtol=1e-13, atol=1e-18, unit="SI", why=ROUNDING)


def test_a_step_of_newtons_method():
    terms = (1.0, -2.0, 0.5, 3.0, -1.0, 0.2, 0.1, -0.4, 0.3)
    shape = np.polynomial.Polynomial(terms)
    assert newton_step(terms, 0.3) == pytest.approx(shape(0.3) / shape.deriv()(0.3), rel=1e-13)


@pytest.mark.parametrize("heading", [Heading(1, 1), Heading(0, 1), Heading(1, 0), Heading(0, 0)])
@pytest.mark.parametrize(
    ("plant", "width"),
    [(RIGID, 50e-6), (SLOW, 50e-6), (ELASTIC, 50e-6), (ELASTIC, 100e-6), (RIGID, 170e-6)],
)
def test_eight_terms_are_as_good_as_the_whole_series(plant, width, heading):
    case = Case(replace(plant, filter_time=0.0), 300, heading=heading, width=width)
    assert plant_rate(case.motion.matrix, False) * width <= BRIEF
    turned = 0
    for x, u, y in case.segments:
        total = change(case.step.charge, plant.elastic, x, u)
        got = turning_energy(case.flow, case.resting, x, y.current, u, width, total)
        if not np.isnan(got):
            turned += 1
            # A share of what would have been given back if the current had not turned.
            scale = abs(u.voltage) * width * max(abs(x.current), abs(y.current))
            wanted = case.searched(x, u)
            assert_quantity(got, wanted, rtol=1e-10, atol=1e-13 * scale, unit="J", why="terms behind the eighth")
        elif x.current * y.current < 0.0:
            slopes = [
                case.flow.ii * one.current + case.flow.iw * one.speed + case.flow.iv * u.voltage for one in (x, y)
            ]
            assert slopes[0] * slopes[1] <= 0.0
    assert turned > 30


def test_against_quadrature():
    case = Case(RIGID, 40)
    turned = 0
    for x, u, y in case.segments:
        total = change(case.step.charge, False, x, u)
        got = turning_energy(case.flow, 0, x, y.current, u, 50e-6, total)
        if not np.isnan(got):
            turned += 1
            build_series(case.motion.series, case.flow, 0, x, u, 50e-6)
            shape = np.polynomial.Polynomial(case.motion.series[:, 0])
            root = next(r.real for r in shape.roots() if abs(r.imag) < 1e-9 and 0.0 < r.real < 1.0)
            charges = [quad(shape, *ends)[0] * 50e-6 for ends in ((0.0, root), (root, 1.0))]
            wanted = max(-u.voltage * charge for charge in charges)
            assert_quantity(got, wanted, rtol=1e-10, atol=1e-16, unit="J", why="tolerance of the quadrature")
            assert state_at(case.motion.series, case.flow, root).current == pytest.approx(0.0, abs=1e-9)
    assert turned > 5


@pytest.mark.parametrize("plant", [RIGID, SLOW, FAST, ELASTIC, replace(ELASTIC, inductance=0.02e-3)])
@pytest.mark.parametrize("count", [0, 1, 2, 37, LOGGED])
def test_a_log_gives_back_what_its_segments_do(plant, count):
    case = Case(plant, count)
    assert case.motion.fine == 0
    wanted = [case.searched(x, u) for x, u, _ in case.segments]
    assert_quantity(case.returned(count), sum(wanted), rtol=1e-11, atol=1e-18, unit="J", why=ROUNDING)


def test_a_segment_that_is_long_against_the_plant():
    case = Case(replace(RIGID, inductance=2e-6), 60)
    assert case.motion.fine > 0
    wanted = 0.0
    for x, u, _ in case.segments:
        _, _, given = travel(case.motion, case.flow, DRAG, 1, x, u.voltage)
        wanted += given
    assert_quantity(case.returned(60), wanted, rtol=1e-10, unit="J", why=ROUNDING)


def test_only_what_is_not_known_is_looked_at():
    case = Case(RIGID, 3)
    case.log[GIVEN : GIVEN + 3] = [1.0, np.nan, 2.0]
    look_closer(case.motion, False, DRAG, case.heading, 1, case.log, 3)
    x, u, _ = case.segments[1]
    assert_quantity(case.log[GIVEN + 1], case.searched(x, u), rtol=1e-10, unit="J", why=ROUNDING)
    assert (case.log[GIVEN], case.log[GIVEN + 2]) == (1.0, 2.0)
