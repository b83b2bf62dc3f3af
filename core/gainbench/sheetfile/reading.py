"""From a file or a text to plain TOML values, with every way that this can fail said in one message."""

from __future__ import annotations

import re
import stat
import tomllib
from pathlib import Path

from gainbench.errors import SheetError

MAX_BYTES = 1_000_000
"""The largest sheet that is read: a larger one is no sheet."""
SUFFIX = ".bench.toml"
_MOST_DOTS = 30
_STRING_OR_COMMENT = re.compile(r'"(?:[^"\\\n]|\\.)*"|\'[^\'\n]*\'|#[^\n]*')
_BYTE_ORDER_MARKS = {b"\xff\xfe": "UTF-16", b"\xfe\xff": "UTF-16"}


def read_text(path: Path) -> str:
    """The text of a sheet's file.

    Raises
    ------
    SheetError
        If it cannot be read, is too large or is not UTF-8.
    """
    name = path.name or str(path)
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            raise SheetError(f"{name}: this is a folder, a bench sheet is a file (for example motor{SUFFIX})")
        if not stat.S_ISREG(status.st_mode):
            raise SheetError(f"{name}: this is not a regular file")
        if status.st_size > MAX_BYTES:
            raise SheetError(_too_large(name, status.st_size))
        with path.open("rb") as file:
            content = file.read(MAX_BYTES + 1)
    except FileNotFoundError:
        raise SheetError(f"{name}: there is no such file; check the path {str(path)!a}") from None
    except OSError as error:
        raise SheetError(f"{name}: cannot be read: {error.strerror or error}") from None
    except ValueError:
        raise SheetError(f"{name!a}: this is not the name of a file") from None
    if len(content) > MAX_BYTES:
        raise SheetError(_too_large(name, len(content)))
    return _decoded(content, name)


def _too_large(name: str, size: int) -> str:
    return f"{name}: the file has {size} bytes, a bench sheet has at most {MAX_BYTES}"


def _decoded(content: bytes, name: str) -> str:
    if not content:
        raise SheetError(f"{name}: the file is empty; a bench sheet starts with format = 1")
    for mark, encoding in _BYTE_ORDER_MARKS.items():
        if content.startswith(mark):
            raise SheetError(f"{name}: the file is {encoding}; save it as UTF-8")
    if b"\0" in content:
        raise SheetError(f"{name}: the file is binary or not UTF-8; a bench sheet is a UTF-8 text")
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        raise SheetError(f"{name}: the file is not UTF-8 (line {line}); save it as UTF-8") from None


def plain_values(text: str, name: str) -> dict[str, object]:
    """The plain TOML values of a sheet's text.

    Raises
    ------
    SheetError
        If the text is not TOML, or longer than a sheet is.
    """
    try:
        size = len(text) if len(text) > MAX_BYTES else len(text.encode("utf-8"))
    except UnicodeEncodeError:
        raise SheetError(f"{name}: the text holds a half character that no file can hold; take it out") from None
    if size > MAX_BYTES:
        raise SheetError(f"{name}: the text is longer than {MAX_BYTES} bytes; a bench sheet is shorter")
    if not text.strip():
        raise SheetError(f"{name}: the file is empty; a bench sheet starts with format = 1")
    _refuse_deep_keys(text, name)
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise SheetError(
            f"{name}: this is not TOML: {error}; texts and quantities stand in quotes"
            ' (for example resistance = "0.60 ohm")'
        ) from None
    except RecursionError:
        raise SheetError(f"{name}: this is not a bench sheet: its brackets are nested too deeply") from None
    except ValueError:
        raise SheetError(f"{name}: this is not a bench sheet: a number or a date in it cannot be read") from None


def _refuse_deep_keys(text: str, name: str) -> None:
    """Keep dotted keys short: the TOML reader's memory and time grow with the square of their parts."""
    # A string over several lines may hide where a line's own strings begin, so that dots in them count as well.
    several_lines = '"""' in text or "'''" in text
    plain = text if several_lines else _STRING_OR_COMMENT.sub("", text)
    for number, line in enumerate(plain.split("\n"), start=1):
        if line.count(".") > _MOST_DOTS:
            raise SheetError(f"{name}: this is not a bench sheet: line {number} has more than {_MOST_DOTS} dots")


def default_title(name: str) -> str:
    """A sheet's title where it has none: the file's name, made fit to print."""
    title = name.removesuffix(SUFFIX) if name.endswith(SUFFIX) else name.removesuffix(".toml")
    printable = "".join(character if character.isprintable() else "?" for character in title).strip()
    return printable[:200] or "sheet"
