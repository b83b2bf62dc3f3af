"""What a design method returns: gains, or why there are none."""

from __future__ import annotations

from dataclasses import dataclass

from gainbench.results import Gains, Refusal


@dataclass(frozen=True, slots=True, kw_only=True)
class Design:
    """The outcome of one design: exactly one of ``gains`` and ``refusal``."""

    gains: Gains | None = None
    refusal: Refusal | None = None
    stable: bool | None = None
    """True where the method made sure of it; None where nobody looked."""
    asked_crossover: float | None = None
    """The crossover the gains are exact for [rad/s]; None where the method has none."""
