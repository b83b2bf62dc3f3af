"""From estimates to entries of the sheet: values, tolerances, and a note of where they came from."""

from __future__ import annotations

import contextlib
import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

from gainbench.errors import UnitError
from gainbench.evidence.estimate import Estimate, EstimateName, Identification
from gainbench.model import Rig, Sheet
from gainbench.plant import back_emf_candidates, refer, winding_size
from gainbench.units import Dimension, format_quantity

_SHARP = 0.005
"""Tolerance below which a value is written with one digit more."""
_SMALL, _LARGE = 1e-3, 1e5
"""Numbers beyond which the unit that the user has no longer suits."""
_ACCEPTED = "accepted: "
"""In a log's note, before what came from it."""
_WIDEST = 0.99
"""Share above which a tolerance would reach zero."""
_UNIT = re.compile(r"^\s*[-+]?[\d.,]+(?:[eE][-+]?\d+)?\s*(?P<unit>.*?)\s*$")
_DIMENSIONS: Mapping[str, Dimension] = {
    "machine.resistance": Dimension.RESISTANCE,
    "machine.inductance": Dimension.INDUCTANCE,
    "machine.torque_constant": Dimension.TORQUE_CONSTANT,
    "machine.back_emf_constant": Dimension.BACK_EMF_CONSTANT,
    "machine.speed_constant": Dimension.SPEED_CONSTANT,
    "machine.rotor_inertia": Dimension.INERTIA,
    "machine.viscous_friction": Dimension.VISCOUS_FRICTION,
    "machine.coulomb_friction": Dimension.TORQUE,
    "train.load_inertia": Dimension.INERTIA,
    "train.load_viscous_friction": Dimension.VISCOUS_FRICTION,
    "train.load_coulomb_friction": Dimension.TORQUE,
    "train.load_torque": Dimension.TORQUE,
}


class Typed(Protocol):
    """What a sheet's document tells of how a value is spelled."""

    def __call__(self, path: str) -> str | None:
        """The entry as typed, None where there is none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Acceptance:
    """What to write into a sheet, in one edit that one undo takes back."""

    values: Mapping[str, str]
    """Entries by their path, tolerances and notes of the logs included, as they would be typed."""
    left_out: tuple[EstimateName, ...]
    """Estimates that a sheet has no entry for."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Entry:
    """One value for the sheet, in its own conventions, SI."""

    path: str
    value: float
    share: float
    """Tolerance, as a share of the value."""


def accept(sheet: Sheet, found: Identification, *, typed: Typed) -> Acceptance:
    """What accepting an identification changes in a sheet.

    Estimates are turned back into what the sheet speaks of: the winding between the points it names, the constant it
    uses, the load's part of the inertia at the load shaft. Frictions on both sides of the train are scaled alike.
    The tolerance is that of the run's bounds. Each log's note says what came from it.

    Parameters
    ----------
    sheet : Sheet
        With the evidence that was identified from.
    found : Identification
        SI.
    typed : callable
        How the document spells an entry: units stay as the user has them.

    Returns
    -------
    Acceptance
        For ``SheetDocument.with_values``.
    """
    estimates = found.estimates
    entries: list[_Entry] = []
    used: list[EstimateName] = []
    for name, estimate in estimates.items():
        own = _entries(sheet.rig, name, estimate)
        entries += own
        if own:
            used.append(name)
    values: dict[str, str] = {}
    for entry in entries:
        values[entry.path] = _spelled(entry, typed(entry.path))
        if 0.0 < entry.share <= _WIDEST:
            values[f'tolerance."{entry.path}"'] = f"{100.0 * entry.share:.2g} %"
    for index, log in enumerate(sheet.evidence):
        if used:
            head, _, before = log.note.partition(_ACCEPTED)
            taken = dict.fromkeys([*(one for one in before.split(", ") if one), *(name.words for name in used)])
            words = _ACCEPTED + ", ".join(taken)
            head = head.rstrip("; ")
            values[f"evidence[{index}].note"] = f"{head}; {words}" if head else words
    return Acceptance(values=values, left_out=tuple(name for name in estimates if name not in used))


def _share(estimate: Estimate) -> float:
    """Half of the run's bounds over the value."""
    size = abs(estimate.value)
    return 0.5 * (estimate.run_high - estimate.run_low) / size if size > 0.0 else 0.0


