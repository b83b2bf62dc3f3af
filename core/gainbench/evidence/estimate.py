"""What identification gives: estimates with their bounds, and a report on each log."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from gainbench.model import Experiment


class EstimateName(StrEnum):
    """What is estimated; inertia and frictions are totals at the motor shaft, windings as the equations have them."""

    RESISTANCE = "resistance"
    INDUCTANCE = "inductance"
    TORQUE_CONSTANT = "torque_constant"
    BACK_EMF_CONSTANT = "back_emf_constant"
    INERTIA = "inertia"
    VISCOUS_FRICTION = "viscous_friction"
    COULOMB_FRICTION = "coulomb_friction"
    TORQUE_OFFSET = "torque_offset"
    VISCOUS_FRICTION_FORWARD = "viscous_friction_forward"
    VISCOUS_FRICTION_BACKWARD = "viscous_friction_backward"
    COULOMB_FRICTION_FORWARD = "coulomb_friction_forward"
    COULOMB_FRICTION_BACKWARD = "coulomb_friction_backward"

    @property
    def words(self) -> str:
        """The name as prose."""
        return self.value.replace("_", " ").replace("coulomb", "Coulomb").replace("back emf", "back-EMF")

    @property
    def si(self) -> str:
        """Its SI unit, as a sheet writes it."""
        return _SI[self]


_SI: Mapping[EstimateName, str] = {
    EstimateName.RESISTANCE: "ohm",
    EstimateName.INDUCTANCE: "H",
    EstimateName.TORQUE_CONSTANT: "N*m/A",
    EstimateName.BACK_EMF_CONSTANT: "V*s/rad",
    EstimateName.INERTIA: "kg*m^2",
    EstimateName.VISCOUS_FRICTION: "N*m*s/rad",
    EstimateName.VISCOUS_FRICTION_FORWARD: "N*m*s/rad",
    EstimateName.VISCOUS_FRICTION_BACKWARD: "N*m*s/rad",
    EstimateName.COULOMB_FRICTION: "N*m",
    EstimateName.COULOMB_FRICTION_FORWARD: "N*m",
    EstimateName.COULOMB_FRICTION_BACKWARD: "N*m",
    EstimateName.TORQUE_OFFSET: "N*m",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """One estimated value with its bounds, SI."""

    value: float
    low: float
    """Lower bound of 95 % confidence of this fit."""
    high: float
    run_low: float
    """The same with the spread between runs allowed for."""
    run_high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Ratio:
    """What one log tells: an estimate, or an estimate over another that the log itself cannot tell."""

    of: EstimateName
    per: EstimateName | None = None
    """None: the estimate itself."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Told:
    """What one log tells, with its covariance."""

    ratios: tuple[Ratio, ...]
    values: NDArray[np.float64]
    """SI, shape (n,)."""
    covariance: NDArray[np.float64]
    """Of the fit, coloured residuals allowed for, shape (n, n)."""
    spare: float
    """Degrees of freedom behind the covariance: blocks of residuals less parameters."""


@dataclass(frozen=True, slots=True, kw_only=True)
class RunReport:
    """What is to be said of one log."""

    log: str
    """As the sheet names it."""
    experiment: Experiment
    fit_percent: float | None
    """100 % is a prediction without error, 0 % one no better than the mean; None where nothing was predicted."""
    remarks: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Identification:
    """All that the evidence of a sheet tells."""

    estimates: Mapping[EstimateName, Estimate]
    regression: Mapping[EstimateName, Estimate]
    """The linear estimates that the fits started from."""
    runs: tuple[RunReport, ...]
