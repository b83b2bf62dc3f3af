"""Evidence: which logs were recorded on the bench, and which of their columns hold which signal."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from gainbench.units import Dimension


class Experiment(StrEnum):
    """What was done on the bench while a log was recorded."""

    LOCKED_ROTOR = "locked-rotor"
    NO_LOAD = "no-load"
    COAST_DOWN = "coast-down"
    DRIVEN = "driven"
    STEP_CHECK = "step-check"
    FREQUENCY_RESPONSE = "frequency-response"


class SignalName(StrEnum):
    """What a column of a log holds."""

    TIME = "time"
    VOLTAGE = "voltage"
    CURRENT = "current"
    TORQUE = "torque"
    SPEED = "speed"
    ANGLE = "angle"
    SPEED_REFERENCE = "speed_reference"
    CURRENT_REFERENCE = "current_reference"


SIGNAL_DIMENSIONS: dict[SignalName, Dimension] = {
    SignalName.TIME: Dimension.TIME,
    SignalName.VOLTAGE: Dimension.VOLTAGE,
    SignalName.CURRENT: Dimension.CURRENT,
    SignalName.TORQUE: Dimension.TORQUE,
    SignalName.SPEED: Dimension.SPEED,
    SignalName.ANGLE: Dimension.ANGLE,
    SignalName.SPEED_REFERENCE: Dimension.SPEED,
    SignalName.CURRENT_REFERENCE: Dimension.CURRENT,
}
"""What each signal of a log is."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LogColumn:
    """One signal of a log: the column's value times ``scale`` is in ``unit``."""

    signal: SignalName
    column: str
    """Header of the column in the file."""
    unit: str
    """As the sheet writes it."""
    scale: float = 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class EvidenceLog:
    """One log of the sheet."""

    log: str
    """Path as the sheet writes it, relative to the sheet."""
    experiment: Experiment
    columns: tuple[LogColumn, ...]
    note: str = ""
