"""Small drives for the tests of the time response: plants at the motor shaft, a stage, gains that hold."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from gainbench.model import Duty, Firmware, MachineKind, SpeedSensor, Stage
from gainbench.plant import Plant, state_space
from gainbench.results import Gains, Response
from gainbench.simulate import simulate

RIGID = Plant(
    kind=MachineKind.BRUSHED_DC,
    resistance=0.6,
    inductance=0.45e-3,
    back_emf=0.052,
    torque=0.052,
    pole_pairs=0,
    motor_inertia=7.1e-5,
    motor_viscous=2e-5,
    motor_coulomb=0.0,
    elastic=False,
    load_inertia=0.0,
    load_viscous=0.0,
    load_coulomb=0.0,
    stiffness=0.0,
    damping=0.0,
    ratio=3.0,
    efficiency=1.0,
    filter_time=0.0,
    current_limit=20.0,
    voltage_limit=45.6,
)
"""A brushed motor of some hundred watts with its load, without Coulomb friction."""

ELASTIC = replace(
    RIGID,
    motor_inertia=3.1e-5,
    elastic=True,
    load_inertia=4e-5,
    load_viscous=3e-5,
    stiffness=5.0,
    damping=1e-3,
    filter_time=40e-6,
)
"""The same torn in two by a shaft, with a current filter."""

SINE = replace(RIGID, kind=MachineKind.PM_SINE, back_emf=0.052 / 1.5, pole_pairs=4, voltage_limit=14.0)
"""A field-oriented one that meets its voltage limit."""

STAGE = Stage(
    bus_voltage=48.0,
    current_limit=20.0,
    pwm_frequency=20e3,
    current_rate=20e3,
    speed_rate=2e3,
    speed_sensor=SpeedSensor.IDEAL,
)
ENCODER = replace(STAGE, speed_sensor=SpeedSensor.ENCODER, encoder_counts=4096)
FIRMWARE = Firmware()
DUTY = Duty(reference_speed=100.0, reference_at=1e-3, load_step=0.06, load_at=25e-3, length=50e-3)
CURRENT_GAINS = Gains(kp=1.4, ki=1500.0)
SPEED_GAINS = Gains(kp=0.4, ki=40.0)


def respond_to(
    duty: Duty = DUTY,
    *,
    plant: Plant = RIGID,
    stage: Stage = STAGE,
    firmware: Firmware = FIRMWARE,
    load_torque: float = 0.0,
    reference_weight: float = 1.0,
    current: Gains = CURRENT_GAINS,
    speed: Gains = SPEED_GAINS,
) -> Response:
    """The response of one of these drives; what is not given is as above."""
    return simulate(
        plant,
        stage,
        firmware,
        duty,
        load_torque=load_torque,
        reference_weight=reference_weight,
        current=current,
        speed=speed,
    )


def matrix_of(plant: Plant) -> NDArray[np.float64]:
    """A plant's equations in the order that the kernels keep them."""
    from gainbench.kernels.motion import flow_matrix
    from gainbench.kernels.response_records import Layout

    space = state_space(plant)
    filtered = space.sampled_current if plant.filter_time > 0.0 else -1
    load = space.load_speed if plant.elastic else -1
    return flow_matrix(space.a, space.b, Layout(filtered, load, space.twist, space.angle))
