"""The tables of a bench sheet, format 1: which keys there are, and what each of them may be.

Defaults are not in here: a key that is left out leaves the model's own default in force.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from typing import Annotated, Any, get_args, get_type_hints

from pydantic import BaseModel, ConfigDict

from gainbench.model import (
    CURRENT_METHODS,
    SPEED_METHODS,
    BackEmfValues,
    CurrentValues,
    DesignMethod,
    Experiment,
    GainForm,
    IntegratorRule,
    MachineKind,
    SpeedOutput,
    SpeedSensor,
    TrainKind,
    WindingValues,
    WindupRule,
)
from gainbench.sheetfile.entries import (
    Choice,
    Count,
    Entry,
    Flag,
    Gain,
    GainUnit,
    GainValue,
    Limits,
    Number,
    Quantity,
    Text,
    UnitName,
)
from gainbench.units import Dimension

_VOLTAGE = Quantity(dimension=Dimension.VOLTAGE, limits=Limits(low=1e-3, high=1e5))
_CURRENT = Quantity(dimension=Dimension.CURRENT, limits=Limits(low=1e-6, high=1e6))
_FRICTION = Limits(low=1e-15, high=1e9, zero=True)
_VISCOUS = Quantity(dimension=Dimension.VISCOUS_FRICTION, limits=_FRICTION)
_COULOMB = Quantity(dimension=Dimension.TORQUE, limits=_FRICTION)
_TORQUE = Quantity(dimension=Dimension.TORQUE, limits=Limits(low=1e-12, high=1e9, zero=True, signed=True))
_LOAD_INERTIA = Limits(low=1e-15, high=1e9, zero=True)
_FILTER = Quantity(dimension=Dimension.TIME, limits=Limits(low=1e-9, high=100.0, zero=True), sample="50 us")
_INSTANT = Quantity(dimension=Dimension.TIME, limits=Limits(low=1e-9, high=1e6, zero=True))
_RATE = Quantity(dimension=Dimension.RATE, limits=Limits(low=0.1, high=1e8))
_RAMP = Quantity(dimension=Dimension.ACCELERATION, limits=Limits(low=1e-6, high=1e12, zero=True))
_FREQUENCY = Quantity(dimension=Dimension.FREQUENCY, limits=Limits(low=1e-3, high=1e9))
_SHARE = Limits(low=1e-3, high=1.0)

_CURRENT_KP = Gain(units=(GainUnit(dimension=Dimension.CURRENT_KP),))
_CURRENT_KI = Gain(
    units=(GainUnit(dimension=Dimension.CURRENT_KI), GainUnit(dimension=Dimension.CURRENT_KP, period=True)),
)
_SPEED_KP = Gain(
    units=(
        GainUnit(dimension=Dimension.SPEED_KP),
        GainUnit(dimension=Dimension.VISCOUS_FRICTION, torque=True),
    )
)
_SPEED_KI = Gain(
    units=(
        GainUnit(dimension=Dimension.SPEED_KI),
        GainUnit(dimension=Dimension.STIFFNESS, torque=True),
        GainUnit(dimension=Dimension.SPEED_KP, period=True),
        GainUnit(dimension=Dimension.VISCOUS_FRICTION, torque=True, period=True),
    )
)
_TI = Quantity(dimension=Dimension.TIME, limits=Limits(low=1e-9, high=1e6), sample="0.5 ms")
_WI = Quantity(dimension=Dimension.FREQUENCY, limits=Limits(low=1e-9, high=1e9, zero=True), sample="1700 rad/s")


class Table(BaseModel):
    """A table; keys that it does not know are refused."""

    model_config = ConfigDict(extra="forbid", frozen=True)


class MachineTable(Table):
    """[machine]"""

    kind: Annotated[MachineKind, Choice(words=MachineKind)]
    resistance: Annotated[float, Quantity(dimension=Dimension.RESISTANCE, limits=Limits(low=1e-6, high=1e6))]
    inductance: Annotated[float, Quantity(dimension=Dimension.INDUCTANCE, limits=Limits(low=1e-9, high=1e4))]
    torque_constant: Annotated[
        float | None, Quantity(dimension=Dimension.TORQUE_CONSTANT, limits=Limits(low=1e-7, high=1e5))
    ] = None
    back_emf_constant: Annotated[
        float | None, Quantity(dimension=Dimension.BACK_EMF_CONSTANT, limits=Limits(low=1e-7, high=1e5))
    ] = None
    speed_constant: Annotated[
        float | None, Quantity(dimension=Dimension.SPEED_CONSTANT, limits=Limits(low=1e-5, high=1e7))
    ] = None
    rotor_inertia: Annotated[float, Quantity(dimension=Dimension.INERTIA, limits=Limits(low=1e-13, high=1e7))]
    viscous_friction: Annotated[float | None, _VISCOUS] = None
    coulomb_friction: Annotated[float | None, _COULOMB] = None
    winding_temperature: Annotated[
        float | None, Quantity(dimension=Dimension.TEMPERATURE, limits=Limits(low=-200.0, high=1000.0))
    ] = None
    rated_voltage: Annotated[float | None, _VOLTAGE] = None
    rated_current: Annotated[float | None, _CURRENT] = None
    peak_current: Annotated[float | None, _CURRENT] = None
    max_speed: Annotated[float | None, Quantity(dimension=Dimension.SPEED, limits=Limits(low=1e-6, high=1e7))] = None
    pole_pairs: Annotated[int | None, Count(low=1, high=1000, sample=4)] = None
    winding_values: Annotated[WindingValues | None, Choice(words=WindingValues)] = None
    current_values: Annotated[CurrentValues | None, Choice(words=CurrentValues)] = None
    back_emf_values: Annotated[BackEmfValues | None, Choice(words=BackEmfValues)] = None


class TrainTable(Table):
    """[train]"""

    kind: Annotated[TrainKind, Choice(words=TrainKind)]
    load_inertia: Annotated[float, Quantity(dimension=Dimension.INERTIA, limits=_LOAD_INERTIA, sample="3.6 kg*cm^2")]
    ratio: Annotated[float | None, Number(limits=Limits(low=1e-5, high=1e6), sample="3.0")] = None
    efficiency: Annotated[float | None, Quantity(dimension=Dimension.SHARE, limits=_SHARE)] = None
    coupling_inertia: Annotated[float | None, Quantity(dimension=Dimension.INERTIA, limits=_LOAD_INERTIA)] = None
    load_viscous_friction: Annotated[float | None, _VISCOUS] = None
    load_coulomb_friction: Annotated[float | None, _COULOMB] = None
    load_torque: Annotated[float | None, _TORQUE] = None
    shaft_stiffness: Annotated[
        float | None, Quantity(dimension=Dimension.STIFFNESS, limits=Limits(low=1e-9, high=1e12))
    ] = None
    shaft_damping: Annotated[
        float | None, Quantity(dimension=Dimension.VISCOUS_FRICTION, limits=_FRICTION, sample="9 mN*m*s/rad")
    ] = None


class StageTable(Table):
    """[stage]"""

    bus_voltage: Annotated[float, _VOLTAGE]
    current_limit: Annotated[float, _CURRENT]
    pwm_frequency: Annotated[float, _RATE]
    current_rate: Annotated[float, _RATE]
    speed_rate: Annotated[float, Quantity(dimension=Dimension.RATE, limits=_RATE.limits, sample="2 kHz")]
    speed_sensor: Annotated[SpeedSensor, Choice(words=SpeedSensor)]
    encoder_counts: Annotated[int | None, Count(low=1, high=2**40, sample=4096)] = None
    voltage_use: Annotated[float | None, Quantity(dimension=Dimension.SHARE, limits=_SHARE)] = None
    update_delay: Annotated[float | None, Number(limits=Limits(low=0.0, high=2.0))] = None
    current_filter: Annotated[float | None, _FILTER] = None
    speed_delay: Annotated[int | None, Count(low=0, high=10**9, sample=0)] = None
    speed_window: Annotated[int | None, Count(low=1, high=1000, sample=1)] = None
    speed_filter: Annotated[float | None, _FILTER] = None


class LoopTable(Table):
    """What both loops' aims share."""

    crossover: Annotated[float | None, _FREQUENCY] = None
    phase_margin: Annotated[
        float | None, Quantity(dimension=Dimension.ANGLE, limits=Limits(low=0.0, high=math.pi / 2))
    ] = None
    bandwidth: Annotated[float | None, _FREQUENCY] = None
    natural_frequency: Annotated[float | None, _FREQUENCY] = None
    damping: Annotated[float | None, Number(limits=Limits(low=1e-3, high=1e3), sample="0.7")] = None
    ti: Annotated[float | None, _TI] = None
    wi: Annotated[float | None, _WI] = None


