"""Problems of a sheet in words: keys that are missing, unknown or refused, each with an example that is taken."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from difflib import get_close_matches

from gainbench.errors import SheetProblem
from gainbench.model import SIGNAL_DIMENSIONS, SignalName
from gainbench.sheetfile.entries import EntryError, shown
from gainbench.sheetfile.tables import ENTRIES, LISTS, entry_at

TOLERANCE_EXAMPLE = '"machine.resistance" = "10 %"'
MOST_OF_A_KIND = 100
"""A table with more faults than that is not read further."""

_INDEX = re.compile(r"\[\d+\]")
_EXAMPLES = {
    "format": "format = 1",
    "tolerance": TOLERANCE_EXAMPLE,
    "aims": "[aims.current]",
    "kept.current": 'current = { kp = "2.66 V/A", ki = "4681 V/(A*s)" }',
    "kept.speed": 'speed = { kp = "0.481 A*s/rad", ki = "57.6 A/rad" }',
    "evidence.columns": "[evidence.columns]",
}


def example_line(path: str) -> str:
    """A line that may stand in a sheet for a path: the key with a value, or the head of a table."""
    bare = _INDEX.sub("", path)
    if bare in _EXAMPLES:
        return _EXAMPLES[bare]
    if bare in LISTS:
        return f"[[{bare}]]"
    parts = bare.split(".")
    if parts[:2] == ["evidence", "columns"] and parts[2] in list(SignalName):
        unit = SIGNAL_DIMENSIONS[SignalName(parts[2])].unit
        if len(parts) == 3:
            return f'{parts[2]} = {{ column = "t", unit = "{unit}" }}'
        if parts[3] == "unit":
            return f'unit = "{unit}"'
    entry = entry_at(path)
    return f"{parts[-1]} = {entry.example}" if entry is not None else f"[{bare}]"


def missing(path: str, *, why: str = "") -> SheetProblem:
    """A required key or table that is not there."""
    reason = f"is missing; {why} needs it" if why else "is missing; it has no default"
    return SheetProblem(path=path, value="", reason=reason, example=example_line(path))


def example_of(path: str) -> str:
    """A value that is taken at a path, as TOML; empty where the format has none."""
    entry = entry_at(path)
    return entry.example if entry is not None else ""


def refused(path: str, value: object, error: EntryError) -> SheetProblem:
    """A value that its entry refused."""
    return SheetProblem(path=path, value=shown(value), reason=error.reason, example=error.example or example_of(path))


def not_a_table(path: str, value: object) -> SheetProblem:
    """A value where a table is meant."""
    return SheetProblem(path=path, value=shown(value), reason="must be a table", example=example_line(path))


def unknown_keys(path: str, data: Mapping[str, object], known: Sequence[str]) -> Iterator[SheetProblem]:
    """Every key of a table that is not in the format."""
    found = (key for key in data if key not in known)
    for key, _ in zip(found, range(MOST_OF_A_KIND), strict=False):
        yield unknown_key(path, key, data[key], known)


def unknown_key(path: str, key: str, value: object, known: Sequence[str]) -> SheetProblem:
    """A key that is not in the format, with what may have been meant."""
    prefix = f"{path}." if path else ""
    near = get_close_matches(key[:100], known, n=1)
    elsewhere = [entry for entry in ENTRIES if entry.rpartition(".")[2] == key]
    if elsewhere:
        hint, meant = f"; it belongs in [{elsewhere[0].rpartition('.')[0]}]", elsewhere[0]
    elif near:
        hint, meant = f"; {near[0]} is near", f"{prefix}{near[0]}"
    else:
        hint, meant = f"; known are {', '.join(known)}" if len(known) <= 10 else "", f"{prefix}{known[0]}"
    return SheetProblem(
        path=f"{prefix}{quoted_key(key)}",
        value=shown(value),
        reason=f"this key is not known{hint}",
        example=example_line(meant),
    )


def quoted_key(key: str) -> str:
    """A key as it may be printed in a path."""
    return key if key.replace("_", "").replace("-", "").isalnum() and key.isascii() and len(key) < 60 else shown(key)
