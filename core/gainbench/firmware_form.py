"""Gains in the form that the firmware keeps them in, as ``[aims.firmware]`` of a sheet states it.

The library's gains are SI with peak amperes and Ki without the period. Firmware may keep Ti = Kp/Ki or Ki/Kp instead
of Ki, may keep Ki times the loop's period, may count speed in rpm, and may put out torque from its speed PI.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Literal

from gainbench.model import Firmware, GainForm, SpeedOutput
from gainbench.results import Gains

LoopName = Literal["current", "speed"]
"""Which of the two loops."""

_ONE_NAME = re.compile(r"[^\W\d_]+")
_RADIANS_PER_SECOND = "rad/s"


@dataclass(frozen=True, slots=True, kw_only=True)
class FirmwareGain:
    """One number that the firmware keeps."""

    name: str
    """``kp``, ``ki``, ``ti`` or ``wi``."""
    value: float | None
    """In ``unit``; None where the form has no finite number for these gains."""
    unit: str
    """As a sheet would take it, ``A/(rpm*s)``."""


def firmware_gains(
    loop: LoopName, gains: Gains | None, *, firmware: Firmware, period: float, torque_constant: float
) -> tuple[FirmwareGain, FirmwareGain]:
    """Write a loop's gains in the firmware's form.

    ``Ti = Kp/Ki``, ``wi = Ki/Kp``; Ki times the period where the firmware's Ki holds it. Speed gains count per
    firmware unit of speed, ``Kp u`` with ``u`` one such unit in rad/s, and times Kt where the PI puts out torque.

    Parameters
    ----------
    loop : str
        ``"current"`` or ``"speed"``.
    gains : Gains or None
        SI, peak amperes, Ki without the period. None gives the names and units without values.
    firmware : Firmware
        The form asked for.
    period : float
        Of the loop: Ts or Tw [s], > 0.
    torque_constant : float
        Kt at the motor shaft, per peak ampere [N m/A], > 0.

    Returns
    -------
    tuple of FirmwareGain
        The proportional number, then the one of the integral part. A value is None where there is no finite one:
        Ti of an integral gain of 0, Ti or Ki/Kp of a proportional gain of 0.

    Examples
    --------
    >>> from gainbench.model import Firmware
    >>> from gainbench.results import Gains
    >>> rpm = Firmware(speed_unit="rpm", speed_unit_size=0.10471975511965977)
    >>> kp, ki = firmware_gains("speed", Gains(kp=0.5, ki=60.0), firmware=rpm, period=5e-4, torque_constant=0.052)
    >>> kp.unit, ki.unit
    ('A/rpm', 'A/(rpm*s)')
    >>> round(kp.value, 6)
    0.05236
    """
    scale = 1.0
    if loop == "speed":
        scale = firmware.speed_unit_size
        if firmware.speed_output is SpeedOutput.TORQUE:
            scale *= torque_constant
    kp = FirmwareGain(
        name="kp",
        value=None if gains is None else gains.kp * scale,
        unit=_unit(loop, firmware, per_second=False),
    )
    if firmware.gain_form is GainForm.KP_TI:
        defined = gains is not None and gains.kp > 0.0 and gains.ki > 0.0
        return kp, FirmwareGain(name="ti", value=gains.kp / gains.ki if gains and defined else None, unit="s")
    if firmware.gain_form is GainForm.KP_WI:
        defined = gains is not None and gains.kp > 0.0
        return kp, FirmwareGain(name="wi", value=gains.ki / gains.kp if gains and defined else None, unit="rad/s")
    held = firmware.ki_includes_period
    ki = FirmwareGain(
        name="ki",
        value=None if gains is None else gains.ki * scale * (period if held else 1.0),
        unit=_unit(loop, firmware, per_second=not held),
    )
    return kp, ki


def is_si_form(loop: LoopName, firmware: Firmware) -> bool:
    """Whether the firmware's form is Kp and Ki in SI, without the period."""
    if firmware.gain_form is not GainForm.KP_KI or firmware.ki_includes_period:
        return False
    return loop == "current" or (firmware.speed_output is SpeedOutput.AMPERE and _is_radians(firmware.speed_unit))


def _is_radians(unit: str) -> bool:
    return unit.replace(" ", "") == _RADIANS_PER_SECOND


def _unit(loop: LoopName, firmware: Firmware, *, per_second: bool) -> str:
    """Unit of the proportional gain; of the integral gain without the period where ``per_second``."""
    if loop == "current":
        return "V/(A*s)" if per_second else "V/A"
    output, speed = firmware.speed_output.value, firmware.speed_unit.strip()
    if _is_radians(speed):
        return f"{output}/rad" if per_second else f"{output}*s/rad"
    if _ONE_NAME.fullmatch(speed):
        return f"{output}/({speed}*s)" if per_second else f"{output}/{speed}"
    return f"{output}/({speed})/s" if per_second else f"{output}/({speed})"
