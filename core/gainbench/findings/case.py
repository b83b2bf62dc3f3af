"""What the findings judge: one sheet with everything that was computed from it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from gainbench.model import Sheet
from gainbench.plant import Plant
from gainbench.results import LockedStep, LoopAssessment, LoopFigures, Response

LoopName = Literal["current", "speed"]
"""The two loops, as findings name their subject."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """One sheet with its plant, its loops and, where there is one, its response."""

    sheet: Sheet
    plant: Plant
    current: LoopAssessment
    speed: LoopAssessment
    locked_step: LockedStep | None
    response: Response | None
    start_problem: str | None
    """Why the duty cannot start from equilibrium, as a sentence without a full stop; None where it can."""

    def loop(self, name: LoopName) -> LoopAssessment:
        """The loop of that name."""
        return self.current if name == "current" else self.speed

    def stable_figures(self, name: LoopName) -> LoopFigures | None:
        """The loop's figures; None where it has no gains or is not stable."""
        figures = self.loop(name).figures
        return figures if figures is not None and figures.stable else None
