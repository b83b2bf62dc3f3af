"""Whether Qt can be imported here: its system libraries may be missing."""

from __future__ import annotations

import importlib
import os

MODULES = ("PySide6.QtGui", "PySide6.QtWidgets", "PySide6.QtTest")


def qt_is_missing() -> str:
    """Why Qt cannot be imported; always empty on the CI machine, where the tests must fail rather than be skipped."""
    if os.environ.get("CI", "").lower() == "true":
        return ""
    try:
        for name in MODULES:
            importlib.import_module(name)
    except ImportError as error:
        return f"Qt cannot be imported: {error}"
    return ""
