"""Which torques voltage and current allow at each speed: the limits of the operating plane."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.model import MachineKind
from gainbench.plant import Plant
from gainbench.results import Trace

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class PlaneLimits:
    """Torques of the motor at steady speed, shape (n,); NaN where there are none."""

    speed: Array
    """[rad/s]."""
    voltage_low: Array
    """[N m]."""
    voltage_high: Array
    """[N m]."""
    low: Array
    """Within voltage and current limit [N m]."""
    high: Array


def plane_limits(plant: Plant, speed: Array) -> PlaneLimits:
    """Limits of the motor's torque ``Kt i`` at steady speeds.

    ``|R i + Ke w| <= V``; for pm-sine the phasor, ``(R i + Ke w)^2 + (p w L i)^2 <= V^2``, with the d current at zero.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft; its voltage limit is that of the present bus.
    speed : ndarray, shape (n,)
        [rad/s], either sign.

    Returns
    -------
    PlaneLimits
    """
    emf = plant.back_emf * speed
    reactance = plant.pole_pairs * speed * plant.inductance if plant.kind is MachineKind.PM_SINE else 0.0 * speed
    square = plant.resistance**2 + reactance**2
    room = square * plant.voltage_limit**2 - (reactance * emf) ** 2
    root = np.sqrt(np.where(room >= 0.0, room, np.nan))
    low = plant.torque * (-plant.resistance * emf - root) / square
    high = plant.torque * (-plant.resistance * emf + root) / square
    most = plant.torque * plant.current_limit
    both_low, both_high = np.maximum(low, -most), np.minimum(high, most)
    none = ~(both_low <= both_high)
    return PlaneLimits(
        speed=speed,
        voltage_low=low,
        voltage_high=high,
        low=np.where(none, np.nan, both_low),
        high=np.where(none, np.nan, both_high),
    )


def least_circle_share(plant: Plant, trace: Trace) -> float | None:
    """The smallest share of the voltage circle that the path of a pm-sine machine leaves to its q axis.

    ``sqrt(1 - (p w L i / V)^2)``, 0 where the cross voltage alone is more than the limit.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    trace : Trace
        The response.

    Returns
    -------
    float or None
        0 to 1; None for other machines.
    """
    if plant.kind is not MachineKind.PM_SINE:
        return None
    crossed = plant.pole_pairs * plant.inductance * trace.speed * trace.current / plant.voltage_limit
    return float(np.sqrt(max(0.0, 1.0 - float(np.max(np.abs(crossed))) ** 2)))
