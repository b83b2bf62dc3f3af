"""The tick loop's own pieces: the reference, the room for the voltage, one gliding step, and a run of them."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from drives import CURRENT_GAINS, DUTY, ELASTIC, ENCODER, FIRMWARE, RIGID, SINE, SPEED_GAINS, STAGE
from gainbench.kernels.response import (
    CURRENT,
    CURRENT_REFERENCE,
    TIME,
    is_plain,
    plain_law,
    reference_at,
    respond,
    run_plain,
    run_rigid,
    voltage_of,
    voltage_room,
)
from gainbench.kernels.response_records import Script
from gainbench.model import Duty, Firmware, IntegratorRule, WindupRule
from gainbench.simulate import schedule
from gainbench.simulate.preparation import prepare_run


def run_of(duty=DUTY, *, plant=RIGID, stage=ENCODER, firmware=FIRMWARE):
    return prepare_run(
        plant,
        stage,
        firmware,
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


@pytest.mark.parametrize(("ticks", "voltage"), [(0, 4.0), (1, 3.0), (2, 2.0)])
def test_a_voltage_acts_when_its_update_comes(ticks, voltage):
    assert voltage_of(ticks, 4.0, 3.0, 2.0) == voltage


def test_which_drives_are_plain():
    assert is_plain(run_of())
    assert not is_plain(run_of(plant=SINE))
    assert not is_plain(run_of(plant=ELASTIC))
    assert not is_plain(run_of(plant=replace(RIGID, filter_time=1e-5)))
    for delay in (0.0, 0.5, 1.5, 2.0):
        assert not is_plain(run_of(stage=replace(ENCODER, update_delay=delay)))
    assert not is_plain(run_of(firmware=Firmware(integrator=IntegratorRule.TRAPEZOID)))
    assert not is_plain(run_of(firmware=Firmware(back_emf_feedforward=True)))


@pytest.mark.parametrize("coulomb", [0.0, 0.05])
@pytest.mark.parametrize("windup", list(WindupRule))
def test_the_code_of_a_kind_is_that_of_a_wider_kind(coulomb, windup):
    # A plain drive on the loop for rigid ones: the same law, left whole.
    duty = replace(DUTY, stop_at=40e-3, length=60e-3)
    run = run_of(duty, plant=replace(RIGID, motor_coulomb=coulomb), firmware=Firmware(windup=windup))
    assert plain_law(run.current_law) == run.current_law
    plain, wide = np.zeros((6, 1200)), np.ones((6, 1200))
    flags, wide_flags = np.zeros((2, 1200), dtype=bool), np.ones((2, 1200), dtype=bool)
    tally, wide_tally = run_plain(run, plain, flags), run_rigid(run, wide, wide_flags)
    scale = np.abs(plain).max(axis=1, keepdims=True)
    assert np.all(np.abs(plain - wide) <= 1e-12 * scale)
    assert np.array_equal(flags, wide_flags)
    assert tally == pytest.approx(wide_tally, rel=1e-11)
    assert tally.returned > 0.0


def test_a_rigid_train_is_an_elastic_one_of_a_stiff_shaft():
    stiff = replace(RIGID, elastic=True, motor_inertia=5e-5, load_inertia=2.1e-5, stiffness=2e4, damping=0.5)
    duty = replace(DUTY, reference_ramp=4e3, length=40e-3)
    rigid, elastic = np.zeros((6, 800)), np.zeros((7, 800))
    flags = np.zeros((2, 800), dtype=bool)
    tally = respond(run_of(duty, plant=RIGID, stage=STAGE), rigid, flags)
    elastic_tally = respond(run_of(duty, plant=stiff, stage=STAGE), elastic, flags)
    assert np.abs(rigid[CURRENT] - elastic[CURRENT]).max() < 2e-3 * tally.peak_current
    assert elastic_tally.squares == pytest.approx(tally.squares, rel=1e-3)


@pytest.mark.parametrize("stage", [ENCODER, replace(ENCODER, update_delay=1.5)])
def test_a_log_may_fill_in_the_midst_of_a_phase(stage):
    # Ticks of the duty in logs of 1024, by speed periods of 7: no boundary falls together with another.
    odd = replace(stage, current_rate=21e3, speed_rate=3e3, speed_delay=3)
    duty = Duty(reference_speed=100.0, load_step=0.06, load_at=1100 / 21e3, length=2500 / 21e3)
    run = run_of(duty, stage=odd)
    traces, flags = np.full((6, 2500), np.nan), np.zeros((2, 2500), dtype=bool)
    respond(run, traces, flags)
    assert np.isfinite(traces).all()
    assert np.array_equal(traces[TIME], np.arange(2500) * run.sampling.period)
    # References change at their own ticks only.
    changed = 1 + np.flatnonzero(np.diff(traces[CURRENT_REFERENCE]))
    assert len(changed) > 100
    assert set(changed % 7) == {3}


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
