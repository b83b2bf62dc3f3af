"""Unsaved work outlasts a crash: it is written to the user's state folder, and offered at the next start.

Each process writes one file and holds a lock beside it; a file whose lock nobody holds was left by a process that died.
"""

from __future__ import annotations

import contextlib
import json
import os
import secrets
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import QLockFile, QObject, QTimer

from gainbench.errors import SheetError
from gainbench.sheetfile import MAX_BYTES, EntryValue, replace_file
from gainbench_app.desk import Desk
from gainbench_app.desk_state import settled

DELAY_MS = 1500
"""Unsaved work is written this long after it came to be."""
_PREFIX, _SUFFIX = "unsaved-", ".json"
_FORMAT = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Unsaved:
    """A sheet that was not saved."""

    name: str
    """Of its file, or of the file it would have."""
    path: Path | None
    """Where it was saved before."""
    since: float | None
    """When it came to differ from its file [s since the epoch]; None for one that does not, and is carried over."""
    text: str
    wrong: Mapping[str, EntryValue]
    """Entries that were refused, as typed."""
    file: Path
    """Where it was found."""

    @property
    def title(self) -> str:
        """For people."""
        return self.name


class Autosave(QObject):
    """Writes the open sheet's unsaved work, and takes it away once it is saved."""

    def __init__(self, desk: Desk, folder: Path, *, delay_ms: int = DELAY_MS, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._folder = folder
        self._file = folder / f"{_PREFIX}{os.getpid()}-{secrets.token_hex(4)}{_SUFFIX}"
        self._lock: QLockFile | None = None
        self._written = ""
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.setInterval(delay_ms)
        self._timer.timeout.connect(self._write)
        desk.changed.connect(self._follow)

    @property
    def file(self) -> Path:
        """Where unsaved work goes."""
        return self._file

    def _follow(self) -> None:
        if self._desk.unsaved_since is None:
            self._timer.stop()
            self._remove()
        elif not self._timer.isActive():
            self._timer.start()

    def write_now(self) -> None:
        """Write without waiting."""
        self._timer.stop()
        self._write()

    def _write(self) -> None:
        if self._desk.unsaved_since is None:
            return
        try:
            content = content_of(self._desk)
            if content != self._written:
                self._hold()
                replace_file(self._file, content.encode("utf-8"))
                self._written = content
        except (OSError, SheetError):
            # A full disk or a folder that is read-only: the user's own save will tell, and the work goes on.
            self._written = ""

    def _hold(self) -> None:
        """Say that this process lives."""
        if self._lock is None:
            self._folder.mkdir(mode=0o700, parents=True, exist_ok=True)
            lock = QLockFile(str(_lock_of(self._file)))
            lock.setStaleLockTime(0)
            lock.tryLock(0)
            self._lock = lock

    def _remove(self) -> None:
        if self._written:
            self._written = ""
            with contextlib.suppress(OSError):
                self._file.unlink()

    def release(self) -> None:
        """The window is closed in good order: nothing is left behind."""
        self._timer.stop()
        self._remove()
        if self._lock is not None:
            self._lock.unlock()
            self._lock = None


def content_of(desk: Desk) -> str:
    """The open sheet with what is not saved, as a file that can be read again.

    Raises
    ------
    SheetError
        If the text cannot be edited where a slider has moved a value.
    """
    state, path = settled(desk.state), desk.path
    return json.dumps(
        {
            "format": _FORMAT,
            "name": state.document.name,
            "path": str(path.absolute()) if path is not None else None,
            "since": desk.unsaved_since,
            "text": state.document.text(),
            "wrong": dict(state.wrong),
        }
    )


def left_behind(folder: Path) -> list[Unsaved]:
    """Sheets that a process did not get to save, the latest first; damaged files are passed over."""
    found = []
    for file in folder.glob(f"{_PREFIX}*{_SUFFIX}"):
        lock = QLockFile(str(_lock_of(file)))
        lock.setStaleLockTime(0)
        if not lock.tryLock(0):
            continue
        lock.unlock()
        unsaved = read_unsaved(file)
        if unsaved is not None and unsaved.since is not None:
            found.append(unsaved)
    return sorted(found, key=lambda one: -(one.since or 0.0))


def forget(unsaved: Unsaved) -> None:
    """Take away what was restored or is not wanted."""
    with contextlib.suppress(OSError):
        unsaved.file.unlink()


def _lock_of(file: Path) -> Path:
    return file.with_suffix(".lock")


def read_unsaved(file: Path) -> Unsaved | None:
    """What a file holds; None where it is absent or damaged."""
    try:
        if file.stat().st_size > 4 * MAX_BYTES:
            return None
        data = json.loads(file.read_text(encoding="utf-8"))
        if data["format"] != _FORMAT:
            return None
        path = data["path"]
        return Unsaved(
            name=str(data["name"]),
            path=Path(path) if isinstance(path, str) else None,
            since=float(data["since"]) if data["since"] is not None else None,
            text=str(data["text"]),
            wrong={
                str(key): value
                for key, value in data["wrong"].items()
                if value is None or isinstance(value, str | float)
            },
            file=file,
        )
    except (OSError, ValueError, KeyError, TypeError, AttributeError, RecursionError):
        return None
