"""From plain TOML values to a sheet, or to every problem that they have."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import TypeVar

from pydantic import ValidationError

from gainbench.errors import SheetProblem
from gainbench.model import DesignMethod, EvidenceLog, Rig, Sheet, Tolerance
from gainbench.sheetfile import building, rules
from gainbench.sheetfile.entries import EntryError, shown
from gainbench.sheetfile.problems import (
    MOST_OF_A_KIND,
    missing,
    not_a_table,
    quoted_key,
    refused,
    unknown_key,
    unknown_keys,
)
from gainbench.sheetfile.tables import (
    REQUIRED_TABLES,
    TABLES,
    TITLE,
    ColumnsTable,
    ColumnTable,
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
from gainbench.sheetfile.tolerances import read_tolerances

FORMAT = 1
_TOP = ("format", "title", "machine", "train", "stage", "aims", "duty", "tolerance", "kept", "evidence")
_AIMS = ("current", "speed", "firmware")
_INNER: dict[str, type[Table]] = {
    "current": CurrentGainsTable,
    "speed": SpeedGainsTable,
    "columns": ColumnsTable,
}

_T = TypeVar("_T", bound=Table)
Raw = Mapping[str, object]


def check(data: Raw, *, default_title: str) -> tuple[Sheet | None, list[SheetProblem]]:
    """Read a sheet from plain TOML values.

    Parameters
    ----------
    data : mapping
        What the TOML reader gave.
    default_title : str
        The title where the sheet has none.

    Returns
    -------
    tuple
        The sheet, None if there are problems; and the problems.
    """
    problems = list(_format(data))
    if problems:
        return None, problems
    problems += unknown_keys("", data, _TOP)
    title = _title(data, default_title, problems)
    raw = _raw_tables(data, problems)
    machine = _table(MachineTable, "machine", raw, problems)
    train = _table(TrainTable, "train", raw, problems)
    stage = _table(StageTable, "stage", raw, problems)
    current = _table(CurrentLoopTable, "aims.current", raw, problems)
    speed = _table(SpeedLoopTable, "aims.speed", raw, problems)
    firmware = _table(FirmwareTable, "aims.firmware", raw, problems)
    duty = _table(DutyTable, "duty", raw, problems)
    problems += _presence(raw)
    if train is not None:
        problems += rules.train_values(train)
    if stage is not None:
        problems += rules.stage_values(stage, raw["stage"])
    if duty is not None:
        problems += rules.duty_values(duty, stage, raw["duty"])
    for path, loop in (("aims.current", current), ("aims.speed", speed)):
        if loop is not None:
            used = loop.method is DesignMethod.BY_HAND
            problems += rules.gain_values(path, loop, firmware, raw[path], used=used)
    kept = _kept(data, firmware, problems)
    evidence = _evidence(data, problems)
    rig = None
    if machine is not None and train is not None and stage is not None:
        rig = Rig(machine=building.machine(machine), train=building.train(train), stage=building.stage(stage))
    tolerances = _tolerances(data, rig, problems)
    if problems or rig is None or current is None or speed is None or firmware is None or duty is None:
        return None, problems
    tunings = (building.kept(one, firmware) for one in kept if one is not None)
    return (
        Sheet(
            title=title,
            rig=rig,
            aims=building.aims(current, speed, firmware),
            duty=building.duty(duty),
            tolerances=tolerances,
            kept=tuple(one for one in tunings if one is not None),
            evidence=evidence,
        ),
        [],
    )


def _format(data: Raw) -> Iterator[SheetProblem]:
    if "format" not in data:
        yield missing("format")
        return
    value = data["format"]
    if not isinstance(value, int) or isinstance(value, bool):
        yield SheetProblem(path="format", value=shown(value), reason="must be a whole number", example="format = 1")
    elif value != FORMAT:
        yield SheetProblem(
            path="format",
            value=shown(value),
            reason=f"this version reads format {FORMAT} only",
            example="format = 1",
        )


def _title(data: Raw, default: str, problems: list[SheetProblem]) -> str:
    if "title" not in data:
        return default
    try:
        return TITLE.read(data["title"])
    except EntryError as error:
        problems.append(refused("title", data["title"], error))
        return default


def _raw_tables(data: Raw, problems: list[SheetProblem]) -> dict[str, Raw]:
    """The tables of single values by their path, those that are there."""
    found: dict[str, Raw] = {}
    aims = data.get("aims", {})
    if isinstance(aims, Mapping):
        problems += unknown_keys("aims", aims, _AIMS)
    else:
        problems.append(not_a_table("aims", aims))
        aims = {}
    for path in TABLES:
        holder, _, key = path.rpartition(".")
        source: Raw = aims if holder else data
        if key in source:
            table = source[key]
            if isinstance(table, Mapping):
                found[path] = table
            else:
                problems.append(not_a_table(path, table))
        elif path in REQUIRED_TABLES and (not holder or isinstance(data.get("aims", {}), Mapping)):
            problems.append(missing(path))
    return found


def _table(kind: type[_T], path: str, raw: Mapping[str, Raw], problems: list[SheetProblem]) -> _T | None:
    if path not in raw:
        return kind.model_validate({}) if path not in REQUIRED_TABLES else None
    return _validated(kind, path, raw[path], problems)


def _validated(kind: type[_T], path: str, raw: object, problems: list[SheetProblem]) -> _T | None:
    """One table, or its problems in our words."""
    try:
        return kind.model_validate(raw)
    except ValidationError as error:
        for one in error.errors(include_url=False)[:MOST_OF_A_KIND]:
            problems.append(_translated(kind, path, one["type"], one["loc"], one["input"], one.get("ctx", {})))
        return None


def _translated(
    kind: type[Table], path: str, code: str, loc: tuple[int | str, ...], value: object, context: Mapping[str, object]
) -> SheetProblem:
    """A problem that pydantic found, as ours."""
    keys = [str(part) for part in loc]
    full = ".".join([path, *(quoted_key(key) for key in keys)])
    error = context.get("error")
    if isinstance(error, EntryError):
        return refused(full, value, error)
    if code == "extra_forbidden":
        holder = _holder(kind, keys[:-1])
        return unknown_key(".".join([path, *keys[:-1]]), keys[-1], value, list(holder.model_fields))
    if code == "missing":
        return missing(full)
    return not_a_table(full, value)


def _holder(kind: type[Table], keys: Sequence[str]) -> type[Table]:
    for key in keys:
        kind = ColumnTable if kind is ColumnsTable else _INNER.get(key, kind)
    return kind


def _presence(raw: Mapping[str, Raw]) -> Iterator[SheetProblem]:
    if "machine" in raw:
        yield from rules.machine_presence(raw["machine"])
    if "train" in raw:
        yield from rules.train_presence(raw["train"])
    if "stage" in raw:
        yield from rules.stage_presence(raw["stage"])
    for path in ("aims.current", "aims.speed"):
        if path in raw:
            yield from rules.loop_presence(path, raw[path])


def _list(data: Raw, key: str, problems: list[SheetProblem]) -> list[object]:
    value = data.get(key, [])
    if isinstance(value, list):
        return value
    problems.append(
        SheetProblem(path=key, value=shown(value), reason="must be tables in double brackets", example=f"[[{key}]]")
    )
    return []


def _kept(data: Raw, firmware: FirmwareTable | None, problems: list[SheetProblem]) -> list[KeptTable | None]:
    found: list[KeptTable | None] = []
    for index, raw in enumerate(_list(data, "kept", problems)):
        if len(problems) > MOST_OF_A_KIND:
            break
        path = f"kept[{index}]"
        table = _validated(KeptTable, path, raw, problems)
        found.append(table)
        for loop in ("current", "speed"):
            gains = raw.get(loop) if isinstance(raw, Mapping) else None
            if not isinstance(gains, Mapping):
                continue
            problems += rules.one_integral(f"{path}.{loop}", gains)
            if table is not None:
                problems += rules.gain_values(f"{path}.{loop}", getattr(table, loop), firmware, gains, used=True)
    problems += rules.kept_values(found)
    return found


def _evidence(data: Raw, problems: list[SheetProblem]) -> tuple[EvidenceLog, ...]:
    found: list[EvidenceLog] = []
    for index, raw in enumerate(_list(data, "evidence", problems)):
        if len(problems) > MOST_OF_A_KIND:
            break
        table = _validated(EvidenceTable, f"evidence[{index}]", raw, problems)
        if table is not None:
            problems += rules.evidence_values(index, table)
            found.append(building.evidence(table))
    return tuple(found)


def _tolerances(data: Raw, rig: Rig | None, problems: list[SheetProblem]) -> tuple[Tolerance, ...]:
    raw = data.get("tolerance", {})
    if not isinstance(raw, Mapping):
        problems.append(not_a_table("tolerance", raw))
        return ()
    return read_tolerances(raw, rig, problems)
