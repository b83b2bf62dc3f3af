"""The estimates as rows of a table, each beside what the sheet has, in the unit that its user has it in."""

from __future__ import annotations

import contextlib
import math
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

from gainbench.errors import UnitError
from gainbench.evidence.accept import Typed, accept
from gainbench.evidence.estimate import Estimate, EstimateName, Identification
from gainbench.model import Rig, Sheet
from gainbench.plant import Plant, back_emf_candidates, refer, winding_size
from gainbench.units import Dimension, pretty, show, unit_size

_UNIT = re.compile(r"^\s*[-+]?[\d.,]+(?:[eE][-+]?\d+)?\s*(?P<unit>.*?)\s*$")
_DIGITS = 5
_SMALL, _LARGE = 1e-3, 1e5
"""Numbers beyond which the unit that the user has does not suit."""
_FINE = 4.0
"""Steps of the last digit within half of the bounds."""
_TINY = 1e-12
_MANY = 1000.0
"""Percent from which on a factor is told instead."""


@dataclass(frozen=True, slots=True, kw_only=True)
class EstimateRow:
    """One estimate, in words."""

    name: EstimateName
    words: str
    unit: str
    value: str
    fit: str
    """Bounds of 95 % of this fit."""
    runs: str
    """Bounds with the spread between runs."""
    linear: str
    """Of the regression that the fit started from; empty where there is none."""
    sheet: str
    """What the sheet has; empty where it has nothing of the kind."""
    difference: str
    """Of the estimate from the sheet; empty where there is nothing to compare with."""
    outside: bool
    """Whether the sheet's value lies beyond the bounds with the spread between runs."""
    target: str
    """What accepting it sets, for people."""
    refused: str
    """Why it cannot be accepted; empty where it can."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Kind:
    path: str
    dimension: Dimension
    own: Callable[[float], float]
    """From the terms of the equations to those of the sheet's entry."""
    believed: float | None
    """What the sheet makes of it, in the terms of the equations."""


def estimate_rows(sheet: Sheet, found: Identification, *, typed: Typed) -> tuple[EstimateRow, ...]:
    """Set out what was identified.

    Parameters
    ----------
    sheet : Sheet
        In force: what the estimates are compared with.
    found : Identification
        SI.
    typed : callable
        How the document spells an entry.

    Returns
    -------
    tuple of EstimateRow
        Windings and constants in the terms of the sheet's entries, inertia and frictions as totals at the motor shaft.
    """
    plant = refer(sheet.rig)
    rows = []
    for name, one in found.estimates.items():
        kind = _kind(name, sheet.rig, plant=plant)
        unit = _unit_of(typed(kind.path), kind, one)
        size = unit_size(unit, kind.dimension)
        write = _Writer(kind, size, one)
        linear = found.regression.get(name)
        believed = kind.believed
        values = accept(sheet, replace(found, estimates={name: one}), typed=typed).values
        set_ = [f"{path} = {text}" for path, text in values.items() if not path.startswith("evidence[")]
        rows.append(
            EstimateRow(
                name=name,
                words=name.words,
                unit=pretty(unit),
                value=write.number(one.value),
                fit=write.bounds(one.low, one.high),
                runs=write.bounds(one.run_low, one.run_high),
                linear=write.number(linear.value) if linear is not None else "",
                sheet=write.number(believed) if believed is not None else "",
                difference=_difference(kind, one.value, believed),
                outside=believed is not None and not one.run_low <= believed <= one.run_high,
                target="\n".join(set_),
                refused="" if set_ else _why_not(name),
            )
        )
    return tuple(rows)


class _Writer:
    """Writes values in one unit, with the digits that their bounds make worth showing."""

    def __init__(self, kind: _Kind, size: float, estimate: Estimate) -> None:
        self._kind, self._size = kind, size
        self._least = max(abs(self._in_unit(estimate.value)) * 10.0**-_DIGITS, _TINY)
        self._decimals = self._worth(estimate.low, estimate.high)

    def _in_unit(self, value: float) -> float:
        return self._kind.own(value) / self._size

    def _worth(self, low: float, high: float) -> int:
        """Decimals that are worth showing between two bounds."""
        half = 0.5 * abs(self._in_unit(high) - self._in_unit(low))
        return min(9, max(0, -math.floor(math.log10(max(half / _FINE, self._least)))))

    def number(self, value: float) -> str:
        return f"{self._in_unit(value):.{self._decimals}f}".replace("-", "\N{MINUS SIGN}")

    def bounds(self, low: float, high: float) -> str:
        first, last = sorted((self._in_unit(low), self._in_unit(high)))
        decimals = self._worth(low, high)
        texts = [f"{one:.{decimals}f}".replace("-", "\N{MINUS SIGN}") for one in (first, last)]
        return f"{texts[0]} \N{HORIZONTAL ELLIPSIS} {texts[1]}"