def _entries(rig: Rig, name: EstimateName, estimate: Estimate) -> list[_Entry]:
    machine, train = rig.machine, rig.train
    value, share = estimate.value, _share(estimate)
    winding = winding_size(machine)
    if name is EstimateName.RESISTANCE:
        return [_Entry(path="machine.resistance", value=value / winding, share=share)]
    if name is EstimateName.INDUCTANCE:
        return [_Entry(path="machine.inductance", value=value / winding, share=share)]
    if name is EstimateName.BACK_EMF_CONSTANT:
        return [_constant(rig, value, share)]
    if name is EstimateName.INERTIA:
        return _inertia(rig, value, share)
    if name is EstimateName.VISCOUS_FRICTION:
        load = train.load_viscous_friction / train.ratio**2
        return _both_sides(
            "viscous_friction", max(0.0, value), share, (machine.viscous_friction, load, train.load_viscous_friction)
        )
    if name is EstimateName.COULOMB_FRICTION:
        load = train.load_coulomb_friction / (train.ratio * train.efficiency)
        return _both_sides(
            "coulomb_friction", max(0.0, value), share, (machine.coulomb_friction, load, train.load_coulomb_friction)
        )
    if name is EstimateName.TORQUE_OFFSET:
        # As it brakes one way and drives the other, the efficiency acts both ways; the mean of both is the offset.
        reflected = 0.5 * (1.0 / train.efficiency + train.efficiency) / train.ratio
        return [_Entry(path="train.load_torque", value=value / reflected, share=share)]
    return []


def _constant(rig: Rig, back_emf: float, share: float) -> _Entry:
    """The constant that the sheet uses, in its own ampere and volt."""
    machine = rig.machine
    key, now = next(iter(back_emf_candidates(machine).items()))
    typed = getattr(machine, key)
    # Either way round: a speed constant is one over it.
    value = typed * now / back_emf if key == "speed_constant" else typed * back_emf / now
    return _Entry(path=f"machine.{key}", value=value, share=share)


def _inertia(rig: Rig, inertia: float, share: float) -> list[_Entry]:
    """What is more than the rotor is the load's; a motor without a load has it all."""
    machine, train = rig.machine, rig.train
    square = train.ratio**2
    own = machine.rotor_inertia + train.coupling_inertia
    if train.load_inertia > 0.0 and inertia > own:
        load = inertia - own
        return [_Entry(path="train.load_inertia", value=load * square, share=share * inertia / load)]
    rest = inertia - train.coupling_inertia - train.load_inertia / square
    if rest > 0.0:
        return [_Entry(path="machine.rotor_inertia", value=rest, share=share * inertia / rest)]
    plant = refer(rig)
    factor = inertia / plant.inertia
    return [
        _Entry(path="machine.rotor_inertia", value=machine.rotor_inertia * factor, share=share),
        _Entry(path="train.load_inertia", value=train.load_inertia * factor, share=share),
    ]


def _both_sides(key: str, value: float, share: float, sides: tuple[float, float, float]) -> list[_Entry]:
    """A friction on the motor's side, and on the load's where the sheet has some there: motor, reflected, load."""
    motor, reflected, load = sides
    if reflected <= 0.0:
        return [_Entry(path=f"machine.{key}", value=value, share=share)]
    factor = value / (motor + reflected)
    found = [_Entry(path=f"train.load_{key}", value=load * factor, share=share)]
    if motor > 0.0:
        found.append(_Entry(path=f"machine.{key}", value=motor * factor, share=share))
    return found


def _spelled(entry: _Entry, before: str | None) -> str:
    """A value in the unit that the user has it in."""
    dimension = _DIMENSIONS[entry.path]
    digits = 4 if entry.share >= _SHARP else 5
    match = _UNIT.match(before or "")
    if match is not None and match["unit"]:
        with contextlib.suppress(UnitError):
            text = format_quantity(entry.value, match["unit"], dimension, digits=digits)
            if entry.value == 0.0 or _SMALL <= abs(float(text.partition(" ")[0])) < _LARGE:
                return text
    return format_quantity(entry.value, dimension.unit, dimension, digits=digits)
