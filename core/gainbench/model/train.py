"""The train: everything the motor turns, as stated at the load shaft."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class TrainKind(StrEnum):
    """Whether the shaft twists."""

    RIGID = "rigid"
    ELASTIC = "elastic"


@dataclass(frozen=True, slots=True, kw_only=True)
class Train:
    """The load and its transmission, in SI units, at the load shaft unless said otherwise."""

    kind: TrainKind
    load_inertia: float
    """[kg m^2], >= 0 (> 0 where elastic)."""
    ratio: float = 1.0
    """Motor turns per load turn, > 0."""
    efficiency: float = 1.0
    """Of the transmission, above 0 to 1."""
    coupling_inertia: float = 0.0
    """[kg m^2], >= 0, on the motor shaft."""
    load_viscous_friction: float = 0.0
    """[N m s/rad], >= 0."""
    load_coulomb_friction: float = 0.0
    """[N m], >= 0."""
    load_torque: float = 0.0
    """Constant torque [N m]; positive brakes a positive speed."""
    shaft_stiffness: float | None = None
    """[N m/rad], > 0; required where elastic."""
    shaft_damping: float | None = None
    """[N m s/rad], >= 0; required where elastic."""
