"""Saving a sheet: all of it or nothing."""

from __future__ import annotations

import contextlib
import os
import secrets
import stat
from pathlib import Path

from gainbench.errors import SheetError
from gainbench.sheetfile.document import SheetDocument


def write_sheet(document: SheetDocument, path: str | Path) -> None:
    """Save a sheet.

    The text goes to a temporary file beside the target, is flushed to the disk, and then takes the target's place
    and mode; a link is followed, so that the file it names is replaced and the link stays.

    Parameters
    ----------
    document : SheetDocument
        What to save.
    path : str or Path
        Where.

    Raises
    ------
    SheetError
        If it cannot be saved; what was there before is untouched.
    """
    replace_file(Path(path), document.text().encode("utf-8"))


def replace_file(path: Path, content: bytes) -> None:
    """Write a file whole, or leave what was there.

    Raises
    ------
    SheetError
        If it cannot be written.
    """
    name = path.name or str(path)
    try:
        target = Path(os.path.realpath(path))
        mode = _mode(target, name)
        temporary = target.with_name(f".gainbench-{secrets.token_hex(8)}.tmp")
        try:
            _write(temporary, content, mode)
            os.replace(temporary, target)
        except BaseException:
            with contextlib.suppress(OSError):
                temporary.unlink()
            raise
        _flush_folder(target.parent)
    except OSError as error:
        raise SheetError(f"{name}: cannot be saved: {error.strerror or error}; nothing was changed") from None
    except ValueError:
        raise SheetError(f"{name!a}: this is not the name of a file") from None


def _mode(target: Path, name: str) -> int | None:
    """The mode of the file that is replaced, None where there is none."""
    try:
        status = target.stat()
    except FileNotFoundError:
        if not target.parent.is_dir():
            raise SheetError(f"{name}: cannot be saved: there is no folder {str(target.parent)!a}") from None
        return None
    if stat.S_ISDIR(status.st_mode):
        raise SheetError(f"{name}: cannot be saved: this is a folder; name a file (for example motor.bench.toml)")
    if not stat.S_ISREG(status.st_mode):
        raise SheetError(f"{name}: cannot be saved: this is not a regular file")
    if not os.access(target, os.W_OK):
        raise SheetError(f"{name}: cannot be saved: the file is read-only; save under another name")
    return stat.S_IMODE(status.st_mode)


def _write(temporary: Path, content: bytes, mode: int | None) -> None:
    handle = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0), 0o666)
    with os.fdopen(handle, "wb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())
    if mode is not None:
        temporary.chmod(mode)


def _flush_folder(folder: Path) -> None:
    """Make the new name last through a power cut, where the system can."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
