"""Putting the firmware files where they belong: whole, or not at all."""

from __future__ import annotations

import contextlib
import os
import secrets
from pathlib import Path
from typing import TYPE_CHECKING

from gainbench.errors import HandoverError
from gainbench.handover.header import Source, write_header

if TYPE_CHECKING:
    from gainbench.assess import Assessment


def write_handover(
    assessment: Assessment, folder: str | Path, *, source: Source, prefix: str | None = None, replace: bool = False
) -> Path:
    """Write the firmware files of an assessment into a folder.

    The text goes to a temporary file beside the target, is flushed to the disk, and then takes the target's place.

    Parameters
    ----------
    assessment : Assessment
        Its gains are the ones that are written.
    folder : str or Path
        Where. It is created if only its last part is missing.
    source : Source
        Which sheet and which tuning; told in the files.
    prefix : str, optional
        Of the macros; by default from the sheet's title.
    replace : bool
        True replaces a file of that name; else it is refused.

    Returns
    -------
    Path
        The header.

    Raises
    ------
    HandoverError
        If the assessment has nothing to export, the prefix will not do, or the file is there already or cannot be
        written; nothing was written then.
    """
    header = write_header(assessment, source, prefix=prefix)
    if not str(folder):
        raise HandoverError("'': this is not the name of a folder; a full stop names the one you are in")
    try:
        place = Path(folder)
        created = _made(place)
        target = place / header.name
        try:
            _put(target, header.text.encode("ascii"), replace=replace)
        except BaseException:
            if created:
                with contextlib.suppress(OSError):
                    place.rmdir()
            raise
    except OSError as error:
        raise HandoverError(f"{folder}: cannot be written to: {error.strerror or error}; nothing was written") from None
    except ValueError:
        raise HandoverError(f"{str(folder)!a}: this is not the name of a folder") from None
    return target


def _made(folder: Path) -> bool:
    """See that the folder is there; True where it was created."""
    if folder.is_dir():
        return False
    if folder.exists() or folder.is_symlink():
        raise HandoverError(f"{folder}: this is not a folder; name one for the firmware files (for example firmware)")
    if not folder.parent.is_dir():
        raise HandoverError(f"{folder}: there is no folder {str(folder.parent)!a} to create it in; create that first")
    folder.mkdir()
    return True


def _put(target: Path, content: bytes, *, replace: bool) -> None:
    if target.is_dir():
        raise HandoverError(f"{target}: a folder of that name is in the way; name another folder with --to")
    if not replace and os.path.lexists(target):
        raise HandoverError(_in_the_way(target))
    temporary = target.with_name(f".gainbench-{secrets.token_hex(8)}.tmp")
    try:
        handle = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0), 0o666)
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.replace(temporary, target)
    except BaseException:
        with contextlib.suppress(OSError):
            temporary.unlink()
        raise


def _in_the_way(target: Path) -> str:
    return f"{target}: this file is there already; replace it with --replace, or name another folder with --to"
