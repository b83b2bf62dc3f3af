"""The aims: what is asked of each loop, and the arithmetic of the firmware that will run it."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum


class DesignMethod(StrEnum):
    """How the gains of a loop are found."""

    CROSSOVER_MARGIN = "crossover-margin"
    BANDWIDTH_MARGIN = "bandwidth-margin"
    LAG_CANCELLATION = "lag-cancellation"
    MAGNITUDE_OPTIMUM = "magnitude-optimum"
    SYMMETRIC_OPTIMUM = "symmetric-optimum"
    POLE_PLACEMENT = "pole-placement"
    BY_HAND = "by-hand"


CURRENT_METHODS: tuple[DesignMethod, ...] = (
    DesignMethod.CROSSOVER_MARGIN,
    DesignMethod.BANDWIDTH_MARGIN,
    DesignMethod.LAG_CANCELLATION,
    DesignMethod.MAGNITUDE_OPTIMUM,
    DesignMethod.POLE_PLACEMENT,
    DesignMethod.BY_HAND,
)
"""The methods that the current loop can be designed by."""

SPEED_METHODS: tuple[DesignMethod, ...] = (
    DesignMethod.CROSSOVER_MARGIN,
    DesignMethod.BANDWIDTH_MARGIN,
    DesignMethod.LAG_CANCELLATION,
    DesignMethod.SYMMETRIC_OPTIMUM,
    DesignMethod.POLE_PLACEMENT,
    DesignMethod.BY_HAND,
)
"""The methods that the speed loop can be designed by."""


class IntegratorRule(StrEnum):
    """Which sum stands for the integral."""

    BACKWARD = "backward"
    FORWARD = "forward"
    TRAPEZOID = "trapezoid"


class WindupRule(StrEnum):
    """What keeps the integrator from running away while a clamp acts."""

    HOLD = "hold"
    BACK_CALCULATION = "back-calculation"


class GainForm(StrEnum):
    """Which pair of numbers the firmware keeps."""

    KP_KI = "kp-ki"
    KP_TI = "kp-ti"
    KP_WI = "kp-wi"


class SpeedOutput(StrEnum):
    """What the speed PI puts out in the firmware."""

    AMPERE = "A"
    TORQUE = "N*m"


@dataclass(frozen=True, slots=True, kw_only=True)
class HandGains:
    """Gains as someone typed them: ``kp`` with exactly one of ``ki``, ``ti`` and ``wi``, SI, peak amperes.

    The flags keep what only the unit told, so that the plant can change below gains that stay as typed.
    """

    kp: float
    """Current loop [V/A]; speed loop [A s/rad], or [N m s/rad] with ``kp_is_torque``; >= 0."""
    ki: float | None = None
    """Current loop [V/(A s)]; speed loop [A/rad], [N m/rad] with ``ki_is_torque``, times s with ``ki_has_period``."""
    ti: float | None = None
    """Kp/Ki [s], > 0."""
    wi: float | None = None
    """Ki/Kp [rad/s], >= 0."""
    kp_is_torque: bool = False
    ki_is_torque: bool = False
    ki_has_period: bool = False
    """True where ``ki`` is Ki times the loop's period."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoopAims:
    """What is asked of one loop. Values of other methods than ``method`` are kept and not used."""

    method: DesignMethod
    crossover: float | None = None
    """[rad/s], > 0."""
    phase_margin: float | None = None
    """[rad], 0 to pi/2."""
    bandwidth: float | None = None
    """[rad/s], > 0."""
    natural_frequency: float | None = None
    """[rad/s], > 0."""
    damping: float | None = None
    """> 0."""
    hand: HandGains | None = None
    """Gains by hand."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SpeedAims(LoopAims):
    """What is asked of the speed loop."""

    spread: float | None = None
    """Of the symmetric optimum, above 1."""
    reference_weight: float = 1.0
    """Of the reference in the proportional part, 0 to 1."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Firmware:
    """The arithmetic of the PI controllers and the form their gains are written in."""

    integrator: IntegratorRule = IntegratorRule.BACKWARD
    windup: WindupRule = WindupRule.HOLD
    back_emf_feedforward: bool = False
    gain_form: GainForm = GainForm.KP_KI
    ki_includes_period: bool = False
    speed_unit: str = "rad/s"
    """The firmware's unit of speed, as the user writes it: a label."""
    speed_unit_size: float = 1.0
    """One of that unit [rad/s]."""
    speed_output: SpeedOutput = SpeedOutput.AMPERE


@dataclass(frozen=True, slots=True, kw_only=True)
class Aims:
    """Both loops' aims and the firmware's arithmetic."""

    current: LoopAims
    speed: SpeedAims
    firmware: Firmware = field(default_factory=Firmware)
