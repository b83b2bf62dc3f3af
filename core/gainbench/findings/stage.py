"""What sampling and sensor do to the current: the encoder's steps, and the angle turned while waiting."""

from __future__ import annotations

import math
from collections.abc import Iterator

from gainbench.derived import count_speed
from gainbench.findings import thresholds
from gainbench.findings.case import Case
from gainbench.findings.demand import Demand, sheet_amperes
from gainbench.findings.numbers import amount, degrees, digits, percent, speed
from gainbench.model import IntegratorRule, MachineKind
from gainbench.plant import current_size
from gainbench.results import Finding, Level, Words

_AT_ONCE = {IntegratorRule.BACKWARD: 1.0, IntegratorRule.TRAPEZOID: 0.5, IntegratorRule.FORWARD: 0.0}
"""Share of Ki T e that a PI puts out at the tick at which the error comes."""


def count_findings(case: Case) -> Iterator[Finding]:
    """The current that one encoder count asks for, against the rated current.

    One count steps the measured speed by ``2 pi/(counts m Tw)``, of which the digital filter passes
    ``1 - exp(-Tw/Tf)`` at once; the speed PI makes ``Kp`` of it and, by its integrator rule, ``Ki Tw`` or half of it.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        One of level ``thin``, or none; none without a stable loop, encoder or rated current.
    """
    machine, stage = case.sheet.rig.machine, case.sheet.rig.stage
    gains, step, figures = case.speed.gains, count_speed(stage), case.stable_figures("speed")
    if gains is None or figures is None or step is None or machine.rated_current is None:
        return
    period = stage.speed_period
    passed = -math.expm1(-period / stage.speed_filter) if stage.speed_filter > 0.0 else 1.0
    at_once = gains.kp + _AT_ONCE[case.sheet.aims.firmware.integrator] * gains.ki * period
    current = at_once * step * passed
    share = current / (machine.rated_current * current_size(machine))
    if share <= thresholds.COUNT_CURRENT_SHARE:
        return

    def words() -> Words:
        doubled = 2 * stage.speed_window
        cost = ""
        if figures.crossover_hz is not None:
            cost = f" and costs {degrees(180.0 * figures.crossover_hz * stage.speed_window * period)} of phase"
        return Words(
            title=f"One encoder count asks for {sheet_amperes(current, machine)}",
            reason=f"a count is {speed(step)} at {amount(stage.speed_rate, 'Hz')}, and the speed PI makes "
            f"{percent(share)} of the rated current of it: it is heard, and it heats",
            advice=f"A speed_window of {doubled} halves it{cost}; a speed_filter or a finer encoder does as well",
        )

    yield Finding.on("stage", "encoder-count-coarse", level=Level.THIN, words=words)


def angle_findings(case: Case, states: tuple[Demand, ...]) -> Iterator[Finding]:
    """The electrical angle turned between a sample and its voltage: ``360 p n (update_delay + 1/2) Ts``.

    Parameters
    ----------
    case : Case
        What is judged.
    states : tuple of Demand
        The steady states of the duty.

    Yields
    ------
    Finding
        ``breaks`` below the least number of ticks per electrical turn, ``thin`` above the angle; none for a machine
        with a commutator.
    """
    if case.plant.kind is MachineKind.BRUSHED_DC:
        return
    stage, reference = case.sheet.rig.stage, abs(states[0].speed)
    electrical = case.plant.pole_pairs * reference / math.tau
    angle = 360.0 * electrical * (stage.update_delay + 0.5) * stage.current_period
    per_turn = stage.current_rate / electrical if electrical > 0.0 else math.inf
    if per_turn < thresholds.TICKS_PER_TURN:
        yield Finding.on(
            "stage",
            "commutation-too-slow",
            level=Level.BREAKS,
            words=lambda: Words(
                title=f"At {speed(reference)} an electrical turn has {digits(per_turn)} current ticks",
                reason=f"{amount(electrical, 'Hz')} electrical at a rate of {amount(stage.current_rate, 'Hz')}: below "
                f"{thresholds.TICKS_PER_TURN:.0f} ticks the steps of the voltage make no rotating field that this "
                "model could stand for",
                advice=f"Raise current_rate above {amount(thresholds.TICKS_PER_TURN * electrical, 'Hz')}, "
                "or lower reference_speed",
            ),
        )
    elif angle > thresholds.DELAY_ANGLE_DEG:
        sine = case.plant.kind is MachineKind.PM_SINE
        share = percent(math.sin(math.radians(min(angle, 90.0))))
        astray = (
            f"{share} of the voltage lands on the other axis" if sine else "each pair of windings is switched that late"
        )
        yield Finding.on(
            "stage",
            "commutation-angle-late",
            level=Level.THIN,
            words=lambda: Words(
                title=f"The rotor turns {degrees(angle)} electrical between sample and voltage",
                reason=f"that is {digits(stage.update_delay + 0.5)} current periods at {speed(reference)}; "
                f"uncorrected, {astray}, which this model leaves out",
                advice="Advance the angle by that much, in proportion to the speed, where firmware turns the voltage "
                "back"
                if sine
                else "Advance the commutation by that much, in proportion to the speed",
            ),
        )
