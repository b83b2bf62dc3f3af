"""Numbers for sentences: three digits, a handy unit, never an exponent where people would not write one."""

from __future__ import annotations

import math
from functools import cache

from gainbench.units import Dimension, unit_size

_PREFIXES = ((1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"), (1e-9, "n"))
_ROUNDS_UP = 0.9995
_UNKNOWN = "more than can be said"


def digits(number: float) -> str:
    """Three significant digits, whole numbers whole: ``1.23``, ``60.0``, ``1500``."""
    size = abs(number)
    if size == 0.0:
        return "0"
    if not size < math.inf:
        return _UNKNOWN
    if size < 0.0995 or size >= 1e6:
        return f"{number:.3g}"
    if size < 9.995:
        return f"{number:.2f}"
    if size < 99.95:
        return f"{number:.1f}"
    return f"{number:.0f}"


def amount(value: float, unit: str) -> str:
    """A value with the prefix that gives it a handy size.

    Parameters
    ----------
    value : float
        In ``unit``.
    unit : str
        A unit that takes a prefix, ``"A"``.

    Returns
    -------
    str
        ``"1.23 kA"``.

    Examples
    --------
    >>> amount(0.0125, "s")
    '12.5 ms'
    """
    size = abs(value)
    if size == 0.0:
        return f"0 {unit}"
    for scale, prefix in _PREFIXES:
        if size >= _ROUNDS_UP * scale:
            return f"{digits(value / scale)} {prefix}{unit}"
    return f"{digits(value)} {unit}"


def hertz(angular: float) -> str:
    """A frequency of so many rad/s: ``"1.23 kHz"``."""
    return amount(angular / math.tau, "Hz")


def degrees(value: float) -> str:
    """An angle of so many degrees, with one decimal: ``"60.0 deg"``."""
    return f"{value + 0.0:.1f} deg" if math.isfinite(value) else _UNKNOWN


def speed(value: float) -> str:
    """A speed of so many rad/s, in rpm, four digits: ``"1500 rpm"``."""
    return f"{_rotation(value)} rpm"


def acceleration(value: float) -> str:
    """An acceleration of so many rad/s^2, in rpm/s, two digits: ``"21000 rpm/s"``."""
    turned = value / _rpm()
    if not math.isfinite(turned):
        return _UNKNOWN
    return f"{float(f'{turned:.2g}'):.0f} rpm/s" if 1.0 <= abs(turned) < 1e9 else f"{turned:.2g} rpm/s"


def percent(share: float) -> str:
    """A share as ``"12.5 %"``."""
    return f"{digits(100.0 * share)} %"


def decibels(value: float) -> str:
    """A level, with one decimal: ``"10.1 dB"``."""
    return f"{value + 0.0:.1f} dB" if math.isfinite(value) else _UNKNOWN


def _rotation(value: float) -> str:
    turned = value / _rpm()
    size = abs(turned)
    if not size < math.inf:
        return _UNKNOWN
    if size >= 999.95:
        return f"{float(f'{turned:.4g}'):.0f}" if size < 1e9 else f"{turned:.4g}"
    return f"{turned:.3g}" if size else "0"


@cache
def _rpm() -> float:
    return unit_size("rpm", Dimension.SPEED)
