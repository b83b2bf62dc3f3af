"""A short procedure for the bench, with the numbers of one sheet: what to do first, and what should then be seen."""

from __future__ import annotations

from typing import TYPE_CHECKING

from gainbench.model import MachineKind, SpeedSensor
from gainbench.plant import current_size
from gainbench.units import Dimension, show

if TYPE_CHECKING:
    from gainbench.assess import Assessment

FIRST_SHARE = 0.1
"""Of the current limit and of the duty's speed for the first runs: the step that the locked-rotor figures are for."""
_SAME_INERTIA = 1.05
"""Up to this ratio of inertias, gains need no change for a motor run by itself (common practice)."""
_STALL_SECONDS = 0.2
"""How long the locked-rotor step may last: many time constants of a winding, few kelvin (common practice)."""
_WORTH_SAYING = 0.01
"""Share of the moving energy from which energy given back is worth a word (common practice)."""


def bench_procedure(assessment: Assessment) -> tuple[str, ...]:
    """The steps from first power to the duty.

    The locked-rotor step and its rise are those of the linear current loop, so they hold for any step that neither
    limit cuts; ``V = R i`` at its end. The no-load run expects ``i = (Tc + b w)/Kt`` of the motor alone.

    Parameters
    ----------
    assessment : Assessment
        Any.

    Returns
    -------
    tuple of str
        Plain ASCII, a paragraph each, in order. Without gains, or with an unstable loop, one sentence that says not to
        run them.
    """
    for name, loop in (("current", assessment.current), ("speed", assessment.speed)):
        if loop.gains is None:
            return (f"There is nothing to try on the bench: the {name} loop has no gains.",)
        if loop.figures is None or not loop.figures.stable:
            return (f"Do not run these gains: the {name} loop is not stable.",)
    return (
        _limit_step(assessment),
        _direction_step(assessment),
        _locked_step(assessment),
        _spin_step(assessment),
        _duty_step(assessment),
    )


def first_current(assessment: Assessment) -> float:
    """The current of the first runs.

    Parameters
    ----------
    assessment : Assessment
        With gains in the current loop.

    Returns
    -------
    float
        A tenth of the limit, no more than the rated current, and no more than a step that the voltage limit would
        cut, ``V/(Kp + Ki Ts)`` [A, peak].
    """
    plant, machine = assessment.plant, assessment.sheet.rig.machine
    bounds = [FIRST_SHARE * plant.current_limit]
    if machine.rated_current is not None:
        bounds.append(machine.rated_current * current_size(machine))
    gains = assessment.current.gains
    if gains is not None:
        bounds.append(plant.voltage_limit / (gains.kp + gains.ki * assessment.sheet.rig.stage.current_period))
    return min(bounds)


def _limit_step(assessment: Assessment) -> str:
    limit, first = assessment.plant.current_limit, first_current(assessment)
    return (
        f"Low limit first: set the firmware's current limit to {_amperes(assessment, first)} instead of "
        f"{_amperes(assessment, limit)}. Uncouple or guard the load, and keep the emergency stop within reach."
    )


def _direction_step(assessment: Assessment) -> str:
    stage = assessment.sheet.rig.stage
    first = _amperes(assessment, first_current(assessment))
    if stage.speed_sensor is SpeedSensor.ENCODER and stage.encoder_counts is not None:
        seen = f"the position must count up, by {stage.encoder_counts} in one turn"
    else:
        seen = "the measured speed must be positive"
    text = f"Direction: with the power off, turn the shaft by hand in the positive direction; {seen}. "
    if assessment.plant.kind is not MachineKind.BRUSHED_DC:
        text += "Set and check the commutation offset; the rotor jumps as it aligns. "
    return f"{text}Then, the speed loop open, a current reference of at most {first} must turn the shaft the same way."


