"""From what the sheet states to the one set of values the equations use, and the continuous plant.

All values are referred to the motor shaft, SI. The plant is

    L di/dt = v - R i - Ke w
    J dw/dt = Kt i - b w - Tc sgn(w) - T_load
    d theta/dt = w

with ``i`` the armature current (brushed), the current of the conducting pair (pm-block) or the q-axis
current as phase peak (pm-sine, amplitude-invariant, so Kt = 1.5 Ke). Positive current accelerates towards
positive speed; a positive load torque brakes a positive speed. An elastic train splits J into two bodies
joined by stiffness and damping in parallel.

References
----------
W. Leonhard, Control of Electrical Drives, 3rd ed., Springer, 2001, chapters 5 and 10 (from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.model import (
    BackEmfValues,
    CurrentValues,
    Machine,
    MachineKind,
    Rig,
    TrainKind,
    WindingValues,
)

_PHASE_PEAK = {
    BackEmfValues.PHASE_PEAK: 1.0,
    BackEmfValues.PHASE_RMS: math.sqrt(2.0),
    BackEmfValues.LINE_TO_LINE_PEAK: 1.0 / math.sqrt(3.0),
    BackEmfValues.LINE_TO_LINE_RMS: math.sqrt(2.0 / 3.0),
}
"""Phase-peak volts in one volt of each kind (P2, sinusoidal symmetric machine)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Plant:
    """The drive referred to the motor shaft, SI; currents and voltages in the terms of the q axis for pm-sine."""

    kind: MachineKind
    resistance: float
    """R [ohm]."""
    inductance: float
    """L [H]."""
    back_emf: float
    """Ke [V s/rad]."""
    torque: float
    """Kt [N m/A]."""
    pole_pairs: int
    """p; 0 for brushed-dc."""
    motor_inertia: float
    """Rotor and coupling; the whole train too where rigid [kg m^2]."""
    motor_viscous: float
    """b of the motor-side body [N m s/rad]."""
    motor_coulomb: float
    """Tc of the motor-side body [N m]."""
    elastic: bool
    load_inertia: float
    """Load-side body [kg m^2]; 0 where rigid."""
    load_viscous: float
    """[N m s/rad]; 0 where rigid."""
    load_coulomb: float
    """[N m]; 0 where rigid."""
    stiffness: float
    """k [N m/rad]; 0 where rigid."""
    damping: float
    """[N m s/rad]; 0 where rigid."""
    ratio: float
    efficiency: float
    filter_time: float
    """Analogue current filter's time constant [s]; 0 is none."""
    current_limit: float
    """The smaller of the stage's limit and the machine's peak [A]."""
    voltage_limit: float
    """V [V]: of the terminals, or of the phase's peak for pm-sine."""

    @property
    def inertia(self) -> float:
        """J, all of it [kg m^2]."""
        return self.motor_inertia + self.load_inertia

    @property
    def viscous(self) -> float:
        """b, all of it [N m s/rad]."""
        return self.motor_viscous + self.load_viscous

    @property
    def coulomb(self) -> float:
        """Tc, all of it [N m]."""
        return self.motor_coulomb + self.load_coulomb

    @property
    def power_factor(self) -> float:
        """Electrical power over v i: 3/2 for the q axis of pm-sine, else 1."""
        return 1.5 if self.kind is MachineKind.PM_SINE else 1.0

    def braking_torque(self, load: float) -> float:
        """Load-shaft torque at the motor shaft where it brakes, or where its body rests: load/(ratio efficiency)."""
        return load / (self.ratio * self.efficiency)

    def driving_torque(self, load: float) -> float:
        """Load-shaft torque at the motor shaft where it drives the motion: load efficiency/ratio."""
        return load * self.efficiency / self.ratio


