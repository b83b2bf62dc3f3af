"""Which stretch of the duty the time plots show."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum

from gainbench.model import Duty
from gainbench.results import ResponseFigures


class SpanChoice(StrEnum):
    """The stretches to choose from."""

    WHOLE = "whole"
    STEP = "step"
    LOAD = "load"
    DRAGGED = "dragged"


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """A stretch of time."""

    start: float
    """[s]."""
    stop: float
    """[s], after ``start``."""

    @property
    def length(self) -> float:
        """[s]."""
        return self.stop - self.start


def whole_span(duty: Duty) -> Span:
    """All of the duty."""
    return Span(start=0.0, stop=duty.length)


def step_span(duty: Duty, figures: ResponseFigures | None) -> Span:
    """From just before the reference until it has settled twice over."""
    start = duty.reference_at
    ends = [one for one in (duty.load_time if duty.load_step else None, duty.stop_at, duty.length) if one is not None]
    room = min((one for one in ends if one > start), default=duty.length) - start
    ramp = abs(duty.reference_speed) / duty.reference_ramp if duty.reference_ramp > 0.0 else 0.0
    settled = figures.settling_time_s if figures is not None and figures.settling_time_s else room / 2.5
    return _around(start, min(room, _rounded_up(2.5 * max(settled, ramp))), duty)


def load_span(duty: Duty, figures: ResponseFigures | None) -> Span:
    """From just before the load until the speed is back."""
    start = duty.load_time
    ends = [one for one in (duty.stop_at, duty.length) if one is not None and one > start]
    room = min(ends, default=duty.length) - start
    recovered = figures.recovery_time_s if figures is not None and figures.recovery_time_s else room / 2.5
    return _around(start, min(room, _rounded_up(3.0 * recovered)), duty)


def _around(start: float, length: float, duty: Duty) -> Span:
    length = max(length, 1e-3 * duty.length)
    before = max(0.0, min(start - 0.08 * length, duty.length - length))
    return Span(start=before, stop=min(duty.length, start + length))


def _rounded_up(length: float) -> float:
    """A length that moves in steps, so that a drag does not make the plots breathe."""
    if length <= 0.0:
        return 0.0
    power = 10.0 ** math.floor(math.log10(length))
    return next(nice * power for nice in (1.0, 2.0, 3.0, 5.0, 10.0) if nice * power >= length * (1.0 - 1e-9))
