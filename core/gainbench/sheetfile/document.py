"""An open bench sheet: its text as the user keeps it, and the sheet that the text means.

A document never changes; an edit gives a new one, whose text keeps comments, order and the user's own spelling, and
which was read anew from that text, so that what is shown is what would be saved.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from pathlib import Path

from gainbench.errors import SheetError, SheetProblem
from gainbench.model import EvidenceLog, LogColumn, Sheet
from gainbench.results import Gains
from gainbench.sheetfile import editing
from gainbench.sheetfile.checking import check
from gainbench.sheetfile.reading import default_title, plain_values, read_text
from gainbench.units import Dimension, format_quantity

_MOST_SHOWN = 30

EntryValue = str | int | float | bool | None
"""What an entry can be set to: a text in the user's spelling, a number, a switch, or None to take it out."""


class SheetDocument:
    """A bench sheet's text and what it means; made by :func:`read_sheet` and :func:`parse_sheet`."""

    __slots__ = ("_data", "_name", "_sheet", "_text")

    def __init__(self, *, text: str, name: str, data: Mapping[str, object], sheet: Sheet) -> None:
        self._text = text
        self._name = name
        self._data = data
        self._sheet = sheet

    @property
    def sheet(self) -> Sheet:
        """What the text means, in SI."""
        return self._sheet

    @property
    def name(self) -> str:
        """The file's name, for messages."""
        return self._name

    def text(self) -> str:
        """The whole sheet as TOML, comments included."""
        return self._text

    def typed(self, path: str) -> str | None:
        """A value as the user spelled it.

        Parameters
        ----------
        path : str
            ``machine.resistance``, ``kept[0].speed.kp``, ``tolerance."machine.resistance"``.

        Returns
        -------
        str or None
            ``"0.60 ohm"`` without its quotes, ``"3.0"``; None where the sheet does not hold the key, or holds a table.
        """
        value = editing.look_up(self._data, editing.split_path(path))
        if value is None or isinstance(value, str):
            return value
        if isinstance(value, Mapping | list):
            return None
        return editing.spelling(self._text, path, value)

    def with_value(self, path: str, value: EntryValue) -> SheetDocument:
        """The document with one value set, added, or taken out with None; see :meth:`with_values`."""
        return self.with_values({path: value})

    def with_values(self, values: Mapping[str, EntryValue]) -> SheetDocument:
        """The document with some values set, added, or taken out with None.

        Parameters
        ----------
        values : mapping
            Paths as in :meth:`typed`, and what they become. A text is taken as typed into a box: without quotes
            for plain numbers and switches too.

        Returns
        -------
        SheetDocument
            A new document; this one stays as it is.

        Raises
        ------
        SheetError
            If the sheet would not be valid, or a path leads nowhere.
        """
        text = editing.with_values(self._text, values, name=self._name)
        return parse_sheet(text, self._name)

    def renamed(self, name: str) -> SheetDocument:
        """The same text under another file's name, which is the title of a sheet without one."""
        return parse_sheet(self._text, name)


def read_sheet(path: str | Path) -> SheetDocument:
    """Read a bench sheet.

    Parameters
    ----------
    path : str or Path
        The file, ``NAME.bench.toml``.

    Returns
    -------
    SheetDocument
        Its text and its meaning.

    Raises
    ------
    SheetError
        If it cannot be read or is refused; the message lists every problem.
    """
    path = Path(path)
    return parse_sheet(read_text(path), path.name)


def parse_sheet(text: str, name: str) -> SheetDocument:
    """Read a bench sheet from its text.

    Parameters
    ----------
    text : str
        The sheet as TOML.
    name : str
        The file's name: for messages, and the title where the sheet has none.

    Returns
    -------
    SheetDocument
        The text and its meaning.

    Raises
    ------
    SheetError
        If it is refused; the message lists every problem.
    """
    data = plain_values(text, name)
    sheet, problems = check(data, default_title=default_title(name))
    if sheet is None or problems:
        raise SheetError(_message(name, problems), problems=tuple(problems))
    return SheetDocument(text=text, name=name, data=data, sheet=sheet)


def _message(name: str, problems: Sequence[SheetProblem]) -> str:
    if len(problems) == 1:
        return f"{name}: {problems[0]}"
    lines = [f"{name}: {len(problems)} problems", *(f"  {problem}" for problem in problems[:_MOST_SHOWN])]
    if len(problems) > _MOST_SHOWN:
        lines.append(f"  and {len(problems) - _MOST_SHOWN} more")
    return "\n".join(lines)


