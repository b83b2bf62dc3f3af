"""What costs a loop most of its phase, and what changing that would give back."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from gainbench.assessed import Assessed, LoopName
from gainbench.findings.numbers import amount, degrees, digits, hertz
from gainbench.ledger import LedgerEntry, PhaseLedger, phase_ledger, speed_filter_angle
from gainbench.model import Stage

LEAST_DEG = 1.0
"""A contributor below this is not worth a word [deg]."""

_WORDS = {
    "pi": "the integral part",
    "update-delay": "the update delay",
    "hold": "the hold of half a current period",
    "current-filter": "the current filter",
    "closed-current-loop": "the current loop inside",
    "feedforward": "the back-EMF feedforward",
    "speed-delay": "the speed delay",
    "speed-window": "the speed window",
    "speed-hold": "the hold of half a speed period",
    "speed-filter": "the speed filter",
}
"""Every contributor that can be changed; the plant cannot."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Cost:
    """The contributor that takes most beside the plant."""

    name: str
    """Of its entry in the ledger."""
    reason: str
    """What takes how much, as a clause."""
    advice: str
    """What to change and what it gives back, as a clause; empty where that is up to the targets."""


def costliest(case: Assessed, name: LoopName) -> Cost | None:
    """What takes most of the phase at a loop's crossover, and what changing it would give back.

    Parameters
    ----------
    case : Assessed
        What is judged, or an assessment.
    name : str
        ``current`` or ``speed``.

    Returns
    -------
    Cost or None
        None where there is no ledger, or nothing beside the plant takes as much as a degree.
    """
    ledger = phase_ledger(case, name)
    return None if ledger is None else costliest_in(ledger, case)


def costliest_in(ledger: PhaseLedger, case: Assessed) -> Cost | None:
    """The same of a ledger that is drawn up already.

    Parameters
    ----------
    ledger : PhaseLedger
        Of a loop of the case, at its crossover.
    case : Assessed
        What is judged, or an assessment.

    Returns
    -------
    Cost or None
        None where nothing beside the plant takes as much as a degree.
    """
    own = case.current if ledger.loop == "current" else case.speed
    cost = cost_of(ledger, case.sheet.rig.stage)
    if cost is not None and cost.name == "pi" and own.asked_crossover is not None:
        # A design for a margin gives the integral part all that is left of it.
        return replace(cost, advice="")
    return cost


def costliest_lag(case: Assessed, name: LoopName, *, margin: float) -> Cost | None:
    """The same for a loop without gains, where plant and delays leave less than a margin at the asked crossover.

    Parameters
    ----------
    case : Assessed
        What is judged, or an assessment.
    name : str
        ``current`` or ``speed``.
    margin : float
        What was asked for [rad].

    Returns
    -------
    Cost or None
        None where something else than lag stands in the way.
    """
    ledger = phase_ledger(case, name)
    # Not the margin itself: lag of more than a turn would pass for a lead.
    if ledger is None or ledger.total + 180.0 >= math.degrees(margin):
        return None
    return cost_of(ledger, case.sheet.rig.stage)


def cost_of(ledger: PhaseLedger, stage: Stage) -> Cost | None:
    """What takes most in a ledger, the plant left out.

    Parameters
    ----------
    ledger : PhaseLedger
        Of either loop.
    stage : Stage
        Whose rates and delays it is drawn up with.

    Returns
    -------
    Cost or None
        None where nothing takes as much as a degree, or the change would not give any back.
    """
    worst = min((one for one in ledger.entries if one.name in _WORDS), key=lambda one: one.degrees)
    if worst.degrees > -LEAST_DEG:
        return None
    change, gives = _change(worst, ledger, stage=stage)
    if gives <= 0.0:
        return None
    return Cost(
        name=worst.name,
        reason=f"beside the plant, {_WORDS[worst.name]} takes most at {hertz(ledger.frequency)}, "
        f"{degrees(-worst.degrees)}",
        advice=f"{change} would give back about {degrees(gives)}",
    )


def _change(entry: LedgerEntry, ledger: PhaseLedger, *, stage: Stage) -> tuple[str, float]:
    """What would take less, and how much less at the same frequency [deg]."""
    half = -0.5 * entry.degrees
    match entry.name:
        case "pi":
            return "half the Ki", -entry.degrees - _halved(entry)
        case "update-delay":
            return f"an update_delay of {digits(0.5 * stage.update_delay)} periods", half
        case "hold":
            return "twice the current_rate", half - 0.5 * ledger.entry("update-delay").degrees
        case "current-filter":
            return f"a current_filter of {amount(0.5 * stage.current_filter, 's')}", -entry.degrees - _halved(entry)
        case "closed-current-loop":
            return "a current loop twice as fast", half
        case "feedforward":
            return "leaving back_emf_feedforward out", -entry.degrees
        case "speed-delay":
            return "a speed_delay of 0", -entry.degrees
        case "speed-window" if stage.speed_window > 1:
            left = math.degrees(0.5 * ledger.frequency * stage.speed_period)
            return "a speed_window of 1", -entry.degrees - left
        case "speed-filter":
            shorter = replace(stage, speed_filter=0.5 * stage.speed_filter)
            left = -math.degrees(speed_filter_angle(shorter, ledger.frequency))
            return f"a speed_filter of {amount(shorter.speed_filter, 's')}", -entry.degrees - left
        case _:
            # The window counts speed periods, so a faster rate shortens it too.
            return "twice the speed_rate", -0.5 * (
                ledger.entry("speed-hold").degrees + ledger.entry("speed-window").degrees
            )


def _halved(entry: LedgerEntry) -> float:
    """What a first-order lag, or an integral beside a proportional part, takes at half its time or gain [deg]."""
    taken = math.radians(-entry.degrees)
    return math.degrees(math.atan2(0.5 * math.sin(taken), math.cos(taken)))
