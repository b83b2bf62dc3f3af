"""Segments in which bodies start and stop, against closed forms, plain integration and the balance of energy."""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest

from drives import ELASTIC, RIGID, matrix_of
from gainbench.kernels.motion import prepare_motion, read_flow
from gainbench.kernels.response_records import Drag, PlantState
from gainbench.kernels.travel import travel
from plain_drive import PlainPlant
from quantities import assert_quantity

REST = PlantState(0.0, 0.0, 0.0, 0.0, 0.0, 0.0)


def go(plant, drag, x, voltage, time, *, pieces=1):
    """Headings, state and energy given back after ``pieces`` segments of ``time`` each, and the states between."""
    matrix = matrix_of(plant)
    motion, flow = prepare_motion(matrix, 0.0, time), read_flow(matrix, plant.elastic)
    energy, states, heading = 0.0, [x], None
    for _ in range(pieces):
        heading, x, given = travel(motion, flow, drag, 1, x, voltage)
        energy += given
        states.append(x)
    return heading, x, energy, states


def friction(motor=0.0, load=0.0):
    return Drag(-motor, motor, -load, load)


COASTING = replace(RIGID, torque=1e-300, back_emf=1e-300, motor_inertia=1e-4, motor_viscous=2e-5)
"""Open terminals: a machine whose current does nothing."""


@pytest.mark.parametrize("way", [1, -1])
def test_k10_coast_down_stops_when_the_closed_form_says(way):
    # K10, closed form: w = (w0 + Tc/B) exp(-B t/J) - Tc/B, at rest at (J/B) ln(1 + B w0/Tc) = 3.942287 s.
    J, B, Tc, w0 = 1e-4, 2e-5, 5e-3, 300.0
    stop = J / B * math.log1p(B * w0 / Tc)
    assert stop == pytest.approx(3.942287, abs=5e-7)
    start = PlantState(0.0, way * w0, 0.0, 0.0, 0.0, 0.0)
    time = 3.5
    heading, x, _, _ = go(COASTING, friction(Tc), start, 0.0, time)
    speed = (w0 + Tc / B) * math.exp(-B * time / J) - Tc / B
    assert heading.motor == way
    assert_quantity(x.speed, way * speed, rtol=1e-11, unit="rad/s", why="rounding")
    heading, x, _, _ = go(COASTING, friction(Tc), start, 0.0, 4.5)
    assert heading.motor == 0
    assert x.speed == 0.0
    # The angle it came to rest at: the integral of the closed form up to the stop.
    angle = J / B * w0 - Tc / B * stop
    assert_quantity(x.angle, way * angle, rtol=1e-12, unit="rad", why="rounding of the instant of the stop")


def test_k10_without_viscous_friction_the_speed_falls_on_a_straight_line():
    # K10 with B = 0: at rest after w0 J/Tc = 6 s, at w0^2 J/(2 Tc).
    plant = replace(COASTING, motor_viscous=0.0)
    _, x, _, _ = go(plant, friction(5e-3), PlantState(0.0, 300.0, 0.0, 0.0, 0.0, 0.0), 0.0, 6.0 + 1e-6)
    assert x.speed == 0.0
    assert_quantity(x.angle, 900.0, rtol=1e-12, unit="rad", why="rounding of the instant of the stop")


def test_k10_without_coulomb_friction_nothing_stops():
    _, x, _, _ = go(COASTING, friction(), PlantState(0.0, 300.0, 0.0, 0.0, 0.0, 0.0), 0.0, 20.0)
    assert_quantity(x.speed, 300.0 * math.exp(-4.0), rtol=1e-12, unit="rad/s", why="rounding")


@pytest.mark.parametrize(("lags", "percent"), [(1.0, 63.212), (5.0, 99.326)])
def test_k11_locked_rotor(lags, percent):
    # K11, closed form: i = V/R (1 - exp(-t R/L)); the rotor is locked by friction that it cannot overcome.
    time = lags * RIGID.inductance / RIGID.resistance
    heading, x, _, _ = go(RIGID, friction(10.0), REST, 6.0, time)
    assert heading.motor == 0
    assert x.speed == x.angle == 0.0
    assert_quantity(10.0 * x.current, percent, atol=5.1e-4, unit="%", why="published digits")
    assert_quantity(x.current, -10.0 * math.expm1(-lags), rtol=1e-13, unit="A", why="rounding")


