"""What follows from a rig without any loop: time constants, ceilings, resonance, and how well its constants agree.

Every value is at the motor shaft and in the terms of :mod:`gainbench.plant`: phase peak for pm-sine, the conducting
pair for pm-block, the terminals for brushed-dc.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from gainbench.model import Machine, MachineKind, Rig, SpeedSensor, Stage
from gainbench.plant import Plant, back_emf_candidates, refer

SLIP_WINDOW = 0.04
"""How near a ratio must come to a factor of convention for that factor to explain it, as a share of the factor."""


@dataclass(frozen=True, slots=True, kw_only=True)
class VoltageCeiling:
    """What one voltage can do by itself, the current limit and the load torque left aside."""

    voltage: float
    """At the terminals or the pair; phase peak for pm-sine [V]."""
    no_load_speed: float
    """V/Ke, without friction or current [rad/s]."""
    running_speed: float
    """The steady speed against friction alone [rad/s]; 0 where friction is not overcome."""
    running_current: float
    """The current at ``running_speed`` [A]; ``stall_current`` where friction is not overcome."""
    stall_current: float
    """V/R [A]."""
    stall_torque: float
    """Kt V/R [N m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class DerivedConstants:
    """What follows from a rig without any loop, at the motor shaft, SI."""

    electrical_time: float
    """L/R [s]."""
    rotor_mechanical_time: float
    """R J/(Kt Ke) of the bare rotor [s]."""
    mechanical_time: float
    """R J/(Kt Ke) of rotor, coupling and load [s]."""
    speed_torque_gradient: float
    """R/(Kt Ke): speed lost per torque at a fixed voltage [rad/(s N m)]."""
    at_rated_voltage: VoltageCeiling | None
    """None without a rated voltage."""
    at_bus_voltage: VoltageCeiling
    """At the voltage that the modulation may use."""
    reflected_load_inertia: float
    """The load's inertia at the motor shaft, without the coupling's [kg m^2]."""
    inertia_ratio: float
    """``reflected_load_inertia`` over the rotor's inertia."""
    antiresonance: float | None
    """sqrt(k/JL), undamped [rad/s]; None where rigid."""
    resonance: float | None
    """sqrt(k (JM + JL)/(JM JL)), undamped [rad/s]; None where rigid."""
    count_speed: float | None
    """One encoder count in the speed window, 2 pi/(counts m Tw) [rad/s]; None with an ideal sensor."""
    current_loop_delay: float
    """(update_delay + 1/2) Ts: computation and half a hold [s]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ConstantCheck:
    """One constant of a machine held against the constant that is used."""

    constant: str
    """Key of the constant that is checked, ``back_emf_constant``."""
    used: str
    """Key of the constant that the equations use."""
    value: float
    """Ke that the checked constant means [V s/rad]."""
    used_value: float
    """Ke that is used [V s/rad]."""
    ratio: float
    """``value`` over ``used_value``; 1 where they agree."""
    slip: str
    """The mix-up of conventions that would explain the ratio; empty where none does."""


_PEAK_RMS = "peak against rms"
_LINE_PHASE = "line-to-line against phase"
_Q_AXIS = "1.5 of the amplitude-invariant q axis"
_RPM = "rad/s against rpm"

_SINE_SLIPS = (
    (math.sqrt(2.0), _PEAK_RMS),
    (1.5, _Q_AXIS),
    (math.sqrt(3.0), _LINE_PHASE),
    (math.sqrt(1.5), f"{_PEAK_RMS} one way and {_LINE_PHASE} the other"),
    (2.0, f"{_PEAK_RMS}, twice"),
    (1.5 * math.sqrt(2.0), f"{_PEAK_RMS} and {_Q_AXIS}"),
    (math.sqrt(6.0), f"{_PEAK_RMS} and {_LINE_PHASE}"),
    (1.5 * math.sqrt(3.0), f"{_LINE_PHASE} and {_Q_AXIS}"),
    (math.tau / 60.0, _RPM),
)
_BLOCK_SLIPS = (
    (math.sqrt(2.0), _PEAK_RMS),
    (math.sqrt(3.0), f"{_LINE_PHASE} of a sinusoidal machine"),
    (2.0, _LINE_PHASE),
    (math.sqrt(6.0), f"{_PEAK_RMS} and {_LINE_PHASE} of a sinusoidal machine"),
    (math.tau / 60.0, _RPM),
)
_BRUSHED_SLIPS = ((math.tau / 60.0, _RPM),)
_SLIPS = {
    MachineKind.PM_SINE: _SINE_SLIPS,
    MachineKind.PM_BLOCK: _BLOCK_SLIPS,
    MachineKind.BRUSHED_DC: _BRUSHED_SLIPS,
}


def derived_constants(rig: Rig) -> DerivedConstants:
    """Derive the constants of a rig.

    ``tau_e = L/R``, ``tau_m = R J/(Kt Ke)``, gradient ``R/(Kt Ke)``; at a voltage V the speed without friction is
    ``V/Ke``, the stall current ``V/R``. Against friction alone ``Kt i = Tc + b w`` and ``V = R i + Ke w``; for
    pm-sine the voltage across the inductance counts too: ``V^2 = (R i + Ke w)^2 + (p w L i)^2``. For pm-sine a rated
    voltage is taken as line-to-line rms, as on an AC machine's plate, and enters as ``sqrt(2/3)`` of it.

    Parameters
    ----------
    rig : Rig
        Machine, train and stage as the sheet states them.

    Returns
    -------
    DerivedConstants
        At the motor shaft, SI.

    Raises
    ------
    ValueError
        As :func:`gainbench.plant.refer`.

    References
    ----------
    Y. Zhang, J. Furusho, Speed ripple and resonance of two-inertia systems, IEEE Trans. Ind. Electron. 47(3), 2000,
    for resonance and antiresonance (from memory); DC motor theory for the rest.
    """
    plant = refer(rig)
    machine, stage, train = rig.machine, rig.stage, rig.train
    gradient = plant.resistance / (plant.torque * plant.back_emf)
    reflected = train.load_inertia / train.ratio**2
    rated = None
    if machine.rated_voltage is not None:
        sine = machine.kind is MachineKind.PM_SINE
        rated = voltage_ceiling(plant, machine.rated_voltage * (math.sqrt(2.0 / 3.0) if sine else 1.0))
    return DerivedConstants(
        electrical_time=plant.inductance / plant.resistance,
        rotor_mechanical_time=gradient * machine.rotor_inertia,
        mechanical_time=gradient * plant.inertia,
        speed_torque_gradient=gradient,
        at_rated_voltage=rated,
        at_bus_voltage=voltage_ceiling(plant, plant.voltage_limit),
        reflected_load_inertia=reflected,
        inertia_ratio=reflected / machine.rotor_inertia,
        antiresonance=antiresonance(plant),
        resonance=resonance(plant),
        count_speed=count_speed(stage),
        current_loop_delay=(stage.update_delay + 0.5) * stage.current_period,
    )


def antiresonance(plant: Plant) -> float | None:
    """Frequency at which the load swings against a held motor: ``sqrt(k/JL)``, undamped.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.

    Returns
    -------
    float or None
        [rad/s]; None where the train is rigid.
    """
    return math.sqrt(plant.stiffness / plant.load_inertia) if plant.elastic else None


def resonance(plant: Plant) -> float | None:
    """Frequency at which motor and load swing against each other: ``sqrt(k (JM + JL)/(JM JL))``, undamped.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.

    Returns
    -------
    float or None
        [rad/s]; None where the train is rigid.
    """
    if not plant.elastic:
        return None
    motor, load = plant.motor_inertia, plant.load_inertia
    return math.sqrt(plant.stiffness * (motor + load) / (motor * load))


def count_speed(stage: Stage) -> float | None:
    """The step of the measured speed that one encoder count makes: ``2 pi/(counts m Tw)``.

    Parameters
    ----------
    stage : Stage
        Sensor and rates.

    Returns
    -------
    float or None
        [rad/s]; None with an ideal sensor.
    """
    if stage.speed_sensor is not SpeedSensor.ENCODER or stage.encoder_counts is None:
        return None
    return math.tau / (stage.encoder_counts * stage.speed_window * stage.speed_period)


def voltage_ceiling(plant: Plant, voltage: float) -> VoltageCeiling:
    """What one voltage can do by itself: speed without load, current and torque at stall.

    The equations are those of :func:`derived_constants`.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    voltage : float
        V in the plant's terms: phase peak for pm-sine [V], > 0.

    Returns
    -------
    VoltageCeiling
        Speeds in rad/s, currents in A, torque in N m.
    """
    stall = voltage / plant.resistance
    speed = _running_speed(plant, voltage)
    return VoltageCeiling(
        voltage=voltage,
        no_load_speed=voltage / plant.back_emf,
        running_speed=speed,
        running_current=(plant.coulomb + plant.viscous * speed) / plant.torque if speed > 0.0 else stall,
        stall_current=stall,
        stall_torque=plant.torque * stall,
    )


def _running_speed(plant: Plant, voltage: float) -> float:
    friction_drop = plant.resistance * plant.coulomb / plant.torque
    if friction_drop >= voltage:
        return 0.0
    straight = (voltage - friction_drop) / (plant.back_emf + plant.resistance * plant.viscous / plant.torque)
    if plant.kind is not MachineKind.PM_SINE:
        return straight

    # The voltage needed rises with speed, and without the inductance's share it is all used up at `straight`.
    low, high = 0.0, straight
    while (middle := 0.5 * (low + high)) not in (low, high):
        current = (plant.coulomb + plant.viscous * middle) / plant.torque
        along = plant.resistance * current + plant.back_emf * middle
        across = plant.pole_pairs * middle * plant.inductance * current
        if math.hypot(along, across) < voltage:
            low = middle
        else:
            high = middle
    return high


def constant_disagreements(machine: Machine) -> tuple[ConstantCheck, ...]:
    """Hold the constants of a machine that are not used against the one that is.

    Each is turned into the ``Ke`` it means in the sheet's own conventions. Where the ratio comes within
    ``SLIP_WINDOW`` of a factor that separates two conventions, or of its inverse, that mix-up is named; a ratio
    within the window of 1 is no slip. Brushed machines know no rms and no phases, so only the unit of speed is
    considered for them.

    Parameters
    ----------
    machine : Machine
        As the sheet states it.

    Returns
    -------
    tuple of ConstantCheck
        In the contract's order; empty where the sheet gives one constant or none.
    """
    candidates = list(back_emf_candidates(machine).items())
    if len(candidates) < 2:
        return ()
    used, used_value = candidates[0]
    return tuple(
        ConstantCheck(
            constant=key,
            used=used,
            value=value,
            used_value=used_value,
            ratio=value / used_value,
            slip=_likely_slip(machine.kind, value / used_value),
        )
        for key, value in candidates[1:]
    )


def _likely_slip(kind: MachineKind, ratio: float) -> str:
    size = abs(math.log(ratio))
    window = math.log1p(SLIP_WINDOW)
    distance, slip = min((abs(size - abs(math.log(factor))), name) for factor, name in _SLIPS[kind])
    return slip if distance <= window else ""
