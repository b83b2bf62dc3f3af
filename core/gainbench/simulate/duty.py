"""The duty in ticks of the current loop: what "from t on" means for each of its times."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gainbench.model import Duty, Stage

ON_TICK = 1e-6
"""Share of a period by which a tick may come early and still count as on time: the rounding of times."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Schedule:
    """A duty's times as ticks, counted from 0; a tick at or beyond ``ticks`` is never reached."""

    ticks: int
    """Length of the duty."""
    reference: int
    """First tick at which the reference counts."""
    load: int
    """First tick whose interval carries the load step."""
    stop: int
    """First tick at which the reference goes back to zero; ``ticks`` where the duty has no stop."""
    stop_size: float
    """Size of the reference from which it goes back [rad/s]."""

    @property
    def step_end(self) -> int:
        """First tick after the window of the reference step, where a load step comes."""
        return min(self.load, self.stop, self.ticks)

    @property
    def load_end(self) -> int:
        """First tick after the window of the load step."""
        return min(self.stop, self.ticks)


def first_tick(time: float, stage: Stage) -> int:
    """First tick with ``t_k >= time - 1e-6 Ts``, for a time [s] at or above 0."""
    return max(0, math.ceil(time * stage.current_rate - ON_TICK))


def schedule(duty: Duty, stage: Stage) -> Schedule:
    """Lay a duty on the ticks of the current loop.

    Ticks are k = 0 .. round(length/Ts) - 1 at t_k = k Ts. A ramp ``min(|ref|, ramp (t - reference_at))`` is stopped at
    the size it has at ``stop_at``.

    Parameters
    ----------
    duty : Duty
        Times in seconds.
    stage : Stage
        Its ``current_rate`` [Hz] is the rate of the ticks.

    Returns
    -------
    Schedule
        The duty's times as ticks.
    """
    ticks = round(duty.length * stage.current_rate)
    reference = first_tick(duty.reference_at, stage)
    stop = ticks if duty.stop_at is None else first_tick(duty.stop_at, stage)
    size = 0.0
    if duty.stop_at is not None and duty.reference_at <= duty.stop_at + ON_TICK * stage.current_period:
        size = abs(duty.reference_speed)
        if duty.reference_ramp > 0.0:
            size = min(size, duty.reference_ramp * max(0.0, duty.stop_at - duty.reference_at))
    return Schedule(ticks=ticks, reference=reference, load=first_tick(duty.load_time, stage), stop=stop, stop_size=size)