def test_e1_tutorial_motor_on_one_volt():
    # E1, DC Motor Speed, Control Tutorials, Univ. of Michigan, System Analysis page (read): 0.1 rad/s, 2 % at 2.07 s;
    # with all its digits 0.0999001 rad/s.
    plant = replace(
        RIGID, resistance=1.0, inductance=0.5, back_emf=0.01, torque=0.01, motor_inertia=0.01, motor_viscous=0.1
    )
    _, x, _, _ = go(plant, friction(), REST, 1.0, 20.0)
    assert_quantity(x.speed, 0.0999001, atol=5.1e-8, unit="rad/s", why="published digits")
    _, x, _, states = go(plant, friction(), REST, 1.0, 1e-3, pieces=3000)
    outside = [k for k, one in enumerate(states) if abs(one.speed / 0.09990010 - 1.0) > 0.02]
    assert_quantity(outside[-1] * 1e-3, 2.07, atol=5e-3, unit="s", why="published digits")


def test_a_body_breaks_away_when_the_torque_passes_its_friction():
    # i = V/R (1 - exp(-t R/L)) reaches Tc/Kt = 2 A at tau ln(1/(1 - 2 R/V)).
    tau = RIGID.inductance / RIGID.resistance
    held, voltage = 2.0 * RIGID.torque, 6.0
    leave = -tau * math.log1p(-2.0 * RIGID.resistance / voltage)
    heading, x, _, _ = go(RIGID, friction(held), REST, voltage, leave * (1.0 - 1e-9))
    assert (heading.motor, x.speed) == (0, 0.0)
    # Just after, the torque grows on a straight line: J w = Kt di/dt t^2/2.
    after = 1e-4 * tau
    heading, x, _, _ = go(RIGID, friction(held), REST, voltage, leave + after)
    rise = (voltage - 2.0 * RIGID.resistance) / RIGID.inductance
    assert heading.motor == 1
    wanted = RIGID.torque / RIGID.motor_inertia * rise * after**2 / 2.0
    assert_quantity(x.speed, wanted, rtol=1e-4, unit="rad/s", why="the line is the start of an exponential")


def test_a_falling_load_is_caught_by_what_the_gear_loses():
    # 0.09 N m at the load with ratio 3 and 80 %: 0.0375 N m against the motor forwards, 0.024 N m with it backwards.
    drag = Drag(0.024, 0.0375, 0.0, 0.0)
    for torque, way in ((0.0376, 1), (0.0374, 0), (0.0241, 0), (0.0239, -1)):
        current = torque / RIGID.torque
        x = REST._replace(current=current)
        heading, y, _, _ = go(RIGID, drag, x, RIGID.resistance * current, 50e-6)
        assert heading.motor == way
        assert np.sign(y.speed) == way


@pytest.mark.parametrize("plant", [RIGID, ELASTIC, replace(ELASTIC, filter_time=0.0, inductance=4e-6)])
@pytest.mark.parametrize("voltage", [6.0, -9.0])
@pytest.mark.parametrize("speed", [0.4, -0.4, 0.0])
def test_stops_and_starts_agree_with_plain_integration(plant, voltage, speed):
    motor, load = 0.03, 0.02 * plant.elastic
    own = replace(plant, motor_coulomb=motor, load_coulomb=load)
    load_speed = 0.9 * speed if plant.elastic else 0.0
    x = PlantState(-0.2 * voltage, speed, 0.1 if plant.filter_time > 0.0 else 0.0, load_speed, 0.0, 0.0)
    plain = PlainPlant(plant=own, state=np.array([*x, 0.0]), load=0.0)
    time, pieces = 60e-6, 20
    _, _, energy, states = go(own, friction(motor, load), x, voltage, time, pieces=pieces)
    for k in range(pieces):
        plain.run(voltage, time)
        wanted = plain.state.copy()
        if not plant.elastic:
            wanted[3] = 0.0
            wanted[4] = 0.0
        if plant.filter_time == 0.0:
            wanted[2] = 0.0
        got = states[k + 1]
        assert_quantity(got, wanted[:6], rtol=1e-9, atol=1e-10, unit="SI", why="tolerance of the integration")
    assert_quantity(energy, plain.state[6], rtol=1e-8, atol=1e-13, unit="J", why="tolerance of the integration")


