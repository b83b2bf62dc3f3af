"""[tolerance]: plus or minus of any quantity, by its dotted path."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from difflib import get_close_matches

from gainbench.errors import SheetProblem, UnitError
from gainbench.model import Rig, Tolerance
from gainbench.sheetfile.entries import Entry, EntryError, Gain, Number, Quantity, shown
from gainbench.sheetfile.problems import MOST_OF_A_KIND, TOLERANCE_EXAMPLE
from gainbench.sheetfile.tables import ENTRIES
from gainbench.units import Dimension, parse, parse_difference

_LARGEST = 1e15


def read_tolerances(raw: Mapping[str, object], rig: Rig | None, problems: list[SheetProblem]) -> tuple[Tolerance, ...]:
    """Read the table; what is refused goes to the problems.

    Parameters
    ----------
    raw : mapping
        Dotted paths and their plus or minus.
    rig : Rig, optional
        Where the nominal values are, to see that none of them can reach 0 that must stay above it.
    problems : list of SheetProblem
        Grows by what is refused.

    Returns
    -------
    tuple of Tolerance
        Those that are taken.
    """
    found: dict[str, Tolerance] = {}
    for path, value in _flat(raw):
        entry = ENTRIES.get(path)
        shown_path = f'tolerance."{path}"' if path.isascii() and path.isprintable() else f"tolerance.{shown(path)}"
        try:
            if not isinstance(entry, Quantity | Number | Gain):
                raise EntryError(_no_tolerance(path, entry), example=TOLERANCE_EXAMPLE)
            tolerance = _read(path, value, entry)
            _check_reach(tolerance, entry, rig)
            if path in found:
                raise EntryError("this path is given twice: keep one of them", example=TOLERANCE_EXAMPLE)
        except EntryError as error:
            problems.append(
                SheetProblem(path=shown_path, value=shown(value), reason=error.reason, example=error.example)
            )
            if len(problems) > MOST_OF_A_KIND:
                break
        else:
            found[path] = tolerance
    return tuple(found.values())


def _flat(raw: Mapping[str, object], prefix: str = "") -> Iterator[tuple[str, object]]:
    """Paths with their values; a path without quotes is a table within a table to TOML."""
    for key, value in raw.items():
        path = f"{prefix}{key}"
        if isinstance(value, Mapping) and value and path.count(".") < 3:
            yield from _flat(value, f"{path}.")
        else:
            yield path, value


def _no_tolerance(path: str, entry: Entry | None) -> str:
    if entry is not None:
        return "only a quantity has a tolerance, not a count, a word or a switch"
    near = get_close_matches(path[:100], [one for one in ENTRIES if isinstance(ENTRIES[one], Quantity | Number)], n=1)
    return f"there is no quantity of this path{f'; {near[0]} is near' if near else ''}"


def _read(path: str, value: object, entry: Quantity | Number | Gain) -> Tolerance:
    example = '"40 K"' if entry.dimension is Dimension.TEMPERATURE else '"10 %"'
    if isinstance(value, str) and value.rstrip().endswith("%"):
        try:
            relative = parse(value, Dimension.SHARE)
        except UnitError as error:
            raise EntryError(error.reason, example=example) from None
        if entry.dimension is Dimension.TEMPERATURE:
            raise EntryError("a share of a temperature has no meaning: write it in K", example=example)
        return Tolerance(path=path, relative=_bounded(relative, 1.0, "100 %"))
    if isinstance(value, int | float) and not isinstance(value, bool):
        if isinstance(entry, Quantity) and entry.dimension is not Dimension.SHARE:
            raise EntryError("a plain number has no unit: write it in quotes with its unit", example=example)
        return Tolerance(path=path, absolute=_bounded(value, _LARGEST, "1e15"))
    if not isinstance(value, str) or isinstance(entry, Number):
        raise EntryError("must be in percent or in the quantity's unit", example=example)
    dimensions = [unit.dimension for unit in entry.units] if isinstance(entry, Gain) else [entry.dimension]
    reason = ""
    for dimension in dimensions:
        try:
            absolute = parse_difference(value, dimension)
        except UnitError as error:
            reason = reason or error.reason
            continue
        return Tolerance(path=path, absolute=_bounded(absolute, _LARGEST, "1e15"))
    raise EntryError(reason, example=example)


def _bounded(number: float, high: float, words: str) -> float:
    if not abs(number) < math.inf:
        raise EntryError("the number must be finite", example='"10 %"')
    if number < 0.0:
        raise EntryError("must be at least 0: it is plus and minus", example='"10 %"')
    if number > high:
        raise EntryError(f"must be at most {words}", example='"10 %"')
    return float(number)


def _check_reach(tolerance: Tolerance, entry: Quantity | Number | Gain, rig: Rig | None) -> None:
    """Refuse a spread in which a quantity that must stay above 0 does not."""
    limits = entry.limits
    if limits.zero or limits.signed or limits.low <= 0.0:
        return
    room = tolerance.relative is not None and tolerance.relative >= 1.0
    if tolerance.absolute is not None and rig is not None:
        part, _, key = tolerance.path.partition(".")
        holder = {"machine": rig.machine, "train": rig.train, "stage": rig.stage}.get(part)
        nominal = getattr(holder, key, None) if holder is not None else None
        room = isinstance(nominal, float) and tolerance.absolute >= nominal
    if room:
        raise EntryError("reaches down to 0, and the quantity must stay above 0", example='"10 %"')
