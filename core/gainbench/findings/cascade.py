"""Do the two loops and their rates leave each other room."""

from __future__ import annotations

from collections.abc import Iterator

from gainbench.findings import thresholds
from gainbench.findings.case import Case
from gainbench.findings.numbers import amount, degrees, digits
from gainbench.results import Finding, Level, Words


def cascade_findings(case: Case) -> Iterator[Finding]:
    """Separation of the loops, and the rates against the crossovers.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        All of level ``thin``; none for a loop that is not stable.
    """
    current, speed = case.stable_figures("current"), case.stable_figures("speed")
    stage = case.sheet.rig.stage
    if current is not None and current.crossover_hz is not None:
        yield from _rate("current", stage.current_rate, current.crossover_hz)
    if current is None or speed is None:
        return
    if speed.crossover_hz is not None:
        yield from _rate("speed", stage.speed_rate, speed.crossover_hz)
    inner, outer = current.crossover_hz, speed.crossover_hz
    inner_band, outer_band = current.bandwidth_hz, speed.bandwidth_hz
    near_crossover = inner is not None and outer is not None and inner < thresholds.LOOP_SEPARATION * outer
    near_band = (
        inner_band is not None and outer_band is not None and inner_band < thresholds.LOOP_SEPARATION * outer_band
    )
    if near_crossover and inner is not None and outer is not None:
        yield _near("crossover", inner, outer)
    elif near_band and inner_band is not None and outer_band is not None:
        yield _near("bandwidth", inner_band, outer_band)


def _rate(name: str, rate: float, crossover: float) -> Iterator[Finding]:
    if rate >= thresholds.TICKS_PER_CROSSOVER * crossover:
        return
    yield Finding.on(
        "stage",
        f"{name}-rate-slow",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The {name} loop has {digits(rate / crossover)} ticks per period of its crossover",
            reason=f"a rate of {amount(rate, 'Hz')} on a crossover of {amount(crossover, 'Hz')} is below the "
            f"usual {thresholds.TICKS_PER_CROSSOVER:.0f}; half a period of hold alone costs "
            f"{degrees(180.0 * crossover / rate)}",
            advice=f"Raise {name}_rate, or ask for a crossover below "
            f"{amount(rate / thresholds.TICKS_PER_CROSSOVER, 'Hz')}",
        ),
    )


def _near(figure: str, inner: float, outer: float) -> Finding:
    return Finding.on(
        "speed",
        "loop-separation-thin",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The current loop is only {digits(inner / outer)} times as fast as the speed loop",
            reason=f"{figure} {amount(inner, 'Hz')} against {amount(outer, 'Hz')}: whatever the current loop loses, to "
            "a sagging bus or at its voltage limit, the speed loop's margin loses with it",
            advice=f"Ask for a speed loop below {amount(inner / thresholds.LOOP_SEPARATION, 'Hz')} of {figure}, "
            "or for a faster current loop",
        ),
    )
