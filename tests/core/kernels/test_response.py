"""The tick loop's own pieces: the reference, the room for the voltage, one gliding step, and a run of them."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from drives import CURRENT_GAINS, DUTY, ENCODER, FIRMWARE, RIGID, SINE, SPEED_GAINS, matrix_of
from gainbench.kernels.bodies import inputs_of
from gainbench.kernels.motion import prepare_motion, read_flow, read_step
from gainbench.kernels.response import (
    CURRENT,
    SURE,
    TURNS,
    UNSURE,
    glide,
    reference_at,
    respond,
    turning_energy,
    voltage_room,
)
from gainbench.kernels.response_records import Drag, Heading, PlantState, Script
from gainbench.kernels.series import build_series, series_energy
from gainbench.simulate import schedule
from gainbench.simulate.preparation import prepare_run

FREE = Drag(0.0, 0.0, 0.0, 0.0)
RUBBING = Drag(-0.05, 0.05, 0.0, 0.0)


def run_of(duty=DUTY, *, plant=RIGID, stage=ENCODER):
    return prepare_run(
        plant,
        stage,
        FIRMWARE,
        duty,
        plan=schedule(duty, stage),
        load_torque=0.0,
        reference_weight=1.0,
        current=CURRENT_GAINS,
        speed=SPEED_GAINS,
    )


STEP = Script(-50.0, 10, 1.0, 0.0, 1000, 0.0, 0.0, 0.0, 1000)
RAMP = Script(50.0, 10, 1.0, 100.0, 30, 1.35, 200.0, 35.0, 1000)


@pytest.mark.parametrize(
    ("script", "tick", "time", "reference"),
    [
        (STEP, 9, 0.9, 0.0),
        (STEP, 10, 1.0, -50.0),
        (STEP._replace(stop_tick=20), 20, 2.0, 0.0),
        # Up with 100 rad/s^2, at 35 rad/s when the stop comes, down with twice that.
        (RAMP, 9, 0.99, 0.0),
        # A tick that is a hair early counts as on time, and the ramp has not begun to fall below zero.
        (RAMP, 10, 1.0 - 1e-9, 0.0),
        (RAMP, 15, 1.25, 25.0),
        (RAMP, 29, 3.0, 50.0),
        (RAMP, 30, 1.35, 35.0),
        (RAMP, 31, 1.45, 15.0),
        (RAMP, 32, 2.0, 0.0),
    ],
)
def test_reference_of_a_step_a_ramp_and_a_stop(script, tick, time, reference):
    assert reference_at(script, tick, time) == pytest.approx(reference, abs=1e-12)


def test_the_q_axis_gets_what_the_d_axis_leaves():
    sampling = run_of(plant=SINE).sampling
    assert voltage_room(sampling, 0.0, 20.0) == SINE.voltage_limit
    # p w L i = 4 * 300 * 0.45 mH * 20 A = 10.8 V of 14 V.
    assert voltage_room(sampling, 300.0, -20.0) == pytest.approx((14.0**2 - 10.8**2) ** 0.5, rel=1e-12)
    assert voltage_room(sampling, 500.0, 20.0) == 0.0
    assert voltage_room(run_of().sampling, 500.0, 20.0) == RIGID.voltage_limit


def glided(x, voltage, drag=FREE, heading=1):
    matrix = matrix_of(RIGID)
    motion, flow = prepare_motion(matrix, 0.0, 50e-6), read_flow(matrix, False)
    return motion, flow, glide(read_step(motion, 1, 0, 0), flow, drag, Heading(heading, 1), x, voltage)


def test_a_gliding_step_says_whether_something_happened():
    moving = PlantState(5.0, 100.0, 0.0, 0.0, 0.0, 0.0)
    assert glided(moving, 8.0)[2][0] == SURE
    came, y, given = glided(moving, -8.0)[2]
    assert came == SURE
    assert given == pytest.approx(8.0 * 50e-6 * (5.0 + y.current) / 2.0, rel=1e-2)
    turning = moving._replace(current=0.2)
    assert glided(turning, -8.0)[2][0] == TURNS
    assert glided(moving._replace(speed=1e-4), 8.0, RUBBING, -1)[2][0] == UNSURE


def test_energy_of_a_step_in_which_the_current_turns():
    turning = PlantState(0.2, 100.0, 0.0, 0.0, 0.0, 0.0)
    motion, flow, (_, y, _) = glided(turning, -8.0)
    step = read_step(motion, 1, 0, 0)
    got = turning_energy(motion, step, flow, FREE, Heading(1, 1), turning, y, -8.0)
    # The current falls by (8 + 5.2 + 0.1)/0.45 mH = 29.6 A/ms: a triangle of 6.8 us.
    assert got == pytest.approx(8.0 * 0.2 * 0.2 / (2.0 * 29.6e3), rel=1e-2)


@pytest.mark.parametrize("first", [-3.0, -0.2, 0.1, 1.2, 3.0])
@pytest.mark.parametrize("voltage", [-30.0, -8.0, 3.0, 30.0])
def test_energy_is_that_of_the_search_through_the_whole_step(first, voltage):
    x = PlantState(first, 100.0, 0.0, 0.0, 0.0, 0.0)
    motion, flow, (came, y, _) = glided(x, voltage)
    if came == TURNS:
        got = turning_energy(motion, read_step(motion, 1, 0, 0), flow, FREE, Heading(1, 1), x, y, voltage)
        build_series(motion.series, flow, 0, x, inputs_of(FREE, Heading(1, 1), voltage), 50e-6)
        assert got == pytest.approx(series_energy(motion.series, voltage, 1.0), rel=1e-12, abs=1e-18)


def test_a_run_fills_every_tick_and_adds_up():
    run = run_of()
    traces, flags = np.full((6, 1000), np.nan), np.zeros((2, 1000), dtype=bool)
    tally = respond(run, traces, flags)
    assert np.isfinite(traces).all()
    assert tally.peak_current == np.abs(traces[CURRENT]).max()
    assert tally.squares == pytest.approx(np.sum(traces[CURRENT] ** 2), rel=1e-12)
    assert tally.current_clamps == flags[0, ::10].sum()
    assert tally.voltage_clamps == flags[1].sum()


def test_a_run_leaves_nothing_behind():
    run = run_of(replace(DUTY, length=20e-3))
    first, again = np.zeros((6, 400)), np.zeros((6, 400))
    flags = np.zeros((2, 400), dtype=bool)
    respond(run, first, flags)
    respond(run, again, flags)
    assert np.array_equal(first, again)