class CurrentLoopTable(LoopTable):
    """[aims.current]"""

    method: Annotated[DesignMethod, Choice(words=CURRENT_METHODS)]
    kp: Annotated[GainValue | None, _CURRENT_KP] = None
    ki: Annotated[GainValue | None, _CURRENT_KI] = None


class SpeedLoopTable(LoopTable):
    """[aims.speed]"""

    method: Annotated[DesignMethod, Choice(words=SPEED_METHODS)]
    kp: Annotated[GainValue | None, _SPEED_KP] = None
    ki: Annotated[GainValue | None, _SPEED_KI] = None
    spread: Annotated[float | None, Number(limits=Limits(low=1.0, high=1e3, above=True), sample="2.0")] = None
    reference_weight: Annotated[
        float | None, Quantity(dimension=Dimension.SHARE, limits=Limits(low=0.0, high=1.0), sample="50 %")
    ] = None


class FirmwareTable(Table):
    """[aims.firmware]"""

    integrator: Annotated[IntegratorRule | None, Choice(words=IntegratorRule)] = None
    windup: Annotated[WindupRule | None, Choice(words=WindupRule)] = None
    back_emf_feedforward: Annotated[bool | None, Flag()] = None
    gain_form: Annotated[GainForm | None, Choice(words=GainForm)] = None
    ki_includes_period: Annotated[bool | None, Flag()] = None
    speed_unit: Annotated[str | None, UnitName(dimension=Dimension.SPEED, sample="rpm")] = None
    speed_output: Annotated[SpeedOutput | None, Choice(words=SpeedOutput)] = None