def _locked_step(assessment: Assessment) -> str:
    plant, step = assessment.plant, assessment.locked_step
    current = first_current(assessment)
    torque, longest = show(plant.torque * current, Dimension.TORQUE), show(_STALL_SECONDS, Dimension.TIME)
    text = (
        f"Current step: lock the rotor against {torque} and step the current reference from 0 to "
        f"{_amperes(assessment, current)}, for no longer than {longest}. "
    )
    if step is not None and step.rise_s is not None:
        over = "" if step.overshoot_percent is None else f" and an overshoot of {step.overshoot_percent:.1f} %"
        text += f"Expect a rise from 10 to 90 % in {show(step.rise_s, Dimension.TIME)}{over}, "
    else:
        text += "Expect a slow rise, "
    return (
        f"{text}and {_volts(assessment, plant.resistance * current)} at the end. "
        "If the rise or the voltage is far off, stop: a resistance, an inductance or a scaling is wrong."
    )


def _spin_step(assessment: Assessment) -> str:
    sheet, plant = assessment.sheet, assessment.plant
    machine = sheet.rig.machine
    speed = FIRST_SHARE * (abs(sheet.duty.reference_speed) or plant.voltage_limit / plant.back_emf)
    current = (machine.coulomb_friction + machine.viscous_friction * speed) / plant.torque
    voltage = plant.back_emf * speed + plant.resistance * current
    alone = machine.rotor_inertia + sheet.rig.train.coupling_inertia
    text = "No-load spin: "
    if plant.inertia > _SAME_INERTIA * alone:
        text += (
            f"the speed gains are for motor and load together, {plant.inertia / alone:.3g} times the inertia of the "
            "motor alone; with the load uncoupled divide both speed gains by that for this run. "
        )
    text += (
        f"Command {show(speed, Dimension.SPEED)}. Expect {_volts(assessment, voltage)} "
        f"and, from the friction in the sheet, {_amperes(assessment, current)}."
    )
    first = first_current(assessment)
    if current >= first:
        text += f" That is more than the low limit of {_amperes(assessment, first)}: raise it as far as needed."
    return text


def _duty_step(assessment: Assessment) -> str:
    limit = _amperes(assessment, assessment.plant.current_limit)
    if assessment.response is None:
        return (
            f"Duty: couple the load and raise the limit in steps towards {limit}. No response was computed for the "
            "duty of this sheet, so there is nothing to compare with: see the findings before it is run."
        )
    duty, figures = assessment.sheet.duty, assessment.response.figures
    text = (
        f"Duty: couple the load, put the assessed speed gains back, and raise the limit in steps to {limit}. With the "
        f"reference at {show(duty.reference_speed, Dimension.SPEED)}, expect at most "
        f"{_amperes(assessment, figures.peak_current_a)}"
    )
    if figures.overshoot_percent is not None:
        text += f", an overshoot of {figures.overshoot_percent:.1f} %"
    if figures.settling_time_s is not None:
        text += f", settling to 2 % in {show(figures.settling_time_s, Dimension.TIME)}"
    if figures.load_dip_rad_s is not None:
        step = show(abs(duty.load_step), Dimension.TORQUE)
        text += f", a dip of {show(figures.load_dip_rad_s, Dimension.SPEED)} under the load step of {step}"
        if figures.recovery_time_s is not None and figures.recovery_time_s > 0.0:
            text += f", back within 2 % after {show(figures.recovery_time_s, Dimension.TIME)}"
    text += "."
    moving = 0.5 * assessment.plant.inertia * duty.reference_speed**2
    if figures.returned_energy_j > _WORTH_SAYING * moving:
        energy = show(figures.returned_energy_j, Dimension.ENERGY)
        text += f" Braking gives {energy} back to the bus: see that it can take that."
    return text


def _amperes(assessment: Assessment, current: float) -> str:
    """A current in the ampere of the gains, said where the trade knows two."""
    peak = " peak" if assessment.plant.kind is MachineKind.PM_SINE else ""
    return f"{show(current, Dimension.CURRENT)}{peak}"


def _volts(assessment: Assessment, voltage: float) -> str:
    """A voltage in the volt of the gains, said likewise."""
    peak = " phase peak" if assessment.plant.kind is MachineKind.PM_SINE else ""
    return f"{show(voltage, Dimension.VOLTAGE)}{peak}"
