"""Whether the elements of a .mat file, versions 5 to 7, are of known types and hold what they say.

WORKAROUND: scipy 1.15 and later reads beyond its tables at an element of an unknown type, which ends the process. So a
file is walked through here before scipy sees it.
"""

from __future__ import annotations

import math
import struct
import zlib
from pathlib import Path

_HEADER_BYTES = 128
_MATRIX, _COMPRESSED = 14, 15
_SIZES = {1: 1, 2: 1, 3: 2, 4: 2, 5: 4, 6: 4, 7: 4, 9: 8, 12: 8, 13: 8, 16: 1, 17: 2, 18: 4}
"""Bytes of one number, by the type of an element."""
_CELL, _STRUCTURE, _OBJECT, _CHARACTERS, _SPARSE = 1, 2, 3, 4, 5
_NUMBERS = range(6, 16)
_OTHERS = (16, 17)
"""Functions and opaque objects, which are passed over."""
_COMPLEX = 0x0800
_DEEPEST = 32


class DamagedError(ValueError):
    """An element that is not what it says."""


def check_elements(path: Path) -> None:
    """See that every variable of a file is whole.

    Parameters
    ----------
    path : Path
        Of version 5 to 7.

    Raises
    ------
    DamagedError
        If a type is unknown, or a size does not fit.
    OSError
        If the file cannot be read.
    zlib.error
        If a packed variable cannot be unpacked.
    """
    with path.open("rb") as file:
        order = "<" if file.read(_HEADER_BYTES).endswith(b"IM") else ">"
        while len(tag := file.read(8)) == 8:
            kind, size = struct.unpack(f"{order}II", tag)
            content = file.read(size)
            if len(content) < size:
                raise DamagedError("the file ends within a variable")
            if kind == _COMPRESSED:
                _Walk(zlib.decompress(content), order).matrix(0)
            elif kind == _MATRIX:
                _Walk(tag + content, order).matrix(0)
            else:
                raise DamagedError(f"element of type {kind}")


class _Walk:
    """One variable, element by element."""

    def __init__(self, content: bytes, order: str) -> None:
        self.content, self.order, self.at = content, order, 0

    def element(self) -> tuple[int, bytes]:
        """Type and bytes of the next element."""
        if self.at + 8 > len(self.content):
            raise DamagedError("a variable ends within an element")
        kind, size = struct.unpack_from(f"{self.order}II", self.content, self.at)
        if kind >> 16:
            kind, size, start = kind & 0xFFFF, kind >> 16, self.at + 4
            self.at += 8
            if size > 4:
                raise DamagedError("a small element of more than four bytes")
        else:
            start = self.at + 8
            self.at = start + size + (-size % 8 if kind != _MATRIX else 0)
        if start + size > len(self.content):
            raise DamagedError("an element is longer than its variable")
        return kind, self.content[start : start + size]

    def numbers(self, count: int | None = None) -> bytes:
        """The bytes of an element of numbers, of which there are so many."""
        kind, content = self.element()
        if kind not in _SIZES or len(content) % _SIZES[kind] or count not in (None, len(content) // _SIZES[kind]):
            raise DamagedError(f"element of type {kind} with {len(content)} bytes")
        return content

    def whole(self, kinds: tuple[int, ...] = (5,)) -> tuple[int, ...]:
        """Whole numbers of four bytes."""
        kind, content = self.element()
        if kind not in kinds or len(content) % 4:
            raise DamagedError(f"element of type {kind} where whole numbers stand")
        return struct.unpack(f"{self.order}{len(content) // 4}i", content)

    def matrix(self, depth: int) -> None:
        """One matrix with all that is in it."""
        start = self.at
        if start + 8 > len(self.content) or depth > _DEEPEST:
            raise DamagedError("a variable ends within a matrix")
        kind, size = struct.unpack_from(f"{self.order}II", self.content, start)
        if kind != _MATRIX or start + 8 + size > len(self.content):
            raise DamagedError(f"element of type {kind} where a matrix stands")
        self.at = start + 8
        if size == 0:
            return
        flags = self.whole((6,))
        if len(flags) != 2:
            raise DamagedError("flags of another size")
        what, is_complex = flags[0] & 0xFF, bool(flags[0] & _COMPLEX)
        if what in _OTHERS:
            self.at = start + 8 + size
            return
        shape = self.whole()
        if len(shape) < 2 or any(one < 0 for one in shape):
            raise DamagedError(f"dimensions {shape}")
        self.numbers()
        self._content(what, math.prod(shape), is_complex=is_complex, depth=depth)
        if self.at > start + 8 + size:
            raise DamagedError("a matrix is longer than it says")
        self.at = start + 8 + size

    def _content(self, what: int, count: int, *, is_complex: bool, depth: int) -> None:
        if what in _NUMBERS:
            for _ in range(1 + is_complex):
                self.numbers(count)
        elif what == _CHARACTERS:
            self.numbers()
        elif what == _SPARSE:
            for _ in range(3 + is_complex):
                self.numbers()
        elif what in (_CELL, _STRUCTURE, _OBJECT):
            fields = 1
            if what == _OBJECT:
                self.numbers()
            if what != _CELL:
                length = self.whole()
                names = self.numbers()
                if len(length) != 1 or length[0] <= 0 or len(names) % length[0]:
                    raise DamagedError("names of fields of another size")
                fields = len(names) // length[0]
            if count * fields > len(self.content):
                raise DamagedError("more parts than bytes")
            for _ in range(count * fields):
                self.matrix(depth + 1)
        else:
            raise DamagedError(f"matrix of class {what}")
