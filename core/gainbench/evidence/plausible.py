"""Estimates far off the sheet's values: which unit or scale would make such a difference, and what else to look at."""

from __future__ import annotations

import math
from collections.abc import Mapping

from gainbench.evidence.estimate import Estimate, EstimateName
from gainbench.model import MachineKind, Sheet
from gainbench.plant import Plant

_FAR = 5.0
"""Times that an estimate may be off the sheet's value without a word."""
_ALIKE = 2.0
"""Times that the sheet's values may be off each for one cause to explain all of them."""
_CAUSES: Mapping[str, tuple[float, float, float, float]] = {
    "the unit or scale of the time": (0.0, 1.0, 0.0, 1.0),
    "the unit or scale of the voltage (a duty or counts are no volts)": (1.0, 1.0, 1.0, 1.0),
    "the unit or scale of the current (counts are no amperes)": (-1.0, -1.0, 0.0, 1.0),
    "the unit or scale of speed or angle": (0.0, 0.0, -1.0, -2.0),
}
"""What a signal that is given too large by a factor does to R, L, Ke and J (with Kt from the same log), as powers."""
_TERMS = (
    (math.sqrt(2.0), "sqrt(2): amperes or volts as rms where peak is meant, or the other way round"),
    (math.sqrt(3.0), "sqrt(3): volts between two lines where those of a phase are meant, or the other way round"),
    (1.5, "1.5: a torque constant with the 3/2 of the three phases, or without it"),
    (math.sqrt(1.5), "sqrt(3/2): volts between two lines as rms where those of a phase as peak are meant, or the other"
                     " way round"),
)  # fmt: skip
_SAME_TERM = 0.04
"""Share by which a ratio may miss such a factor."""


def off_the_sheet(estimates: Mapping[EstimateName, Estimate], sheet: Sheet, plant: Plant) -> list[str]:
    """What is to be said of estimates that the sheet's values make hard to believe.

    Parameters
    ----------
    estimates : mapping
        From all logs, SI.
    sheet : Sheet
        That the logs belong to.
    plant : Plant
        The sheet's values at the motor shaft, SI.

    Returns
    -------
    list of str
    """
    believed = {
        EstimateName.RESISTANCE: plant.resistance,
        EstimateName.INDUCTANCE: plant.inductance,
        EstimateName.BACK_EMF_CONSTANT: plant.back_emf,
        EstimateName.INERTIA: plant.inertia,
    }
    ratios = {name: estimates[name].value / value for name, value in believed.items() if name in estimates}
    far = {name: ratio for name, ratio in ratios.items() if ratio > 0.0 and not 1.0 / _FAR < ratio < _FAR}
    words = []
    if far:
        listed = ", ".join(f"{name.words} {ratio:.3g} times" for name, ratio in far.items())
        cause = _cause(ratios)
        hint = f"{cause} would do that" if cause else "look at the units and scales of the columns"
        words.append(f"far off the sheet's values: {listed}; {hint}, where the sheet is about right")
    if sheet.rig.machine.kind is MachineKind.PM_SINE:
        words += _terms(ratios)
    return words


def _cause(ratios: Mapping[EstimateName, float]) -> str:
    """The one signal whose factor explains all ratios, empty where none does or more than one."""
    names = (
        EstimateName.RESISTANCE,
        EstimateName.INDUCTANCE,
        EstimateName.BACK_EMF_CONSTANT,
        EstimateName.INERTIA,
    )
    found = []
    for cause, powers in _CAUSES.items():
        pairs = [(math.log(ratios[name]), power) for name, power in zip(names, powers, strict=True) if name in ratios]
        squares = sum(power**2 for _, power in pairs)
        if len(pairs) < 2 or squares == 0.0:
            continue
        size = sum(ratio * power for ratio, power in pairs) / squares
        left = max(abs(ratio - size * power) for ratio, power in pairs)
        if left < math.log(_ALIKE):
            found.append(cause)
    return found[0] if len(found) == 1 else ""


def _terms(ratios: Mapping[EstimateName, float]) -> list[str]:
    """Whether a constant of a sine machine is off by what other terms of current and voltage make."""
    words = []
    for name in (EstimateName.BACK_EMF_CONSTANT, EstimateName.RESISTANCE):
        if name not in ratios:
            continue
        size = max(ratios[name], 1.0 / ratios[name])
        if name is EstimateName.RESISTANCE and EstimateName.BACK_EMF_CONSTANT in ratios:
            # A warm winding makes such factors; the constant is the surer sign.
            continue
        near = next((text for factor, text in _TERMS if abs(size / factor - 1.0) < _SAME_TERM), None)
        if near is not None:
            words.append(
                f"{name.words} {ratios[name]:.3g} times the sheet's, close to {near}. Logs of this machine hold the q"
                " axis as peak amperes and peak volts of a phase"
            )
    return words
