"""Frequency responses in delta form, against plain complex algebra and python-control."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.frequency import (
    gains_at,
    gains_for_margin,
    gains_over,
    hessenberg,
    integral_at,
    pi_at,
    plant_at,
    plant_response,
    workspace,
)
from gainbench.kernels.lifting import BACKWARD, FORWARD, TRAPEZOID
from gainbench.kernels.loop_records import SampledPlant
from quantities import assert_quantity

ROUNDING = "one elimination of a well-conditioned matrix"


def some_plant(n=5, *, fed=False, window=1, shift=0, gain=1.0, seed=0):
    rng = np.random.default_rng(seed)
    m = 0.3 * rng.standard_normal((n, n)) - 0.5 * np.eye(n)
    b0, b1, c, bw = (rng.standard_normal(n) for _ in range(4))
    return SampledPlant(m, c, b0, b1, 0.05 * bw * fed, 0.2, -0.1, 0.03 * fed, 1e-3, shift, window, 0.7, gain)


def plainly(plant, w):
    z = np.exp(1j * w * plant.period)
    inverse = np.linalg.inv(z * np.eye(len(plant.c)) - np.eye(len(plant.c)) - plant.m)
    raw = plant.c @ inverse @ (plant.b0 + plant.b1 / z) + plant.d0 + plant.d1 / z
    back = plant.c @ inverse @ plant.bw + plant.dw
    ahead = plant.scale * sum(z ** -(plant.shift + i) for i in range(plant.window))
    ahead *= plant.filter_gain / (1.0 - (1.0 - plant.filter_gain) / z)
    return ahead * raw / (1.0 - ahead * back)


@pytest.mark.parametrize("n", [1, 2, 3, 6])
@pytest.mark.parametrize(("fed", "window", "shift", "gain"), [(False, 1, 0, 1.0), (True, 1, 1, 1.0), (True, 4, 1, 0.3)])
def test_response_is_the_transfer_function(n, fed, window, shift, gain):
    plant = some_plant(n, fed=fed, window=window, shift=shift, gain=gain, seed=n)
    w = np.geomspace(1e-2, math.pi / 1e-3, 60)
    expected = np.array([plainly(plant, one) for one in w])
    got = plant_response(plant, w)
    scale = np.abs(expected).max()
    assert_quantity(got.real, expected.real, rtol=1e-9, atol=1e-10 * scale, unit="1", why=ROUNDING)
    assert_quantity(got.imag, expected.imag, rtol=1e-9, atol=1e-10 * scale, unit="1", why=ROUNDING)


def test_hessenberg_form_is_the_same_plant():
    plant = some_plant(6, fed=True)
    reduced = hessenberg(plant)
    assert np.all(np.tril(reduced.m, -2) == 0.0)
    assert_quantity(
        np.sort_complex(np.linalg.eigvals(reduced.m)).real,
        np.sort_complex(np.linalg.eigvals(plant.m)).real,
        atol=1e-12,
        unit="1",
        why="orthogonal similarity",
    )
    got, expected = plant_at(reduced, 700.0, workspace(reduced)), plainly(plant, 700.0)
    assert_quantity([got.real, got.imag], [expected.real, expected.imag], rtol=1e-11, unit="1", why=ROUNDING)


def test_an_integrator_far_below_the_rate_keeps_its_phase():
    # x[n+1] = x[n] + T u[n]: 1/(j w) to first order, with half a period of delay; at 1e-9 of the rate an expanded
    # polynomial in z would have no digit left.
    period = 1e-4
    nothing = np.zeros(1)
    plant = SampledPlant(
        np.zeros((1, 1)), np.ones(1), np.array([period]), nothing, nothing, 0.0, 0.0, 0.0, period, 0, 1, 1.0, 1.0
    )
    w = 1e-9 * math.pi / period
    got = plant_response(plant, np.array([w]))[0] * 1j * w
    assert_quantity(got.real, 1.0, rtol=1e-12, unit="1", why=ROUNDING)
    assert_quantity(got.imag, -0.5 * w * period, rtol=1e-6, unit="1", why="half a period of delay")


@pytest.mark.parametrize("rule", [BACKWARD, FORWARD, TRAPEZOID])
def test_the_integrators_are_their_z_transforms(rule):
    w, period = 900.0, 1e-3
    z = np.exp(1j * w * period)
    shape = {BACKWARD: z / (z - 1.0), FORWARD: 1.0 / (z - 1.0), TRAPEZOID: 0.5 * (z + 1.0) / (z - 1.0)}[rule]
    got = integral_at(w, period, rule)
    assert_quantity([got.real, got.imag], [shape.real, shape.imag], atol=1e-14, unit="1", why=ROUNDING)
    whole = pi_at(2.0, 0.3, rule, w, period)
    assert_quantity(
        [whole.real, whole.imag], [2.0 + 0.3 * shape.real, 0.3 * shape.imag], atol=1e-14, unit="1", why=ROUNDING
    )


@pytest.mark.parametrize("rule", [BACKWARD, FORWARD, TRAPEZOID])
def test_gains_put_the_loop_on_the_unit_circle_with_the_margin(rule):
    w, period, margin = 400.0, 1e-3, math.radians(50.0)
    response = 0.3 - 0.8j
    kp, ki_period = gains_at(response, w, period, rule, margin)
    loop = response * pi_at(kp, ki_period, rule, w, period)
    assert_quantity(abs(loop), 1.0, rtol=1e-14, unit="1", why=ROUNDING)
    assert_quantity(np.angle(-loop), margin, rtol=1e-13, unit="rad", why=ROUNDING)
    plant = some_plant(3, fed=True, window=2, shift=1, gain=0.5)
    found = gains_for_margin(plant, w, rule, margin)
    expected = gains_at(plant_response(plant, np.array([w]))[0], w, period, rule, margin)
    assert_quantity(found, expected, rtol=1e-12, unit="1", why="the same elimination")
    over = gains_over(np.array([response]), np.array([w]), period, rule, margin)
    assert_quantity(over[:, 0], [kp, ki_period], unit="1", why="the same arithmetic")
