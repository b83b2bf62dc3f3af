"""The sampled law written down plainly, its plant integrated as differential equations: what the kernels must give.

No matrix exponential and no power series: ``solve_ivp`` with tight tolerances from one change of voltage to the next,
with its own search for the instants at which a body stops or the current turns.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from gainbench.model import Duty, Firmware, IntegratorRule, MachineKind, SpeedSensor, Stage, WindupRule
from gainbench.plant import Plant
from gainbench.results import Gains

Array = NDArray[np.float64]
MOST_CHANGES = 60
"""Of motion, between two changes of voltage."""
NAMES = ("reference", "speed", "load_speed", "current", "current_reference", "voltage")


@dataclass
class PlainPlant:
    """i, motor speed, filtered current, load speed, twist, motor angle, energy given back; a rigid load moves along."""

    plant: Plant
    state: Array
    load: float
    """At the load shaft [N m]."""
    ways: tuple[int, int] = (0, 0)

    def drag(self, body: int, way: int) -> float:
        """Torque against a body that moves that way [N m]."""
        plant = self.plant
        carries = body == 1 or not plant.elastic
        own = (plant.motor_coulomb, plant.load_coulomb)[body] * way
        if not carries:
            return own
        brakes = self.load * way >= 0.0
        return own + (plant.braking_torque(self.load) if brakes else plant.driving_torque(self.load))

    def torques(self, x: Array) -> tuple[float, float]:
        """On either body, its drag apart [N m]."""
        plant = self.plant
        shaft = plant.stiffness * x[4] + plant.damping * (x[1] - x[3]) if plant.elastic else 0.0
        return plant.torque * x[0] - plant.motor_viscous * x[1] - shaft, shaft - plant.load_viscous * x[3]

    def starts(self, body: int, x: Array) -> int:
        """Way a body at rest would start."""
        torque, edge = self.torques(x)[body], 1e-12
        if torque - self.drag(body, 1) > edge * abs(self.drag(body, 1)):
            return 1
        return -1 if torque - self.drag(body, -1) < -edge * abs(self.drag(body, -1)) else 0

    def flow(self, x: Array, voltage: float) -> Array:
        """dx/dt in the present mode."""
        plant = self.plant
        torques = self.torques(x)
        slopes = [0.0, 0.0]
        for body, inertia in enumerate((plant.motor_inertia, plant.load_inertia)):
            if self.ways[body] != 0 and inertia > 0.0:
                slopes[body] = (torques[body] - self.drag(body, self.ways[body])) / inertia
        di = (voltage - plant.resistance * x[0] - plant.back_emf * x[1]) / plant.inductance
        df = (x[0] - x[2]) / plant.filter_time if plant.filter_time > 0.0 else 0.0
        return np.array([di, slopes[0], df, slopes[1], x[1] - x[3], x[1], max(0.0, -voltage * x[0])])

    def turns(self, voltage: float, *, from_zero: bool):
        """Function of time and state that is zero where the current is, but for a zero it has just come from."""
        if voltage == 0.0:
            # Nothing is given back either way.
            return lambda t, x: 1.0
        if not from_zero and self.state[0] != 0.0:
            return lambda t, x: x[0]
        onwards = 1e-300 * float(np.sign(self.flow(self.state, voltage)[0]))
        return lambda t, x: onwards if t == 0.0 else x[0]

    def leaves(self, body: int):
        """Function of time and state that goes through zero where a body leaves its mode."""
        way = self.ways[body]
        if way != 0:
            # A body that has just started, at speed zero, has not stopped.
            return lambda t, x: way * x[1 + 2 * body] + (1e-300 if t == 0.0 else 0.0)
        return lambda t, x: min(self.drag(body, 1) - self.torques(x)[body], self.torques(x)[body] - self.drag(body, -1))

    def run(self, voltage: float, time: float) -> None:
        """Let a time pass."""
        bodies = (0, 1) if self.plant.elastic else (0,)
        watched = [body for body in bodies if self.drag(body, 1) > self.drag(body, -1)]
        breaking_away: dict[int, int] = {}
        turned = False
        left = time
        for _ in range(MOST_CHANGES):
            if left <= 0.0:
                return
            ways = [int(body in bodies) for body in range(2)]
            for body in watched:
                speed = self.state[1 + 2 * body]
                ways[body] = int(np.sign(speed)) or breaking_away.get(body, self.starts(body, self.state))
            self.ways = (ways[0], ways[1])
            breaking_away = {}
            events = [self.turns(voltage, from_zero=turned), *(self.leaves(body) for body in watched)]
            for event in events:
                event.terminal = True
                event.direction = -1.0 if event is not events[0] else 0.0
            found = solve_ivp(
                lambda _, x: self.flow(x, voltage),
                (0.0, left),
                self.state,
                method="DOP853",
                rtol=3e-14,
                atol=1e-15,
                events=events,
            )
            self.state = found.y[:, -1]
            left -= found.t[-1]
            turned = len(found.t_events[0]) > 0
            for body, when in zip(watched, found.t_events[1:], strict=True):
                if not len(when):
                    continue
                if self.ways[body] != 0:
                    self.state[1 + 2 * body] = 0.0
                else:
                    middle = (self.drag(body, 1) + self.drag(body, -1)) / 2.0
                    breaking_away[body] = 1 if self.torques(self.state)[body] > middle else -1
            if not self.plant.elastic:
                self.state[3] = self.state[1]
        raise RuntimeError("too many changes of motion in one stretch")


class PlainPi:
    """One PI controller with its clamp."""

    def __init__(self, gains: Gains, period: float, weight: float, firmware: Firmware, integral: float) -> None:
        self.gains, self.period, self.weight, self.firmware = gains, period, weight, firmware
        self.integral, self.old_error = integral, 0.0

    def step(self, reference: float, measured: float, addend: float, limit: float) -> float:
        """The output after the clamp."""
        error = reference - measured
        p = self.gains.kp * (self.weight * reference - measured)
        rule = self.firmware.integrator
        grown = error if rule is not IntegratorRule.TRAPEZOID else (error + self.old_error) / 2.0
        new = self.integral + self.gains.ki * self.period * grown
        u = p + addend + (self.integral if rule is IntegratorRule.FORWARD else new)
        out = float(np.clip(u, -limit, limit))
        if out != u and self.firmware.windup is WindupRule.HOLD and error * u > 0.0:
            new = self.integral
        if out != u and self.firmware.windup is WindupRule.BACK_CALCULATION:
            new += min(1.0, self.period * self.gains.ki / self.gains.kp) * (out - u)
        self.integral, self.old_error = new, error
        return out


def plain_reference(duty: Duty, time: float, near: float) -> float:
    """The scripted reference at a speed tick."""

    def up(at: float) -> float:
        if at < duty.reference_at - near:
            return 0.0
        full = abs(duty.reference_speed)
        return full if duty.reference_ramp == 0.0 else min(full, duty.reference_ramp * max(0.0, at - duty.reference_at))

    size = up(time)
    if duty.stop_at is not None and time >= duty.stop_at - near:
        gone = max(0.0, time - duty.stop_at) * duty.stop_ramp
        size = max(0.0, up(duty.stop_at) - gone) if duty.stop_ramp > 0.0 else 0.0
    return math.copysign(size, duty.reference_speed)


def plain_response(
    plant: Plant,
    stage: Stage,
    firmware: Firmware,
    duty: Duty,
    *,
    load_torque: float,
    reference_weight: float,
    current: Gains,
    speed: Gains,
) -> tuple[dict[str, Array], float]:
    """The signals at the ticks, and the energy given back [J]."""
    period, divisor = 1.0 / stage.current_rate, round(stage.current_rate / stage.speed_rate)
    load = plant.braking_torque(load_torque)
    i = load / plant.torque
    twist = load / plant.stiffness if plant.elastic else 0.0
    body = PlainPlant(plant=plant, state=np.array([i, 0.0, i, 0.0, twist, 0.0, 0.0]), load=load_torque)
    inner = PlainPi(current, period, 1.0, firmware, plant.resistance * i)
    outer = PlainPi(speed, divisor * period, reference_weight, firmware, i)
    voltages = [plant.resistance * i] * 4
    counts = [0] * (stage.speed_window + 1)
    measured = reference = 0.0
    asked = in_force = i
    rows: dict[str, list[float]] = {name: [] for name in NAMES}
    for tick in range(round(duty.length * stage.current_rate)):
        time = tick * period
        if tick % divisor == 0:
            reference = plain_reference(duty, time, 1e-6 * period)
            raw = body.state[1]
            if stage.speed_sensor is SpeedSensor.ENCODER:
                size = math.tau / (stage.encoder_counts or 1)
                counts = [math.floor(body.state[5] / size + 0.5), *counts[:-1]]
                if tick == 0:
                    counts = [0] * len(counts)
                raw = (counts[0] - counts[-1]) * size / (stage.speed_window * divisor * period)
            share = 1.0
            if stage.speed_filter > 0.0:
                share = 1.0 - math.exp(-divisor * period / stage.speed_filter)
            measured += share * (raw - measured)
            asked = outer.step(reference, measured, 0.0, plant.current_limit)
        if tick % divisor == stage.speed_delay:
            in_force = asked
        sample = body.state[2] if plant.filter_time > 0.0 else body.state[0]
        limit = plant.voltage_limit
        if plant.kind is MachineKind.PM_SINE:
            across = plant.pole_pairs * measured * plant.inductance * sample
            limit = math.sqrt(max(0.0, limit**2 - across**2))
        fed = plant.back_emf * measured if firmware.back_emf_feedforward else 0.0
        voltages = [inner.step(in_force, sample, fed, limit), *voltages[:3]]
        load_speed = body.state[3] if plant.elastic else body.state[1]
        now = (reference, body.state[1], load_speed, body.state[0], in_force, voltages[0])
        for name, value in zip(NAMES, now, strict=True):
            rows[name].append(value)
        if time >= duty.load_time - 1e-6 * period:
            body.load = load_torque + duty.load_step
        whole = math.floor(stage.update_delay)
        part = stage.update_delay - whole
        if part > 0.0:
            body.run(voltages[whole + 1], part * period)
        body.run(voltages[whole], (1.0 - part) * period)
    return {name: np.array(row) for name, row in rows.items()}, body.state[6] * plant.power_factor
