"""How a sheet names the file of a log, and which file a name of it leads to."""

from __future__ import annotations

import os
from pathlib import Path

from gainbench.sheetfile import EntryValue, SheetDocument


def place_of(log: Path, sheet: Path | None) -> str:
    """How a sheet names a log.

    Parameters
    ----------
    log : Path
        The log's file.
    sheet : Path, optional
        The sheet's file; None where it has none yet.

    Returns
    -------
    str
        Relative to the sheet where it lies in its folder, below it or beside it; else the whole path.
    """
    whole = Path(os.path.abspath(log))
    if sheet is None:
        return whole.as_posix()
    folder = Path(os.path.abspath(sheet)).parent
    if whole.is_relative_to(folder):
        return whole.relative_to(folder).as_posix()
    if folder.parent != folder.parent.parent and whole.is_relative_to(folder.parent):
        return f"../{whole.relative_to(folder.parent).as_posix()}"
    return whole.as_posix()


def file_of(text: str, sheet: Path | None) -> Path:
    """The file that a sheet's name of a log leads to; without a file of the sheet, from the working folder."""
    return (sheet.parent if sheet is not None else Path()) / text


def carried_along(document: SheetDocument, *, before: Path | None, after: Path) -> SheetDocument:
    """A sheet whose logs are found from another folder as well.

    Parameters
    ----------
    document : SheetDocument
        As it is saved.
    before : Path, optional
        The sheet's file up to now; None where it had none.
    after : Path
        The sheet's file from now on.

    Returns
    -------
    SheetDocument
        The same where the folder stays, and where a log is not there anyhow.

    Raises
    ------
    SheetError
        If the text cannot be edited.
    """
    if before is not None and os.path.abspath(before.parent) == os.path.abspath(after.parent):
        return document
    values: dict[str, EntryValue] = {}
    for index, log in enumerate(document.sheet.evidence):
        file = file_of(log.log, before)
        place = place_of(file, after)
        if place != log.log and file.is_file():
            values[f"evidence[{index}].log"] = place
    return document.with_values(values) if values else document


def words_of(text: str, sheet: Path | None) -> str:
    """What is to be said of a name that a sheet holds; nothing where the log lies with the sheet."""
    if Path(text).is_absolute():
        return "by its whole path, since it lies far from the sheet" if sheet is not None else _NO_FILE
    return "" if sheet is not None else "looked for in the working folder, since the sheet has no file yet"


_NO_FILE = "by its whole path, since the sheet has no file yet"
