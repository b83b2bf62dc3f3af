"""Edits of the shelf in the sheet: each is one change of its text, and one step of undo. No widgets."""

from __future__ import annotations

from collections.abc import Callable

from gainbench.errors import SheetError
from gainbench.results import Gains
from gainbench.sheetfile import EntryValue, SheetDocument, add_kept, move_kept, remove_kept
from gainbench_app.starting_values import gains_by_hand

_GAIN_KEYS = ("kp", "ki", "ti", "wi")

Change = Callable[[SheetDocument], SheetDocument]


def free_name(document: SheetDocument) -> str:
    """A name that no kept tuning has: ``tuning 2``."""
    names = {one.name.strip() for one in document.sheet.kept}
    number = len(names) + 1
    while f"tuning {number}" in names:
        number += 1
    return f"tuning {number}"


def keeping(name: str, *, current: Gains, speed: Gains, note: str) -> Change:
    """Put gains on the shelf."""
    return lambda document: add_kept(document, name, current=current, speed=speed, note=note)


def renaming(name: str, new: str) -> Change:
    """Give a kept tuning another name."""
    return lambda document: document.with_value(f"kept[{_place(document, name)}].name", new)


def noting(name: str, note: str) -> Change:
    """Give a kept tuning another note; an empty one takes it out."""
    return lambda document: document.with_value(f"kept[{_place(document, name)}].note", note or None)


def removing(name: str) -> Change:
    """Take a tuning off the shelf."""
    return lambda document: remove_kept(document, name)


def moving(name: str, by: int) -> Change:
    """Put a tuning further up or down; at the end it stays."""

    def change(document: SheetDocument) -> SheetDocument:
        place = _place(document, name)
        to = min(max(place + by, 0), len(document.sheet.kept) - 1)
        return document if to == place else move_kept(document, name, to=to)

    return change


def recalled(document: SheetDocument, name: str) -> dict[str, EntryValue]:
    """Entries that put a kept tuning in force: both loops by hand, its gains as they are spelled on the shelf."""
    place = _place(document, name)
    values: dict[str, EntryValue] = {}
    for loop in ("current", "speed"):
        values[f"aims.{loop}.method"] = "by-hand"
        for key in _GAIN_KEYS:
            values[f"aims.{loop}.{key}"] = document.typed(f"kept[{place}].{loop}.{key}")
    return values


def by_hand(current: Gains, speed: Gains) -> dict[str, EntryValue]:
    """Entries that put gains in force which this sheet's shelf does not hold."""
    values: dict[str, EntryValue] = {}
    for loop, gains in (("current", current), ("speed", speed)):
        values[f"aims.{loop}.method"] = "by-hand"
        values |= gains_by_hand(loop, gains)
    return values


def _place(document: SheetDocument, name: str) -> int:
    names = [one.name for one in document.sheet.kept]
    if name not in names:
        raise SheetError(f'{document.name}: the shelf holds no tuning "{name}"')
    return names.index(name)
