"""Where an open loop has a gain of 1, read off its drawn curve."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gainbench.results import LoopCurve


@dataclass(frozen=True, slots=True, kw_only=True)
class Crossing:
    """One frequency at which \\|L\\| is 1."""

    frequency_hz: float
    falling: bool
    """True where the gain falls through 1, False where it rises."""
    margin_deg: float
    """arg L + 180 deg, between -180 and 180: below 0 the phase lies beyond -180 deg."""


def crossings(curve: LoopCurve) -> tuple[Crossing, ...]:
    """Every crossing of \\|L\\| = 1, from low frequency to high.

    Between two points the logarithm of the gain and the phase are taken as straight in the logarithm of frequency.

    Parameters
    ----------
    curve : LoopCurve
        The open loop, arrays of shape (n,).

    Returns
    -------
    tuple of Crossing
        Empty where the gain stays on one side of 1.
    """
    from gainbench.kernels.loop_curve import edges_of_one

    return tuple(_crossing(curve, edge) for edge in edges_of_one(curve.open_loop).tolist())


def crosses_again(curve: LoopCurve) -> bool:
    """Whether there is more than one crossing of \\|L\\| = 1."""
    from gainbench.kernels.loop_curve import edge_count

    return edge_count(curve.open_loop) > 1


def _crossing(curve: LoopCurve, edge: int) -> Crossing:
    first, second = complex(curve.open_loop[edge]), complex(curve.open_loop[edge + 1])
    low, high = float(curve.frequency_hz[edge]), float(curve.frequency_hz[edge + 1])
    part = 1.0
    if first != 0.0 and second != 0.0:
        start, end = math.log(abs(first)), math.log(abs(second))
        part = start / (start - end) if start != end else 0.0
    turned = math.atan2(first.imag, first.real)
    if first != 0.0 and second != 0.0:
        step = second / first
        turned += part * math.atan2(step.imag, step.real)
    return Crossing(
        frequency_hz=low * (high / low) ** part,
        falling=abs(first) > 1.0,
        margin_deg=(math.degrees(turned) + 360.0) % 360.0 - 180.0,
    )
