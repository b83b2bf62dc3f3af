"""Scales of plots: nice steps, ranges that move in steps, ticks and their words."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

_NICE = (1.0, 2.0, 2.5, 5.0, 10.0)
_SHRINK_BELOW = 0.45
"""A range shrinks once less of it is used; before that it stays, so that plots do not breathe."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Range:
    """The ends of an axis, and the step of its ticks."""

    low: float
    high: float
    step: float

    @property
    def span(self) -> float:
        """From end to end."""
        return self.high - self.low

    def ticks(self) -> list[float]:
        """Multiples of the step within the range."""
        first = math.ceil(self.low / self.step - 1e-9)
        last = math.floor(self.high / self.step + 1e-9)
        return [number * self.step for number in range(first, last + 1)]


def nice_step(span: float, most: int) -> float:
    """The smallest step of 1, 2, 2.5, 5 times a power of ten that makes at most so many intervals."""
    if not span > 0.0 or not math.isfinite(span):
        return 1.0
    raw = span / most
    power = 10.0 ** math.floor(math.log10(raw))
    return next(nice * power for nice in _NICE if nice * power >= raw * (1.0 - 1e-9))


def nice_range(low: float, high: float, *, most: int = 4, pad: float = 0.0) -> Range:
    """A range that holds both values, its ends at half steps."""
    if high - low < 1e-12 * max(abs(low), abs(high), 1e-9):
        middle, half = low, max(abs(low) * 0.1, 1.0)
        low, high = middle - half, middle + half
    margin = pad * (high - low)
    step = nice_step(high - low + 2.0 * margin, most)
    half = step / 2.0
    return Range(
        low=math.floor((low - margin) / half + 1e-9) * half,
        high=math.ceil((high + margin) / half - 1e-9) * half,
        step=step,
    )


def stepped(shown: Range | None, *, low: float, high: float, most: int = 4, pad: float = 0.0) -> Range:
    """The range to show next: it grows at once, and shrinks only where most of it has become empty."""
    wanted = nice_range(low, high, most=most, pad=pad)
    if shown is None or low < shown.low or high > shown.high:
        return wanted
    used = (high - low) / shown.span if shown.span > 0.0 else 0.0
    return wanted if used < _SHRINK_BELOW else shown


def number_text(value: float, step: float) -> str:
    """A tick's number, with the decimals that its step needs and a gap in thousands."""
    if abs(value) < step * 1e-6:
        return "0"
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    if round(step * 10**decimals, 6) % 1.0:
        decimals += 1
    text = f"{value:,.{decimals}f}".replace(",", "\N{NARROW NO-BREAK SPACE}")
    return text.replace("-", "\N{MINUS SIGN}")


def frequency_text(hertz: float, *, digits: int = 3) -> str:
    """``1.00 kHz``, ``60.0 Hz``."""
    if hertz >= 999.5:
        return f"{_fixed(hertz / 1000.0, digits)}\N{NO-BREAK SPACE}kHz"
    return f"{_fixed(hertz, digits)}\N{NO-BREAK SPACE}Hz"


def _fixed(value: float, digits: int) -> str:
    if value <= 0.0:
        return "0"
    rounded = float(f"{value:.{digits - 1}e}")
    decimals = max(0, digits - 1 - math.floor(math.log10(rounded) + 1e-12))
    return f"{value:.{decimals}f}"


def time_text(seconds: float, *, digits: int = 3) -> str:
    """``23.2 ms``, ``1.20 s``."""
    if seconds <= 0.0:
        return "0\N{NO-BREAK SPACE}ms"
    for size, unit in ((1.0, "s"), (1e-3, "ms")):
        if seconds >= 0.9995 * size:
            return f"{_fixed(seconds / size, digits)}\N{NO-BREAK SPACE}{unit}"
    return f"{_fixed(seconds * 1e6, digits)}\N{NO-BREAK SPACE}µs"


def corners(x: NDArray[np.float64], y: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Only the points where a line of straight pieces bends."""
    if len(x) < 3:
        return x, y
    slope = np.diff(y)
    scale = float(np.max(np.abs(y))) or 1.0
    bends = np.nonzero(np.abs(np.diff(slope)) > 1e-9 * scale)[0] + 1
    keep = np.concatenate(([0], bends, [len(x) - 1]))
    return x[keep], y[keep]
