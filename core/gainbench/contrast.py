"""Tunings side by side: what sheets' aims give and what their shelves hold, figure by figure, against one of them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from gainbench.assess import Assessment, assess
from gainbench.kept import with_kept
from gainbench.model import Sheet
from gainbench.results import Finding, Level, LoopAssessment, LoopFigures, ResponseFigures

Subject = Literal["current", "speed", "response"]

_WORST_FIRST = (Level.BREAKS, Level.THIN, Level.HOLDS)
_LOOP = ("kp", "ki", *(one.name for one in fields(LoopFigures) if one.name != "stable"))
_STEP = ("step_rise_s", "step_overshoot_percent")
_RESPONSE = tuple(one.name for one in fields(ResponseFigures))


@dataclass(frozen=True, slots=True, kw_only=True)
class Figure:
    """One figure that tunings are held against each other by; its name ends with its unit, gains are SI."""

    subject: Subject
    name: str
    """``kp``, ``crossover_hz``, ``overshoot_percent``, as in the JSON of an assessment."""


FIGURES: tuple[Figure, ...] = (
    *(Figure(subject="current", name=name) for name in _LOOP + _STEP),
    *(Figure(subject="speed", name=name) for name in _LOOP),
    *(Figure(subject="response", name=name) for name in _RESPONSE),
)
"""In the order they are shown in."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Tuning:
    """One set of gains, assessed on a sheet."""

    sheet_name: str
    """Of the sheet, for people."""
    kept: str | None
    """The kept tuning's name; None for what the sheet's aims give."""
    assessment: Assessment

    @property
    def level(self) -> Level:
        """The worst of its findings."""
        found = {one.level for one in self.assessment.findings}
        return next(level for level in _WORST_FIRST if level in found)

    @property
    def worst(self) -> tuple[Finding, ...]:
        """Its findings of that level."""
        return tuple(one for one in self.assessment.findings if one.level is self.level)

    def value(self, figure: Figure) -> float | None:
        """One figure; None where there is none: no gains, an unstable loop, no response, a null of the contract."""
        if figure.subject == "response":
            response = self.assessment.response
            return None if response is None else _number(response.figures, figure.name)
        return self._of_loop(figure)

    def _of_loop(self, figure: Figure) -> float | None:
        loop: LoopAssessment = self.assessment.current if figure.subject == "current" else self.assessment.speed
        if figure.name in ("kp", "ki"):
            return None if loop.gains is None else _number(loop.gains, figure.name)
        if loop.figures is None or not loop.figures.stable:
            return None
        if figure.name in _STEP:
            step = self.assessment.locked_step
            return None if step is None else _number(step, figure.name.removeprefix("step_"))
        return _number(loop.figures, figure.name)


def _number(holder: object, name: str) -> float | None:
    value = getattr(holder, name)
    return None if value is None else float(value)


@dataclass(frozen=True, slots=True, kw_only=True)
class Contrast:
    """Tunings side by side; rows are tunings, columns are figures, arrays are read-only."""

    tunings: tuple[Tuning, ...]
    reference: int
    """Index of the tuning that the others are held against."""
    figures: tuple[Figure, ...]
    values: NDArray[np.float64]
    """SI as the figures' names say, NaN where a tuning has none, shape (tunings, figures)."""
    differences: NDArray[np.float64]
    """Values less the reference's, NaN where either has none, shape (tunings, figures)."""

    @property
    def breaks(self) -> bool:
        """Whether something breaks with any of the tunings."""
        return any(one.level is Level.BREAKS for one in self.tunings)


def sheet_tunings(sheet: Sheet, name: str) -> tuple[Tuning, ...]:
    """Assess what a sheet's aims give, and each of its kept tunings as gains by hand on the same sheet.

    Parameters
    ----------
    sheet : Sheet
        With or without a shelf.
    name : str
        Of the sheet, for people.

    Returns
    -------
    tuple of Tuning
        The design first, then the shelf in its order.
    """
    designed = Tuning(sheet_name=name, kept=None, assessment=assess(sheet))
    return (
        designed,
        *(Tuning(sheet_name=name, kept=kept.name, assessment=assess(with_kept(sheet, kept))) for kept in sheet.kept),
    )


def contrast(tunings: Sequence[Tuning], *, reference: int = 0) -> Contrast:
    """Lay tunings side by side.

    Parameters
    ----------
    tunings : sequence of Tuning
        At least one, of one sheet or of several.
    reference : int
        Index of the one that the others are held against.

    Returns
    -------
    Contrast
        All figures of gains, loops and response, and their differences to the reference's.

    Raises
    ------
    ValueError
        If there are no tunings, or no such reference.
    """
    if not 0 <= reference < len(tunings):
        raise ValueError(f"no tuning {reference} among {len(tunings)}")
    found = [[one.value(figure) for figure in FIGURES] for one in tunings]
    values = np.array([[np.nan if value is None else value for value in row] for row in found])
    differences = values - values[reference]
    values.setflags(write=False)
    differences.setflags(write=False)
    return Contrast(
        tunings=tuple(tunings), reference=reference, figures=FIGURES, values=values, differences=differences
    )
