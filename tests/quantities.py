"""One way to compare a number with the number it should be: every tolerance has a unit and a reason."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike


def assert_quantity(
    actual: ArrayLike, reference: ArrayLike, *, rtol: float = 0.0, atol: float = 0.0, unit: str, why: str
) -> None:
    """Fail unless ``|actual - reference| <= atol + rtol |reference|`` everywhere.

    Parameters
    ----------
    actual : array_like
        What the library gave; finite real numbers.
    reference : array_like
        What it should be, finite, of the same shape or a scalar.
    rtol : float
        Share of the reference, >= 0. With ``atol`` zero as well the numbers must be equal.
    atol : float
        In ``unit``, >= 0.
    unit : str
        Of both numbers and of ``atol``; ``"1"`` for a pure number.
    why : str
        Where the tolerance comes from: rounding of a published value, order of a method, length of a sum.

    Raises
    ------
    AssertionError
        Naming the worst place, both numbers and the tolerance.
    ValueError
        If unit or reason are missing, or a tolerance is not a finite number of at least 0.
    """
    if not unit or not why:
        raise ValueError("a tolerance needs a unit and a reason")
    for name, tolerance in (("rtol", rtol), ("atol", atol)):
        if not (math.isfinite(tolerance) and tolerance >= 0.0):
            raise ValueError(f"{name} = {tolerance!r} is no tolerance")
    got, wanted = np.asarray(actual, dtype=float), np.asarray(reference, dtype=float)
    if not np.all(np.isfinite(wanted)):
        raise ValueError("the reference must be finite")
    if wanted.shape not in ((), got.shape):
        raise AssertionError(f"shape {got.shape} against {wanted.shape}")
    wanted = np.broadcast_to(wanted, got.shape)
    allowed = atol + rtol * np.abs(wanted)
    off = np.abs(got - wanted)
    # Written so that a NaN is outside.
    outside = ~(off <= allowed)
    if not outside.any():
        return
    excess = np.where(np.isnan(off), np.inf, off - allowed)
    worst = np.unravel_index(int(np.argmax(excess)), got.shape)
    place = f" at {[int(i) for i in worst]} ({int(outside.sum())} of {got.size} outside)" if got.shape else ""
    raise AssertionError(
        f"{got[worst]:.12g} {unit} is not {wanted[worst]:.12g} {unit}{place}: "
        f"off by {off[worst]:.3g}, allowed {allowed[worst]:.3g} ({why})"
    )
