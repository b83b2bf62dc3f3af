"""Small dense linear algebra for kernels: the matrix exponential as a difference from one, Hessenberg form, products.

Everything here works on matrices of fewer than twenty rows, where the call overhead of a general library
is a hundred times the arithmetic. The tests hold each function against scipy.linalg.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled

_TAYLOR_TERMS = 14
"""With a scaled 1-norm of at most 1/4 the first term left out is below 0.25^14/15! = 3e-21."""


@compiled
def matmul(a: NDArray[np.float64], b: NDArray[np.float64]) -> NDArray[np.float64]:
    """The product a b by plain loops."""
    rows, inner, columns = a.shape[0], a.shape[1], b.shape[1]
    out = np.zeros((rows, columns))
    for i in range(rows):
        for k in range(inner):
            factor = a[i, k]
            if factor != 0.0:
                for j in range(columns):
                    out[i, j] += factor * b[k, j]
    return out


@compiled
def to_hessenberg(m: NDArray[np.float64], columns: NDArray[np.float64]) -> None:
    """Bring ``m`` to Hessenberg form in place by Householder reflections, and ``columns``, shape (k, n), along.

    References
    ----------
    G. H. Golub, C. F. Van Loan, Matrix Computations, section 7.4 (from memory).
    """
    n = m.shape[0]
    v = np.zeros(n)
    for k in range(n - 2):
        norm = 0.0
        for r in range(k + 1, n):
            norm += m[r, k] * m[r, k]
        norm = math.sqrt(norm)
        rest = 0.0
        for r in range(k + 2, n):
            rest += abs(m[r, k])
        if rest == 0.0:
            continue
        for r in range(n):
            v[r] = m[r, k] if r > k else 0.0
        v[k + 1] += norm if v[k + 1] >= 0.0 else -norm
        size = 0.0
        for r in range(k + 1, n):
            size += v[r] * v[r]
        beta = 2.0 / size
        for j in range(n):
            total = 0.0
            for r in range(k + 1, n):
                total += v[r] * m[r, j]
            for r in range(k + 1, n):
                m[r, j] -= beta * total * v[r]
        for r in range(n):
            total = 0.0
            for j in range(k + 1, n):
                total += m[r, j] * v[j]
            for j in range(k + 1, n):
                m[r, j] -= beta * total * v[j]
        for column in range(columns.shape[0]):
            total = 0.0
            for r in range(k + 1, n):
                total += v[r] * columns[column, r]
            for r in range(k + 1, n):
                columns[column, r] -= beta * total * v[r]
        for r in range(k + 2, n):
            m[r, k] = 0.0


@compiled
def _balance(a: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Similarity scaling by powers of two that evens row and column norms; inputs' zero rows take any scale."""
    n = a.shape[0]
    out = a.copy()
    scale = np.ones(n)
    for _ in range(12):
        changed = False
        for i in range(n):
            column, row = 0.0, 0.0
            for j in range(n):
                if j != i:
                    column += abs(out[j, i])
                    row += abs(out[i, j])
            if column == 0.0:
                continue
            # A zero row (an input held constant) may be scaled freely: bring its column to about 1/8.
            goal = np.sqrt(row / column) if row > 0.0 else 0.125 / column
            factor = 2.0 ** np.round(np.log2(goal)) if goal > 0.0 else 1.0
            if factor > 1.5 or factor < 0.75:
                changed = True
                scale[i] *= factor
                for j in range(n):
                    out[j, i] *= factor
                for j in range(n):
                    out[i, j] /= factor
        if not changed:
            break
    return out, scale


@compiled
def expm_minus_identity(a: NDArray[np.float64]) -> NDArray[np.float64]:
    """exp(a) - I, accurate where exp(a) is close to one.

    Balancing, then scaling and squaring on the difference itself, ``E(2x) = 2 E(x) + E(x)^2``, so that slow
    modes keep their relative accuracy at fast sampling.

    Parameters
    ----------
    a : ndarray, shape (n, n)
        Matrix times time.

    Returns
    -------
    ndarray, shape (n, n)

    References
    ----------
    C. Moler, C. Van Loan, Nineteen Dubious Ways to Compute the Exponential of a Matrix, Twenty-Five Years
    Later, SIAM Review 45(1), 2003, method 3 (from memory).
    """
    n = a.shape[0]
    x, scale = _balance(a)
    norm = 0.0
    for j in range(n):
        column = 0.0
        for i in range(n):
            column += abs(x[i, j])
        norm = max(norm, column)
    squarings = 0
    while norm > 0.25:
        norm *= 0.5
        squarings += 1
    x *= 0.5**squarings
    # Horner on E = x (I + x/2 (I + x/3 (...)))
    out = x / _TAYLOR_TERMS
    for term in range(_TAYLOR_TERMS - 1, 0, -1):
        out = matmul(x, out)
        for i in range(n):
            for j in range(n):
                out[i, j] = (out[i, j] + x[i, j]) / term
    for _ in range(squarings):
        square = matmul(out, out)
        for i in range(n):
            for j in range(n):
                out[i, j] = 2.0 * out[i, j] + square[i, j]
    for i in range(n):
        for j in range(n):
            out[i, j] *= scale[i] / scale[j]
    return out


@compiled
def power_minus_identity(d: NDArray[np.float64], count: int) -> NDArray[np.float64]:
    """(I + d)^count - I for a whole count >= 0, by ``D(a + b) = D(a) + D(b) + D(a) D(b)``."""
    n = d.shape[0]
    out = np.zeros((n, n))
    base = d.copy()
    left = count
    while left > 0:
        if left & 1:
            product = matmul(out, base)
            for i in range(n):
                for j in range(n):
                    out[i, j] += base[i, j] + product[i, j]
        left >>= 1
        if left > 0:
            square = matmul(base, base)
            for i in range(n):
                for j in range(n):
                    base[i, j] = 2.0 * base[i, j] + square[i, j]
    return out
