"""What the tick loop starts from: the drive, its law, its duty and its start, as plain numbers."""

from __future__ import annotations

import math

from gainbench.kernels.response_records import (
    BACKWARD,
    FORWARD,
    TRAPEZOID,
    Drag,
    Layout,
    PiLaw,
    Run,
    Sampling,
    Script,
    Start,
)
from gainbench.model import Duty, Firmware, IntegratorRule, MachineKind, SpeedSensor, Stage, WindupRule
from gainbench.plant import Plant, state_space
from gainbench.results import Gains
from gainbench.simulate.duty import Schedule

_RULES = {
    IntegratorRule.BACKWARD: BACKWARD,
    IntegratorRule.FORWARD: FORWARD,
    IntegratorRule.TRAPEZOID: TRAPEZOID,
}


def prepare_run(
    plant: Plant,
    stage: Stage,
    firmware: Firmware,
    duty: Duty,
    *,
    plan: Schedule,
    load_torque: float,
    reference_weight: float,
    current: Gains,
    speed: Gains,
) -> Run:
    """Gather what the tick loop starts from.

    The start is at rest in equilibrium, friction carrying nothing: ``i = T_load/Kt``, ``v = R i``, twist ``T_load/k``.

    Parameters
    ----------
    plant, stage, firmware, duty, load_torque, reference_weight, current, speed
        As :func:`gainbench.simulate.simulate` takes them.
    plan : Schedule
        The duty in ticks.

    Returns
    -------
    Run
        For :func:`gainbench.kernels.response.respond`.

    Raises
    ------
    ValueError
        If back-calculation is asked for with a proportional gain of 0.
    """
    space = state_space(plant)
    load = plant.braking_torque(load_torque)
    held_current = load / plant.torque
    return Run(
        plant=(space.a, space.b),
        layout=Layout(
            filtered=space.sampled_current if plant.filter_time > 0.0 else -1,
            load_speed=space.load_speed if plant.elastic else -1,
            twist=space.twist,
            angle=space.angle,
        ),
        sampling=_sampling(plant, stage, firmware, plan),
        current_law=_law(current, firmware, period=stage.current_period, weight=1.0),
        speed_law=_law(speed, firmware, period=stage.speed_period, weight=float(reference_weight)),
        script=_script(duty, plan),
        start=Start(
            current=held_current,
            voltage=plant.resistance * held_current,
            twist=load / plant.stiffness if plant.elastic else 0.0,
        ),
        drags=(_drag(plant, load_torque), _drag(plant, load_torque + duty.load_step)),
    )


def _sampling(plant: Plant, stage: Stage, firmware: Firmware, plan: Schedule) -> Sampling:
    """The sampled law around the controllers."""
    whole = math.floor(stage.update_delay)
    encoder = stage.speed_sensor is SpeedSensor.ENCODER and stage.encoder_counts is not None
    sine = plant.kind is MachineKind.PM_SINE
    return Sampling(
        ticks=plan.ticks,
        divisor=stage.speed_divisor,
        period=stage.current_period,
        held_ticks=whole,
        held_part=stage.update_delay - whole,
        reference_delay=stage.speed_delay,
        counts_per_radian=(stage.encoder_counts or 0) / math.tau if encoder else 0.0,
        window=stage.speed_window,
        filter_gain=-math.expm1(-stage.speed_period / stage.speed_filter) if stage.speed_filter > 0.0 else 1.0,
        feedforward=plant.back_emf if firmware.back_emf_feedforward else 0.0,
        current_limit=plant.current_limit,
        voltage_limit=plant.voltage_limit,
        reactance=plant.pole_pairs * plant.inductance if sine else 0.0,
    )


def _law(gains: Gains, firmware: Firmware, *, period: float, weight: float) -> PiLaw:
    """A PI controller's parameters."""
    hold = firmware.windup is WindupRule.HOLD
    if not hold and gains.kp <= 0.0:
        raise ValueError("back-calculation needs a proportional gain above 0")
    return PiLaw(
        kp=float(gains.kp),
        ki_period=gains.ki * period,
        weight=weight,
        rule=_RULES[firmware.integrator],
        hold=hold,
        relief=0.0 if hold else min(1.0, period * gains.ki / gains.kp),
    )


def _script(duty: Duty, plan: Schedule) -> Script:
    """The duty in ticks, for the kernel."""
    return Script(
        reference=float(duty.reference_speed),
        reference_tick=plan.reference,
        reference_at=float(duty.reference_at),
        ramp=float(duty.reference_ramp),
        stop_tick=plan.stop,
        stop_at=float(duty.stop_at or 0.0),
        stop_ramp=float(duty.stop_ramp),
        stop_size=plan.stop_size,
        load_tick=plan.load,
    )


def _drag(plant: Plant, load: float) -> Drag:
    """Torque against each body by its way: friction, and the load torque on the body that carries it."""
    braking, driving = plant.braking_torque(load), plant.driving_torque(load)
    forwards, backwards = (braking, driving) if load >= 0.0 else (driving, braking)
    carrier = plant.load_coulomb if plant.elastic else plant.motor_coulomb
    carried = (backwards - carrier, forwards + carrier)
    return Drag(-plant.motor_coulomb, plant.motor_coulomb, *carried) if plant.elastic else Drag(*carried, 0.0, 0.0)