def current_size(machine: Machine) -> float:
    """Amperes of the equations in one ampere of the sheet: sqrt(2) where a pm-sine sheet speaks of rms, else 1."""
    rms = machine.kind is MachineKind.PM_SINE and machine.current_values is CurrentValues.RMS
    return math.sqrt(2.0) if rms else 1.0


def winding_size(machine: Machine) -> float:
    """Ohms (and henries) of the equations in one of the sheet: phase values for pm-sine, line-to-line for pm-block."""
    if machine.kind is MachineKind.PM_SINE and machine.winding_values is WindingValues.LINE_TO_LINE:
        return 0.5
    if machine.kind is MachineKind.PM_BLOCK and machine.winding_values is WindingValues.PHASE:
        return 2.0
    return 1.0


def back_emf_candidates(machine: Machine) -> dict[str, float]:
    """Ke [V s/rad] of the equations from each constant that the sheet gives, by its key, in the contract's order."""
    found: dict[str, float] = {}
    sine = machine.kind is MachineKind.PM_SINE
    if machine.torque_constant is not None:
        found["torque_constant"] = machine.torque_constant / current_size(machine) / (1.5 if sine else 1.0)
    if machine.back_emf_constant is not None:
        values = machine.back_emf_values or BackEmfValues.PHASE_PEAK
        found["back_emf_constant"] = machine.back_emf_constant * (_PHASE_PEAK[values] if sine else 1.0)
    if machine.speed_constant is not None and not sine:
        found["speed_constant"] = 1.0 / machine.speed_constant
    return found


