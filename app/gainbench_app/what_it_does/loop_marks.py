"""Where the margins of a loop are on its curve: what a Bode plot marks."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.results import LoopCurve, LoopFigures

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class BodeCurve:
    """A loop as a Bode plot draws it."""

    frequency_hz: Array
    magnitude_db: Array
    phase_deg: Array
    """Without jumps, between -360 and 0 at the crossover."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LengthMark:
    """A margin as a length: a vertical from one value to another at a frequency."""

    frequency_hz: float
    start: float
    stop: float
    value: float
    """The margin [deg] or [dB]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoopMarks:
    """What is marked of one loop."""

    crossover_hz: float | None = None
    phase_margin: LengthMark | None = None
    """From an odd multiple of 180 degrees to the phase."""
    gain_margin: LengthMark | None = None
    """From 0 dB down to the magnitude."""


def bode_curve(curve: LoopCurve, figures: LoopFigures | None) -> BodeCurve:
    """Magnitude and phase for drawing."""
    magnitude = 20.0 * np.log10(np.maximum(np.abs(curve.open_loop), 1e-300))
    phase = _unwrapped(np.angle(curve.open_loop, deg=True))
    anchor = figures.crossover_hz if figures is not None and figures.crossover_hz is not None else None
    at = float(np.interp(anchor or curve.frequency_hz[0], curve.frequency_hz, phase))
    phase = phase - 360.0 * math.ceil(at / 360.0 - 1e-9)
    return BodeCurve(frequency_hz=curve.frequency_hz, magnitude_db=magnitude, phase_deg=phase)


def _unwrapped(degrees: Array) -> Array:
    """Without jumps of a turn from one frequency to the next."""
    turns = np.cumsum(np.rint(np.diff(degrees) / 360.0))
    return np.concatenate((degrees[:1], degrees[1:] - 360.0 * turns))


def loop_marks(bode: BodeCurve, figures: LoopFigures | None) -> LoopMarks:
    """Find the places of the margins that the figures name.

    Parameters
    ----------
    bode : BodeCurve
        The curve that is drawn.
    figures : LoopFigures, optional
        Its exact figures: they are what is written, the curve only tells where.

    Returns
    -------
    LoopMarks
        None where there is no such margin, or its place is not on the curve.
    """
    if figures is None or not figures.stable:
        return LoopMarks()
    phase_margin = gain_margin = None
    if figures.phase_margin_deg is not None:
        phase_margin = _phase_mark(bode, figures.phase_margin_deg)
    if figures.gain_margin_db is not None:
        gain_margin = _gain_mark(bode, figures.gain_margin_db)
    return LoopMarks(crossover_hz=figures.crossover_hz, phase_margin=phase_margin, gain_margin=gain_margin)


def _crossings(y: Array, level: float) -> list[tuple[int, float]]:
    """Where a curve crosses a level: the point before, and the share of the way to the next."""
    above = y - level
    found = np.flatnonzero((above[:-1] * above[1:] <= 0.0) & (above[:-1] != above[1:]))
    return [(int(index), float(above[index] / (above[index] - above[index + 1]))) for index in found]


def _between(values: Array, index: int, share: float) -> float:
    return float(values[index] + share * (values[index + 1] - values[index]))


def _frequency(bode: BodeCurve, index: int, share: float) -> float:
    before, after = (math.log(float(one)) for one in bode.frequency_hz[index : index + 2])
    return math.exp(before + share * (after - before))


def _phase_mark(bode: BodeCurve, margin: float) -> LengthMark | None:
    """At the crossing of 0 dB that comes nearest to an odd multiple of 180 degrees."""
    best: LengthMark | None = None
    for index, share in _crossings(bode.magnitude_db, 0.0):
        phase = _between(bode.phase_deg, index, share)
        odd = 360.0 * round((phase - 180.0) / 360.0) + 180.0
        if best is None or abs(phase - odd) < abs(best.stop - best.start):
            best = LengthMark(frequency_hz=_frequency(bode, index, share), start=odd, stop=phase, value=margin)
    return best


def _gain_mark(bode: BodeCurve, margin: float) -> LengthMark | None:
    """At the crossing of an odd multiple of 180 degrees whose magnitude is the margin below 0 dB."""
    places: list[LengthMark] = []
    lowest = math.ceil((float(bode.phase_deg.min()) - 180.0) / 360.0)
    highest = math.floor((float(bode.phase_deg.max()) - 180.0) / 360.0)
    for turn in range(lowest, highest + 1):
        for index, share in _crossings(bode.phase_deg, 360.0 * turn + 180.0):
            magnitude = _between(bode.magnitude_db, index, share)
            if magnitude < 0.0:
                places.append(
                    LengthMark(frequency_hz=_frequency(bode, index, share), start=0.0, stop=magnitude, value=margin)
                )
    end = float(bode.magnitude_db[-1])
    if not places and end < 0.0:
        places.append(LengthMark(frequency_hz=float(bode.frequency_hz[-1]), start=0.0, stop=end, value=margin))
    return min(places, key=lambda place: abs(-place.stop - margin), default=None)
