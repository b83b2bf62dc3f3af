"""The machine as its data sheet states it: SI values, still in the sheet's own conventions.

:mod:`gainbench.plant` turns them into the one set of values that the equations use.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class MachineKind(StrEnum):
    """What the motor is, and with it which terms its values are in."""

    BRUSHED_DC = "brushed-dc"
    PM_SINE = "pm-sine"
    PM_BLOCK = "pm-block"


class WindingValues(StrEnum):
    """Between which points resistance and inductance were measured."""

    LINE_TO_LINE = "line-to-line"
    PHASE = "phase"


class CurrentValues(StrEnum):
    """Which ampere a field-oriented machine's sheet speaks of."""

    RMS = "rms"
    PEAK = "peak"


class BackEmfValues(StrEnum):
    """Which volt the back-EMF constant of a field-oriented machine speaks of."""

    LINE_TO_LINE_RMS = "line-to-line-rms"
    LINE_TO_LINE_PEAK = "line-to-line-peak"
    PHASE_RMS = "phase-rms"
    PHASE_PEAK = "phase-peak"


@dataclass(frozen=True, slots=True, kw_only=True)
class Machine:
    """The motor, as typed into the sheet, in SI units.

    Of ``torque_constant``, ``back_emf_constant`` and ``speed_constant`` the first that is given is used;
    the others are cross-checked.
    """

    kind: MachineKind
    resistance: float
    """Winding resistance [ohm], > 0, between the points ``winding_values`` names."""
    inductance: float
    """Winding inductance [H], > 0, between the same points."""
    rotor_inertia: float
    """Inertia of the rotor [kg m^2], > 0."""
    torque_constant: float | None = None
    """[N m/A], > 0, in the ampere of ``current_values``."""
    back_emf_constant: float | None = None
    """[V s/rad], > 0, in volts of ``back_emf_values`` (pm-sine), line-to-line peak (pm-block) or terminals."""
    speed_constant: float | None = None
    """[rad/(s V)], > 0; not for pm-sine."""
    viscous_friction: float = 0.0
    """[N m s/rad], >= 0, at the motor shaft."""
    coulomb_friction: float = 0.0
    """[N m], >= 0, at the motor shaft."""
    winding_temperature: float = 25.0
    """Temperature of the values above [degC]."""
    rated_voltage: float | None = None
    """[V]."""
    rated_current: float | None = None
    """[A], in the ampere of ``current_values``."""
    peak_current: float | None = None
    """[A], in the ampere of ``current_values``."""
    max_speed: float | None = None
    """[rad/s]."""
    pole_pairs: int | None = None
    """Pole pairs; required for pm-sine and pm-block."""
    winding_values: WindingValues | None = None
    """Required for pm-sine and pm-block."""
    current_values: CurrentValues | None = None
    """Required for pm-sine."""
    back_emf_values: BackEmfValues | None = None
    """Required for pm-sine with a back-EMF constant."""