class DutyTable(Table):
    """[duty]"""

    reference_speed: Annotated[
        float, Quantity(dimension=Dimension.SPEED, limits=Limits(low=1e-9, high=1e7, zero=True, signed=True))
    ]
    length: Annotated[float, Quantity(dimension=Dimension.TIME, limits=Limits(low=1e-9, high=1e6), sample="450 ms")]
    reference_at: Annotated[float | None, _INSTANT] = None
    reference_ramp: Annotated[float | None, _RAMP] = None
    load_step: Annotated[float | None, _TORQUE] = None
    load_at: Annotated[float | None, _INSTANT] = None
    stop_at: Annotated[float | None, _INSTANT] = None
    stop_ramp: Annotated[float | None, _RAMP] = None


class CurrentGainsTable(Table):
    """current of [[kept]]"""

    kp: Annotated[GainValue, _CURRENT_KP]
    ki: Annotated[GainValue | None, _CURRENT_KI] = None
    ti: Annotated[float | None, _TI] = None
    wi: Annotated[float | None, _WI] = None


class SpeedGainsTable(Table):
    """speed of [[kept]]"""

    kp: Annotated[GainValue, _SPEED_KP]
    ki: Annotated[GainValue | None, _SPEED_KI] = None
    ti: Annotated[float | None, _TI] = None
    wi: Annotated[float | None, _WI] = None


class KeptTable(Table):
    """[[kept]]"""

    name: Annotated[str, Text(sample="first light", longest=100)]
    current: CurrentGainsTable
    speed: SpeedGainsTable
    note: Annotated[str, Text(sample="before the belt was changed", longest=2000, blank=True)] = ""


class ColumnTable(Table):
    """One signal of a log."""

    column: Annotated[str, Text(sample="t")]
    unit: Annotated[str, Text(sample="s", longest=40)]
    scale: Annotated[float, Number(limits=Limits(low=1e-15, high=1e15, signed=True))] = 1.0


class ColumnsTable(Table):
    """[evidence.columns]"""

    time: ColumnTable | None = None
    voltage: ColumnTable | None = None
    current: ColumnTable | None = None
    torque: ColumnTable | None = None
    speed: ColumnTable | None = None
    angle: ColumnTable | None = None
    speed_reference: ColumnTable | None = None
    current_reference: ColumnTable | None = None


class EvidenceTable(Table):
    """[[evidence]]"""

    log: Annotated[str, Text(sample="run-07.csv", longest=1000)]
    experiment: Annotated[Experiment, Choice(words=Experiment)]
    columns: ColumnsTable
    note: Annotated[str, Text(sample="second run", longest=2000, blank=True)] = ""


TITLE = Text(sample="Label unwinder")

TABLES: dict[str, type[Table]] = {
    "machine": MachineTable,
    "train": TrainTable,
    "stage": StageTable,
    "aims.current": CurrentLoopTable,
    "aims.speed": SpeedLoopTable,
    "aims.firmware": FirmwareTable,
    "duty": DutyTable,
}
"""The tables that hold single values, by their path."""

REQUIRED_TABLES: tuple[str, ...] = ("machine", "train", "stage", "aims.current", "aims.speed", "duty")


LISTS: dict[str, type[Table]] = {"kept": KeptTable, "evidence": EvidenceTable}
"""The tables that a sheet may hold many of."""


def _entries_of(table: type[Table], prefix: str) -> Iterator[tuple[str, Entry]]:
    for key, hint in get_type_hints(table, include_extras=True).items():
        marks: tuple[Any, ...] = getattr(hint, "__metadata__", ())
        for mark in marks:
            if isinstance(mark, Entry):
                yield f"{prefix}.{key}", mark
        for inner in (hint, *get_args(hint)):
            if isinstance(inner, type) and issubclass(inner, Table):
                yield from _entries_of(inner, f"{prefix}.{key}")


ENTRIES: dict[str, Entry] = {
    path: entry for holder, table in TABLES.items() for path, entry in _entries_of(table, holder)
}
"""Every single value of a sheet by its dotted path, and what it may be."""

_LISTED: dict[str, Entry] = {
    path: entry for holder, table in LISTS.items() for path, entry in _entries_of(table, holder)
}
_INDEX = re.compile(r"\[\d+\]")


def entry_at(path: str) -> Entry | None:
    """What the value at a path may be, ``kept[0].speed.kp`` included; None where the format has no such value."""
    if path == "title":
        return TITLE
    return ENTRIES.get(path) or _LISTED.get(_INDEX.sub("", path))
