"""Is the crossover the one that was asked for, the only one, and is there one at all."""

from __future__ import annotations

import math
from collections.abc import Iterator

from gainbench.findings import thresholds
from gainbench.findings.case import Case, LoopName
from gainbench.findings.crossings import crosses_again, crossings
from gainbench.findings.numbers import amount, degrees, digits, hertz
from gainbench.results import Finding, Gains, Level, LoopCurve, Words


def crossover_findings(case: Case, name: LoopName) -> Iterator[Finding]:
    """Missing, earlier and later crossovers, and an integral too slow for the crossover.

    Parameters
    ----------
    case : Case
        What is judged.
    name : str
        ``current`` or ``speed``.

    Yields
    ------
    Finding
        All of level ``thin``; none where the loop is not stable.
    """
    figures, loop = case.stable_figures(name), case.loop(name)
    if figures is None or loop.gains is None:
        return
    if figures.crossover_hz is None:
        yield _none(name, loop.curve)
    else:
        first = figures.crossover_hz
        asked = loop.asked_crossover
        if asked is not None and abs(asked / math.tau - first) > thresholds.CROSSOVER_ACCURACY * first:
            yield _not_first(name, first, asked)
        elif loop.curve is not None:
            yield from _later(case, name, first, loop.curve)
    yield from _integral(case, name, loop.gains, figures.crossover_hz)


def _none(name: LoopName, curve: LoopCurve | None) -> Finding:
    above = curve is not None and abs(complex(curve.open_loop[-1])) > 1.0
    state = "stays above 1 up to half its rate" if above else "stays below 1"
    return Finding.on(
        name,
        f"{name}-no-crossover",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The {name} loop's gain {state}",
            reason="without a crossover there is no phase margin to speak of"
            + ("" if above else ", and a loop this weak hardly acts on its error"),
            advice="Lower the gains" if above else "Raise the gains",
        ),
    )


def _not_first(name: LoopName, first: float, asked: float) -> Finding:
    return Finding.on(
        name,
        f"{name}-crossover-not-first",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The {name} loop's gain falls through 1 at {amount(first, 'Hz')} already, {hertz(asked)} were asked",
            reason="the asked crossover is met, but the gain comes back to 1 before it; the margins count every "
            "crossing",
            advice=f"Ask for a crossover near {amount(first, 'Hz')}, or far above what lifts the gain in between",
        ),
    )


def _later(case: Case, name: LoopName, first: float, curve: LoopCurve) -> Iterator[Finding]:
    if not crosses_again(curve):
        return
    later = [one for one in crossings(curve) if one.frequency_hz > thresholds.LATER_CROSSING * first]
    if not later:
        return
    last = later[-1]
    where = amount(last.frequency_hz, "Hz")
    if last.falling:
        state = f"it falls through 1 for good at {where}, with {degrees(abs(last.margin_deg))} to -180 deg there"
    else:
        state = f"it is above 1 from {where} up to half the loop's rate"
    shaft = case.plant.elastic
    yield Finding.on(
        name,
        f"{name}-later-crossing",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The {name} loop's gain comes back to 1 above its crossover of {amount(first, 'Hz')}",
            reason=f"{state}; "
            + ("that rests on the shaft's damping, seldom well known" if shaft else "the margins count every crossing"),
            advice="Lower the crossover until the peak stays below 1" + (", or damp the shaft" if shaft else ""),
        ),
    )


def _integral(case: Case, name: LoopName, gains: Gains, crossover_hz: float | None) -> Iterator[Finding]:
    if gains.ki == 0.0:
        yield _no_integral(case, name, gains)
    elif crossover_hz is not None and gains.ki < thresholds.INTEGRAL_SHARE * gains.kp * math.tau * crossover_hz:
        yield Finding.on(
            name,
            f"{name}-integral-slow",
            level=Level.THIN,
            words=lambda: Words(
                title=f"The {name} loop's integral takes {amount(gains.kp / gains.ki, 's')} to act",
                reason=f"Ki/Kp is {digits(gains.ki / gains.kp)} rad/s, "
                f"the crossover {digits(math.tau * crossover_hz)} rad/s: "
                + (
                    "the dip that a load leaves is made up at that slow pace"
                    if name == "speed"
                    else "what the back EMF takes from the current is made up at that slow pace"
                ),
                advice=f"Raise Ki: a tenth of the crossover, {_tenth(name, gains, crossover_hz)}, costs 5.7 deg of "
                "phase",
            ),
        )


def _tenth(name: LoopName, gains: Gains, crossover_hz: float) -> str:
    return f"{digits(0.1 * gains.kp * math.tau * crossover_hz)} {'V/(A*s)' if name == 'current' else 'A/rad'}"


def _no_integral(case: Case, name: LoopName, gains: Gains) -> Finding:
    plant = case.plant
    if name == "speed":
        torque = plant.torque * gains.kp + plant.viscous
        error = f"{digits(1.0 / torque)} rad/s of" if torque > 0.0 else "a growing"
        left = f"a load of 1 N*m at the motor leaves {error} error for good"
    else:
        left = f"at rest {digits(100.0 * plant.resistance / (plant.resistance + gains.kp))} % of the current is missing"
    return Finding.on(
        name,
        f"{name}-no-integral",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The {name} loop has no integral",
            reason=f"with Ki at 0 an error stays: {left}",
            advice="Give it a Ki; a Ki/Kp of a tenth of the crossover costs 5.7 deg of phase",
        ),
    )
