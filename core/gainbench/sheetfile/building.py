"""From the tables that were read to the model; keys that were left out leave the model's defaults in force."""

from __future__ import annotations

from typing import Any

from gainbench.model import (
    Aims,
    Duty,
    EvidenceLog,
    Firmware,
    HandGains,
    KeptTuning,
    LogColumn,
    LoopAims,
    Machine,
    SignalName,
    SpeedAims,
    Stage,
    Train,
)
from gainbench.sheetfile.rules import gain_has_period
from gainbench.sheetfile.tables import (
    CurrentGainsTable,
    CurrentLoopTable,
    DutyTable,
    EvidenceTable,
    FirmwareTable,
    KeptTable,
    MachineTable,
    SpeedGainsTable,
    SpeedLoopTable,
    StageTable,
    Table,
    TrainTable,
)
from gainbench.units import Dimension, unit_size

_GAIN_KEYS = frozenset(["kp", "ki", "ti", "wi"])


def _given(table: Table) -> dict[str, Any]:
    """The keys that the sheet holds, with their values."""
    return {key: getattr(table, key) for key in type(table).model_fields if key in table.model_fields_set}


def machine(table: MachineTable) -> Machine:
    """The machine of [machine]."""
    return Machine(**_given(table))


def train(table: TrainTable) -> Train:
    """The train of [train]."""
    return Train(**_given(table))


def stage(table: StageTable) -> Stage:
    """The stage of [stage]."""
    return Stage(**_given(table))


def duty(table: DutyTable) -> Duty:
    """The duty of [duty]."""
    return Duty(**_given(table))


def aims(current: CurrentLoopTable, speed: SpeedLoopTable, table: FirmwareTable) -> Aims:
    """Both loops' aims and the firmware."""
    return Aims(
        current=LoopAims(**_loop(current), hand=hand_gains(current, table)),
        speed=SpeedAims(**_loop(speed), hand=hand_gains(speed, table)),
        firmware=firmware(table),
    )


def _loop(table: CurrentLoopTable | SpeedLoopTable) -> dict[str, Any]:
    return {key: value for key, value in _given(table).items() if key not in _GAIN_KEYS}


def firmware(table: FirmwareTable) -> Firmware:
    """The firmware of [aims.firmware]."""
    given = _given(table)
    if table.speed_unit is not None:
        given["speed_unit_size"] = unit_size(table.speed_unit, Dimension.SPEED)
    return Firmware(**given)


def hand_gains(
    table: CurrentLoopTable | SpeedLoopTable | CurrentGainsTable | SpeedGainsTable, firmware: FirmwareTable
) -> HandGains | None:
    """Gains as typed; None where they are not complete, which is so only where they are not in use."""
    if table.kp is None or sum(value is not None for value in (table.ki, table.ti, table.wi)) != 1:
        return None
    return HandGains(
        kp=table.kp.value,
        ki=None if table.ki is None else table.ki.value,
        ti=table.ti,
        wi=table.wi,
        kp_is_torque=table.kp.torque,
        ki_is_torque=table.ki is not None and table.ki.torque,
        ki_has_period=table.ki is not None and gain_has_period(table.ki, firmware),
    )


def kept(table: KeptTable, firmware: FirmwareTable) -> KeptTuning | None:
    """One kept tuning; None where a rule on its gains is broken."""
    current, speed = hand_gains(table.current, firmware), hand_gains(table.speed, firmware)
    if current is None or speed is None:
        return None
    return KeptTuning(name=table.name, current=current, speed=speed, note=table.note)


def evidence(table: EvidenceTable) -> EvidenceLog:
    """One log of the sheet, its columns in the order of the format."""
    given = ((signal, getattr(table.columns, signal)) for signal in SignalName)
    columns = (
        LogColumn(signal=signal, column=one.column, unit=one.unit, scale=one.scale)
        for signal, one in given
        if one is not None
    )
    return EvidenceLog(log=table.log, experiment=table.experiment, columns=tuple(columns), note=table.note)
