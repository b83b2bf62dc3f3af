"""Reading logs: which form a file has, what its columns may hold, and a log out of the columns that are asked for.

Files are opened for reading only.
"""

from __future__ import annotations

import math
import stat
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Protocol

import numpy as np

from gainbench.errors import LogError, UnitError
from gainbench.evidence.cleaning import Scaled, clean
from gainbench.evidence.columns import BY_PLACE, FileColumn, Raw, find_column
from gainbench.evidence.guessing import COUNTED, ColumnGuess, counted_word, guess_column, spelled, suggested
from gainbench.evidence.log import Log
from gainbench.evidence.matlab import HDF5, MatlabTable
from gainbench.evidence.matlab import MAGIC as MATLAB
from gainbench.evidence.parquet import MAGIC as PARQUET
from gainbench.evidence.parquet import ParquetTable
from gainbench.evidence.text_layout import TextLayout
from gainbench.evidence.text_table import TextTable
from gainbench.evidence.told_rate import is_counter
from gainbench.model import SIGNAL_DIMENSIONS, LogColumn, SignalName
from gainbench.units import unit_size

_OTHER_FILES: tuple[tuple[bytes, str], ...] = (
    (b"PK\x03\x04", "a spreadsheet or a zip archive"),
    (b"\xd0\xcf\x11\xe0", "a spreadsheet"),
    (b"%PDF", "a PDF"),
    (b"\x89PNG", "a picture"),
    (b"\xff\xd8\xff", "a picture"),
    (b"\x1f\x8b", "a gzip archive"),
    (b"\x7fELF", "a program"),
    (b"MZ", "a program"),
)
_SAME = 1e-6
ROW = "row"
"""What the time may be mapped to where a file has no column of it: the number of the row."""
_LOOKED_AT = 1000
"""Stamps that tell whether they count samples."""
_MOST_SHOWN = 12
_OFF = 0.02
"""Share by which a period may differ from what the file says it is."""


class LogTable(Protocol):
    """A file whose columns are known and can be read."""

    columns: tuple[FileColumn, ...]
    rows: int | None
    period: float | None

    def load(self, places: Sequence[int], *, time: int | None) -> list[Raw]:
        """Read columns by their places, the one of the time without loss."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyedColumn:
    """One column of a file, with what it may hold."""

    name: str
    mapped_as: str
    """What a mapping calls it by: its name, or its place where another column has that name too."""
    others: tuple[str, ...]
    """What other header rows call it."""
    unit: str
    """As the file spells it; empty where it gives none."""
    first_values: tuple[str, ...]
    numeric: bool
    """Whether it holds numbers or stamps."""
    guess: ColumnGuess | None
    """None where nothing speaks for a signal."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LogSurvey:
    """What is in a file, before anything is read from it."""

    name: str
    form: str
    """``"text"``, ``"matlab"`` or ``"parquet"``."""
    columns: tuple[SurveyedColumn, ...]
    suggestion: tuple[LogColumn, ...]
    """A mapping to start from; the user corrects it."""
    layout: TextLayout | None
    """Of a text; None of other forms."""
    rows: int | None
    """None where counting them takes reading the file."""


def survey_log(path: str | Path) -> LogSurvey:
    """Look into a file without reading all of it.

    Parameters
    ----------
    path : str or Path
        The log.

    Returns
    -------
    LogSurvey
        Its columns with guesses, and its layout.

    Raises
    ------
    LogError
        If it is no log.
    """
    path = Path(path)
    table = _opened(path)
    columns = tuple(
        SurveyedColumn(
            name=one.name,
            mapped_as=_mapped_as(table.columns, place),
            others=one.others,
            unit=one.unit,
            first_values=one.first_values,
            numeric=one.numeric,
            guess=_guessed(one),
        )
        for place, one in enumerate(table.columns)
    )
    return LogSurvey(
        name=path.name,
        form={TextTable: "text", MatlabTable: "matlab"}.get(type(table), "parquet"),
        columns=columns,
        suggestion=suggested([one.mapped_as for one in columns], [one.guess for one in columns]),
        layout=table.layout if isinstance(table, TextTable) else None,
        rows=table.rows,
    )


def _mapped_as(columns: Sequence[FileColumn], place: int) -> str:
    wanted = columns[place].name
    alone = sum(wanted in {one.name, *one.others} for one in columns) == 1
    return wanted if alone else f"column {place + 1}"


def _guessed(column: FileColumn) -> ColumnGuess | None:
    if column.stamps:
        return ColumnGuess(signal=SignalName.TIME, unit="s")
    return guess_column(column.name, column.unit, others=column.others) if column.numeric else None


