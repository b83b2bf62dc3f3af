"""Does each loop have gains, is it stable, and how much may change before it is not."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from gainbench.findings import thresholds
from gainbench.findings.case import Case, LoopName
from gainbench.findings.crossings import crossings
from gainbench.findings.ledger import costliest, costliest_lag
from gainbench.findings.numbers import amount, decibels, degrees, digits, hertz
from gainbench.model import DesignMethod, LoopAims
from gainbench.results import Finding, Level, LoopAssessment, LoopCurve, LoopFigures, Refusal, Words


def loop_findings(case: Case, name: LoopName) -> Iterator[Finding]:
    """Refusal, instability, thin margins, or that the loop holds.

    Parameters
    ----------
    case : Case
        What is judged.
    name : str
        ``current`` or ``speed``.

    Yields
    ------
    Finding
        At least one.
    """
    loop = case.loop(name)
    if name == "speed" and case.stable_figures("current") is None:
        yield _waiting(case)
    elif loop.gains is None or loop.figures is None:
        yield _refused(case, name, loop.refusal)
    elif not loop.figures.stable:
        yield _unstable(name, loop)
    else:
        thin = tuple(_thin_margins(case, name, loop.figures))
        if thin:
            yield from thin
        else:
            yield _holds(name, loop.figures)


def _waiting(case: Case) -> Finding:
    missing = case.current.gains is None
    return Finding.on(
        "speed",
        "speed-loop-waits",
        level=Level.BREAKS,
        words=lambda: Words(
            title="The speed loop cannot be judged" if not missing else "The speed loop cannot be designed",
            reason=f"the current loop inside it {'has no gains' if missing else 'is unstable'}",
            advice="Put the current loop right first",
        ),
    )


def _refused(case: Case, name: LoopName, refusal: Refusal | None) -> Finding:
    aims: LoopAims = case.sheet.aims.current if name == "current" else case.sheet.aims.speed
    return Finding.on(
        name,
        f"{name}-loop-refused",
        level=Level.BREAKS,
        words=lambda: Words(
            title=f"The {name} loop cannot be had with {_asked(aims)}",
            reason=refusal.reason if refusal is not None and refusal.reason else "no positive gains give a stable loop",
            advice=_nearest(aims, refusal) + _less_lag(case, name, aims),
        ),
    )


def _less_lag(case: Case, name: LoopName, aims: LoopAims) -> str:
    """What would leave more phase to a target that lag stands in the way of; empty where it is something else."""
    if aims.method is not DesignMethod.CROSSOVER_MARGIN or aims.phase_margin is None:
        return ""
    cost = costliest_lag(case, name, margin=aims.phase_margin)
    return "" if cost is None else f"; {cost.reason}: {cost.advice}"


def _asked(aims: LoopAims) -> str:
    margin = f" and {degrees(math.degrees(aims.phase_margin))} of margin" if aims.phase_margin is not None else ""
    match aims.method:
        case DesignMethod.CROSSOVER_MARGIN if aims.crossover is not None:
            return f"a crossover of {hertz(aims.crossover)}{margin}"
        case DesignMethod.BANDWIDTH_MARGIN if aims.bandwidth is not None:
            return f"a bandwidth of {hertz(aims.bandwidth)}{margin}"
        case DesignMethod.LAG_CANCELLATION if aims.crossover is not None:
            return f"lag cancellation and a crossover of {hertz(aims.crossover)}"
        case DesignMethod.POLE_PLACEMENT if aims.natural_frequency is not None:
            return f"poles placed at {hertz(aims.natural_frequency)}"
        case _:
            return f"the method {aims.method.value}"


def _nearest(aims: LoopAims, refusal: Refusal | None) -> str:
    ways: list[str] = []
    if refusal is not None:
        if refusal.nearest_crossover is not None:
            ways.append(f"a crossover of {hertz(refusal.nearest_crossover)}, the nearest with the same margin")
        if refusal.nearest_bandwidth is not None:
            ways.append(f"a bandwidth of {hertz(refusal.nearest_bandwidth)}, the nearest with the same margin")
        if refusal.largest_margin is not None:
            target = "bandwidth" if aims.method is DesignMethod.BANDWIDTH_MARGIN else "crossover"
            largest = degrees(math.degrees(refusal.largest_margin))
            ways.append(f"a phase margin of {largest}, the largest at the asked {target}")
    if ways:
        return f"Try {', or '.join(ways)}"
    if aims.method in (DesignMethod.CROSSOVER_MARGIN, DesignMethod.BANDWIDTH_MARGIN):
        return "Ask for less of both, the crossover and the phase margin, or take delay out of the loop"
    return f"Try the method {DesignMethod.CROSSOVER_MARGIN.value}, which names what can be met"


def _unstable(name: LoopName, loop: LoopAssessment) -> Finding:
    return Finding.on(
        name,
        f"{name}-loop-unstable",
        level=Level.BREAKS,
        words=lambda: Words(
            title=f"The {name} loop is unstable",
            reason=f"a pole of the closed sampled loop lies outside the unit circle{_last_fall(loop.curve)}",
            advice="Lower its gains or its crossover, or take delay out of the loop; do not run these gains",
        ),
    )


def _last_fall(curve: LoopCurve | None) -> str:
    """What the open loop shows of it; empty where it shows nothing plain."""
    if curve is None:
        return ""
    found = crossings(curve)
    if not found:
        stays = abs(complex(curve.open_loop[-1])) > 1.0
        return "; the loop gain stays above 1 up to half the loop's rate" if stays else ""
    last = found[-1]
    where = amount(last.frequency_hz, "Hz")
    if not last.falling:
        return f"; the loop gain is above 1 again from {where} up to half the loop's rate"
    if last.margin_deg < 0.0:
        beyond = degrees(-last.margin_deg)
        return f"; at {where}, where its gain last falls through 1, the phase is {beyond} beyond -180 deg"
    return ""


def _thin_margins(case: Case, name: LoopName, figures: LoopFigures) -> Iterator[Finding]:
    margin, gain, reduction = figures.phase_margin_deg, figures.gain_margin_db, figures.gain_reduction_db
    thin_phase = margin is not None and margin < thresholds.PHASE_MARGIN_DEG
    if margin is not None and thin_phase:
        yield _thin(name, "phase-margin", lambda: _thin_phase(case, name, figures, margin=margin))
    thin_gain = gain is not None and gain < thresholds.GAIN_MARGIN_DB
    if gain is not None and thin_gain:
        yield _thin(
            name,
            "gain-margin",
            lambda: Words(
                title=f"The {name} loop's gain margin is {decibels(gain)}",
                reason=f"a loop gain {digits(10.0 ** (gain / 20.0))} times as high is unstable; {_what_raises(name)}",
                advice=f"Ask for a lower crossover{_than(figures)}, or take delay out of the loop",
            ),
        )
    thin_reduction = reduction is not None and reduction > -thresholds.GAIN_MARGIN_DB
    if reduction is not None and thin_reduction:
        yield _thin(
            name,
            "gain-reduction",
            lambda: Words(
                title=f"The {name} loop bears {decibels(-reduction)} less gain and no more",
                reason=f"at {digits(10.0 ** (reduction / 20.0))} times its gain it is unstable; {_what_lowers(name)}",
                advice="Ask for more phase margin, or lower Ki",
            ),
        )
    peak = figures.peak_sensitivity
    if peak is not None and peak > thresholds.PEAK_SENSITIVITY and not (thin_phase or thin_gain or thin_reduction):
        yield _thin(
            name,
            "sensitivity",
            lambda: Words(
                title=f"The {name} loop's peak sensitivity is {digits(peak)}",
                reason=f"its curve comes within {digits(1.0 / peak)} of -1: each margin by itself looks better than "
                f"both together; values above {digits(thresholds.PEAK_SENSITIVITY)} are seldom wanted",
                advice=f"Ask for more margin or a lower crossover{_than(figures)}",
            ),
        )
    delay, stage = figures.delay_margin_s, case.sheet.rig.stage
    period = stage.current_period if name == "current" else stage.speed_period
    if delay is not None and delay < thresholds.DELAY_MARGIN_PERIODS * period:
        yield _thin(
            name,
            "delay-margin",
            lambda: Words(
                title=f"The {name} loop bears {amount(delay, 's')} more delay and no more",
                reason=f"that is {digits(delay / period)} of its period of {amount(period, 's')}: one period of delay "
                "that the sheet does not count makes it unstable",
                advice=f"Measure the delay of the real loop, or ask for a lower crossover{_than(figures)}",
            ),
        )


def _thin(name: LoopName, code: str, words: Callable[[], Words]) -> Finding:
    return Finding.on(name, f"{name}-{code}-thin", level=Level.THIN, words=words)


def _thin_phase(case: Case, name: LoopName, figures: LoopFigures, *, margin: float) -> Words:
    cost = costliest(case, name)
    return Words(
        title=f"The {name} loop's phase margin is {degrees(margin)}",
        reason=f"below {degrees(thresholds.PHASE_MARGIN_DEG)} it rings, and parts that differ from the sheet "
        f"can take what is left{_sensitivity(figures)}" + (f"; {cost.reason}" if cost is not None else ""),
        advice=f"Ask for more margin or a lower crossover{_than(figures)}"
        + (f"; {cost.advice}" if cost is not None and cost.advice else ""),
    )


def _than(figures: LoopFigures) -> str:
    return f" than {amount(figures.crossover_hz, 'Hz')}" if figures.crossover_hz is not None else ""


def _sensitivity(figures: LoopFigures) -> str:
    peak = figures.peak_sensitivity
    return f"; its peak sensitivity is {digits(peak)}" if peak is not None else ""


def _what_raises(name: LoopName) -> str:
    if name == "current":
        return "an inductance that saturates or a bus above its value in the sheet raises it"
    return "an inertia smaller than in the sheet raises it"


def _what_lowers(name: LoopName) -> str:
    if name == "current":
        return "a bus that sags lowers it"
    return "an inertia larger than in the sheet or a hot, weaker magnet lowers it"


def _holds(name: LoopName, figures: LoopFigures) -> Finding:
    return Finding.on(name, f"{name}-loop-holds", level=Level.HOLDS, words=lambda: _holding(name, figures))


def _holding(name: LoopName, figures: LoopFigures) -> Words:
    margin, crossover = figures.phase_margin_deg, figures.crossover_hz
    title = f"The {name} loop holds"
    if margin is not None:
        title += f" with {degrees(margin)} of phase margin"
    if crossover is not None:
        title += f" at {amount(crossover, 'Hz')}"
    parts: list[str] = []
    if figures.gain_margin_db is not None:
        parts.append(f"gain margin {decibels(figures.gain_margin_db)}")
    if figures.delay_margin_s is not None:
        parts.append(f"delay margin {amount(figures.delay_margin_s, 's')}")
    if figures.peak_sensitivity is not None and figures.peak_sensitivity > 0.0:
        clear = digits(1.0 / figures.peak_sensitivity)
        parts.append(f"peak sensitivity {digits(figures.peak_sensitivity)}: the curve stays {clear} clear of -1")
    return Words(
        title=title, reason=", ".join(parts) or "all poles of the closed sampled loop lie inside the unit circle"
    )
