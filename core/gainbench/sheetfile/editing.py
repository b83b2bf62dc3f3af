"""Edits of a sheet's text that leave comments, order and spelling alone: all that is known of tomlkit."""

from __future__ import annotations

import math
import re
import tomllib
from collections.abc import Mapping, MutableMapping, Sequence
from functools import lru_cache
from typing import Any

from gainbench.errors import SheetError
from gainbench.sheetfile.entries import Count, Flag, Gain, Number, Quantity, shown, typed_number
from gainbench.sheetfile.tables import entry_at
from gainbench.units import Dimension

_PART = re.compile(r'\.?(?:"(?P<quoted>[^"]*)"|(?P<bare>[^.\[\]"]+))|\[(?P<index>\d{1,6})\]')

_LIST_WORDS = {"kept": "the shelf", "evidence": "the list of logs"}

Key = str | int


def split_path(path: str) -> list[Key]:
    """The keys of a dotted path; what follows ``tolerance.`` is one key.

    Raises
    ------
    SheetError
        If the text is no path.
    """
    head, dot, rest = path.partition(".")
    if head == "tolerance" and dot:
        return [head, rest.strip('"')]
    keys: list[Key] = []
    position = 0
    while position < len(path):
        match = _PART.match(path, position)
        if match is None:
            break
        index = match["index"]
        keys.append(int(index) if index is not None else match["quoted"] or match["bare"] or "")
        position = match.end()
    if position < len(path) or not keys:
        raise SheetError(f"{shown(path)} is not the path of an entry (for example machine.resistance)")
    return keys


def look_up(data: object, keys: Sequence[Key]) -> object | None:
    """The plain value at a path, None where there is none."""
    node = data
    for position, key in enumerate(keys):
        if isinstance(node, Mapping) and isinstance(key, str):
            if key not in node and "." in key:
                return look_up(node, [*key.split("."), *keys[position + 1 :]])
            node = node.get(key)
        elif isinstance(node, list) and isinstance(key, int) and key < len(node):
            node = node[key]
        else:
            return None
    return node


def spelling(text: str, path: str, value: object) -> str:
    """A number or a switch as it stands in the text."""
    try:
        item = look_up(_only_read(text), split_path(path))
    except SheetError:
        item = None
    as_string = getattr(item, "as_string", None)
    return str(as_string()) if as_string is not None else shown(value)


def with_values(text: str, values: Mapping[str, str | int | float | bool | None], *, name: str) -> str:
    """The text with some values set, added, or taken out with None.

    Raises
    ------
    SheetError
        If a path leads nowhere.
    """
    document = _parsed(text, name)
    wanted = tomllib.loads(text)
    for path, value in values.items():
        keys = split_path(path)
        item = _item(path, value)
        try:
            found = _put(document, keys, item)
            _put_plain(wanted, found, None if item is None else item.unwrap())
        except _EDIT_FAULTS:
            raise SheetError(f"{name}: {path} cannot be reached; check the path, or edit the file itself") from None
    result = _written(document, text)
    if _plain(result) != wanted:
        paths = ", ".join(values)
        raise SheetError(f"{name}: {paths} cannot be changed as it stands in the file; edit the file itself")
    return result


def with_listed(text: str, key: str, *, entry: Mapping[str, object], inner: bool = False, name: str) -> str:
    """The text with one more table in the list of a key, [[kept]] or [[evidence]], at its end.

    Mappings in the entry become inline tables; with ``inner`` tables of their own, whose mappings are inline.
    """
    import tomlkit

    document = _parsed(text, name)
    try:
        table = tomlkit.table()
        for own, value in entry.items():
            if isinstance(value, Mapping) and inner:
                holder = tomlkit.table()
                for signal, pairs in value.items():
                    holder.add(signal, _inline(pairs))
                table.add(own, holder)
            else:
                table.add(own, _inline(value) if isinstance(value, Mapping) else tomlkit.item(value))
        table.trivia.indent = ""
        if key in document:
            found = document[key]
            if isinstance(found, tomlkit.items.AoT) and len(found):
                _end_with_blank_line(found[-1])
            if list(document)[-1] != key:
                _end_with_blank_line(table)
            found.append(table)
        else:
            _end_with_blank_line(document)
            found = tomlkit.aot()
            found.append(table)
            document.add(key, found)
    except _EDIT_FAULTS:
        raise SheetError(f"{name}: {_LIST_WORDS[key]} cannot be written to as it stands in the file") from None
    result = _written(document, text)
    _same_but(text, result, key, name)
    return result


