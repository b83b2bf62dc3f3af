"""What holds between entries: keys that a kind, sensor or method needs, rates that divide, times that fit.

The rules on presence look at the plain TOML values, so that they speak even where a value is refused; the rules on
values look at tables that were read.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from gainbench.errors import SheetProblem, UnitError
from gainbench.model import MAX_TICKS, SIGNAL_DIMENSIONS, DesignMethod, MachineKind, SpeedSensor, TrainKind, WindupRule
from gainbench.sheetfile.entries import GainValue, shown
from gainbench.sheetfile.problems import example_line, example_of, missing
from gainbench.sheetfile.tables import (
    CurrentGainsTable,
    CurrentLoopTable,
    DutyTable,
    EvidenceTable,
    FirmwareTable,
    KeptTable,
    SpeedGainsTable,
    SpeedLoopTable,
    StageTable,
    TrainTable,
    entry_at,
)
from gainbench.units import unit_size

_RATE_ACCURACY = 1e-9
_TIME_ACCURACY = 1e-12

_METHOD_KEYS: dict[str, tuple[str, ...]] = {
    DesignMethod.CROSSOVER_MARGIN: ("crossover", "phase_margin"),
    DesignMethod.BANDWIDTH_MARGIN: ("bandwidth", "phase_margin"),
    DesignMethod.LAG_CANCELLATION: ("crossover",),
    DesignMethod.MAGNITUDE_OPTIMUM: (),
    DesignMethod.SYMMETRIC_OPTIMUM: ("spread",),
    DesignMethod.POLE_PLACEMENT: ("natural_frequency", "damping"),
    DesignMethod.BY_HAND: ("kp",),
}

Raw = Mapping[str, object]


def machine_presence(machine: Raw) -> Iterator[SheetProblem]:
    """Keys that the kind of machine needs."""
    kind = machine.get("kind")
    constants = ["torque_constant", "back_emf_constant"]
    if kind != MachineKind.PM_SINE:
        constants.append("speed_constant")
    if not any(key in machine for key in constants):
        names = " or ".join((", ".join(constants[:-1]), constants[-1]))
        yield SheetProblem(
            path="machine.torque_constant",
            value="",
            reason=f"is missing; give {names}"
            + (", a speed_constant is not used for pm-sine" if "speed_constant" in machine else ""),
            example=example_line("machine.torque_constant"),
        )
    needed: list[str] = []
    if kind in (MachineKind.PM_SINE, MachineKind.PM_BLOCK):
        needed += ["pole_pairs", "winding_values"]
    if kind == MachineKind.PM_SINE:
        needed.append("current_values")
        if "back_emf_constant" in machine:
            needed.append("back_emf_values")
    for key in needed:
        if key not in machine:
            yield missing(f"machine.{key}", why=f"kind {shown(kind)}")


def train_presence(train: Raw) -> Iterator[SheetProblem]:
    """Keys that an elastic train needs."""
    if train.get("kind") == TrainKind.ELASTIC:
        for key in ("shaft_stiffness", "shaft_damping"):
            if key not in train:
                yield missing(f"train.{key}", why='kind "elastic"')


def stage_presence(stage: Raw) -> Iterator[SheetProblem]:
    """Keys that the speed sensor needs."""
    if stage.get("speed_sensor") == SpeedSensor.ENCODER and "encoder_counts" not in stage:
        yield missing("stage.encoder_counts", why='speed_sensor "encoder"')


def loop_presence(path: str, loop: Raw) -> Iterator[SheetProblem]:
    """Keys that the design method needs."""
    method = loop.get("method")
    if not isinstance(method, str):
        return
    for key in _METHOD_KEYS.get(method, ()):
        if key not in loop and entry_at(f"{path}.{key}") is not None:
            yield missing(f"{path}.{key}", why=f"method {shown(method)}")
    if method == DesignMethod.BY_HAND:
        yield from one_integral(path, loop)


def one_integral(path: str, gains: Raw) -> Iterator[SheetProblem]:
    """Exactly one of ki, ti and wi."""
    given = [key for key in ("ki", "ti", "wi") if key in gains]
    if not given:
        yield SheetProblem(
            path=f"{path}.ki",
            value="",
            reason="is missing; give one of ki, ti and wi",
            example=example_line(f"{path}.ki"),
        )
    for key in given[1:]:
        yield SheetProblem(
            path=f"{path}.{key}",
            value=shown(gains[key]),
            reason=f"{given[0]} is given as well: give one of ki, ti and wi, and take the others out",
            example=f"{given[0]} = {shown(gains[given[0]])}",
        )


def train_values(train: TrainTable) -> Iterator[SheetProblem]:
    """An elastic train has a body behind its shaft."""
    if train.kind is TrainKind.ELASTIC and train.load_inertia == 0.0:
        yield SheetProblem(
            path="train.load_inertia",
            value="0",
            reason="must be above 0 behind an elastic shaft",
            example=example_of("train.load_inertia"),
        )


def stage_values(stage: StageTable, raw: Raw) -> Iterator[SheetProblem]:
    """Rates that divide, and a speed delay within its period."""
    ratio = stage.pwm_frequency / stage.current_rate
    if not (_whole(ratio) or abs(ratio - 0.5) <= 0.5 * _RATE_ACCURACY):
        yield SheetProblem(
            path="stage.current_rate",
            value=shown(raw["current_rate"]),
            reason="must be twice stage.pwm_frequency, equal to it, or it over a whole number",
            example=f'"{stage.pwm_frequency / max(1, round(ratio)):.12g} Hz"',
        )
    divisor = stage.current_rate / stage.speed_rate
    if not _whole(divisor):
        yield SheetProblem(
            path="stage.speed_rate",
            value=shown(raw["speed_rate"]),
            reason="must be stage.current_rate over a whole number",
            example=f'"{stage.current_rate / max(1, round(divisor)):.12g} Hz"',
        )
    elif stage.speed_delay is not None and stage.speed_delay >= round(divisor):
        yield SheetProblem(
            path="stage.speed_delay",
            value=shown(raw["speed_delay"]),
            reason=f"must be below current_rate/speed_rate, which is {round(divisor)}",
            example=str(round(divisor) - 1),
        )


def _whole(ratio: float) -> bool:
    return ratio > 0.5 and abs(ratio - round(ratio)) <= _RATE_ACCURACY * ratio


def duty_values(duty: DutyTable, stage: StageTable | None, raw: Raw) -> Iterator[SheetProblem]:
    """Times within the length, a stop after its reference, and a length that can be computed."""
    latest = duty.length * (1.0 + _TIME_ACCURACY)
    for key, instant in (("reference_at", duty.reference_at), ("load_at", duty.load_at), ("stop_at", duty.stop_at)):
        if instant is not None and instant > latest:
            yield SheetProblem(
                path=f"duty.{key}",
                value=shown(raw[key]),
                reason=f"is beyond duty.length, which is {shown(raw['length'])}",
                example=shown(raw["length"]),
            )
    start = duty.reference_at or 0.0
    if duty.stop_at is not None and duty.stop_at < start:
        yield SheetProblem(
            path="duty.stop_at",
            value=shown(raw["stop_at"]),
            reason=f"is before duty.reference_at, which is {shown(raw.get('reference_at', '0 s'))}",
            example=shown(raw["length"]),
        )
    if stage is None:
        return
    ticks = round(duty.length * stage.current_rate)
    if ticks > MAX_TICKS:
        yield SheetProblem(
            path="duty.length",
            value=shown(raw["length"]),
            reason=f"makes {ticks} ticks of the current loop, at most {MAX_TICKS} are computed: shorten it",
            example=f'"{MAX_TICKS / stage.current_rate:.6g} s"',
        )
    if ticks < 1:
        yield SheetProblem(
            path="duty.length",
            value=shown(raw["length"]),
            reason="is shorter than one period of the current loop",
            example=f'"{1000.0 / stage.current_rate:.6g} s"',
        )


def gain_values(
    path: str,
    gains: CurrentGainsTable | SpeedGainsTable | CurrentLoopTable | SpeedLoopTable,
    firmware: FirmwareTable | None,
    raw: Raw,
    *,
    used: bool,
) -> Iterator[SheetProblem]:
    """What gains by hand must keep: a ki that is Ki, and a kp that the other keys can stand on."""
    if firmware is not None and not firmware.ki_includes_period and gains.ki is not None and gains.ki.period:
        yield SheetProblem(
            path=f"{path}.ki",
            value=shown(raw["ki"]),
            reason="this unit is that of Ki times the loop's period, and aims.firmware.ki_includes_period is not true",
            example=example_of(f"{path}.ki"),
        )
    if not used or gains.kp is None or gains.kp.value != 0.0:
        return
    reason = ""
    if gains.ki is not None and gains.ki.value == 0.0:
        reason = "kp and ki must not both be 0"
    elif gains.ti is not None or gains.wi is not None:
        reason = f"must be above 0 where {'ti' if gains.ti is not None else 'wi'} is given: give ki instead"
    elif firmware is not None and firmware.windup is WindupRule.BACK_CALCULATION:
        reason = 'must be above 0 where aims.firmware.windup is "back-calculation"'
    if reason:
        yield SheetProblem(path=f"{path}.kp", value=shown(raw["kp"]), reason=reason, example=example_of(f"{path}.kp"))


def kept_values(kept: list[KeptTable | None]) -> Iterator[SheetProblem]:
    """Names on the shelf differ."""
    seen: dict[str, int] = {}
    for index, one in enumerate(kept):
        if one is None:
            continue
        name = one.name.strip()
        if name in seen:
            yield SheetProblem(
                path=f"kept[{index}].name",
                value=shown(one.name),
                reason=f"kept[{seen[name]}] has this name as well: each kept tuning needs a name of its own",
                example=f'"kept {index + 1}"',
            )
        seen.setdefault(name, index)


def evidence_values(index: int, evidence: EvidenceTable) -> Iterator[SheetProblem]:
    """Columns are in units of what they hold."""
    given = evidence.columns.model_fields_set
    if not given:
        yield SheetProblem(
            path=f"evidence[{index}].columns",
            value="{}",
            reason="names no signal",
            example=example_line(f"evidence[{index}].columns.time"),
        )
    for signal, dimension in SIGNAL_DIMENSIONS.items():
        column = getattr(evidence.columns, signal)
        if column is None:
            continue
        path = f"evidence[{index}].columns.{signal}"
        try:
            unit_size(column.unit, dimension)
        except UnitError as error:
            yield SheetProblem(
                path=f"{path}.unit", value=shown(column.unit), reason=error.reason, example=shown(dimension.unit)
            )


def gain_has_period(gain: GainValue, firmware: FirmwareTable) -> bool:
    """Whether a ki is Ki times the period: by its unit, or as a plain number in such a firmware."""
    return gain.period or (gain.plain and bool(firmware.ki_includes_period))
