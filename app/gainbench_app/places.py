"""Where the window keeps what is its own: settings, and sheets that are not saved yet."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QStandardPaths

_NAME = "gainbench"


def config_folder() -> Path:
    """For what the window remembers; it may not be there yet."""
    return _folder(QStandardPaths.StandardLocation.GenericConfigLocation)


def state_folder() -> Path:
    """For what must outlast a crash; it may not be there yet."""
    return _folder(QStandardPaths.StandardLocation.GenericStateLocation)


def _folder(location: QStandardPaths.StandardLocation) -> Path:
    return Path(QStandardPaths.writableLocation(location)) / _NAME
