"""Do the machine's own statements agree, and does the duty keep within its ratings."""

from __future__ import annotations

from collections.abc import Iterator

from gainbench.derived import ConstantCheck, constant_disagreements
from gainbench.findings import thresholds
from gainbench.findings.case import Case
from gainbench.findings.demand import Demand, sheet_amperes
from gainbench.findings.numbers import amount, digits, percent, speed
from gainbench.plant import current_size
from gainbench.results import Finding, Level, Words


def constant_findings(case: Case) -> Iterator[Finding]:
    """Constants of the machine that contradict the one that is used.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        One of level ``thin`` for each such constant.
    """
    for check in constant_disagreements(case.sheet.rig.machine):
        if abs(check.ratio - 1.0) > thresholds.CONSTANT_GAP:
            yield _disagreement(check)


def _disagreement(check: ConstantCheck) -> Finding:
    times = digits(check.ratio)
    slip = f"; {check.slip} would explain it" if check.slip else "; no usual mix-up of conventions explains it"
    return Finding.on(
        "machine",
        f"{check.constant.replace('_', '-')}-disagrees",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The constants {check.constant} and {check.used} disagree by a factor of {times}",
            reason=f"they mean {amount(check.value, 'V*s/rad')} and {amount(check.used_value, 'V*s/rad')}, "
            f"and a machine has one such constant{slip}",
            advice=f"Everything here rests on {check.used}: settle which is right before a motor turns, "
            "by a spin test with open terminals",
        ),
    )


def rating_findings(case: Case, states: tuple[Demand, ...]) -> Iterator[Finding]:
    """Speed and current of the duty against the machine's ratings; unknown ratings are not judged.

    Parameters
    ----------
    case : Case
        What is judged.
    states : tuple of Demand
        The steady states of the duty.

    Yields
    ------
    Finding
        ``breaks`` beyond the machine's speed, ``thin`` beyond its rated current.
    """
    machine = case.sheet.rig.machine
    figures = case.response.figures if case.response is not None else None
    highest = machine.max_speed
    if highest is not None:
        asked = abs(states[0].speed)
        overshoot = figures.overshoot_percent if figures is not None else None
        if asked > highest:
            yield Finding.on(
                "duty",
                "duty-over-max-speed",
                level=Level.BREAKS,
                words=lambda: Words(
                    title=f"The duty asks for {speed(asked)}, the machine may turn {speed(highest)}",
                    reason="beyond its highest speed a rotor may burst or its bearings fail",
                    advice=f"Keep reference_speed below {speed(highest)}, or correct max_speed",
                ),
            )
        elif overshoot is not None and (reached := asked * (1.0 + overshoot / 100.0)) > highest:
            yield Finding.on(
                "duty",
                "overshoot-over-max-speed",
                level=Level.THIN,
                words=lambda: Words(
                    title=f"The speed overshoots to {speed(reached)}, the machine may turn {speed(highest)}",
                    reason=f"the reference of {speed(asked)} is within, its overshoot of {digits(overshoot)} % is not",
                    advice="Lower reference_weight, or give the reference a ramp",
                ),
            )
    if machine.rated_current is None:
        return
    rated = machine.rated_current * current_size(machine)
    worst = max(states, key=lambda state: abs(state.current))
    if abs(worst.current) > rated:
        yield Finding.on(
            "machine",
            "steady-current-over-rated",
            level=Level.THIN,
            words=lambda: Words(
                title=f"Holding the duty's {'load' if worst.loaded else 'speed'} takes "
                f"{sheet_amperes(abs(worst.current), machine)}, rated are {sheet_amperes(rated, machine)}",
                reason=f"friction and load at {speed(worst.speed)} need {percent(abs(worst.current) / rated)} of the "
                "rated current for as long as they last; the winding heats with its square",
                advice="Lower the load or its time, or choose a larger machine or another ratio",
            ),
        )
    if figures is not None and figures.rms_current_a > rated:
        yield Finding.on(
            "machine",
            "rms-current-over-rated",
            level=Level.THIN,
            words=lambda: Words(
                title=f"Over the duty the current amounts to {sheet_amperes(figures.rms_current_a, machine)}, "
                f"rated are {sheet_amperes(rated, machine)}",
                reason="this is its root mean square over the whole duty; repeated without a pause, "
                f"it heats the winding {digits((figures.rms_current_a / rated) ** 2)} times as much as the rated "
                "current",
                advice="Leave a pause between runs, soften the ramps, or choose a larger machine",
            ),
        )