def _inline(pairs: Mapping[str, object]) -> Any:
    """Pairs as one inline table, with blanks inside its braces."""
    import tomlkit

    told = ", ".join(f"{key} = {tomlkit.item(value).as_string()}" for key, value in pairs.items())
    return tomlkit.value(f"{{ {told} }}")


def without_listed(text: str, key: str, *, index: int, name: str) -> str:
    """The text without one of the tables in the list of a key."""
    document = _parsed(text, name)
    try:
        found: Any = document[key]
        del found[index]
        if not len(found):
            del document[key]
    except _EDIT_FAULTS:
        raise SheetError(f"{name}: {_LIST_WORDS[key]} cannot be written to as it stands in the file") from None
    result = _written(document, text)
    _same_but(text, result, key, name)
    return result


def with_moved(text: str, key: str, *, index: int, to: int, name: str) -> str:
    """The text with one of the tables in the list of a key at another place in it."""
    document = _parsed(text, name)
    wanted = tomllib.loads(text)
    try:
        found: Any = document[key]
        tables = list(found)
        for table in tables:
            _end_with_blank_line(table)
        tables.insert(to, tables.pop(index))
        wanted[key].insert(to, wanted[key].pop(index))
        while len(found):
            del found[0]
        for table in tables:
            found.append(table)
    except _EDIT_FAULTS:
        raise SheetError(f"{name}: {_LIST_WORDS[key]} cannot be written to as it stands in the file") from None
    result = _written(document, text).rstrip() + text[len(text.rstrip()) :]
    if _plain(result) != wanted:
        raise SheetError(f"{name}: {key} cannot be changed as it stands in the file; edit the file itself")
    return result


# WORKAROUND tomlkit 0.13 to 0.15: tables out of order and dotted keys fail in the middle of an edit, each with a
# different built-in exception; an edit that went through is confirmed by reading its result.
_EDIT_FAULTS = (KeyError, IndexError, TypeError, ValueError, AttributeError, AssertionError, RecursionError)


@lru_cache(maxsize=4)
def _only_read(text: str) -> Any:
    """The text as tomlkit's document, for callers that leave it as it is: a window asks for many spellings of one."""
    return _parsed(text, "sheet")


def _parsed(text: str, name: str) -> Any:
    """The text as tomlkit's document."""
    import tomlkit

    try:
        return tomlkit.parse(text)
    except _EDIT_FAULTS as error:
        raise SheetError(f"{name}: the text cannot be edited: {error}") from None


def _written(document: Any, before: str) -> str:
    """The document as text, with the line ends it had."""
    import tomlkit

    text = tomlkit.dumps(document)
    if "\r\n" in before and "\n" not in before.replace("\r\n", ""):
        return text.replace("\r\n", "\n").replace("\n", "\r\n")
    return text


def _item(path: str, value: str | int | float | bool | None) -> Any:
    """A value as typed into a box, as an item of the text; None stays None."""
    import tomlkit

    if value is None:
        return None
    if isinstance(value, float) and not math.isfinite(value):
        raise SheetError(f"{path}: the number must be finite")
    if isinstance(value, str):
        keys = split_path(path)
        entry = entry_at(str(keys[1]) if keys[0] == "tolerance" and len(keys) == 2 else path)
        plain = value.strip()
        if isinstance(entry, Flag) and plain in {"true", "false"}:
            return tomlkit.item(plain == "true")
        share = isinstance(entry, Quantity) and entry.dimension is Dimension.SHARE
        number = typed_number(value) if share or isinstance(entry, Number | Count | Gain) else None
        if number is not None:
            return tomlkit.value(number)
    return tomlkit.item(value)


