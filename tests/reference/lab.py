"""Sheets that realise a textbook loop: one rate, thousands of ticks per time constant, limits out of reach.

The current loop of a winding and the speed loop of an inertia are enough for the loops that books tabulate:

- ``Ki/(s (R + L s))``, integral action alone on a lag of ``T = L/R``: with ``Ki = R/(2T)`` the magnitude optimum;
- a current loop by lag cancellation with crossover ``1/T``: exactly the lag ``1/(1 + T s)`` inside the speed loop.
"""

from __future__ import annotations

from gainbench.model import (
    Aims,
    DesignMethod,
    Duty,
    HandGains,
    LoopAims,
    Machine,
    MachineKind,
    Rig,
    Sheet,
    SpeedAims,
    SpeedSensor,
    Stage,
    Train,
    TrainKind,
)

T = 1e-3
"""The time constant of every realised loop [s]."""
PER_T = 4000
"""Ticks in it."""
R = 2.0
K = 0.01
"""Torque and back-EMF constant: so small on such an inertia that the back EMF moves no figure by 1e-6."""
J = 1.0
OUT_OF_REACH = 1e12


def by_hand(kp: float, ki: float) -> LoopAims:
    """A current loop's gains as given."""
    return LoopAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=kp, ki=ki))


def speed_by_hand(kp: float, ki: float, *, weight: float = 1.0) -> SpeedAims:
    """A speed loop's gains as given."""
    return SpeedAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=kp, ki=ki), reference_weight=weight)


LAG = LoopAims(method=DesignMethod.LAG_CANCELLATION, crossover=1.0 / T)
"""The current loop as the lag 1/(1 + T s)."""
OPTIMUM = by_hand(0.0, R / (2.0 * T))
"""The current loop as the magnitude optimum on the lag T = L/R."""
FAINT = speed_by_hand(1e-6, 1e-9)
"""A speed loop that does not matter."""


def lab_sheet(
    current: LoopAims,
    speed: SpeedAims = FAINT,
    *,
    duration: float = 1.0,
    load_step: float = 0.0,
    rate: float = PER_T / T,
    update_delay: float = 0.0,
    resistance: float = R,
    inductance: float = R * T,
    constant: float = K,
    inertia: float = J,
    reference: float = 1.0,
) -> Sheet:
    """A bare winding on a bare inertia; ``duration`` in T. A load step comes at the start, without a reference."""
    machine = Machine(
        kind=MachineKind.BRUSHED_DC,
        resistance=resistance,
        inductance=inductance,
        torque_constant=constant,
        rotor_inertia=inertia,
    )
    stage = Stage(
        bus_voltage=OUT_OF_REACH,
        current_limit=OUT_OF_REACH,
        pwm_frequency=rate,
        current_rate=rate,
        speed_rate=rate,
        speed_sensor=SpeedSensor.IDEAL,
        update_delay=update_delay,
    )
    duty = Duty(reference_speed=0.0 if load_step else reference, length=duration * T, load_step=load_step, load_at=0.0)
    train = Train(kind=TrainKind.RIGID, load_inertia=0.0)
    rig = Rig(machine=machine, train=train, stage=stage)
    return Sheet(title="lab", rig=rig, aims=Aims(current=current, speed=speed), duty=duty)


PLAIN_STAGE = Stage(
    bus_voltage=100.0,
    current_limit=10.0,
    pwm_frequency=1e4,
    current_rate=1e4,
    speed_rate=1e3,
    speed_sensor=SpeedSensor.IDEAL,
    voltage_use=1.0,
)


def brushed(
    *,
    resistance: float = 1.0,
    inductance: float = 1e-3,
    rotor_inertia: float = 1e-4,
    torque_constant: float = 0.1,
    viscous_friction: float = 0.0,
    coulomb_friction: float = 0.0,
) -> Machine:
    """A brushed motor of round numbers."""
    return Machine(
        kind=MachineKind.BRUSHED_DC,
        resistance=resistance,
        inductance=inductance,
        rotor_inertia=rotor_inertia,
        torque_constant=torque_constant,
        viscous_friction=viscous_friction,
        coulomb_friction=coulomb_friction,
    )


def rig_of(machine: Machine, train: Train | None = None, *, stage: Stage = PLAIN_STAGE) -> Rig:
    """The machine on a bare shaft, or on the train given."""
    return Rig(machine=machine, train=train or Train(kind=TrainKind.RIGID, load_inertia=0.0), stage=stage)
