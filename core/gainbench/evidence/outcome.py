"""What one experiment gives: what it tells, by fit and by regression, and what is to be said of it."""

from __future__ import annotations

from dataclasses import dataclass, field

from gainbench.evidence.estimate import Told


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """Of one log."""

    fitted: tuple[Told, ...] = ()
    linear: tuple[Told, ...] = ()
    """What the fits started from."""
    fit_percent: float | None = None
    remarks: tuple[str, ...] = field(default=())