def _put(document: Any, keys: Sequence[Key], item: Any) -> Sequence[Key]:
    """Set, add or take out one value; gives the keys that lead to it in this document."""
    import tomlkit

    if len(keys) == 2 and keys[0] == "tolerance" and keys[1] not in document.get("tolerance", {}):
        nested = [keys[0], *str(keys[1]).split(".")]
        keys = nested if look_up(document, nested) is not None else keys
    node = document
    for key in keys[:-1]:
        if isinstance(key, str) and key not in node:
            if item is None:
                return keys
            table = tomlkit.table()
            if node is document:
                _end_with_blank_line(document)
            else:
                table.add(tomlkit.nl())
            node[key] = table
        node = node[key]
    last = keys[-1]
    if not isinstance(last, str) or not isinstance(node, MutableMapping):
        raise KeyError(last)
    if item is None:
        if last in node:
            del node[last]
    elif last in node:
        _replace(node, last, item)
    else:
        _append(node, last, item)
    return keys


def _put_plain(data: Any, keys: Sequence[Key], value: object) -> None:
    """The same to plain values: what the edited text must mean, and nothing besides."""
    node = data
    for key in keys[:-1]:
        if isinstance(key, str) and key not in node:
            if value is None:
                return
            node[key] = {}
        node = node[key]
    if value is None:
        node.pop(keys[-1], None)
    else:
        node[keys[-1]] = value


def _replace(table: Any, key: str, item: Any) -> None:
    """Change a value, and leave the comment behind it in its column."""
    import tomlkit

    container = table.value if isinstance(table, tomlkit.items.Table) else None
    old: Any = container.item(key) if container is not None else None
    width = len(old.as_string()) if old is not None else 0
    table[key] = item
    if container is None:
        return
    new: Any = container.item(key)
    if new.trivia.comment and not new.trivia.comment_ws.strip(" "):
        new.trivia.comment_ws = " " * max(1, len(new.trivia.comment_ws) + width - len(new.as_string()))


def _append(table: Any, key: str, item: Any) -> None:
    """Add a key below the last one of a table, above the blank lines and comments that lead to the next table."""
    import tomlkit

    container = table.value if isinstance(table, tomlkit.items.Table) else None
    tail: list[Any] = []
    if container is not None:
        body = container.body
        end = max((index for index, (name, _) in enumerate(body) if name is not None), default=-1)
        gap = next(
            (index for index in range(end + 1, len(body)) if isinstance(body[index][1], tomlkit.items.Whitespace)), None
        )
        if gap is not None:
            tail = body[gap:]
            del body[gap:]
    table[key] = item
    if container is not None:
        container.body.extend(tail)


def _end_with_blank_line(table: Any) -> None:
    """Leave a blank line below a table, or below all that there is."""
    import tomlkit

    text = table.as_string()
    if text and not text.endswith("\n"):
        table.add(tomlkit.nl())
    if text and not text.endswith(("\n\n", "\r\n\r\n")):
        table.add(tomlkit.nl())


def _plain(text: str) -> dict[str, object] | None:
    """What a text means, None where it is no TOML any more."""
    try:
        return tomllib.loads(text)
    except ValueError:
        return None


def _same_but(before: str, after: str, key: str, name: str) -> None:
    """See that an edit touched nothing but one key."""
    old, new = tomllib.loads(before), _plain(after)
    old.pop(key, None)
    if new is not None:
        new.pop(key, None)
    if old != new:
        raise SheetError(f"{name}: {key} cannot be changed as it stands in the file; edit the file itself")