def test_energy_in_is_energy_stored_and_lost():
    # Through a stop and a start the other way: v i = d(L i^2 + J w^2)/2 + R i^2 + b w^2 + Tc |w| on a fine grid.
    plant, tc = RIGID, 0.03
    start = PlantState(8.0, 6.0, 0.0, 0.0, 0.0, 0.0)
    pieces, time, voltage = 4000, 2e-6, -12.0
    _, _, _, states = go(plant, friction(tc), start, voltage, time, pieces=pieces)
    i, w = (np.array([getattr(one, name) for one in states]) for name in ("current", "speed"))
    assert w[0] > 0.0 > w[-1]
    power = voltage * i - plant.resistance * i**2 - plant.motor_viscous * w**2 - tc * np.abs(w)
    put_in = np.sum((power[1:] + power[:-1]) * time / 2.0)
    stored = plant.inductance * i**2 / 2.0 + plant.motor_inertia * w**2 / 2.0
    lost = plant.resistance * np.sum(i**2) * time
    assert_quantity(put_in, stored[-1] - stored[0], atol=1e-5 * lost, unit="J", why="the trapezoidal sum on this grid")


def test_two_bodies_that_stick_and_slip_come_to_rest():
    # Twisted and let go: the shaft swings both bodies until friction holds what is left of the twist.
    x = REST._replace(twist=0.05)
    heading, y, _, states = go(ELASTIC, friction(0.02, 0.02), x, 0.0, 50e-6, pieces=4000)
    assert (heading.motor, heading.load) == (0, 0)
    assert (y.speed, y.load_speed) == (0.0, 0.0)
    assert ELASTIC.stiffness * abs(y.twist) <= 0.02 * (1.0 + 1e-9)
    stops = sum(a.speed != 0.0 and b.speed == 0.0 for a, b in pairwise(states))
    assert stops >= 1
    energies = [
        ELASTIC.stiffness * one.twist**2 + ELASTIC.motor_inertia * one.speed**2
        + ELASTIC.load_inertia * one.load_speed**2 + ELASTIC.inductance * one.current**2
        for one in states
    ]  # fmt: skip
    assert all(b <= a * (1.0 + 1e-12) + 1e-18 for a, b in pairwise(energies))


def test_a_stiff_plant_gives_the_same_with_events_in_it():
    # L/R of 0.1 us in segments of 1 ms: the current follows at once, and the speed is that of the slow equation.
    plant = replace(RIGID, inductance=0.6e-7)
    tc, voltage = 0.03, 12.0
    heading, x, energy, _ = go(plant, friction(tc), REST._replace(speed=-20.0), voltage, 1e-3, pieces=8)
    # J dw/dt = Kt (V - Ke w)/R - b w +- Tc: up to the stop with Tc helping, then against it.
    rate = (plant.torque * plant.back_emf / plant.resistance + plant.motor_viscous) / plant.motor_inertia
    goals = [
        (plant.torque * voltage / plant.resistance + tc * way) / (rate * plant.motor_inertia) for way in (1.0, -1.0)
    ]
    stop = math.log((goals[0] + 20.0) / goals[0]) / rate
    wanted = -goals[1] * math.expm1(-rate * (8e-3 - stop))
    assert heading.motor == 1
    assert_quantity(
        x.speed, wanted, rtol=1e-4, unit="rad/s", why="the current lags by L/R, a share of 1e-5 of the time"
    )
    assert energy == 0.0


def test_a_stiff_plant_gives_back_what_the_slow_equation_says():
    # Driven by its speed against a low voltage: v i < 0 until the speed has fallen to v/Ke.
    plant = replace(RIGID, inductance=0.6e-7, motor_viscous=0.0)
    voltage, first = 1.0, 100.0
    _, _, energy, _ = go(plant, friction(), REST._replace(speed=first), voltage, 1e-3, pieces=400)
    charge = plant.motor_inertia / plant.torque * (first - voltage / plant.back_emf)
    assert_quantity(
        energy, voltage * charge, rtol=2e-4, unit="J", why="the energy of the first 0.1 us, and the tail left"
    )
