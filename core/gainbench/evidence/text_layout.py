"""How a text log is laid out: separator, decimal mark, comment lines, header rows, first row of data.

Nothing is taken for granted but that most of the rows hold numbers. Every pair of a separator and a decimal mark is
tried on a sample of the lines; the one under which the most fields are numbers, and the fewest are neither number nor
empty, is the one.
"""

from __future__ import annotations

import csv
import re
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from gainbench.errors import LogError
from gainbench.evidence.stamps import is_stamp
from gainbench.evidence.text_source import TextSample

BLANKS = " "
"""As a separator: any run of blanks."""
_SEPARATORS = ("\t", ";", ",", "|", BLANKS)
_COMMENTS = ("//", "#", "%", "!", "*")
_MOST_LINES = 250
_MOST_HEADER_ROWS = 5
_MOST_FIELDS = 2000
_MISSING = frozenset(
    [
        "",
        "nan",
        "+nan",
        "-nan",
        "na",
        "n/a",
        "#n/a",
        "null",
        "none",
        "nil",
        "-",
        "--",
        "---",
        "?",
        "inf",
        "+inf",
        "-inf",
        "infinity",
        "+infinity",
        "-infinity",
        "1.#inf",
        "-1.#inf",
        "1.#qnan",
        "-1.#ind",
    ]
)
"""What stands where a number is missing, in small letters."""
_NUMBER = {
    mark: re.compile(rf"[+-]?(?:\d+(?:{re.escape(mark)}\d*)?|{re.escape(mark)}\d+)(?:[eE][+-]?\d+)?", re.ASCII)
    for mark in ".,"
}
# A comma with nothing behind it ends a word, not a number.
_ENDS_IN_COMMA = re.compile(r",(?:[eE]|$)")
_GROUPED = {
    ".": re.compile(r"[+-]?\d{1,3}(?:,\d{3})+(?:\.\d+)?", re.ASCII),
    ",": re.compile(r"[+-]?\d{1,3}(?:\.\d{3})+(?:,\d+)?", re.ASCII),
}
"""Numbers with thousands separators, by their decimal mark."""
_BLANK_HEADER = re.compile(r"[^\s\[(]+(?:\s?(?:\[[^\]]*\]|\([^)]*\)))?")

