"""Where a drag stops that goes beyond what a loop can meet: no Qt, no widgets."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from gainbench.assess import Assessment
from gainbench.model import Sheet
from gainbench.results import LoopAssessment, Refusal
from gainbench_app.desk_state import State, moved
from gainbench_app.sheet_edits import value_at

_INSIDE = 1e-3
"""Share by which a slider stays inside the edge of what can be met."""
_OF_A_MAP = ("phase_margin", "crossover", "bandwidth")
"""What a drag in a reach map moves, in the order in which it gives way at an edge."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Stopped:
    """A state at the edge, and its assessment."""

    state: State
    assessment: Assessment


def loop_of(assessment: Assessment, loop: str) -> LoopAssessment:
    """``"current"`` or ``"speed"`` of an assessment."""
    return assessment.current if loop == "current" else assessment.speed


def stopped_at_edge(
    path: str,
    state: State,
    assessment: Assessment,
    *,
    good: State,
    before: Assessment,
    assess: Callable[[Sheet], Assessment],
) -> Stopped | None:
    """The nearest state that can be met, else the last one that was.

    Parameters
    ----------
    path : str
        What is dragged: ``aims.speed.crossover``, or ``aims.speed`` in a reach map.
    state : State
        What the drag asks for.
    assessment : Assessment
        Of that state.
    good : State
        The last one that was assessed.
    before : Assessment
        Of that one.
    assess : callable
        Assesses a sheet as the desk does.

    Returns
    -------
    Stopped or None
        None where the drag need not stop: it moves no target of a loop, its target can be met, it came from one
        that could not be met either, or there is nothing to stop at.
    """
    if not path.startswith("aims."):
        return None
    loop, *keys = path.split(".")[1:]
    refusal = loop_of(assessment, loop).refusal
    if refusal is None or loop_of(before, loop).refusal is not None:
        return None
    for candidate in (*_at_the_edge(state, loop, keys or _OF_A_MAP, refusal=refusal), good):
        found = assess(candidate.assessed_sheet)
        if loop_of(found, loop).refusal is None:
            return Stopped(state=candidate, assessment=found)
    return None


def _at_the_edge(state: State, loop: str, keys: list[str] | tuple[str, ...], *, refusal: Refusal) -> Iterator[State]:
    """The state with one target or the other moved back to the nearest that can be met."""
    for key in keys:
        nearest = {
            "crossover": refusal.nearest_crossover,
            "bandwidth": refusal.nearest_bandwidth,
            "phase_margin": refusal.largest_margin,
        }.get(key)
        if nearest is not None:
            # A hair inside the edge, so that rounding to the digits shown does not step over it.
            asked = value_at(state.sheet, f"aims.{loop}.{key}") or 0.0
            inside = nearest * (1.0 - _INSIDE if nearest < asked else 1.0 + _INSIDE)
            yield moved(state, f"aims.{loop}.{key}", inside, differs=False)
