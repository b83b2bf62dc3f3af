"""The duty: the scripted test that the time response is computed for."""

from __future__ import annotations

from dataclasses import dataclass

MAX_TICKS = 2_000_000
"""The longest duty that is computed, in ticks of the current loop."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Duty:
    """A speed reference, a load step and a length, in SI units; times from the start."""

    reference_speed: float
    """[rad/s] at the motor shaft, either sign."""
    length: float
    """[s], > 0."""
    reference_at: float = 0.0
    """[s]."""
    reference_ramp: float = 0.0
    """[rad/s^2], >= 0; 0 is a step."""
    load_step: float = 0.0
    """[N m] at the load shaft, added to ``train.load_torque``."""
    load_at: float | None = None
    """[s]; None stands for half of ``length``."""
    stop_at: float | None = None
    """[s]: the reference goes back to zero from where it is; None is never."""
    stop_ramp: float = 0.0
    """[rad/s^2], >= 0; 0 is a step."""

    @property
    def load_time(self) -> float:
        """When the load step comes [s]."""
        return self.length / 2.0 if self.load_at is None else self.load_at
