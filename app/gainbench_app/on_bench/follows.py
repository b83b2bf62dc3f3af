"""The line below each card: what follows from its entries."""

from __future__ import annotations

import math

from gainbench.derived import DerivedConstants
from gainbench.model import Sheet, SpeedSensor, Stage
from gainbench.plant import Plant
from gainbench.units import Dimension, pretty, show
from gainbench_app.theme import strong


def said(value: float, dimension: Dimension, *, digits: int = 3) -> str:
    """A value in bold, typeset, with a gap in thousands."""
    return strong(spaced(pretty(show(value, dimension, digits=digits))))


def spaced(text: str) -> str:
    """``8750 rpm`` with a gap between thousands, and no break within."""
    number, blank, unit = text.partition(" ")
    sign, digits = ("-", number[1:]) if number.startswith("-") else ("", number)
    if digits.isdigit() and len(digits) > 3:
        digits = f"{int(digits):,}".replace(",", "\N{NO-BREAK SPACE}")
    return f"{sign}{digits}" + ("\N{NO-BREAK SPACE}" + unit if blank else "")


def machine_line(derived: DerivedConstants) -> str:
    """Time constants and what the voltage can do."""
    rated = derived.at_rated_voltage
    ceiling = rated or derived.at_bus_voltage
    where = "at rated voltage" if rated is not None else "at usable voltage"
    return " · ".join(
        [
            f"electrical {said(derived.electrical_time, Dimension.TIME)}",
            f"mechanical {said(derived.mechanical_time, Dimension.TIME)}",
            f"{where}: no load {said(ceiling.running_speed, Dimension.SPEED)}",
            f"stall {said(ceiling.stall_current, Dimension.CURRENT)}",
        ]
    )


def train_line(derived: DerivedConstants) -> str:
    """The load as the motor sees it."""
    parts = [
        f"at the motor {said(derived.reflected_load_inertia, Dimension.INERTIA)}, "
        f"{strong(f'{derived.inertia_ratio:.2g}')} times the rotor"
    ]
    if derived.resonance is not None and derived.antiresonance is not None:
        parts.append(f"antiresonance {said(derived.antiresonance, Dimension.FREQUENCY)}")
        parts.append(f"resonance {said(derived.resonance, Dimension.FREQUENCY)}")
    return " · ".join(parts)


def stage_line(derived: DerivedConstants, plant: Plant, sheet: Sheet) -> str:
    """What the sampling costs, and the limits in force."""
    parts = []
    if sheet.rig.stage.speed_sensor is SpeedSensor.ENCODER and derived.count_speed is not None:
        parts.append(f"one count per window {said(derived.count_speed, Dimension.SPEED)}")
    parts.append(f"current loop delay {said(derived.current_loop_delay, Dimension.TIME)}")
    parts.append(f"speed loop delay {said(sum(speed_delays(sheet.rig.stage).values()), Dimension.TIME)}")
    parts.append(
        f"limits {said(plant.current_limit, Dimension.CURRENT)}, {said(plant.voltage_limit, Dimension.VOLTAGE)}"
    )
    return " · ".join(parts)


def speed_delays(stage: Stage) -> dict[str, float]:
    """What delays the speed loop, by name [s]; half a hold and half a window are their low-frequency delays."""
    period = stage.speed_period
    window = 0.5 * stage.speed_window * period if stage.speed_sensor is SpeedSensor.ENCODER else 0.0
    return {
        "half a hold": 0.5 * period,
        "speed window": window,
        "speed delay": stage.speed_delay * stage.current_period,
        "speed filter": stage.speed_filter,
    }


def delay_budget(stage: Stage) -> str:
    """Where the delays of both loops come from."""
    current = {
        "update delay": stage.update_delay * stage.current_period,
        "half a hold": 0.5 * stage.current_period,
        "current filter": stage.current_filter,
    }
    lines = []
    for loop, delays in (("current", current), ("speed", speed_delays(stage))):
        told = ", ".join(f"{name} {pretty(show(one, Dimension.TIME))}" for name, one in delays.items() if one > 0.0)
        lines.append(f"{loop} loop: {told}")
    return "\n".join(lines)


def duty_line(sheet: Sheet, plant: Plant) -> str:
    """The current that the duty asks for once it runs evenly."""
    duty, speed = sheet.duty, sheet.duty.reference_speed
    if speed == 0.0:
        return ""
    load = sheet.rig.train.load_torque + duty.load_step
    at_motor = plant.braking_torque(load) if load * speed >= 0.0 else plant.driving_torque(load)
    torque = plant.viscous * speed + math.copysign(plant.coulomb, speed) + at_motor
    return f"steady under load {said(abs(torque) / plant.torque, Dimension.CURRENT)}"