def read_log(path: str | Path, columns: Sequence[LogColumn]) -> Log:
    """Read the signals of a log.

    Parameters
    ----------
    path : str or Path
        csv, tsv and their like, .mat up to version 7, or .parquet; what it is is told by its content.
    columns : sequence of LogColumn
        Which columns hold which signals, the time among them.

    Returns
    -------
    Log
        In SI, time in order, every repair told in its remarks.

    Raises
    ------
    LogError
        If the file, the mapping or the signals cannot be used; the message names the file and the column.
    """
    path = Path(path)
    table = _opened(path)
    factors = _factors(columns, path.name, table)
    rows = [_is_row(one, table.columns) for one in columns]
    held = [one for one, counts in zip(columns, rows, strict=True) if not counts]
    places = [find_column(table.columns, one.column, name=path.name) for one in held]
    for place, one in zip(places, held, strict=True):
        _refuse_text(table.columns[place], one, path.name)
        _refuse_other_unit(table.columns[place], one, path.name)
    time = next((place for place, one in zip(places, held, strict=True) if one.signal is SignalName.TIME), None)
    try:
        raws = table.load(places, time=time)
    except OSError as error:
        raise LogError(f"{path.name}: cannot be read: {error.strerror or error}") from None
    if time is None:
        count = raws[0].values.size
        raws.insert(rows.index(True), Raw(values=np.arange(count), missing=np.zeros(count, dtype=np.bool_)))
    scaled = {
        one.signal: Scaled(raw=raw, column=one.column, factor=factor)
        for one, raw, factor in zip(columns, raws, factors, strict=True)
    }
    remarks = [_unit_remark(table.columns[place], one) for place, one in zip(places, held, strict=True)]
    stamps = scaled.pop(SignalName.TIME)
    remarks.append(_period_remark(stamps, table.period, name=path.name, counts=any(rows)))
    return clean(path.name, stamps, signals=scaled, remarks=tuple(remark for remark in remarks if remark))


def _is_row(one: LogColumn, columns: Sequence[FileColumn]) -> bool:
    """Whether a mapping asks for the number of the row."""
    if one.signal is not SignalName.TIME or one.column.strip().lower() != ROW:
        return False
    return not any(ROW in {name.strip().lower() for name in (own.name, *own.others)} for own in columns)


def _period_remark(stamps: Scaled, told: float | None, *, name: str, counts: bool) -> str:
    """See that a counter of samples was given its period, and that the time runs as the file says it does."""
    values = stamps.raw.values[:_LOOKED_AT]
    if stamps.raw.stamps or values.size < 2 or stamps.raw.missing[:_LOOKED_AT].any():
        return ""
    steps = np.diff(values)
    counter = bool(np.all(steps == 1))
    period = float(np.median(steps)) * stamps.factor
    off = told is not None and period > 0.0 and abs(period - told) > _OFF * told
    if counter and (counts or is_counter(stamps.column)) and (off or (told is None and stamps.factor == 1.0)):
        wanted = "its period, for example scale = 0.0001" if told is None else f"scale = {told:.6g}"
        said = "" if told is None else f", and the file says that samples are {told:.6g} s apart"
        raise LogError(
            f'{name}: column "{stamps.column}" counts samples{said}: the mapping takes one as {stamps.factor:.6g} s;'
            f' give time unit = "s" and {wanted}'
        )
    if off:
        return f"the file says that samples are {told:.6g} s apart, and by its column of time they are {period:.6g} s"
    return ""


def _mapping_hint(table: LogTable) -> str:
    """What the names of a file's columns suggest to map, in the words of a sheet."""
    names = [_mapped_as(table.columns, place) for place in range(len(table.columns))]
    found = suggested(names, [_guessed(one) for one in table.columns])
    if not found:
        shown = ", ".join(names[:_MOST_SHOWN]) + (" and more" if len(names) > _MOST_SHOWN else "")
        return f"; the file has {shown}, and what they hold does not follow from their names"
    listed = ", ".join(f'{one.signal} = {{ column = "{one.column}", unit = "{one.unit}" }}' for one in found)
    return f"; by their names: {listed}"


def _factors(columns: Sequence[LogColumn], name: str, table: LogTable) -> list[float]:
    """One of each column in SI."""
    signals = [one.signal for one in columns]
    if len(set(signals)) < len(signals):
        twice = next(signal for signal in signals if signals.count(signal) > 1)
        raise LogError(f"{name}: {twice} is mapped to more than one column; leave one of them")
    if SignalName.TIME not in signals:
        raise LogError(
            f'{name}: no column is mapped to time (for example time = {{ column = "t", unit = "s" }});'
            f' a sample counter will do, with the period as its scale, and where there is none column = "{ROW}" counts'
            f" the rows{_with_period(table.period)}{_mapping_hint(table)}"
        )
    if len(signals) < 2:
        raise LogError(
            f"{name}: no column but the time is mapped; map at least one signal"
            f' (for example current = {{ column = "i", unit = "A" }}){_mapping_hint(table)}'
        )
    return [_factor(one, name) for one in columns]