def add_kept(document: SheetDocument, name: str, *, current: Gains, speed: Gains, note: str = "") -> SheetDocument:
    """Put a tuning on the shelf.

    Parameters
    ----------
    document : SheetDocument
        The sheet.
    name : str
        A name that no kept tuning has yet.
    current : Gains
        [V/A] and [V/(A s)], without the period.
    speed : Gains
        [A s/rad] and [A/rad], without the period.
    note : str
        A line of text; empty for none.

    Returns
    -------
    SheetDocument
        A new document with one more kept tuning; its gains are the same floats when read again.

    Raises
    ------
    SheetError
        If the name is taken or empty, or the gains are refused.
    """
    if not all(map(math.isfinite, (current.kp, current.ki, speed.kp, speed.ki))):
        raise SheetError(f"{document.name}: these gains cannot be kept: a number must be finite")
    entry: dict[str, object] = {
        "name": name,
        "current": {
            "kp": format_quantity(current.kp, "V/A", Dimension.CURRENT_KP),
            "ki": format_quantity(current.ki, "V/(A*s)", Dimension.CURRENT_KI),
        },
        "speed": {
            "kp": format_quantity(speed.kp, "A*s/rad", Dimension.SPEED_KP),
            "ki": format_quantity(speed.ki, "A/rad", Dimension.SPEED_KI),
        },
    }
    if note:
        entry["note"] = note
    text = editing.with_listed(document.text(), "kept", entry=entry, name=document.name)
    return parse_sheet(text, document.name)


def remove_kept(document: SheetDocument, name: str) -> SheetDocument:
    """Take a tuning off the shelf.

    Parameters
    ----------
    document : SheetDocument
        The sheet.
    name : str
        The kept tuning's name.

    Returns
    -------
    SheetDocument
        A new document without it.

    Raises
    ------
    SheetError
        If the shelf holds no tuning of that name.
    """
    names = [kept.name for kept in document.sheet.kept]
    if name not in names:
        raise SheetError(f'{document.name}: the shelf holds no tuning "{name}"')
    text = editing.without_listed(document.text(), "kept", index=names.index(name), name=document.name)
    return parse_sheet(text, document.name)


def move_kept(document: SheetDocument, name: str, *, to: int) -> SheetDocument:
    """Put a tuning at another place on the shelf.

    Parameters
    ----------
    document : SheetDocument
        The sheet.
    name : str
        The kept tuning's name.
    to : int
        Its new place, from 0.

    Returns
    -------
    SheetDocument
        A new document; every tuning keeps its spelling and comments.

    Raises
    ------
    SheetError
        If the shelf holds no tuning of that name, or has no such place.
    """
    names = [kept.name for kept in document.sheet.kept]
    if name not in names:
        raise SheetError(f'{document.name}: the shelf holds no tuning "{name}"')
    if not 0 <= to < len(names):
        raise SheetError(f"{document.name}: the shelf has no place {to + 1}; it has {len(names)}")
    text = editing.with_moved(document.text(), "kept", index=names.index(name), to=to, name=document.name)
    return parse_sheet(text, document.name)


def add_evidence(document: SheetDocument, evidence: EvidenceLog) -> SheetDocument:
    """Put a log with its mapping of columns into the sheet, behind those that are there.

    Parameters
    ----------
    document : SheetDocument
        The sheet.
    evidence : EvidenceLog
        The log's path relative to the sheet, its experiment and its columns.

    Returns
    -------
    SheetDocument
        A new document with one more log.

    Raises
    ------
    SheetError
        If the log is refused: no columns, or a unit that is not one of the signal.
    """
    if len({one.signal for one in evidence.columns}) < len(evidence.columns):
        raise SheetError(f"{document.name}: {evidence.log}: a signal is mapped to more than one column")
    entry: dict[str, object] = {"log": evidence.log, "experiment": evidence.experiment.value}
    if evidence.note:
        entry["note"] = evidence.note
    entry["columns"] = {one.signal.value: _column(one) for one in evidence.columns}
    text = editing.with_listed(document.text(), "evidence", entry=entry, inner=True, name=document.name)
    return parse_sheet(text, document.name)


def _column(one: LogColumn) -> dict[str, object]:
    scale: dict[str, object] = {} if one.scale == 1.0 else {"scale": one.scale}
    return {"column": one.column, "unit": one.unit} | scale


def remove_evidence(document: SheetDocument, index: int) -> SheetDocument:
    """Take a log out of the sheet; its file stays where it is.

    Parameters
    ----------
    document : SheetDocument
        The sheet.
    index : int
        Place of the log in ``document.sheet.evidence``, from 0.

    Returns
    -------
    SheetDocument
        A new document without it.

    Raises
    ------
    SheetError
        If the sheet holds no log at that place.
    """
    count = len(document.sheet.evidence)
    if not 0 <= index < count:
        raise SheetError(f"{document.name}: the sheet holds no log {index + 1}; it holds {count}")
    text = editing.without_listed(document.text(), "evidence", index=index, name=document.name)
    return parse_sheet(text, document.name)
