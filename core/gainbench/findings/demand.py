"""What the duty needs once it is steady: the current and the voltage to hold a speed against a load."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gainbench.findings.case import Case
from gainbench.findings.numbers import amount
from gainbench.model import Duty, Machine, MachineKind
from gainbench.plant import Plant, current_size


@dataclass(frozen=True, slots=True, kw_only=True)
class Demand:
    """One steady state of the duty."""

    speed: float
    """[rad/s], signed."""
    load: float
    """At the load shaft [N m]; positive brakes a positive speed."""
    loaded: bool
    """True after the load step."""
    current: float
    """[A], signed."""
    voltage: float
    """Size of the voltage [V]; phase peak for pm-sine, its inductance counted."""

    @property
    def drives(self) -> bool:
        """True where the load drives the motion."""
        return self.load * self.speed < 0.0


def steady_demand(plant: Plant, speed: float, *, load: float, loaded: bool) -> Demand:
    """The steady state at a speed: ``Kt i = b w + Tc sgn(w) + T_load``, ``v = R i + Ke w``.

    At rest the machine carries the load and friction nothing. For pm-sine ``v`` is the length of the voltage
    vector, ``sqrt((R i + Ke w)^2 + (p w L i)^2)``.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    speed : float
        At the motor shaft [rad/s].
    load : float
        At the load shaft [N m].
    loaded : bool
        Whether this is after the load step.

    Returns
    -------
    Demand
        Current [A] and voltage [V] in the plant's terms.
    """
    drives = load * speed < 0.0
    torque = plant.driving_torque(load) if drives else plant.braking_torque(load)
    if speed != 0.0:
        torque += plant.viscous * speed + math.copysign(plant.coulomb, speed)
    current = torque / plant.torque
    voltage = abs(plant.resistance * current + plant.back_emf * speed)
    if plant.kind is MachineKind.PM_SINE:
        voltage = math.hypot(voltage, plant.pole_pairs * speed * plant.inductance * current)
    return Demand(speed=speed, load=load, loaded=loaded, current=current, voltage=voltage)


def current_at_voltage(plant: Plant, speed: float) -> float:
    """The steady current that the whole voltage drives against the back EMF.

    The larger root of ``(R i + Ke w)^2 + (p w L i)^2 = V^2``, the second term for pm-sine only.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    speed : float
        At the motor shaft; its sign does not matter [rad/s].

    Returns
    -------
    float
        [A]; below 0 where the back EMF is above the voltage.
    """
    emf, resistance = plant.back_emf * abs(speed), plant.resistance
    across = plant.pole_pairs * speed * plant.inductance if plant.kind is MachineKind.PM_SINE else 0.0
    square = resistance**2 + across**2
    root = (resistance * emf) ** 2 + square * (plant.voltage_limit**2 - emf**2)
    return (math.sqrt(max(root, 0.0)) - resistance * emf) / square


def top_speed(duty: Duty) -> float:
    """The speed that the reference comes to [rad/s], signed: a ramp may be stopped before its end."""
    if duty.reference_ramp <= 0.0:
        return duty.reference_speed
    end = duty.length if duty.stop_at is None else duty.stop_at
    size = min(abs(duty.reference_speed), duty.reference_ramp * max(0.0, end - duty.reference_at))
    return math.copysign(size, duty.reference_speed)


def demands(case: Case) -> tuple[Demand, ...]:
    """The steady states that the duty passes: at its reference before the load step, and after it.

    A load that comes only when the reference has gone back to zero is held at rest.
    """
    duty, idle = case.sheet.duty, case.sheet.rig.train.load_torque
    top = top_speed(duty)
    before = steady_demand(case.plant, top, load=idle, loaded=False)
    if duty.load_step == 0.0:
        return (before,)
    stopped = duty.stop_at is not None and duty.load_time >= duty.stop_at
    speed = 0.0 if stopped else top
    return before, steady_demand(case.plant, speed, load=idle + duty.load_step, loaded=True)


def sheet_amperes(value: float, machine: Machine) -> str:
    """A current of the equations, in the sheet's own ampere and with its name: ``"4.10 A rms"``."""
    return f"{amount(value / current_size(machine), 'A')}{ampere_name(machine)}"


def ampere_name(machine: Machine) -> str:
    """Which ampere the sheet speaks of, behind the unit; empty where there is only one."""
    if machine.kind is not MachineKind.PM_SINE or machine.current_values is None:
        return ""
    return f" {machine.current_values.value}"
