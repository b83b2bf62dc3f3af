"""Edits of a sheet's evidence: from one document to the next."""

from __future__ import annotations

from collections.abc import Collection, Sequence

from gainbench.model import EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.sheetfile import EntryValue, SheetDocument, add_evidence


def with_log(document: SheetDocument, evidence: EvidenceLog) -> SheetDocument:
    """One log more.

    Raises
    ------
    SheetError
        If the sheet refuses it.
    """
    return add_evidence(document, evidence)


def with_experiment(document: SheetDocument, index: int, experiment: Experiment) -> SheetDocument:
    """A log is of another experiment."""
    return document.with_value(f"evidence[{index}].experiment", experiment.value)


def with_columns(document: SheetDocument, index: int, columns: Sequence[LogColumn]) -> SheetDocument:
    """A log's columns hold other signals; entries that stay keep their spelling and comments.

    Raises
    ------
    SheetError
        If the sheet refuses them.
    """
    before = {one.signal: one for one in document.sheet.evidence[index].columns}
    after = {one.signal: one for one in columns}
    values: dict[str, EntryValue] = {}
    for signal in SignalName:
        old, new = before.get(signal), after.get(signal)
        path = f"evidence[{index}].columns.{signal.value}"
        if new is None:
            if old is not None:
                values[path] = None
            continue
        if old is None or old.column != new.column:
            values[f"{path}.column"] = new.column
        if old is None or old.unit != new.unit:
            values[f"{path}.unit"] = new.unit
        if (old.scale if old is not None else 1.0) != new.scale:
            values[f"{path}.scale"] = None if new.scale == 1.0 else new.scale
    # What comes first, so that there is always a signal while others go.
    ordered = sorted(values.items(), key=lambda one: one[1] is None)
    return document.with_values(dict(ordered))


def mapped(columns: Sequence[LogColumn], chosen: LogColumn, *, names: Collection[str]) -> list[LogColumn]:
    """A mapping with one column holding a signal; what held it, or what that column held before, goes.

    Parameters
    ----------
    columns : sequence of LogColumn
        The mapping before.
    chosen : LogColumn
        What the column is to hold.
    names : collection of str
        All names that the column goes by.
    """
    kept = [one for one in columns if one.signal is not chosen.signal and one.column not in names]
    return [*kept, chosen]


def unmapped(columns: Sequence[LogColumn], *, names: Collection[str]) -> list[LogColumn]:
    """A mapping in which the column of these names holds nothing."""
    return [one for one in columns if one.column not in names]
