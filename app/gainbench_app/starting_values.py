"""What a newly chosen design method starts from: the loop as it is, said in the method's own terms."""

from __future__ import annotations

import math

from gainbench.model import DesignMethod, Sheet
from gainbench.plant import Plant
from gainbench.results import Gains, LoopAssessment
from gainbench.sheetfile import EntryValue
from gainbench.units import Dimension, format_quantity
from gainbench_app.sheet_edits import LIVE_DIGITS, METHOD_KEYS, loop_aims

_GAIN_DIGITS = 5
"""Enough that no figure moves in the digits shown, and few enough for a box."""
_DEFAULT_MARGIN = math.radians(60.0)
_DEFAULT_DAMPING = 1.0 / math.sqrt(2.0)
_DEFAULT_SPREAD = 2.0
"""C. Kessler's symmetric optimum, 1958 (common practice)."""


def starting_values(
    sheet: Sheet, loop: str, *, plant: Plant, assessed: LoopAssessment, method: DesignMethod
) -> dict[str, EntryValue]:
    """Texts for the keys that a method needs and the sheet does not hold.

    Gains by hand are the gains in force; pole placement is said by the poles that these gains stand for
    (``w0^2 = Ki/L``, ``2 z w0 L = Kp + R``, for speed with J/Kt and b/Kt); frequencies and margins are the figures
    of the loop as it is. Where there are none, a twentieth of the loop's rate, 60 degrees and a damping of 0.71.

    Parameters
    ----------
    sheet : Sheet
        In force.
    loop : str
        ``"current"`` or ``"speed"``.
    plant : Plant
        Of that sheet.
    assessed : LoopAssessment
        Of that loop.
    method : DesignMethod
        The method to come.

    Returns
    -------
    dict
        Dotted paths and texts.
    """
    aims = loop_aims(sheet, loop)
    path = f"aims.{loop}"
    if method is DesignMethod.BY_HAND:
        return {} if aims.hand is not None else gains_by_hand(loop, assessed.gains)
    values = _values(sheet, loop, plant=plant, assessed=assessed)
    return {f"{path}.{key}": _text(key, values[key]) for key in METHOD_KEYS[method] if getattr(aims, key) is None}


def _values(sheet: Sheet, loop: str, *, plant: Plant, assessed: LoopAssessment) -> dict[str, float]:
    stage, figures, gains = sheet.rig.stage, assessed.figures, assessed.gains
    rate = stage.current_rate if loop == "current" else stage.speed_rate
    crossover = math.tau * rate / 20.0
    margin = _DEFAULT_MARGIN
    if figures is not None and figures.crossover_hz is not None:
        crossover = math.tau * figures.crossover_hz
    if figures is not None and figures.phase_margin_deg is not None:
        margin = math.radians(min(max(figures.phase_margin_deg, 1.0), 89.0))
    bandwidth = 1.5 * crossover
    if figures is not None and figures.bandwidth_hz is not None:
        bandwidth = math.tau * figures.bandwidth_hz
    store, loss = (plant.inductance, plant.resistance)
    if loop == "speed":
        store, loss = plant.inertia / plant.torque, plant.viscous / plant.torque
    natural, damping = crossover, _DEFAULT_DAMPING
    if gains is not None and gains.ki > 0.0:
        natural = math.sqrt(gains.ki / store)
        damping = (gains.kp + loss) / (2.0 * natural * store)
    return {
        "crossover": crossover,
        "phase_margin": margin,
        "bandwidth": bandwidth,
        "natural_frequency": natural,
        "damping": damping,
        "spread": _DEFAULT_SPREAD,
    }


def _text(key: str, value: float) -> EntryValue:
    if key in {"damping", "spread"}:
        return f"{value:.{LIVE_DIGITS}g}"
    if key == "phase_margin":
        return format_quantity(value, "deg", Dimension.ANGLE, digits=LIVE_DIGITS)
    unit = "kHz" if value >= math.tau * 1000.0 else "Hz"
    return format_quantity(value, unit, Dimension.FREQUENCY, digits=LIVE_DIGITS)


def gains_by_hand(loop: str, gains: Gains | None) -> dict[str, EntryValue]:
    """Gains as texts for the keys of a loop by hand.

    Parameters
    ----------
    loop : str
        ``"current"`` or ``"speed"``.
    gains : Gains or None
        SI; without any there is nothing to write.

    Returns
    -------
    dict
        Dotted paths and texts; ti and wi go, since a sheet holds one of the three.
    """
    path = f"aims.{loop}"
    if gains is None:
        return {}
    if loop == "current":
        kp = format_quantity(gains.kp, "V/A", Dimension.CURRENT_KP, digits=_GAIN_DIGITS)
        ki = format_quantity(gains.ki, "V/(A*s)", Dimension.CURRENT_KI, digits=_GAIN_DIGITS)
    else:
        kp = format_quantity(gains.kp, "A*s/rad", Dimension.SPEED_KP, digits=_GAIN_DIGITS)
        ki = format_quantity(gains.ki, "A/rad", Dimension.SPEED_KI, digits=_GAIN_DIGITS)
    return {f"{path}.kp": kp, f"{path}.ki": ki, f"{path}.ti": None, f"{path}.wi": None}
