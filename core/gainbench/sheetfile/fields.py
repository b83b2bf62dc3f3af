"""What a window asks about single entries: which there are, of what dimension, and what a typed text means."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache
from types import MappingProxyType

from gainbench.errors import SheetError
from gainbench.sheetfile.entries import Count, EntryError, Flag, Gain, GainValue, Number, Quantity, shown, typed_number
from gainbench.sheetfile.problems import refused
from gainbench.sheetfile.tables import ENTRIES
from gainbench.units import Dimension


@cache
def quantity_paths() -> Mapping[str, Dimension]:
    """Every quantity and number of a sheet by its dotted path, and its dimension."""
    found = {path: entry.dimension for path, entry in ENTRIES.items() if isinstance(entry, Quantity | Number | Gain)}
    return MappingProxyType(found)


def read_entry(path: str, text: str) -> float | int | bool | str:
    """What a text typed for one entry means.

    Parameters
    ----------
    path : str
        ``machine.resistance``.
    text : str
        As typed into a box: without quotes.

    Returns
    -------
    float, int, bool or str
        In the model's unit; the word itself for a choice. A gain is SI in the unit that was typed.

    Raises
    ------
    SheetError
        If the text is refused, with one problem; the rules between entries are not applied.
    """
    entry = ENTRIES.get(path)
    if entry is None:
        raise SheetError(f"{shown(path)} is not the path of an entry (for example machine.resistance)")
    value: object = text
    number = typed_number(text)
    if isinstance(entry, Flag):
        value = {"true": True, "false": False}.get(text.strip(), text)
    elif isinstance(entry, Number | Gain | Count) and number is not None:
        whole = not set(number) & set(".eE")
        value = int(number) if whole else float(number)
    try:
        result = entry.read(value)
    except EntryError as error:
        problem = refused(path, text, error)
        raise SheetError(str(problem), problems=(problem,)) from None
    if isinstance(result, GainValue):
        return result.value
    if isinstance(result, float | int | str):
        return result
    return str(result)
