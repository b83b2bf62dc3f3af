"""A tuning of the shelf as it is drawn over the live curves: its curves, and the pattern of its line."""

from __future__ import annotations

from dataclasses import dataclass

from gainbench.assess import Assessment

PATTERNS: tuple[tuple[float, ...], ...] = ((1.0, 2.5), (6.0, 3.0), (5.0, 2.5, 1.0, 2.5), (1.0, 2.5, 1.0, 6.0))
"""Dashes and gaps of lines [px], so that tunings are told apart without a colour; a solid line is the live one."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ShownTuning:
    """One tuning; two are the same only where they are one object, since comparing curves would take long."""

    name: str
    assessment: Assessment
    pattern: tuple[float, ...]
    """Of its line [px]."""
