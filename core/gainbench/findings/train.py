"""What the train does to the loops and to the torque: resonance, losses, loads that drive."""

from __future__ import annotations

import math
from collections.abc import Iterator

from gainbench.derived import antiresonance, resonance
from gainbench.findings import thresholds
from gainbench.findings.case import Case
from gainbench.findings.demand import Demand, sheet_amperes
from gainbench.findings.numbers import amount, digits, hertz, percent, speed
from gainbench.results import Finding, Level, Words


def resonance_findings(case: Case) -> Iterator[Finding]:
    """The speed loop's crossover against the antiresonance of an elastic train.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        One of level ``thin``, or none.
    """
    figures = case.stable_figures("speed")
    low, high = antiresonance(case.plant), resonance(case.plant)
    if figures is None or figures.crossover_hz is None or low is None or high is None:
        return
    crossover = math.tau * figures.crossover_hz
    if crossover * thresholds.RESONANCE_DISTANCE <= low:
        return
    where = hertz(low)
    if crossover < low:
        reason = f"it lies at {digits(low / crossover)} times the crossover; below about "
        reason += f"{thresholds.RESONANCE_DISTANCE:.0f} times a shaft softer than in the sheet takes the margin, "
        reason += "and steps leave the load swinging"
    else:
        reason = f"the load cannot follow: the loop holds the motor, and the load swings behind it at {where}"
    yield Finding.on(
        "train",
        "train-resonance-near",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The crossover of {hertz(crossover)} is near the shaft's antiresonance at {where}"
            if crossover < low
            else f"The crossover of {hertz(crossover)} is above the shaft's antiresonance at {where}",
            reason=f"{reason}; motor and load swing against each other at {hertz(high)}",
            advice=f"Ask for a crossover below {hertz(low / thresholds.RESONANCE_DISTANCE)}, or stiffen the shaft",
        ),
    )


def efficiency_findings(case: Case) -> Iterator[Finding]:
    """A transmission whose losses the inertia torque leaves out.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        One of level ``thin`` below the contract's efficiency, or none.
    """
    train, plant = case.sheet.rig.train, case.plant
    if train.efficiency >= thresholds.EFFICIENCY or train.load_inertia == 0.0:
        return
    share = train.load_inertia / train.ratio**2 / plant.inertia
    more = share * (1.0 / train.efficiency - 1.0)
    yield Finding.on(
        "train",
        "train-efficiency-low",
        level=Level.THIN,
        words=lambda: Words(
            title=f"An efficiency of {percent(train.efficiency)} is not counted for the torque that accelerates",
            reason="the losses enlarge load torque and load friction, but not the inertia's torque; speeding up may "
            f"take up to {percent(more)} more current than computed, slowing down less",
            advice="Leave that much room below the current limit, or measure a run-up on the bench",
        ),
    )


def driving_findings(case: Case, states: tuple[Demand, ...]) -> Iterator[Finding]:
    """A load that drives the motion instead of braking it.

    Parameters
    ----------
    case : Case
        What is judged.
    states : tuple of Demand
        The steady states of the duty.

    Yields
    ------
    Finding
        One of level ``thin``, or none.
    """
    driven = [state for state in states if state.drives]
    if not driven:
        return
    worst = max(driven, key=lambda state: abs(state.load))
    machine = case.sheet.rig.machine
    brakes = worst.current * worst.speed < 0.0
    held = (
        f"the machine brakes with {sheet_amperes(abs(worst.current), machine)} and works as a generator"
        if brakes
        else "friction holds it back"
    )
    yield Finding.on(
        "train",
        "load-drives",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The load of {amount(abs(worst.load), 'N*m')} drives the motion",
            reason=f"at {speed(worst.speed)} it pushes the way the shaft turns, so that {held}; without power it runs "
            "away or falls",
            advice="Give it a holding brake, and the bus a place for the energy that comes back"
            if brakes
            else "Give it a holding brake, and check that friction is there to stay",
        ),
    )
