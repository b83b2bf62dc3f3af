"""Closed formulas against published numbers and against the loops they were made for."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.model import SpeedSensor
from gainbench.plant import refer
from gainbench.tuning.formulas import (
    current_lag_cancellation,
    current_pole_placement,
    magnitude_optimum,
    speed_lag_cancellation,
    speed_pole_placement,
    symmetric_optimum,
)
from quantities import assert_quantity
from rigs import fixed_sheet

ROUNDING = "one product"


@pytest.fixture(scope="module")
def sheet():
    return fixed_sheet("plain")


@pytest.fixture(scope="module")
def plant(sheet):
    return refer(sheet.rig)


def test_w1_lag_cancellation(plant):
    # W1: R = 2 ohm, L = 5.2 mH, converter gain 12, 1 kHz: exact Ki 1047.198, Kp 2.72271. Mohan, Electric Drives
    # (from memory).
    gains = current_lag_cancellation(
        replace(plant, resistance=2.0, inductance=5.2e-3), crossover=math.tau * 1000.0
    ).gains
    assert_quantity(gains.kp / 12.0, 2.72271, rtol=1e-5, unit="V/A", why="digits printed")
    assert_quantity(gains.ki / 12.0, 1047.198, rtol=1e-6, unit="V/(A s)", why="digits printed")


def test_m5_magnitude_optimum_cancels_the_lag(plant, sheet):
    # M5: Kp = L/(2 T), Ti = L/R, Ki = R/(2 T); Kessler 1955 (from memory). With d = 1 and no filter T = 1.5 Ts.
    gains = magnitude_optimum(plant, stage=sheet.rig.stage).gains
    assert_quantity(gains.kp, plant.inductance / 3e-4, rtol=1e-14, unit="V/A", why=ROUNDING)
    assert_quantity(gains.kp / gains.ki, plant.inductance / plant.resistance, rtol=1e-14, unit="s", why=ROUNDING)
    slow = magnitude_optimum(plant, stage=replace(sheet.rig.stage, update_delay=0.5, current_filter=1e-4)).gains
    assert_quantity(slow.kp, plant.inductance / 4e-4, rtol=1e-14, unit="V/A", why=ROUNDING)


def test_w5_pole_placement_on_a_winding(plant):
    # W5: R = 2, L = 5.2 mH, wn = 2 pi 1000, zeta = 0.7071: Kp 44.206, Ki 2.05288e5. Identity.
    winding = replace(plant, resistance=2.0, inductance=5.2e-3)
    gains = current_pole_placement(winding, natural_frequency=math.tau * 1000.0, damping=0.7071).gains
    assert_quantity(gains.kp, 44.206, rtol=2e-5, unit="V/A", why="digits printed")
    assert_quantity(gains.ki, 2.05288e5, rtol=5e-6, unit="V/(A s)", why="digits printed")
    poles = np.roots([5.2e-3, 2.0 + gains.kp, gains.ki])
    assert_quantity(np.abs(poles), math.tau * 1000.0, rtol=1e-12, unit="rad/s", why=ROUNDING)


def test_w2_speed_gains_of_an_ideal_inner_loop(plant):
    # W2: J = 152e-6, Kt = 0.1, 100 Hz, 60 deg, inner loop 1: exact Ki 300.036 and Kp 0.827093. Mohan, Electric Drives
    # (from memory). |C| Kt/(J w) = 1 at -120 deg gives Kp = sin 60 w J/Kt, Ki = cos 60 w^2 J/Kt; placing
    # the poles of that loop must give the same.
    j, kt, w = 152e-6, 0.1, math.tau * 100.0
    kp, ki = math.sin(math.pi / 3.0) * w * j / kt, 0.5 * w * w * j / kt
    assert_quantity([kp, ki], [0.827093, 300.036], rtol=2e-6, unit="SI", why="digits printed")
    inertia = replace(plant, motor_inertia=j, motor_viscous=0.0, torque=kt)
    w0 = math.sqrt(ki * kt / j)
    gains = speed_pole_placement(inertia, natural_frequency=w0, damping=0.5 * kp * kt / (j * w0)).gains
    assert_quantity([gains.kp, gains.ki], [kp, ki], rtol=1e-13, unit="SI", why=ROUNDING)


def test_s3_spread_gives_its_margin_on_the_lag_it_stands_for(plant, sheet):
    # S3: PM = atan a - atan(1/a): a 2 -> 36.870 deg, 1 + sqrt 2 -> 45.000, 3 -> 53.130, 4 -> 61.928. Derived.
    for a, expected in ((2.0, 36.870), (1.0 + math.sqrt(2.0), 45.0), (2.5, 46.397), (3.0, 53.130), (4.0, 61.928)):
        stage = replace(sheet.rig.stage, speed_sensor=SpeedSensor.IDEAL, speed_filter=0.0, speed_delay=0)
        gains = symmetric_optimum(plant, stage=stage, spread=a, current_crossover_hz=200.0).gains
        lag = 1.0 / (math.tau * 200.0) + 0.5 * stage.speed_period
        s = 1j / (a * lag)
        loop = (gains.kp + gains.ki / s) * plant.torque / (plant.inertia * s * (1.0 + lag * s))
        assert_quantity(abs(loop), 1.0, rtol=1e-12, unit="1", why=ROUNDING)
        assert_quantity(math.degrees(np.angle(-loop)), expected, atol=6e-4, unit="deg", why="digits printed")


def test_the_symmetric_optimum_counts_every_lag(plant, sheet):
    stage = replace(
        sheet.rig.stage,
        speed_sensor=SpeedSensor.ENCODER,
        encoder_counts=1000,
        speed_window=4,
        speed_delay=3,
        speed_filter=2e-3,
    )
    gains = symmetric_optimum(plant, stage=stage, spread=2.0, current_crossover_hz=500.0).gains
    lag = 1.0 / (math.tau * 500.0) + 0.25e-3 + 3e-4 + 1e-3 + 2e-3
    assert_quantity(gains.kp, plant.inertia / (2.0 * plant.torque * lag), rtol=1e-13, unit="A s/rad", why=ROUNDING)
    assert_quantity(gains.kp / gains.ki, 4.0 * lag, rtol=1e-13, unit="s", why=ROUNDING)


def test_speed_lag_cancellation_needs_friction(plant):
    gains = speed_lag_cancellation(plant, crossover=100.0).gains
    assert_quantity(gains.kp, 100.0 * plant.inertia / plant.torque, rtol=1e-14, unit="A s/rad", why=ROUNDING)
    assert_quantity(gains.ki, 100.0 * plant.viscous / plant.torque, rtol=1e-14, unit="A/rad", why=ROUNDING)
    design = speed_lag_cancellation(replace(plant, motor_viscous=0.0), crossover=100.0)
    assert design.gains is None
    assert "viscous friction" in design.refusal.reason


def test_poles_slower_than_the_plants_own_damping_are_refused(plant):
    current = current_pole_placement(plant, natural_frequency=10.0, damping=0.7)
    assert current.gains is None
    assert f"{plant.resistance / (1.4 * plant.inductance):.4g} rad/s" in current.refusal.reason
    speed = speed_pole_placement(replace(plant, motor_viscous=1.0), natural_frequency=10.0, damping=0.7)
    assert speed.gains is None
    assert "rad/s" in speed.refusal.reason
