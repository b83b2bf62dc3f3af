"""The verdict: one shape and a few words about the whole assessment."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from gainbench.assess import Assessment
from gainbench.results import Level, LoopAssessment


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """What stands large above the plots."""

    level: Level | None
    """None while there is nothing to judge."""
    words: str
    more: str = ""


def _state(loop: LoopAssessment) -> str:
    if loop.refusal is not None or loop.figures is None:
        return "refused"
    return "holds" if loop.figures.stable else "unstable"


def _count(number: int, word: str) -> str:
    return f"{number} finding{'s' if number > 1 else ''} {word if number > 1 else _SINGLE[word]}"


_SINGLE = {"are thin": "is thin", "break": "breaks"}


def verdict(assessment: Assessment | None, *, problems: Mapping[str, str], preparing: bool) -> Verdict:
    """Judge an assessment in a few words.

    Parameters
    ----------
    assessment : Assessment, optional
        The newest.
    problems : mapping
        Refused entries and why; where there are any, the assessment is of the last valid sheet.
    preparing : bool
        Whether the time response is not computed yet because its code is being compiled.

    Returns
    -------
    Verdict
        Shape and words.
    """
    if problems:
        return Verdict(
            level=Level.BREAKS, words="Sheet not valid", more=f"showing the last valid one; see {next(iter(problems))}"
        )
    if assessment is None:
        return Verdict(level=None, words="Being prepared", more="the first start compiles for a moment")
    states = {"current": _state(assessment.current), "speed": _state(assessment.speed)}
    breaks = sum(one.level is Level.BREAKS for one in assessment.findings)
    thin = sum(one.level is Level.THIN for one in assessment.findings)
    counts = ", ".join([*([_count(breaks, "break")] if breaks else []), *([_count(thin, "are thin")] if thin else [])])
    for loop, state in states.items():
        # Without a current loop there is no speed loop to judge, so the first one that fails is the one to name.
        if state != "holds":
            words = "unstable" if state == "unstable" else "cannot meet its targets"
            return Verdict(level=Level.BREAKS, words=f"{loop.capitalize()} loop {words}", more=counts)
    if preparing:
        return Verdict(level=None, words="Both loops are stable", more="the response is being prepared")
    if breaks:
        return Verdict(level=Level.BREAKS, words="Both loops hold, the duty does not", more=counts)
    return Verdict(level=Level.THIN if thin else Level.HOLDS, words="Both loops hold", more=counts or "nothing is thin")
