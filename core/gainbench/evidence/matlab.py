"""Numbers from a .mat log, versions 4 to 7: variables, the columns of matrices, and fields of structures."""

from __future__ import annotations

import struct
import zlib
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError
from gainbench.evidence.columns import FileColumn, Raw, most_rows, refuse_too_large
from gainbench.evidence.guessing import split_name
from gainbench.evidence.matlab_check import check_elements
from gainbench.evidence.told_rate import period_of

MAGIC = b"MATLAB 5.0 MAT-file"
HDF5 = (b"MATLAB 7.3 MAT-file", b"\x89HDF\r\n\x1a\n")
_MOST_COLUMNS = 64
_DEEPEST = 4
_FIRST = 5
_HEADER_BYTES = 128
_COMPRESSED = 15
_PIECE = 1 << 20
_VALUE_BYTES = 8
_MOST_PACKED = 1032
"""How many bytes deflate can pack into one."""
# What scipy raises at a damaged file; MatReadError and zlib's own error are of no common kind.
_TROUBLE = (ArithmeticError, AssertionError, AttributeError, BufferError, EOFError, LookupError, MemoryError, OSError)
_MORE_TROUBLE = (NameError, RuntimeError, TypeError, ValueError, struct.error, zlib.error)


class MatlabTable:
    """A .mat log whose variables were read."""

    __slots__ = ("_arrays", "_path", "columns", "period", "rows")

    def __init__(self, path: Path) -> None:
        self._path = path
        variables = _loaded(path)
        self._arrays = _vectors(variables)
        self.period: float | None = period_of(_scalars(variables))
        """As a single number beside the vectors tells it [s]; None where there is none."""
        if not self._arrays:
            raise LogError(f"{path.name}: no usable columns: it holds no vector of numbers with two or more of them")
        self.columns: tuple[FileColumn, ...] = tuple(
            FileColumn(
                name=name,
                unit=split_name(name).unit,
                first_values=tuple(f"{value:.6g}" for value in values[:_FIRST].tolist()),
            )
            for name, values in self._arrays.items()
        )
        self.rows: int | None = max(values.size for values in self._arrays.values())

    def load(self, places: Sequence[int], *, time: int | None) -> list[Raw]:
        """Read columns by their places.

        Raises
        ------
        LogError
            If they are of different length.
        """
        names = [self.columns[place].name for place in places]
        sizes = {name: self._arrays[name].size for name in names}
        if len(set(sizes.values())) > 1:
            told = ", ".join(f"{name} has {size} values" for name, size in sizes.items())
            raise LogError(
                f"{self._path.name}: columns of different length: {told}; map columns that were recorded together"
            )
        return [_raw(self._arrays[name], place == time) for name, place in zip(names, places, strict=True)]


def _loaded(path: Path) -> dict[str, Any]:
    """The variables of the file."""
    from scipy.io import loadmat, whosmat
    from scipy.io.matlab import MatReadError

    with path.open("rb") as file:
        start = file.read(520)
    if start.startswith(HDF5) or start[512:].startswith(HDF5[1]):
        raise LogError(f"{path.name}: a .mat file of version 7.3 is not read; save it again with save(..., '-v7')")
    try:
        refuse_too_large(path.stat().st_size / _VALUE_BYTES, 1, name=path.name)
        if start.startswith(MAGIC) and path.stat().st_size * _MOST_PACKED > most_rows(1) * _VALUE_BYTES:
            refuse_too_large(_unpacked_bytes(path, most_rows(1) * _VALUE_BYTES) / _VALUE_BYTES, 1, name=path.name)
        if 0 not in start[:4]:
            # A file of version 4 begins with a small number, all others with a text.
            check_elements(path)
        shapes = whosmat(path, appendmat=False)
        refuse_too_large(float(sum(np.prod(shape, dtype=float) for _, shape, _ in shapes)), 1, name=path.name)
        found: dict[str, Any] = loadmat(path, appendmat=False, chars_as_strings=False, squeeze_me=False)
    except (*_TROUBLE, *_MORE_TROUBLE, MatReadError) as error:
        detail = str(error).partition("\n")[0] or type(error).__name__
        raise LogError(f"{path.name}: not a .mat file that can be read: {detail}; save it again") from None
    return {name: value for name, value in found.items() if not name.startswith("__")}


def _unpacked_bytes(path: Path, most: int) -> int:
    """Size of all variables of a file once they are unpacked [bytes], counted no further than a limit."""
    total = 0
    with path.open("rb") as file:
        order = "<" if file.read(_HEADER_BYTES).endswith(b"IM") else ">"
        while total <= most and len(tag := file.read(8)) == 8:
            kind, left = struct.unpack(f"{order}II", tag)
            if kind != _COMPRESSED:
                total += left
                file.seek(left, 1)
                continue
            stream = zlib.decompressobj()
            while total <= most and left > 0 and (packed := file.read(min(left, _PIECE))):
                left -= len(packed)
                while packed and total <= most:
                    total += len(stream.decompress(packed, _PIECE))
                    packed = stream.unconsumed_tail
    return total


def _vectors(variables: dict[str, Any]) -> dict[str, NDArray[Any]]:
    """Every vector of numbers by its name: ``speed``, ``run.speed`` in a structure, ``data(:,2)`` of a matrix."""
    found: dict[str, NDArray[Any]] = {}
    waiting = [(name, value, 0) for name, value in variables.items()]
    while waiting:
        name, value, depth = waiting.pop(0)
        array = np.asarray(value)
        if array.dtype.names is not None and array.size == 1 and depth < _DEEPEST:
            waiting += [(f"{name}.{key}", array[key].ravel()[0], depth + 1) for key in array.dtype.names]
        elif array.dtype.kind in "biuf" and array.ndim <= 2:
            if array.size >= 2 and max(array.shape) == array.size:
                found[name] = array.ravel()
            elif array.ndim == 2 and min(array.shape) > 1:
                tall = array if array.shape[0] >= array.shape[1] else array.T
                for index in range(min(tall.shape[1], _MOST_COLUMNS)):
                    label = f"{name}(:,{index + 1})" if tall is array else f"{name}({index + 1},:)"
                    found[label] = tall[:, index]
    return found


def _scalars(variables: dict[str, Any]) -> dict[str, float]:
    """Every single number by its name, in structures as well."""
    found: dict[str, float] = {}
    waiting = [(name, value, 0) for name, value in variables.items()]
    while waiting:
        name, value, depth = waiting.pop(0)
        array = np.asarray(value)
        if array.dtype.names is not None and array.size == 1 and depth < _DEEPEST:
            waiting += [(f"{name}.{key}", array[key].ravel()[0], depth + 1) for key in array.dtype.names]
        elif array.dtype.kind in "iuf" and array.size == 1:
            found[name] = float(array.ravel()[0])
    return found


def _raw(array: NDArray[Any], is_time: bool) -> Raw:
    if is_time and array.dtype.kind == "i":
        return Raw(values=array.astype(np.int64), missing=np.zeros(array.size, dtype=np.bool_))
    values = array.astype(np.float64)
    return Raw(values=values, missing=~np.isfinite(values))
