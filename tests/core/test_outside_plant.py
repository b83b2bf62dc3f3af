"""The sampled plant, its holds and sums, and warm windings against outside values, by the rows of ``published``."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.linalg import expm

from gainbench.derived import voltage_ceiling
from gainbench.kernels.lifting import held_step
from gainbench.margins import open_loop, plant_response
from gainbench.model import (
    Firmware,
    IntegratorRule,
    SpeedSensor,
)
from gainbench.plant import refer, state_space
from gainbench.results import Gains
from gainbench.sampling import current_loop, hardware, speed_loop
from gainbench.temperature import WindingRule, resistance_ratio, winding_resistance
from lab import brushed, by_hand, lab_sheet, rig_of
from published import PUBLISHED
from quantities import assert_quantity
from rigs import fixed_sheet

DIGITS = "the digits of the row"
CLOSED = "closed form"
RPM = math.tau / 60.0

# --- The motor of the tutorials --------------------------------------------------------------------------------------

TUTORIAL = brushed(resistance=1.0, inductance=0.5, rotor_inertia=0.01, torque_constant=0.01, viscous_friction=0.1)


def test_tutorial_motor_under_one_volt() -> None:
    """E1."""
    plant = refer(rig_of(TUTORIAL))
    steady = voltage_ceiling(plant, 1.0).running_speed
    assert_quantity(steady, PUBLISHED["E1"]["gain"], atol=5e-4, unit="rad/s", why=DIGITS)
    space = state_space(plant)
    times = np.arange(0.0, 4.0, 1e-3)
    joint = np.zeros((4, 4))
    joint[:3, :3], joint[:3, 3] = space.a, space.b[:, 0]
    step, state, speeds = expm(joint * 1e-3), np.array([0.0, 0.0, 0.0, 1.0]), []
    for _ in times:
        speeds.append(state[space.speed])
        state = step @ state
    last = times[np.flatnonzero(np.abs(np.array(speeds) - steady) > 0.02 * steady)[-1]]
    assert_quantity(last, PUBLISHED["E1"]["settling"], atol=0.005, unit="s", why=DIGITS)


def test_tutorial_motor_poles() -> None:
    """E2."""
    space = state_space(refer(rig_of(TUTORIAL)))
    poles = np.sort(np.linalg.eigvals(space.a[:-1, :-1]).real)
    assert_quantity(poles, [PUBLISHED["E2"]["fast"], PUBLISHED["E2"]["slow"]], atol=1e-3, unit="1/s", why=DIGITS)


def _held(a: NDArray[np.float64], b: NDArray[np.float64], h: float) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    change, held = held_step(np.ascontiguousarray(a, dtype=float), np.ascontiguousarray(b, dtype=float), h)
    return np.eye(len(a)) + change, held


def _at(z: complex, phi: NDArray[np.float64], gamma: NDArray[np.float64], c: NDArray[np.float64]) -> complex:
    return complex(c @ np.linalg.solve(z * np.eye(len(phi)) - phi, gamma))


PLACES = (1.7 + 0.3j, -1.4 + 0.9j, 0.2 - 2.0j)


def test_tutorial_motor_sampled() -> None:
    """E3 and E4: zero-order hold at 0.05 s."""
    space = state_space(refer(rig_of(TUTORIAL)))
    phi, gamma = _held(space.a[:2, :2], space.b[:2, 0], 0.05)
    e3, e4 = PUBLISHED["E3"], PUBLISHED["E4"]
    poles = np.sort(np.linalg.eigvals(phi).real)
    assert_quantity(poles, [e3["fast"], e3["slow"]], atol=6e-5, unit="1", why=DIGITS)
    for z in PLACES:
        got = _at(z, phi, gamma, np.array([0.0, 1.0]))
        assert got == pytest.approx((e4["b1"] * z + e4["b2"]) / (z * z + e4["a1"] * z + e4["a2"]), rel=1e-5)
        assert got == pytest.approx(e3["gain"] * (z - e3["zero"]) / ((z - e3["slow"]) * (z - e3["fast"])), rel=1e-3)


# --- Holds and sums --------------------------------------------------------------------------------------------------


def _table(h: float, a: float, b: float) -> list[tuple[str, list[list[float]], list[float], list[float], list[float]]]:
    """Name, A, B, then numerator and denominator in z (D1: Astrom & Wittenmark, table 2.1, from memory)."""
    ea, eb = math.exp(-a * h), math.exp(-b * h)
    b1, b2 = (a * h - 1.0 + ea) / a, (1.0 - ea - a * h * ea) / a
    c1 = (b * (1.0 - ea) - a * (1.0 - eb)) / (b - a)
    c2 = (a * (1.0 - eb) * ea - b * (1.0 - ea) * eb) / (b - a)
    return [
        ("1/s", [[0.0]], [1.0], [h], [1.0, -1.0]),
        ("1/s^2", [[0.0, 0.0], [1.0, 0.0]], [1.0, 0.0], [h * h / 2.0, h * h / 2.0], [1.0, -2.0, 1.0]),
        ("a/(s + a)", [[-a]], [a], [1.0 - ea], [1.0, -ea]),
        ("a/(s (s + a))", [[-a, 0.0], [1.0, 0.0]], [a, 0.0], [b1, b2], [1.0, -(1.0 + ea), ea]),
        ("ab/((s + a) (s + b))", [[-a, 0.0], [b, -b]], [a, 0.0], [c1, c2], [1.0, -(ea + eb), ea * eb]),
    ]


@pytest.mark.parametrize("k", range(5))
def test_hold_by_the_table(k: int) -> None:
    """D1."""
    name, a, b, numerator, denominator = _table(0.3, 2.0, 5.0)[k]
    phi, gamma = _held(np.array(a), np.array(b), 0.3)
    c = np.eye(len(b))[-1]
    for z in PLACES:
        wanted = np.polyval(numerator, z) / np.polyval(denominator, z)
        assert _at(z, phi, gamma, c) == pytest.approx(wanted, rel=1e-10), name


def test_hold_of_the_textbooks() -> None:
    """D2: 1/(s (s + 1)) at 1 s."""
    row = PUBLISHED["D2"]
    phi, gamma = _held(np.array([[-1.0, 0.0], [1.0, 0.0]]), np.array([1.0, 0.0]), 1.0)
    for z in PLACES:
        wanted = (row["b1"] * z + row["b2"]) / ((z - 1.0) * (z - math.exp(-1.0)))
        assert _at(z, phi, gamma, np.array([0.0, 1.0])) == pytest.approx(wanted, rel=1e-7)


@pytest.mark.parametrize(("parts", "name"), [(10, "tenth"), (20, "twentieth")])
def test_warping_of_the_trapezoid(parts: int, name: str) -> None:
    """D3: the trapezoid sum has the gain 1/w of an integrator at w_d = (2/h) atan(w h/2), 3.11 % low at fs/10."""
    sheet = lab_sheet(by_hand(1.0, 1.0), rate=1e4)
    own = hardware(refer(sheet.rig), sheet.rig.stage)
    loop = current_loop(own, Firmware(integrator=IntegratorRule.TRAPEZOID))
    h, w = 1e-4, math.tau * 1e4 / parts
    warped = w * (1.0 + PUBLISHED["D3"][name] / 100.0)
    at = np.array([warped])
    sums = open_loop(loop, Gains(kp=0.0, ki=1.0), frequency=at) / open_loop(loop, Gains(kp=1.0, ki=0.0), frequency=at)
    assert_quantity(2.0 / h * math.atan(w * h / 2.0), warped, rtol=1e-6, unit="rad/s", why=DIGITS)
    assert_quantity(abs(sums[0]), 1.0 / w, rtol=1e-5, unit="s", why=DIGITS)
    assert_quantity(math.degrees(np.angle(sums[0])), -90.0, atol=1e-6, unit="deg", why=CLOSED)


@pytest.mark.parametrize("window", [10, 50])
def test_speed_window(window: int) -> None:
    """K9 (identity): a difference over T is sinc(wT/2) and a delay of T/2; the first zero is at 1/T."""
    sheet = fixed_sheet("plain")
    ideal = replace(sheet.rig.stage, speed_rate=sheet.rig.stage.current_rate)
    encoder = replace(ideal, speed_sensor=SpeedSensor.ENCODER, encoder_counts=1000, speed_window=window)
    plant, span = refer(sheet.rig), window * ideal.speed_period
    frequencies = np.array([0.05, 0.2, 0.5, 0.8, 1.0]) * math.tau / span
    sensed = [
        plant_response(
            speed_loop(
                hardware(plant, stage), plant, stage=stage, firmware=Firmware(), current=Gains(kp=3.0, ki=2000.0)
            ),
            frequencies,
        )
        for stage in (encoder, ideal)
    ]
    ratio = sensed[0] / sensed[1]
    half = frequencies * span / 2.0
    wanted = np.sin(half) / half * np.exp(-1j * half)
    # Between ticks the angle is the integral of the speed, which the sampled speed alone does not tell.
    assert np.max(np.abs(ratio[:4] - wanted[:4])) < 4.0 / window**2
    assert abs(ratio[4]) < 1e-9


# --- Temperature -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("rule", "known", "wanted", "ratio"),
    [
        # T2: IEC 60034-1, from memory
        (WindingRule.IEC_COPPER, 20.0, 120.0, 355.0 / 255.0),
        (WindingRule.IEC_COPPER, 20.0, 75.0, 310.0 / 255.0),
        (WindingRule.IEC_COPPER, 25.0, 155.0, 390.0 / 260.0),
        (WindingRule.ALUMINIUM, 20.0, 120.0, 345.0 / 245.0),
        # T3: practice in the United States (UL test text, read; IEEE 112 from memory)
        (WindingRule.US_COPPER, 20.0, 120.0, 354.5 / 254.5),
    ],
)
def test_resistance_of_a_warm_winding(rule: WindingRule, known: float, wanted: float, ratio: float) -> None:
    assert_quantity(resistance_ratio(known, wanted, rule=rule), ratio, rtol=1e-9, unit="1", why=CLOSED)
    assert_quantity(
        winding_resistance(0.6, known, wanted_at=wanted, rule=rule), 0.6 * ratio, rtol=1e-9, unit="ohm", why=CLOSED
    )


def test_the_two_copper_rules_are_not_one() -> None:
    """T4 (identity): 1.52941 against 1.53045 at 155 degC; within a tenth of a percent, and not the same."""
    iec = resistance_ratio(20.0, 155.0, rule=WindingRule.IEC_COPPER)
    us = resistance_ratio(20.0, 155.0, rule=WindingRule.US_COPPER)
    assert_quantity([iec, us], [1.52941, 1.53045], atol=5e-6, unit="1", why=DIGITS)
    assert_quantity(us, iec, rtol=1e-3, unit="1", why="how far the two conventions are apart")
    assert abs(us / iec - 1.0) > 5e-4
