"""The macros of a header: everything that the assessed law used, each with unit, range and meaning."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from gainbench.errors import HandoverError
from gainbench.firmware_form import LoopName, firmware_gains, is_si_form
from gainbench.handover.literals import count_literal, float_literal
from gainbench.handover.names import unit_name
from gainbench.model import Firmware, GainForm, IntegratorRule, MachineKind, SpeedOutput, SpeedSensor, WindupRule
from gainbench.results import Gains

if TYPE_CHECKING:
    from gainbench.assess import Assessment

_NO_UNIT = "none"
_RULES = {
    IntegratorRule.BACKWARD: "s' = s + Ki T e, then u = p + s'",
    IntegratorRule.FORWARD: "u = p + s, then s' = s + Ki T e",
    IntegratorRule.TRAPEZOID: "s' = s + Ki T (e + e_old)/2, then u = p + s', e_old being the error of the tick before",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Symbol:
    """One macro, without its prefix."""

    name: str
    """``CURRENT_KP``."""
    literal: str
    """In C, ``2.66F``."""
    unit: str
    range: str
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Group:
    """Macros that belong together."""

    title: str
    symbols: tuple[Symbol, ...]


def groups(assessment: Assessment) -> tuple[Group, ...]:
    """All macros of an assessment's header.

    Parameters
    ----------
    assessment : Assessment
        With gains in both loops.

    Returns
    -------
    tuple of Group
        In the order of the header.

    Raises
    ------
    HandoverError
        If a loop has no gains, or a value does not fit its type.
    """
    current, speed = assessment.current.gains, assessment.speed.gains
    if current is None or speed is None:
        raise HandoverError("there are no gains to write")
    found = (
        Group(title="Rates and delays", symbols=tuple(_timing(assessment))),
        Group(title="Gains, SI", symbols=tuple(_gains(assessment, current, speed))),
        Group(title="Arithmetic of both PI controllers", symbols=tuple(_law(assessment, current, speed))),
        Group(title="Limits", symbols=tuple(_limits(assessment))),
        Group(title="Speed measurement", symbols=tuple(_sensor(assessment))),
        Group(title="The same gains in the form of this firmware", symbols=tuple(_forms(assessment, current, speed))),
    )
    return tuple(group for group in found if group.symbols)


def _real(name: str, value: float, unit: str, range_: str, meaning: str) -> Symbol:
    try:
        literal = float_literal(value)
    except HandoverError as error:
        raise HandoverError(f"{name}: {error}; nothing was written") from None
    return Symbol(name=name, literal=literal, unit=unit, range=range_, meaning=meaning)


def _count(name: str, value: int, unit: str, range_: str, meaning: str) -> Symbol:
    return Symbol(name=name, literal=count_literal(value), unit=unit, range=range_, meaning=meaning)


def _timing(assessment: Assessment) -> Iterator[Symbol]:
    stage = assessment.sheet.rig.stage
    yield _real("CURRENT_RATE_HZ", stage.current_rate, "Hz", "above 0", "Rate of the current loop, 1/Ts.")
    yield _real(
        "SPEED_RATE_HZ",
        stage.speed_rate,
        "Hz",
        "above 0, divides the rate of the current loop",
        f"Rate of the speed loop, 1/Tw: every tick in {stage.speed_divisor}.",
    )
    yield _real(
        "UPDATE_DELAY_PERIODS",
        stage.update_delay,
        "current periods",
        "0 to 2",
        "From the sampling of the current to the new voltage at the terminals; the margins hold for this delay only.",
    )
    yield _count(
        "SPEED_DELAY_TICKS",
        stage.speed_delay,
        "current periods",
        "0 to below current rate over speed rate",
        "From a speed tick to the tick at which its current reference acts.",
    )


def _gains(assessment: Assessment, current: Gains, speed: Gains) -> Iterator[Symbol]:
    stage = assessment.sheet.rig.stage
    ampere = _ampere(assessment)
    yield _real(
        "CURRENT_KP",
        current.kp,
        "V/A",
        "0 or more",
        f"Proportional gain of the current loop: volts{_volt(assessment)} per ampere{ampere}.",
    )
    yield _real(
        "CURRENT_KI_TS",
        current.ki * stage.current_period,
        "V/A",
        "0 or more",
        "Ki Ts, the integral gain of the current loop times its period: what is added per tick and ampere of error.",
    )
    yield _real(
        "SPEED_KP",
        speed.kp,
        "A s/rad",
        "0 or more",
        f"Proportional gain of the speed loop: amperes{ampere} of current reference per rad/s at the motor shaft.",
    )
    yield _real(
        "SPEED_KI_TS",
        speed.ki * stage.speed_period,
        "A s/rad",
        "0 or more",
        "Ki Tw, the integral gain of the speed loop times its own period Tw, that of SPEED_RATE_HZ.",
    )
    yield _real(
        "SPEED_REFERENCE_WEIGHT",
        assessment.sheet.aims.speed.reference_weight,
        _NO_UNIT,
        "0 to 1",
        "Weight b of the reference in the proportional part of the speed loop, p = Kp (b r - y); the integral part "
        "takes the full error. The current loop has 1.",
    )


def _law(assessment: Assessment, current: Gains, speed: Gains) -> Iterator[Symbol]:
    firmware, stage, plant = assessment.sheet.aims.firmware, assessment.sheet.rig.stage, assessment.plant
    yield _count(
        f"INTEGRATOR_{_word(firmware.integrator)}",
        1,
        _NO_UNIT,
        "always 1",
        f"The integrator: {_RULES[firmware.integrator]}. Here p is the proportional part, e = r - y, T the period.",
    )
    hold = firmware.windup is WindupRule.HOLD
    yield _count(
        f"WINDUP_{_word(firmware.windup)}",
        1,
        _NO_UNIT,
        "always 1",
        "Where the clamp acts and e u is above 0, u before the clamp, the integrator keeps the value it had before."
        if hold
        else "Each tick the integrator takes s' = s' + g (u_clamped - u) as well, with the gain g below; the speed "
        "loop is not told of the voltage clamp.",
    )
    if not hold:
        for loop, gains, period in (("CURRENT", current, stage.current_period), ("SPEED", speed, stage.speed_period)):
            yield _real(
                f"{loop}_WINDUP_GAIN",
                min(1.0, period * gains.ki / gains.kp),
                _NO_UNIT,
                "0 to 1",
                f"Gain g of the back-calculation in the {loop.lower()} loop, the smaller of 1 and Ki T/Kp.",
            )
    yield _count(
        "BACK_EMF_FEEDFORWARD",
        int(firmware.back_emf_feedforward),
        _NO_UNIT,
        "0 or 1",
        "1 where back-EMF constant times measured speed is added to the output of the current loop, before its clamp.",
    )
    yield _real(
        "BACK_EMF_V_S_PER_RAD",
        plant.back_emf,
        "V s/rad",
        "above 0",
        f"Back-EMF constant Ke at the motor shaft, volts{_volt(assessment)}; used where BACK_EMF_FEEDFORWARD is 1.",
    )


def _limits(assessment: Assessment) -> Iterator[Symbol]:
    plant, stage = assessment.plant, assessment.sheet.rig.stage
    sine = plant.kind is MachineKind.PM_SINE
    yield _real(
        "CURRENT_LIMIT_A",
        plant.current_limit,
        "A",
        "above 0",
        f"The current reference is clamped to plus and minus this, amperes{_ampere(assessment)}.",
    )
    yield _real(
        "VOLTAGE_LIMIT_V",
        plant.voltage_limit,
        "V",
        "above 0",
        (
            f"Largest phase peak at the bus of {stage.bus_voltage:g} V. The q axis is clamped to the root of this "
            "squared minus (POLE_PAIRS w INDUCTANCE_H i) squared, w the measured speed, i the current sample; to 0 "
            "where there is no root."
            if sine
            else f"The voltage is clamped to plus and minus this, at the bus of {stage.bus_voltage:g} V."
        ),
    )
    if sine:
        yield _count(
            "POLE_PAIRS", plant.pole_pairs, _NO_UNIT, "1 or more", "Pole pairs, electrical over mechanical angle."
        )
        yield _real("INDUCTANCE_H", plant.inductance, "H", "above 0", "Inductance of a phase, in the voltage limit.")


def _sensor(assessment: Assessment) -> Iterator[Symbol]:
    stage = assessment.sheet.rig.stage
    if stage.speed_sensor is SpeedSensor.ENCODER and stage.encoder_counts is not None:
        yield _count(
            "ENCODER_COUNTS",
            stage.encoder_counts,
            "counts per motor turn",
            "1 or more",
            "Resolution after edge multiplication.",
        )
        yield _count(
            "SPEED_WINDOW",
            stage.speed_window,
            "speed periods",
            "1 to 1000",
            "The speed is the difference of the angle over this many speed periods, divided by their time.",
        )
    yield _real(
        "SPEED_FILTER_GAIN",
        -math.expm1(-stage.speed_period / stage.speed_filter) if stage.speed_filter > 0.0 else 1.0,
        _NO_UNIT,
        "above 0 to 1",
        "Gain g of the low-pass on the measured speed, y = y + g (raw - y) at each speed tick; 1 is no filter.",
    )


def _forms(assessment: Assessment, current: Gains, speed: Gains) -> Iterator[Symbol]:
    firmware, stage, plant = assessment.sheet.aims.firmware, assessment.sheet.rig.stage, assessment.plant
    if firmware.speed_output is SpeedOutput.TORQUE:
        yield _real(
            "TORQUE_CONSTANT_N_M_PER_A",
            plant.torque,
            "N m/A",
            "above 0",
            f"Kt at the motor shaft, per ampere{_ampere(assessment)}: current reference = torque reference / Kt.",
        )
    loops: tuple[tuple[LoopName, Gains, float], ...] = (
        ("current", current, stage.current_period),
        ("speed", speed, stage.speed_period),
    )
    for loop, gains, period in loops:
        pair = firmware_gains(loop, gains, firmware=firmware, period=period, torque_constant=plant.torque)
        for one in pair:
            if one.value is None or _is_written(loop, one.name, firmware):
                continue
            held = "_TS" if one.name == "ki" and firmware.ki_includes_period else ""
            unit = unit_name(one.unit) or f"PER_SPEED_UNIT{'_S' if one.name == 'ki' and not held else ''}"
            yield _real(
                f"{loop.upper()}_{one.name.upper()}{held}_{unit}",
                one.value,
                one.unit.replace("*", " "),
                "0 or more",
                _form_meaning(loop, one.name, held=bool(held)),
            )


def _is_written(loop: LoopName, name: str, firmware: Firmware) -> bool:
    """Whether a number of the firmware's form stands among the SI gains already."""
    plain = Firmware(gain_form=GainForm.KP_KI, speed_unit=firmware.speed_unit, speed_output=firmware.speed_output)
    if not is_si_form(loop, plain):
        return False
    return name == "kp" or (name == "ki" and firmware.ki_includes_period)


def _form_meaning(loop: LoopName, name: str, *, held: bool) -> str:
    words = {
        "kp": "Proportional gain",
        "ki": "Ki times the loop's period" if held else "Ki, without the period",
        "ti": "Integral time Ti = Kp/Ki",
        "wi": "Corner of the integral part, Ki/Kp",
    }
    return f"{words[name]} of the {loop} loop."


def _word(rule: IntegratorRule | WindupRule) -> str:
    return rule.value.upper().replace("-", "_")


def _ampere(assessment: Assessment) -> str:
    """Which ampere is meant, where more than one could be."""
    return {
        MachineKind.PM_SINE: " (peak of the phase current, q axis)",
        MachineKind.PM_BLOCK: " (of the conducting pair)",
        MachineKind.BRUSHED_DC: "",
    }[assessment.plant.kind]


def _volt(assessment: Assessment) -> str:
    """Which volt is meant, likewise."""
    return {
        MachineKind.PM_SINE: " (peak of the phase voltage, q axis)",
        MachineKind.PM_BLOCK: " (of the conducting pair)",
        MachineKind.BRUSHED_DC: "",
    }[assessment.plant.kind]