def _with_period(period: float | None) -> str:
    return "" if period is None else f', as the file says with unit = "s", scale = {period:.6g}'


def _factor(one: LogColumn, name: str) -> float:
    dimension = SIGNAL_DIMENSIONS[one.signal]
    try:
        factor = unit_size(one.unit, dimension) * one.scale
    except (UnitError, OverflowError) as error:
        raise LogError(f'{name}: unit "{one.unit}" of {one.signal} (column "{one.column}"): {error}') from None
    if not math.isfinite(factor) or factor == 0.0:
        raise LogError(f'{name}: scale {one.scale!r} of {one.signal} (column "{one.column}") must be finite and not 0')
    return factor


def _opened(path: Path) -> LogTable:
    """The file's table, by its content."""
    name = path.name or str(path)
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            raise LogError(f"{name}: this is a folder, a log is a file (for example run-07.csv)")
        if not stat.S_ISREG(status.st_mode):
            raise LogError(f"{name}: this is not a regular file")
        if status.st_size == 0:
            raise LogError(f"{name}: the file is empty; export the log again")
        with path.open("rb") as file:
            start = file.read(520)
        if start.startswith(PARQUET):
            return ParquetTable(path)
        if start.startswith((MATLAB, *HDF5)) or path.suffix.lower() == ".mat":
            return MatlabTable(path)
        for magic, what in _OTHER_FILES:
            if start.startswith(magic):
                raise LogError(f"{name}: not a log: this is {what}; export the log as csv, .mat or .parquet")
        return TextTable(path)
    except FileNotFoundError:
        raise LogError(f"{name}: there is no such file; check the path {str(path)!a}") from None
    except OSError as error:
        raise LogError(f"{name}: cannot be read: {error.strerror or error}") from None
    except ValueError:
        raise LogError(f"{name!a}: this is not the name of a file") from None


def _refuse_text(column: FileColumn, one: LogColumn, name: str) -> None:
    """See that a column holds what can be the signal: numbers, and stamps for the time alone."""
    shown = ", ".join(value for value in column.first_values[:3] if value)
    if not column.numeric:
        told = f"it starts with {shown}" if shown else "it is empty"
        stamps = "; stamps are read as 2024-05-03T12:34:56.789, 03.05.2024 12:34:56.789 or 12:34:56.789"
        raise LogError(
            f'{name}: column "{one.column}" ({one.signal}) holds no numbers: {told}; map another column'
            f"{stamps if one.signal is SignalName.TIME and shown else ''}"
        )
    if column.stamps and one.signal is not SignalName.TIME:
        raise LogError(f'{name}: column "{one.column}" holds time stamps ({shown}), {one.signal} is meant')
    if column.stamps and one.scale != 1.0:
        raise LogError(
            f'{name}: column "{one.column}" holds time stamps ({shown}), which take no scale; take the scale out'
        )


def _refuse_other_unit(column: FileColumn, one: LogColumn, name: str) -> None:
    """See that a unit without a scale is that of the file; a column that is named by its place is taken as mapped."""
    own = spelled(column.unit)
    if column.stamps or one.scale != 1.0 or BY_PLACE.fullmatch(one.column.strip()):
        return
    raw = column.unit if column.unit.strip().lower() in COUNTED else counted_word(column.name)
    if raw:
        raise LogError(
            f'{name}: column "{one.column}" ({one.signal}) holds {raw}, and the mapping takes one as {one.unit};'
            f" give it the scale that makes {one.unit} of it (for example scale = 0.01), or name it by its place, as in"
            ' "column 2", where the file\'s header is wrong'
        )
    if not own:
        return
    try:
        size = unit_size(own, SIGNAL_DIMENSIONS[one.signal])
    except UnitError:
        return
    if abs(unit_size(one.unit, SIGNAL_DIMENSIONS[one.signal]) - size) > _SAME * size:
        raise LogError(
            f'{name}: column "{one.column}" ({one.signal}) is in {column.unit} as the file says, and the mapping takes'
            f' it as {one.unit}; write unit = "{own}", or name the column by its place, as in "column 2", where the'
            " file's header is wrong"
        )


def _unit_remark(column: FileColumn, one: LogColumn) -> str:
    """What to say where the file's own unit is not the one of the mapping."""
    own = spelled(column.unit)
    if not own or column.stamps:
        return ""
    try:
        size = unit_size(own, SIGNAL_DIMENSIONS[one.signal])
    except UnitError:
        return f'{one.signal}: the file gives column "{one.column}" in {column.unit}, the mapping in {one.unit}'
    mapped = unit_size(one.unit, SIGNAL_DIMENSIONS[one.signal]) * abs(one.scale)
    if abs(mapped - size) <= _SAME * size:
        return ""
    told = one.unit if one.scale == 1.0 else f"{one.scale:g} {one.unit}"
    return f'{one.signal}: the file gives column "{one.column}" in {column.unit}, the mapping takes one as {told}'
