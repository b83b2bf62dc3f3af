"""The figures of the speed's answer to the reference and to the load step."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.model import Duty, Stage
from gainbench.simulate.duty import Schedule

BAND = 0.02
"""Share of the reference speed within which the speed counts as settled."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SpeedFigures:
    """What is read off the speed trace; None where there is nothing to read."""

    overshoot_percent: float | None = None
    rise_time_s: float | None = None
    settling_time_s: float | None = None
    load_dip_rad_s: float | None = None
    recovery_time_s: float | None = None


def speed_figures(
    speed: NDArray[np.float64], reference: NDArray[np.float64], *, duty: Duty, plan: Schedule, stage: Stage
) -> SpeedFigures:
    """Read the figures off the speed trace, in whole ticks, signed by the reference.

    From the reference to before the load step, the stop or the end: largest excess over the reference (at least 0, in
    percent of it), first tick at 90 % minus first at 10 %, last tick outside 2 % of the reference. From the load step
    to before the stop or the end: largest distance from the reference in force, last tick outside 2 %. A time that
    ends with its window is None. Without a reference there is only the dip, without a load step neither dip nor
    recovery; where the load step does not come after the reference there are none.

    Parameters
    ----------
    speed, reference : ndarray, shape (n_ticks,)
        True motor speed and the reference in force at the ticks [rad/s].
    duty : Duty
        The duty that was run.
    plan : Schedule
        Its ticks.
    stage : Stage
        Its ``current_period`` [s] is the length of a tick.

    Returns
    -------
    SpeedFigures
        Percent, s and rad/s.
    """
    from gainbench.kernels.response_figures import NEVER, load_ticks, step_ticks

    size = abs(duty.reference_speed)
    loaded = duty.load_step != 0.0
    if size > 0.0 and loaded and duty.load_time <= duty.reference_at:
        return SpeedFigures()
    period = stage.current_period
    overshoot = rise = settling = dip = recovery = None

    end = plan.step_end if loaded else plan.load_end
    if size > 0.0 and plan.reference < end:
        step = step_ticks(speed, duty.reference_speed, plan.reference, end, BAND * size)
        overshoot = 100.0 * step.excess / size
        if step.ninth != NEVER:
            rise = (step.ninth - step.tenth) * period
        settling = _settled(step.outside, plan.reference, end, period)

    end = plan.load_end
    if loaded and plan.load < end:
        load = load_ticks(speed, reference, plan.load, end, BAND * size)
        dip = load.dip
        if size > 0.0:
            recovery = _settled(load.outside, plan.load, end, period)
    return SpeedFigures(
        overshoot_percent=overshoot,
        rise_time_s=rise,
        settling_time_s=settling,
        load_dip_rad_s=dip,
        recovery_time_s=recovery,
    )


def _settled(outside: int, first: int, end: int, period: float) -> float | None:
    """Time from a window's first tick to its last tick outside; 0 without one, None where it is the window's last."""
    if outside < 0:
        return 0.0
    return None if outside == end - 1 else (outside - first) * period
