"""The reference model's own reading of a sheet: values at the motor shaft and the continuous plant.

Written from the equations of the notation page alone, without the library's plant, so that it can judge it.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import expm

from gainbench.model import BackEmfValues, CurrentValues, MachineKind, Sheet, SpeedSensor, TrainKind, WindingValues

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class Body:
    """One turning body, at the motor shaft."""

    inertia: float
    viscous: float
    coulomb: float
    carries_load: bool


@dataclass(frozen=True, kw_only=True)
class Bench:
    """All that the loops and the response depend on, SI, at the motor shaft, peak amperes."""

    R: float
    L: float
    Ke: float
    Kt: float
    pole_pairs: int
    """0 where the voltage limit does not depend on speed."""
    power_factor: float
    bodies: tuple[Body, ...]
    """The motor-side body first; one body where the train is rigid."""
    stiffness: float
    damping: float
    ratio: float
    efficiency: float
    Tf_current: float
    current_limit: float
    voltage_limit: float
    Ts: float
    N: int
    Tw: float
    delay: float
    speed_delay: int
    counts: int
    """0 where the speed sensor is ideal."""
    window: int
    Tf_speed: float

    @property
    def inertia(self) -> float:
        return sum(body.inertia for body in self.bodies)

    @property
    def viscous(self) -> float:
        return sum(body.viscous for body in self.bodies)

    @property
    def speed_filter_gain(self) -> float:
        return 1.0 if self.Tf_speed == 0.0 else 1.0 - math.exp(-self.Tw / self.Tf_speed)

    def load_at_shaft(self, torque: float, direction: int) -> float:
        """Load torque at the motor shaft while its body moves that way (0: rests)."""
        drives = torque * direction < 0.0
        return torque * self.efficiency / self.ratio if drives else torque / (self.ratio * self.efficiency)


def read_bench(sheet: Sheet) -> Bench:
    """Refer a sheet to the motor shaft."""
    machine, train, stage = sheet.rig.machine, sheet.rig.train, sheet.rig.stage
    sine = machine.kind is MachineKind.PM_SINE
    resistance, inductance = machine.resistance, machine.inductance
    ampere = math.sqrt(2.0) if sine and machine.current_values is CurrentValues.RMS else 1.0
    if sine and machine.winding_values is WindingValues.LINE_TO_LINE:
        resistance, inductance = resistance / 2.0, inductance / 2.0
    if machine.kind is MachineKind.PM_BLOCK and machine.winding_values is WindingValues.PHASE:
        resistance, inductance = resistance * 2.0, inductance * 2.0

    if machine.torque_constant is not None:
        torque = machine.torque_constant / ampere
        back_emf = torque / 1.5 if sine else torque
    elif machine.back_emf_constant is not None:
        back_emf = machine.back_emf_constant
        if sine:
            if machine.back_emf_values in (BackEmfValues.LINE_TO_LINE_RMS, BackEmfValues.PHASE_RMS):
                back_emf *= math.sqrt(2.0)
            if machine.back_emf_values in (BackEmfValues.LINE_TO_LINE_RMS, BackEmfValues.LINE_TO_LINE_PEAK):
                back_emf /= math.sqrt(3.0)
        torque = 1.5 * back_emf if sine else back_emf
    else:
        assert machine.speed_constant is not None
        torque = back_emf = 1.0 / machine.speed_constant

    n2 = train.ratio * train.ratio
    motor_inertia = machine.rotor_inertia + train.coupling_inertia
    load = Body(
        inertia=train.load_inertia / n2,
        viscous=train.load_viscous_friction / n2,
        coulomb=train.load_coulomb_friction / (train.ratio * train.efficiency),
        carries_load=True,
    )
    bodies: tuple[Body, ...]
    stiffness = damping = 0.0
    if train.kind is TrainKind.ELASTIC:
        assert train.shaft_stiffness is not None
        assert train.shaft_damping is not None
        stiffness, damping = train.shaft_stiffness / n2, train.shaft_damping / n2
        motor = Body(
            inertia=motor_inertia,
            viscous=machine.viscous_friction,
            coulomb=machine.coulomb_friction,
            carries_load=False,
        )
        bodies = (motor, load)
    else:
        whole = Body(
            inertia=motor_inertia + load.inertia,
            viscous=machine.viscous_friction + load.viscous,
            coulomb=machine.coulomb_friction + load.coulomb,
            carries_load=True,
        )
        bodies = (whole,)

    currents = [stage.current_limit] + ([] if machine.peak_current is None else [machine.peak_current])
    usable = stage.voltage_use * stage.bus_voltage
    encoder = stage.speed_sensor is SpeedSensor.ENCODER
    return Bench(
        R=resistance,
        L=inductance,
        Ke=back_emf,
        Kt=torque,
        pole_pairs=(machine.pole_pairs or 0) if sine else 0,
        power_factor=1.5 if sine else 1.0,
        bodies=bodies,
        stiffness=stiffness,
        damping=damping,
        ratio=train.ratio,
        efficiency=train.efficiency,
        Tf_current=stage.current_filter,
        current_limit=ampere * min(currents),
        voltage_limit=usable / math.sqrt(3.0) if sine else usable,
        Ts=1.0 / stage.current_rate,
        N=round(stage.current_rate / stage.speed_rate),
        Tw=round(stage.current_rate / stage.speed_rate) / stage.current_rate,
        delay=stage.update_delay,
        speed_delay=stage.speed_delay,
        counts=(stage.encoder_counts or 0) if encoder else 0,
        window=stage.speed_window,
        Tf_speed=stage.speed_filter,
    )


@dataclass(frozen=True, kw_only=True)
class Continuous:
    """``dx/dt = A x + B u``, ``u = (v, braking torque on the motor side, braking torque on the load side)``."""

    names: tuple[str, ...]
    A: Array
    B: Array

    def step(self, h: float) -> tuple[Array, Array]:
        """Exact step over ``h`` with inputs held: ``x(h) = F x + G u``."""
        n, m = self.B.shape
        block = np.zeros((n + m, n + m))
        block[:n, :n] = self.A
        block[:n, n:] = self.B
        whole = expm(block * h)
        return whole[:n, :n], whole[:n, n:]


def continuous(bench: Bench, *, held: tuple[bool, ...] | None = None, electric_only: bool = False) -> Continuous:
    """The plant without Coulomb friction; a body that is held keeps its speed (and the motor its angle).

    States: ``i``; ``f`` where the current is filtered; ``w``; ``wl`` and ``twist`` with an elastic train; ``theta``.
    """
    names = ["i"] + (["f"] if bench.Tf_current > 0.0 else [])
    elastic = len(bench.bodies) == 2
    if not electric_only:
        names += ["w"] + (["wl", "twist"] if elastic else []) + ["theta"]
    at = {name: index for index, name in enumerate(names)}
    A = np.zeros((len(names), len(names)))
    B = np.zeros((len(names), 3))
    A[at["i"], at["i"]] = -bench.R / bench.L
    B[at["i"], 0] = 1.0 / bench.L
    if "f" in at:
        A[at["f"], at["i"]] = 1.0 / bench.Tf_current
        A[at["f"], at["f"]] = -1.0 / bench.Tf_current
    if not electric_only:
        A[at["i"], at["w"]] = -bench.Ke / bench.L
        A[at["theta"], at["w"]] = 1.0
        held = held or (False,) * len(bench.bodies)
        motor = bench.bodies[0]
        if not held[0]:
            row = A[at["w"]]
            row[at["i"]] = bench.Kt / motor.inertia
            row[at["w"]] = -motor.viscous / motor.inertia
            B[at["w"], 1] = -1.0 / motor.inertia
            if elastic:
                row[at["w"]] -= bench.damping / motor.inertia
                row[at["wl"]] = bench.damping / motor.inertia
                row[at["twist"]] = -bench.stiffness / motor.inertia
        if elastic:
            load = bench.bodies[1]
            A[at["twist"], at["w"]], A[at["twist"], at["wl"]] = 1.0, -1.0
            if not held[1]:
                row = A[at["wl"]]
                row[at["w"]] = bench.damping / load.inertia
                row[at["wl"]] = -(bench.damping + load.viscous) / load.inertia
                row[at["twist"]] = bench.stiffness / load.inertia
                B[at["wl"], 2] = -1.0 / load.inertia
    return Continuous(names=tuple(names), A=A, B=B)
