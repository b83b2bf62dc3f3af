"""The matrix exponential as a difference from one, and the Hessenberg form, against a general library."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.linalg import expm, hessenberg

from gainbench.kernels.linalg import expm_minus_identity, matmul, power_minus_identity, to_hessenberg
from quantities import assert_quantity

ROUNDING = "rounding through a dozen squarings"


@pytest.mark.parametrize("size", [1, 2, 4, 7])
@pytest.mark.parametrize("scale", [1e-9, 1e-2, 1.0, 30.0])
def test_exponential_agrees_with_scipy(size, scale):
    rng = np.random.default_rng(size)
    a = scale * rng.standard_normal((size, size)) / size
    a -= scale * np.eye(size)
    # The reference itself is only known to rounding of one.
    allowed = max(1e-13 * min(1.0, scale), 5e-16)
    assert_quantity(expm_minus_identity(a), expm(a) - np.eye(size), atol=allowed, unit="1", why=ROUNDING)


def test_slow_modes_keep_their_relative_accuracy_beside_fast_ones():
    # A lag of 1 us beside one of 10,000 s: exp - 1 of the slow one is -1e-9 to 16 digits.
    a = np.diag([-100.0, -1e-9])
    got = expm_minus_identity(a)
    assert_quantity(np.diag(got), np.expm1(np.diag(a)), rtol=1e-14, unit="1", why=ROUNDING)


def test_badly_scaled_states_do_not_matter():
    rng = np.random.default_rng(5)
    a = rng.standard_normal((4, 4))
    scale = np.diag([1e6, 1.0, 1e-6, 1e3])
    back = np.linalg.inv(scale)
    assert_quantity(
        back @ expm_minus_identity(scale @ a @ back) @ scale,
        expm(a) - np.eye(4),
        atol=1e-12,
        unit="1",
        why="states balanced by powers of two before the series",
    )


@pytest.mark.parametrize("count", [0, 1, 2, 7, 10, 64, 1000])
def test_power_agrees_with_repeated_products(count):
    rng = np.random.default_rng(3)
    d = 0.02 * rng.standard_normal((3, 3)) - 0.01 * np.eye(3)
    assert_quantity(
        power_minus_identity(d, count),
        np.linalg.matrix_power(np.eye(3) + d, count) - np.eye(3),
        rtol=1e-10,
        atol=1e-13,
        unit="1",
        why="the reference loses digits where the power is close to one",
    )


def test_power_of_a_slow_mode_keeps_its_digits():
    got = power_minus_identity(np.array([[-1e-14]]), 1000)[0, 0]
    assert_quantity(got, -1e-11, rtol=1e-10, unit="1", why="second-order term of 1e-22")


def test_product():
    rng = np.random.default_rng(9)
    a, b = rng.standard_normal((3, 5)), rng.standard_normal((5, 2))
    assert_quantity(matmul(a, b), a @ b, atol=1e-14, unit="1", why="order of summation")


def test_reflections_turn_a_matrix_and_what_comes_along():
    rng = np.random.default_rng(3)
    matrix, columns = rng.standard_normal((5, 5)), rng.standard_normal((2, 5))
    h, along = matrix.copy(), columns.copy()
    to_hessenberg(h, along)
    # The form is one but for signs.
    assert_quantity(np.abs(h), np.abs(hessenberg(matrix)), atol=1e-14, unit="1", why=ROUNDING)
    assert_quantity(along @ along.T, columns @ columns.T, rtol=1e-13, unit="1", why=ROUNDING)
    assert_quantity(along[0] @ h @ along[1], columns[0] @ matrix @ columns[1], rtol=1e-12, unit="1", why=ROUNDING)