Fields = tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class TextLayout:
    """The layout of a text log."""

    separator: str
    """One character; a space stands for any run of blanks."""
    decimal_mark: str
    comment: str
    """What a comment line starts with; empty where there are none."""
    quoted: bool
    """Whether fields may stand in double quotes."""
    padded: bool
    """Whether blanks stand behind numbers."""
    head_lines: int
    """Lines above the first row of data."""
    header: tuple[Fields, ...]
    """The rows that name the columns, from top to bottom; empty where there are none."""
    columns: int
    numbers: tuple[bool, ...]
    """Whether a column holds numbers."""
    stamps: tuple[bool, ...]
    """Whether a column holds calendar stamps or times of day."""
    first_rows: tuple[Fields, ...]
    """Up to five rows of data."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Trial:
    """One pair of separator and decimal mark on the sample."""

    separator: str
    mark: str
    quoted: bool
    rows: list[Fields]
    score: int
    columns: int


def find_layout(sample: TextSample, name: str) -> TextLayout:
    """Find out how a text log is laid out.

    Parameters
    ----------
    sample : TextSample
        Lines of it.
    name : str
        The file's name, for messages.

    Returns
    -------
    TextLayout
        The layout.

    Raises
    ------
    LogError
        If no rows of numbers are found, or the numbers cannot be told from their separators.
    """
    comment = _comment(sample)
    top = [_content(line, comment) for line in sample.lines]
    # What stands above the data must not outvote it.
    body = [line for line in top[len(top) // 3 :] if line.strip()][-_MOST_LINES:]
    body += [line for line in sample.later if _content(line, comment).strip()][-_MOST_LINES:]
    quoted = any(line.count('"') >= 2 for line in body)
    trials = [_trial(body, separator, mark=mark, quoted=quoted) for separator in _SEPARATORS for mark in ".,"]
    best = max((one for one in trials if one is not None), key=lambda one: one.score, default=None)
    if best is None or best.score <= 0:
        raise LogError(
            f"{name}: not a log: no rows of numbers are found in it; export the log as csv with one row a sample"
        )
    _refuse_grouped(best, name)
    numbers, stamps = _kinds(best)
    first = _first_row(top, best, numbers, stamps)
    if first is None:
        raise LogError(f"{name}: no usable columns: no row holds a number in each of its columns of numbers")
    _refuse_split_commas(top[:first], best, name)
    told = tuple(number or stamp for number, stamp in zip(numbers, stamps, strict=True))
    header = _header(sample.lines[:first], top, best, comment=comment, told=told)
    rows = [_fields(line, best.separator, quoted=quoted) for line in top[first : first + 50] if line.strip()]
    return TextLayout(
        separator=best.separator,
        decimal_mark=best.mark,
        comment=comment,
        quoted=quoted,
        padded=best.separator != BLANKS and any(re.search(r"\d\s+$", field) for row in best.rows for field in row),
        head_lines=first,
        header=header,
        columns=best.columns,
        numbers=numbers,
        stamps=stamps,
        first_rows=tuple(tuple(field.strip() for field in row) for row in rows[:5]),
    )


def _comment(sample: TextSample) -> str:
    """What comment lines start with, empty where there are none; a number with a sign is no comment."""
    starts = Counter(mark for line in sample.lines for mark in _COMMENTS if line.startswith(mark))
    return max(starts, key=lambda mark: starts[mark]) if starts else ""


def _content(line: str, comment: str) -> str:
    return "" if comment and line.startswith(comment) else line


def _fields(line: str, separator: str, *, quoted: bool) -> Fields:
    if separator == BLANKS:
        return tuple(line.split())
    if quoted and '"' in line:
        try:
            return tuple(next(csv.reader([line], delimiter=separator), ()))
        except csv.Error:
            return ()
    return tuple(line.split(separator))


def _is_number(field: str, mark: str) -> bool:
    text = field.strip()
    return _NUMBER[mark].fullmatch(text) is not None and _ENDS_IN_COMMA.search(text) is None


def _is_surely_grouped(field: str, mark: str) -> bool:
    """Whether it is a number with thousands separators, and could be no other number."""
    text = field.strip()
    return _GROUPED[mark].fullmatch(text) is not None and (mark in text or text.count("," if mark == "." else ".") > 1)


def _is_missing(field: str) -> bool:
    return field.strip().lower() in _MISSING


def _trial(body: Sequence[str], separator: str, *, mark: str, quoted: bool) -> _Trial | None:
    """What the sample looks like under one pair; None where the pair cannot be."""
    if separator == mark and not quoted:
        return None
    rows = [_fields(line, separator, quoted=quoted) for line in body]
    counts = Counter(len(row) for row in rows)
    if not counts:
        return None
    columns = max(counts, key=lambda count: (counts[count], count))
    rows = [row for row in rows if len(row) == columns]
    if not 0 < columns <= _MOST_FIELDS:
        return None
    score = 0
    for row in rows:
        for field in row:
            if _is_number(field, mark) or is_stamp(field) or _is_surely_grouped(field, mark):
                score += 2
            elif not _is_missing(field):
                score -= 2
    # A decimal point where nothing speaks for a comma.
    return _Trial(
        separator=separator, mark=mark, quoted=quoted, rows=rows, score=score + (mark == "."), columns=columns
    )


def _refuse_grouped(trial: _Trial, name: str) -> None:
    grouped = next(
        (
            field.strip()
            for row in trial.rows
            for field in row
            if _GROUPED[trial.mark].fullmatch(field.strip()) and not _is_number(field, trial.mark)
        ),
        None,
    )
    if grouped is not None:
        raise LogError(
            f"{name}: numbers with thousands separators, such as {grouped}, are not read; export the log without them"
        )


def _refuse_split_commas(above: Sequence[str], trial: _Trial, name: str) -> None:
    """See that commas between the fields are not decimal commas as well: then the header names too few columns."""
    line = next((line for line in reversed(above) if line.strip()), "")
    names = [field for field in _fields(line, ",", quoted=True) if field.strip()]
    if trial.separator != "," or len(names) < 2 or any(_is_number(field, ".") for field in names):
        return
    filled = max(sum(bool(field.strip()) for field in row) for row in trial.rows)
    if filled > len(names):
        raise LogError(
            f"{name}: the header names {len(names)} columns and the rows have {filled} fields: the commas are decimal"
            " commas and separators at once; export the log with semicolons or with decimal points"
        )


def _kinds(trial: _Trial) -> tuple[tuple[bool, ...], tuple[bool, ...]]:
    """Which columns hold numbers, and which hold stamps."""
    numbers, stamps = [], []
    for index in range(trial.columns):
        fields = [row[index] for row in trial.rows if not _is_missing(row[index])]
        numbers.append(_most(_is_number(field, trial.mark) for field in fields))
        stamps.append(_most(is_stamp(field) for field in fields))
    return tuple(numbers), tuple(stamps)


def _most(given: Iterable[bool]) -> bool:
    found = list(given)
    return sum(found) > 0.5 * len(found)


def _first_row(top: Sequence[str], trial: _Trial, numbers: Sequence[bool], stamps: Sequence[bool]) -> int | None:
    """The first line with a number or nothing in every column of numbers, and a number in one of them."""
    for index, line in enumerate(top):
        fields = _fields(line, trial.separator, quoted=trial.quoted)
        if len(fields) != trial.columns:
            continue
        told = [
            (_is_number(field, trial.mark) if number else is_stamp(field), _is_missing(field))
            for field, number, stamp in zip(fields, numbers, stamps, strict=True)
            if number or stamp
        ]
        if any(given for given, _ in told) and all(given or missing for given, missing in told):
            return index
    return None


def _header(
    above: Sequence[str], top: Sequence[str], trial: _Trial, *, comment: str, told: Sequence[bool]
) -> tuple[Fields, ...]:
    """The rows above the data that name its columns: those right above it with as many fields."""
    found: list[Fields] = []
    for line, content in zip(reversed(above), reversed(top[: len(above)]), strict=True):
        if not line.strip():
            continue
        text = line[len(comment) :].strip(comment) if not content.strip() else content
        fields = _header_fields(text, trial, told)
        if fields is None or len(found) == _MOST_HEADER_ROWS:
            break
        found.append(fields)
    return tuple(reversed(found))


def _header_fields(line: str, trial: _Trial, told: Sequence[bool]) -> Fields | None:
    """A header row cut into one field a column; None where it has not as many."""
    if trial.separator == BLANKS:
        for cut in (_BLANK_HEADER.findall(line), re.split(r"\s{2,}|\t", line.strip()), line.split()):
            if len(cut) == trial.columns:
                return tuple(cut)
        return None
    fields = [field.strip().strip('"').strip() for field in _fields(line, trial.separator, quoted=True)]
    while len(fields) > trial.columns and not fields[-1]:
        fields.pop()
    # Rows of data may end in a separator that the header has not; a row with a number above numbers names none.
    behind = told[len(fields) :]
    filled = sum(bool(field) for field in fields)
    if len(fields) > trial.columns or any(behind) or filled < 0.5 * sum(told):
        return None
    if any(_is_number(field, trial.mark) for field, numeric in zip(fields, told, strict=False) if numeric):
        return None
    return tuple(fields + [""] * len(behind))
