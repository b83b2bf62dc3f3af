"""Numbers as C literals of single precision."""

from __future__ import annotations

import re
from decimal import Decimal
from fractions import Fraction

import numpy as np

from gainbench.errors import HandoverError

_DIGITS = 9
"""Significant decimal digits that give any single-precision number back (IEEE 754)."""
_INSIDE = 1 - Fraction(1, 2**20)
_FIXED = (1e-4, 1e9)
"""Sizes that are written without an exponent."""


def float_literal(value: float) -> str:
    """A number as a literal of type float.

    The value is rounded to single precision once, and written with as few digits as read back to that number.

    Parameters
    ----------
    value : float
        Finite.

    Returns
    -------
    str
        ``2.65999293F``.

    Raises
    ------
    HandoverError
        If single precision cannot hold it with its full 24 bits.
    """
    with np.errstate(over="ignore", under="ignore"):
        single = np.float32(value)
    limits = np.finfo(np.float32)
    if not np.isfinite(single) or (value != 0.0 and abs(single) < limits.tiny):
        raise HandoverError(f"{value!r} is beyond what single precision holds ({limits.tiny:.3g} to {limits.max:.3g})")
    # Exact arithmetic, and a hair inside half a step: a reader may round the text by way of double.
    exact = Fraction(float(single))
    step = abs(exact - Fraction(float(np.nextafter(single, np.float32(0.0))))) * _INSIDE
    texts = (f"{float(single):.{digits}g}" for digits in range(1, _DIGITS + 1))
    text = next((one for one in texts if 2 * abs(Fraction(one) - exact) < step), f"{float(single):.{_DIGITS}g}")
    if _FIXED[0] <= abs(single) < _FIXED[1]:
        text = f"{Decimal(text):f}"
    return f"{text if re.search('[.e]', text) else f'{text}.0'}F"


def count_literal(value: int) -> str:
    """A whole number, 0 or more, as an unsigned literal (MISRA C:2012 rule 7.2, from memory)."""
    return f"{value}U"