def refer(rig: Rig) -> Plant:
    """Refer a rig to the motor shaft.

    Inertia, viscous friction, stiffness and damping reflect by 1/ratio^2, load Coulomb friction by
    1/(ratio efficiency). Inertia torque is not reduced by efficiency.

    Parameters
    ----------
    rig : Rig
        Machine, train and stage as the sheet states them.

    Returns
    -------
    Plant
        The values of the equations.

    Raises
    ------
    ValueError
        If the machine has none of the three constants, or an elastic train no stiffness or damping; a sheet that was
        read has them.
    """
    machine, train, stage = rig.machine, rig.train, rig.stage
    constants = back_emf_candidates(machine)
    if not constants:
        raise ValueError("a machine needs one of torque_constant, back_emf_constant and speed_constant")
    back_emf = next(iter(constants.values()))
    sine = machine.kind is MachineKind.PM_SINE
    amperes, winding = current_size(machine), winding_size(machine)
    square = train.ratio**2
    load_inertia = train.load_inertia / square
    load_viscous = train.load_viscous_friction / square
    load_coulomb = train.load_coulomb_friction / (train.ratio * train.efficiency)
    own_inertia = machine.rotor_inertia + train.coupling_inertia
    elastic = train.kind is TrainKind.ELASTIC
    stiffness = damping = 0.0
    if elastic:
        if train.shaft_stiffness is None or train.shaft_damping is None:
            raise ValueError("an elastic train needs shaft_stiffness and shaft_damping")
        stiffness, damping = train.shaft_stiffness / square, train.shaft_damping / square
    limit = stage.current_limit
    if machine.peak_current is not None:
        limit = min(limit, machine.peak_current)
    voltage = stage.voltage_use * stage.bus_voltage
    return Plant(
        kind=machine.kind,
        resistance=machine.resistance * winding,
        inductance=machine.inductance * winding,
        back_emf=back_emf,
        torque=back_emf * (1.5 if sine else 1.0),
        pole_pairs=machine.pole_pairs or 0,
        motor_inertia=own_inertia if elastic else own_inertia + load_inertia,
        motor_viscous=machine.viscous_friction if elastic else machine.viscous_friction + load_viscous,
        motor_coulomb=machine.coulomb_friction if elastic else machine.coulomb_friction + load_coulomb,
        elastic=elastic,
        load_inertia=load_inertia if elastic else 0.0,
        load_viscous=load_viscous if elastic else 0.0,
        load_coulomb=load_coulomb if elastic else 0.0,
        stiffness=stiffness,
        damping=damping,
        ratio=train.ratio,
        efficiency=train.efficiency,
        filter_time=stage.current_filter,
        current_limit=limit * amperes,
        voltage_limit=voltage / math.sqrt(3.0) if sine else voltage,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class StateSpace:
    """The continuous linear plant, ``dx/dt = a x + b u``, inputs ``u = (v, motor torque, load torque)``.

    The two torques brake: they enter with a minus. With a rigid train both act on the one body. States, in
    this order, those that exist: current ``i``, motor speed ``w``, filtered current, load speed, twist
    (motor minus load angle), motor angle.
    """

    a: NDArray[np.float64]
    """shape (n, n)."""
    b: NDArray[np.float64]
    """shape (n, 3)."""
    sampled_current: int
    """Index of the current that is sampled: behind the filter where there is one."""
    load_speed: int
    """Index of the speed of the body that carries the load: the motor's where rigid."""
    twist: int
    """Index of the twist, -1 where rigid."""
    current: int = 0
    """Index of the current."""
    speed: int = 1
    """Index of the motor's speed."""

    @property
    def angle(self) -> int:
        """Index of the motor angle: the last state."""
        return int(self.a.shape[0]) - 1


def state_space(plant: Plant, *, locked: bool = False) -> StateSpace:
    """The continuous plant without Coulomb friction.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    locked : bool
        True holds the rotor: speed and angle stay.

    Returns
    -------
    StateSpace
        Read-only arrays.
    """
    a, b = state_matrices(plant, locked=locked)
    a.setflags(write=False)
    b.setflags(write=False)
    filtered = plant.filter_time > 0.0
    return StateSpace(
        a=a,
        b=b,
        sampled_current=sampled_state(plant),
        load_speed=2 + int(filtered) if plant.elastic else 1,
        twist=3 + int(filtered) if plant.elastic else -1,
    )


def sampled_state(plant: Plant) -> int:
    """Index of the current that is sampled, among the states of :class:`StateSpace`."""
    return 2 if plant.filter_time > 0.0 else 0


def state_matrices(plant: Plant, *, locked: bool = False) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """The two matrices of :func:`state_space`, for a caller that hands them on at once.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    locked : bool
        True holds the rotor: speed and angle stay.

    Returns
    -------
    a, b : ndarray, shapes (n, n) and (n, 3)
    """
    filtered = plant.filter_time > 0.0
    count = 3 + int(filtered) + 2 * int(plant.elastic)
    a = np.zeros((count, count))
    b = np.zeros((count, 3))
    i, w, angle = 0, 1, count - 1
    load = twist = -1
    a[i, i] = -plant.resistance / plant.inductance
    b[i, 0] = 1.0 / plant.inductance
    if filtered:
        a[2, i] = 1.0 / plant.filter_time
        a[2, 2] = -1.0 / plant.filter_time
    if plant.elastic:
        load, twist = 2 + int(filtered), 3 + int(filtered)
    if not locked:
        inertia = plant.motor_inertia
        a[i, w] = -plant.back_emf / plant.inductance
        a[w, i] = plant.torque / inertia
        a[w, w] = -plant.motor_viscous / inertia
        b[w, 1] = -1.0 / inertia
        a[angle, w] = 1.0
        if plant.elastic:
            a[w, w] -= plant.damping / inertia
            a[w, load] = plant.damping / inertia
            a[w, twist] = -plant.stiffness / inertia
        else:
            b[w, 2] = -1.0 / inertia
    if plant.elastic:
        if not locked:
            a[twist, w] = 1.0
            a[load, w] = plant.damping / plant.load_inertia
        a[twist, load] = -1.0
        a[load, load] = -(plant.load_viscous + plant.damping) / plant.load_inertia
        a[load, twist] = plant.stiffness / plant.load_inertia
        b[load, 2] = -1.0 / plant.load_inertia
    return a, b
