"""What the shelf shows of one tuning: a few figures, without the curves that they came from."""

from __future__ import annotations

from dataclasses import dataclass

from gainbench.assess import Assessment
from gainbench.results import Gains, Level, LoopAssessment


@dataclass(frozen=True, slots=True, kw_only=True)
class Summary:
    """Figures of one tuning, as in an assessment; None where there is none."""

    current: Gains | None
    speed: Gains | None
    torque_constant: float
    """Kt of its plant [N m/A]."""
    current_period: float
    """[s]."""
    speed_period: float
    """[s]."""
    trouble: str
    """Why there are no figures; empty where there are."""
    level: Level
    """The worst of its findings."""
    current_crossover_hz: float | None = None
    speed_crossover_hz: float | None = None
    phase_margin_deg: float | None = None
    """Of the speed loop."""
    gain_margin_db: float | None = None
    """Of the speed loop."""
    overshoot_percent: float | None = None
    settling_time_s: float | None = None
    load_dip_rad_s: float | None = None
    current_limited_s: float | None = None


def summary(assessment: Assessment) -> Summary:
    """The figures of an assessment that the shelf shows.

    Parameters
    ----------
    assessment : Assessment
        Of any sheet.

    Returns
    -------
    Summary
        Without curves and traces, so that a long shelf of long duties stays small.
    """
    current, speed, stage = assessment.current, assessment.speed, assessment.sheet.rig.stage
    inner, outer = current.figures, speed.figures
    response = assessment.response.figures if assessment.response is not None else None
    levels = {one.level for one in assessment.findings}
    return Summary(
        current=current.gains,
        speed=speed.gains,
        torque_constant=assessment.plant.torque,
        current_period=stage.current_period,
        speed_period=stage.speed_period,
        trouble=_trouble("current", current) or _trouble("speed", speed),
        level=next((one for one in (Level.BREAKS, Level.THIN) if one in levels), Level.HOLDS),
        current_crossover_hz=inner.crossover_hz if inner is not None else None,
        speed_crossover_hz=outer.crossover_hz if outer is not None else None,
        phase_margin_deg=outer.phase_margin_deg if outer is not None else None,
        gain_margin_db=outer.gain_margin_db if outer is not None else None,
        overshoot_percent=response.overshoot_percent if response is not None else None,
        settling_time_s=response.settling_time_s if response is not None else None,
        load_dip_rad_s=response.load_dip_rad_s if response is not None else None,
        current_limited_s=response.current_limited_s if response is not None else None,
    )


def _trouble(name: str, loop: LoopAssessment) -> str:
    if loop.gains is None:
        return f"the targets of the {name} loop cannot be met"
    if loop.figures is None or not loop.figures.stable:
        return f"{name} loop unstable"
    return ""