def _kind(name: EstimateName, rig: Rig, *, plant: Plant) -> _Kind:
    machine, train = rig.machine, rig.train
    winding = winding_size(machine)
    key, now = next(iter(back_emf_candidates(machine).items()))
    typed = getattr(machine, key)
    load = 0.5 * (1.0 / train.efficiency + train.efficiency) / train.ratio * train.load_torque
    one = EstimateName

    def constant(value: float) -> float:
        return float(typed * now / value if key == "speed_constant" else typed * value / now)

    same: Callable[[float], float] = float
    dimensions = {"torque_constant": Dimension.TORQUE_CONSTANT, "back_emf_constant": Dimension.BACK_EMF_CONSTANT}
    kinds: Mapping[EstimateName, tuple[str, Dimension, Callable[[float], float], float | None]] = {
        one.RESISTANCE: ("machine.resistance", Dimension.RESISTANCE, lambda v: v / winding, plant.resistance),
        one.INDUCTANCE: ("machine.inductance", Dimension.INDUCTANCE, lambda v: v / winding, plant.inductance),
        one.BACK_EMF_CONSTANT: (
            f"machine.{key}",
            dimensions.get(key, Dimension.SPEED_CONSTANT),
            constant,
            plant.back_emf,
        ),
        one.TORQUE_CONSTANT: ("machine.torque_constant", Dimension.TORQUE_CONSTANT, same, plant.torque),
        one.INERTIA: ("machine.rotor_inertia", Dimension.INERTIA, same, plant.inertia),
        one.VISCOUS_FRICTION: ("machine.viscous_friction", Dimension.VISCOUS_FRICTION, same, plant.viscous),
        one.COULOMB_FRICTION: ("machine.coulomb_friction", Dimension.TORQUE, same, plant.coulomb),
        one.TORQUE_OFFSET: ("machine.coulomb_friction", Dimension.TORQUE, same, load),
        one.VISCOUS_FRICTION_FORWARD: ("machine.viscous_friction", Dimension.VISCOUS_FRICTION, same, None),
        one.VISCOUS_FRICTION_BACKWARD: ("machine.viscous_friction", Dimension.VISCOUS_FRICTION, same, None),
        one.COULOMB_FRICTION_FORWARD: ("machine.coulomb_friction", Dimension.TORQUE, same, None),
        one.COULOMB_FRICTION_BACKWARD: ("machine.coulomb_friction", Dimension.TORQUE, same, None),
    }
    path, dimension, own, believed = kinds[name]
    return _Kind(path=path, dimension=dimension, own=own, believed=believed)


def _unit_of(before: str | None, kind: _Kind, estimate: Estimate) -> str:
    """The user's unit, unless the number would be unhandy in it."""
    match = _UNIT.match(before or "")
    value = abs(kind.own(estimate.value))
    if match is not None and match["unit"]:
        with contextlib.suppress(UnitError):
            if value == 0.0 or _SMALL <= value / unit_size(match["unit"], kind.dimension) < _LARGE:
                return match["unit"]
    return show(value, kind.dimension).partition(" ")[2] or kind.dimension.unit


def _difference(kind: _Kind, value: float, believed: float | None) -> str:
    if believed is None:
        return ""
    before, now = kind.own(believed), kind.own(value)
    if abs(before) < _TINY:
        return "from 0" if now != 0.0 else "0 %"
    percent = 100.0 * (now - before) / abs(before)
    if abs(percent) < 0.05:
        return "0 %"
    if abs(percent) > _MANY:
        return f"{now / before:.3g} times".replace("-", "\N{MINUS SIGN}")
    text = f"{percent:+.1f}" if abs(percent) < 99.95 else f"{percent:+.0f}"
    return f"{text} %".replace("-", "\N{MINUS SIGN}")


def _why_not(name: EstimateName) -> str:
    if name is EstimateName.TORQUE_CONSTANT:
        return "follows from the back-EMF constant"
    return "the sheet has one friction for both directions"
