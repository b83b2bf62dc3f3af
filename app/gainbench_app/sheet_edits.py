"""Single values of a frozen sheet by their dotted path, and the unit they are written in."""

from __future__ import annotations

import re
from dataclasses import replace
from typing import Any

from gainbench.errors import UnitError
from gainbench.model import DesignMethod, HandGains, LoopAims, Sheet, SpeedAims
from gainbench.sheetfile import EntryValue
from gainbench.units import Dimension, format_quantity, unit_size

_NUMBER = re.compile(
    r"\s*[+\-\N{MINUS SIGN}]?(?:\d[\d_]*\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3}(?!\d))?[ \u00a0\u2009\u202f]*"
)
_GAIN_KEYS = frozenset(["kp", "ki", "ti", "wi"])
_GAIN_DIMENSIONS = {
    ("current", "kp"): (Dimension.CURRENT_KP,),
    ("current", "ki"): (Dimension.CURRENT_KI, Dimension.CURRENT_KP),
    ("speed", "kp"): (Dimension.SPEED_KP, Dimension.VISCOUS_FRICTION),
    ("speed", "ki"): (Dimension.SPEED_KI, Dimension.STIFFNESS, Dimension.SPEED_KP, Dimension.VISCOUS_FRICTION),
}
LIVE_DIGITS = 4
"""Significant digits of a value that a slider writes; more only where a step would be lost in them."""


def unit_of(text: str | None) -> str | None:
    """The unit of a quantity as typed, ``"kHz"``; empty for a plain number, None where there is no number."""
    match = _NUMBER.match(text) if text is not None else None
    return text[match.end() :].strip() if match is not None and text is not None else None


def written(value: float, dimension: Dimension, *, like: str | None, differs_from: str | None = None) -> EntryValue:
    """A value in the unit that the user typed.

    Parameters
    ----------
    value : float
        In ``dimension.unit``.
    dimension : Dimension
        What it is.
    like : str, optional
        The text whose unit is kept; without one the dimension's example lends its unit.
    differs_from : str, optional
        A text that the result must not repeat: a step smaller than the last digit gets more digits.

    Returns
    -------
    str or float
        ``"1.05 kHz"``; a float for a share or a gain that was typed as a plain number.
    """
    unit = unit_of(like)
    if unit is None:
        unit = unit_of(dimension.example) or ""
    plain = not unit and dimension is not Dimension.NUMBER
    for digits in range(LIVE_DIGITS, 10):
        text = f"{value:.{digits}g}" if plain else format_quantity(value, unit, dimension, digits=digits)
        if text != differs_from:
            break
    return float(text) if plain else text


def gain_dimension(path: str, text: str | None) -> Dimension:
    """Which of the dimensions that a gain is taken in its text is of; the gain's own where there is no unit."""
    loop, key = path.split(".")[-2:]
    own = _GAIN_DIMENSIONS[loop, key]
    unit = unit_of(text)
    for dimension in own if unit else ():
        try:
            unit_size(unit or "", dimension)
        except UnitError:
            continue
        return dimension
    return own[0]


def value_at(sheet: Sheet, path: str) -> float | None:
    """A number of the sheet, None where it has none."""
    holder, key = _holder(sheet, path)
    value = getattr(holder, key, None)
    return float(value) if isinstance(value, int | float) else None


def with_number(sheet: Sheet, path: str, value: float) -> Sheet:
    """The sheet with one number changed; the value must have been read as an entry of that path.

    Raises
    ------
    KeyError
        If the path is none of a single number.
    """
    table, _, key = path.rpartition(".")
    change: dict[str, Any] = {key: value}
    rig, aims = sheet.rig, sheet.aims
    if table == "machine":
        return replace(sheet, rig=replace(rig, machine=replace(rig.machine, **change)))
    if table == "train":
        return replace(sheet, rig=replace(rig, train=replace(rig.train, **change)))
    if table == "stage":
        return replace(sheet, rig=replace(rig, stage=replace(rig.stage, **change)))
    if table == "duty":
        return replace(sheet, duty=replace(sheet.duty, **change))
    if table == "aims.current":
        return replace(sheet, aims=replace(aims, current=_with_aim(aims.current, key, value)))
    if table == "aims.speed":
        speed = _with_aim(aims.speed, key, value)
        assert isinstance(speed, SpeedAims)
        return replace(sheet, aims=replace(aims, speed=speed))
    raise KeyError(path)


def _with_aim(aims: LoopAims, key: str, value: float) -> LoopAims:
    change: dict[str, Any] = {key: value}
    if key not in _GAIN_KEYS:
        return replace(aims, **change)
    if aims.hand is None:
        raise KeyError(key)
    return replace(aims, hand=replace(aims.hand, **change))


def _holder(sheet: Sheet, path: str) -> tuple[object, str]:
    table, _, key = path.rpartition(".")
    if key in _GAIN_KEYS:
        loop = loop_aims(sheet, table.rpartition(".")[2])
        return loop.hand, key
    holders: dict[str, object] = {
        "machine": sheet.rig.machine,
        "train": sheet.rig.train,
        "stage": sheet.rig.stage,
        "duty": sheet.duty,
        "aims.current": sheet.aims.current,
        "aims.speed": sheet.aims.speed,
        "aims.firmware": sheet.aims.firmware,
    }
    return holders.get(table), key


def loop_aims(sheet: Sheet, loop: str) -> LoopAims:
    """The aims of ``"current"`` or ``"speed"``."""
    return sheet.aims.current if loop == "current" else sheet.aims.speed


def integral_key(hand: HandGains | None) -> str:
    """Which of ki, ti and wi gains by hand are given with."""
    if hand is not None and hand.ti is not None:
        return "ti"
    if hand is not None and hand.wi is not None:
        return "wi"
    return "ki"


METHOD_KEYS: dict[DesignMethod, tuple[str, ...]] = {
    DesignMethod.CROSSOVER_MARGIN: ("crossover", "phase_margin"),
    DesignMethod.BANDWIDTH_MARGIN: ("bandwidth", "phase_margin"),
    DesignMethod.LAG_CANCELLATION: ("crossover",),
    DesignMethod.MAGNITUDE_OPTIMUM: (),
    DesignMethod.SYMMETRIC_OPTIMUM: ("spread",),
    DesignMethod.POLE_PLACEMENT: ("natural_frequency", "damping"),
    DesignMethod.BY_HAND: ("kp",),
}
"""What each method asks for; by hand also one of ki, ti and wi."""
