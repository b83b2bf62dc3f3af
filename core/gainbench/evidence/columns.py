"""Columns as a file holds them, whatever its form: names, first values, and raw numbers before any unit."""

from __future__ import annotations

import os
import re
from collections.abc import Sequence
from dataclasses import dataclass
from difflib import get_close_matches

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError

MOST_VALUES = 200_000_000
"""Numbers of one log that are held at once: rows times the columns that are asked for."""
_BYTES_A_VALUE = 32
"""What one number takes while a log is read: in the table, as an array, and in what is done to it."""
_SHARE_OF_MEMORY = 0.6
_MOST_NAMED = 12
BY_PLACE = re.compile(r"column ([1-9]\d{0,5})")


@dataclass(frozen=True, slots=True, kw_only=True)
class FileColumn:
    """One column of a file, before it is known what it holds."""

    name: str
    others: tuple[str, ...] = ()
    """What other header rows call it."""
    unit: str = ""
    """As the file spells it; empty where it gives none."""
    numeric: bool = True
    """Whether it holds numbers or stamps."""
    stamps: bool = False
    """Whether it holds calendar stamps or times of day."""
    first_values: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Raw:
    """Numbers of one column as they stand in the file."""

    values: NDArray[np.float64] | NDArray[np.int64]
    """Whole numbers only of stamps [ns] and of counters too long for a float; anything where one is missing."""
    missing: NDArray[np.bool_]
    """Where no number stands."""
    stamps: bool = False
    """Whether the values are nanoseconds."""


def find_column(columns: Sequence[FileColumn], wanted: str, *, name: str) -> int:
    """The place of a column by its header.

    Parameters
    ----------
    columns : sequence of FileColumn
        The file's.
    wanted : str
        Its header, one of its other names, or its place as ``column 3``.
    name : str
        The file's name, for messages.

    Returns
    -------
    int
        From 0.

    Raises
    ------
    LogError
        If no column or more than one is called so.
    """
    text = wanted.strip()
    for same in (str, str.casefold):
        found = [
            index
            for index, column in enumerate(columns)
            if same(text) in {same(other.strip()) for other in (column.name, *column.others)}
        ]
        if len(found) == 1:
            return found[0]
        if found:
            places = " and ".join(f'"column {index + 1}"' for index in found[:_MOST_NAMED])
            raise LogError(f'{name}: more than one column is called "{text}": name it by its place, {places}')
    place = BY_PLACE.fullmatch(text)
    if place is not None and int(place[1]) <= len(columns):
        return int(place[1]) - 1
    names = [column.name for column in columns if column.numeric]
    near = get_close_matches(text, [*names, *(other for column in columns for other in column.others)], n=1)
    hint = f"; {near[0]} is near" if near else ""
    more = f" and {len(names) - _MOST_NAMED} more" if len(names) > _MOST_NAMED else ""
    listed = ", ".join(names[:_MOST_NAMED]) + more or "none with numbers"
    raise LogError(f'{name}: there is no column "{text}"{hint}; the file has {listed}')


def refuse_too_large(rows: float, columns: int, *, name: str) -> None:
    """Refuse a log that would not fit into memory.

    Parameters
    ----------
    rows : float
        How many samples there are, at most, as a pure number.
    columns : int
        How many columns of them are asked for.
    name : str
        The file's name, for messages.

    Raises
    ------
    LogError
        If it holds more than can be held at once.
    """
    most = most_rows(columns)
    if rows > most:
        raise LogError(
            f"{name}: too large: about {rows:.3g} rows of {columns} columns, at most {most:.3g} are read here;"
            " cut the log to the part that matters, or record it at a lower rate behind an anti-alias filter"
        )


def most_rows(columns: int) -> int:
    """How many samples of so many columns can be held at once, for lack of memory or by the set limit."""
    values = min(float(MOST_VALUES), _SHARE_OF_MEMORY * _free_memory() / _BYTES_A_VALUE)
    return int(values) // max(1, columns)


def _free_memory() -> float:
    """Memory that is free [bytes]; without bound where the system does not tell."""
    try:
        with open("/proc/meminfo", encoding="ascii", errors="replace") as file:
            for line in file:
                if line.startswith("MemAvailable:"):
                    return 1024.0 * float(line.split()[1])
    except (OSError, ValueError, IndexError):
        pass
    try:
        return float(os.sysconf("SC_AVPHYS_PAGES")) * float(os.sysconf("SC_PAGE_SIZE"))
    except (AttributeError, ValueError, OSError):
        return float("inf")
