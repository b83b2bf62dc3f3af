"""Which method runs for which aims."""

from __future__ import annotations

from gainbench.model import DesignMethod, LoopAims, SpeedAims, Stage
from gainbench.plant import Plant
from gainbench.results import LoopFigures, Refusal
from gainbench.sampling import CurrentLoop, Loop, SpeedLoop
from gainbench.tuning.bandwidth import bandwidth_margin
from gainbench.tuning.exact import crossover_margin
from gainbench.tuning.formulas import (
    current_lag_cancellation,
    current_pole_placement,
    magnitude_optimum,
    speed_lag_cancellation,
    speed_pole_placement,
    symmetric_optimum,
)
from gainbench.tuning.hand import hand_gains
from gainbench.tuning.outcome import Design


def design_current(aims: LoopAims, plant: Plant, *, stage: Stage, loop: CurrentLoop) -> Design:
    """Gains of the current loop by the method that the aims name.

    Parameters
    ----------
    aims : LoopAims
        Method and its targets.
    plant : Plant
        Values at the motor shaft.
    stage : Stage
        Rates and delays.
    loop : CurrentLoop
        Of this plant and stage.

    Returns
    -------
    Design
        kp [V/A], ki [V/(A s)], or a refusal.

    Raises
    ------
    ValueError
        If the method's targets are missing, or the method is none of this loop's; a sheet that was read is complete.
    """
    match aims.method:
        case DesignMethod.CROSSOVER_MARGIN | DesignMethod.BANDWIDTH_MARGIN:
            return _on_the_loop(aims, loop)
        case DesignMethod.LAG_CANCELLATION:
            return current_lag_cancellation(plant, crossover=_target(aims.crossover, "crossover"))
        case DesignMethod.MAGNITUDE_OPTIMUM:
            return magnitude_optimum(plant, stage=stage)
        case DesignMethod.POLE_PLACEMENT:
            return current_pole_placement(
                plant,
                natural_frequency=_target(aims.natural_frequency, "natural_frequency"),
                damping=_target(aims.damping, "damping"),
            )
        case DesignMethod.BY_HAND:
            return _by_hand(aims, plant, period=stage.current_period)
    raise ValueError(f"{aims.method} is not a method of the current loop")


def design_speed(
    aims: SpeedAims, plant: Plant, *, stage: Stage, loop: SpeedLoop | None, current: LoopFigures | None
) -> Design:
    """Gains of the speed loop by the method that the aims name.

    Parameters
    ----------
    aims : SpeedAims
        Method and its targets.
    plant : Plant
        Values at the motor shaft.
    stage : Stage
        Rates and delays.
    loop : SpeedLoop or None
        With the current gains inside; None where there are none.
    current : LoopFigures or None
        Of the current loop; the symmetric optimum asks for its crossover.

    Returns
    -------
    Design
        kp [A s/rad], ki [A/rad], or a refusal.

    Raises
    ------
    ValueError
        As :func:`design_current`.
    """
    match aims.method:
        case DesignMethod.CROSSOVER_MARGIN | DesignMethod.BANDWIDTH_MARGIN:
            return _waits() if loop is None else _on_the_loop(aims, loop)
        case DesignMethod.LAG_CANCELLATION:
            return speed_lag_cancellation(plant, crossover=_target(aims.crossover, "crossover"))
        case DesignMethod.SYMMETRIC_OPTIMUM:
            spread = _target(aims.spread, "spread")
            if current is None:
                return _waits()
            if current.crossover_hz is None:
                return Design(
                    refusal=Refusal(
                        reason="this method starts from the current loop's crossover, and the current loop has none"
                    )
                )
            return symmetric_optimum(plant, stage=stage, spread=spread, current_crossover_hz=current.crossover_hz)
        case DesignMethod.POLE_PLACEMENT:
            return speed_pole_placement(
                plant,
                natural_frequency=_target(aims.natural_frequency, "natural_frequency"),
                damping=_target(aims.damping, "damping"),
            )
        case DesignMethod.BY_HAND:
            return _by_hand(aims, plant, period=stage.speed_period)
    raise ValueError(f"{aims.method} is not a method of the speed loop")


def _on_the_loop(aims: LoopAims, loop: Loop) -> Design:
    """The two methods that are exact on the sampled loop."""
    margin = _target(aims.phase_margin, "phase_margin")
    if aims.method is DesignMethod.CROSSOVER_MARGIN:
        return crossover_margin(loop, crossover=_target(aims.crossover, "crossover"), margin=margin)
    return bandwidth_margin(loop, bandwidth=_target(aims.bandwidth, "bandwidth"), margin=margin)


def _waits() -> Design:
    return Design(refusal=Refusal(reason="the speed loop is designed around the current loop, which has no gains"))


def _by_hand(aims: LoopAims, plant: Plant, *, period: float) -> Design:
    if aims.hand is None:
        raise ValueError("by-hand needs gains")
    return Design(gains=hand_gains(aims.hand, period=period, torque_constant=plant.torque))


def _target(value: float | None, name: str) -> float:
    if value is None:
        raise ValueError(f"this method needs {name}")
    return value
