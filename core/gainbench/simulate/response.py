"""The time response of the sampled drive to its duty."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from gainbench.model import Duty, Firmware, MachineKind, SpeedSensor, Stage
from gainbench.plant import Plant
from gainbench.results import Gains, Response, ResponseFigures, Trace
from gainbench.simulate.duty import schedule
from gainbench.simulate.preparation import prepare_run
from gainbench.simulate.response_figures import speed_figures

_AT_LIMIT = 1e-12
"""Share by which an equilibrium may exceed a limit it was set to: the rounding of the limit."""


def start_breaks(plant: Plant, load_torque: float) -> str | None:
    """Say why the drive cannot rest in equilibrium with its load, if it cannot.

    The equilibrium is ``i = T_load/Kt`` and ``v = R i``, friction carrying nothing.

    Parameters
    ----------
    plant : Plant
        The drive at the motor shaft.
    load_torque : float
        Constant torque at the load shaft [N m].

    Returns
    -------
    str or None
        The limit that is passed, with its numbers, as a sentence without a full stop; None where none is.
    """
    current = plant.braking_torque(load_torque) / plant.torque
    voltage = plant.resistance * current
    if abs(current) > plant.current_limit * (1.0 + _AT_LIMIT):
        return (
            f"holding the load torque of {load_torque:.4g} N*m at rest takes {abs(current):.4g} A, "
            f"and the current limit is {plant.current_limit:.4g} A"
        )
    if abs(voltage) > plant.voltage_limit * (1.0 + _AT_LIMIT):
        return (
            f"holding the load torque of {load_torque:.4g} N*m at rest takes {abs(voltage):.4g} V, "
            f"and the voltage limit is {plant.voltage_limit:.4g} V"
        )
    return None


def simulate(
    plant: Plant,
    stage: Stage,
    firmware: Firmware,
    duty: Duty,
    *,
    load_torque: float,
    reference_weight: float,
    current: Gains,
    speed: Gains,
) -> Response:
    """Run a duty on the sampled drive.

    The plant moves exactly between the ticks, friction and the load's direction included; the two PI controllers run
    at their rates with their delays, sensors, clamps and windup rules. The run starts at rest in equilibrium with the
    load. Whether the loops are stable and the start is within the limits is for the caller to see first
    (:func:`start_breaks`); the response of an unstable loop is computed all the same.

    Parameters
    ----------
    plant : Plant
        The drive at the motor shaft.
    stage : Stage
        Rates, delays and the speed sensor.
    firmware : Firmware
        Integrator and windup rules, feedforward.
    duty : Duty
        Reference, load step, stop and length.
    load_torque : float
        Constant torque at the load shaft [N m]; positive brakes a positive speed.
    reference_weight : float
        Of the reference in the speed loop's proportional part, 0 to 1.
    current : Gains
        Current loop [V/A, V/(A s)].
    speed : Gains
        Speed loop [A s/rad, A/rad].

    Returns
    -------
    Response
        Traces at the ticks, read-only, and figures.

    Raises
    ------
    ValueError
        If back-calculation is asked for with a proportional gain of 0; a sheet that was read has none.
    """
    from gainbench.kernels.response import LOAD_SPEED, respond

    plan = schedule(duty, stage)
    run = prepare_run(
        plant,
        stage,
        firmware,
        duty,
        plan=plan,
        load_torque=load_torque,
        reference_weight=reference_weight,
        current=current,
        speed=speed,
    )
    traces = np.empty((LOAD_SPEED + int(plant.elastic), plan.ticks))
    flags = np.empty((2, plan.ticks), dtype=np.bool_)
    tally = respond(run, traces, flags)
    traces.setflags(write=False)
    flags.setflags(write=False)
    reference, motor_speed, true_current, current_reference, voltage, time = traces[:LOAD_SPEED]
    found = speed_figures(motor_speed, reference, duty=duty, plan=plan, stage=stage)
    return Response(
        trace=Trace(
            time=time,
            reference=reference,
            speed=motor_speed,
            load_speed=traces[LOAD_SPEED] if plant.elastic else motor_speed,
            current=true_current,
            current_reference=current_reference,
            voltage=voltage,
            current_clamped=flags[0],
            voltage_clamped=flags[1],
        ),
        figures=ResponseFigures(
            overshoot_percent=found.overshoot_percent,
            rise_time_s=found.rise_time_s,
            settling_time_s=found.settling_time_s,
            load_dip_rad_s=found.load_dip_rad_s,
            recovery_time_s=found.recovery_time_s,
            peak_current_a=tally.peak_current,
            rms_current_a=math.sqrt(tally.squares / plan.ticks),
            peak_voltage_v=tally.peak_voltage,
            current_limited_s=tally.current_clamps * stage.speed_period,
            voltage_limited_s=tally.voltage_clamps * stage.current_period,
            returned_energy_j=tally.returned * plant.power_factor,
        ),
    )


def warm_up_response() -> None:
    """Compile the kernels of the time response, or load them from the disk cache: after it :func:`simulate` is fast.

    The tick loop has a machine code for each of three kinds of drive, and one of each is run.
    """
    plant = Plant(
        kind=MachineKind.BRUSHED_DC,
        resistance=1.0,
        inductance=1e-3,
        back_emf=0.1,
        torque=0.1,
        pole_pairs=0,
        motor_inertia=1e-4,
        motor_viscous=0.0,
        motor_coulomb=0.0,
        elastic=False,
        load_inertia=0.0,
        load_viscous=0.0,
        load_coulomb=0.0,
        stiffness=0.0,
        damping=0.0,
        ratio=1.0,
        efficiency=1.0,
        filter_time=0.0,
        current_limit=1.0,
        voltage_limit=1.0,
    )
    stage = Stage(
        bus_voltage=1.0,
        current_limit=1.0,
        pwm_frequency=1e4,
        current_rate=1e4,
        speed_rate=1e3,
        speed_sensor=SpeedSensor.IDEAL,
    )
    sprung = replace(plant, elastic=True, load_inertia=1e-4, stiffness=1.0, damping=1e-3)
    gains = Gains(kp=1.0, ki=1.0)
    for one, delay in ((plant, 1.0), (plant, 1.5), (sprung, 1.0)):
        simulate(
            one,
            replace(stage, update_delay=delay),
            Firmware(),
            Duty(reference_speed=1.0, length=2e-3, load_step=1e-3),
            load_torque=0.0,
            reference_weight=1.0,
            current=gains,
            speed=gains,
        )
