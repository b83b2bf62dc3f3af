"""Whether a window can be opened here; if not, why, and how to put it right."""

from __future__ import annotations

import ctypes
import os
import re
import socket
import sys
from collections.abc import Mapping
from importlib import import_module
from pathlib import Path

PACKAGES: Mapping[str, str] = {
    "libEGL.so.1": "libegl1",
    "libGL.so.1": "libgl1",
    "libfontconfig.so.1": "libfontconfig1",
    "libfreetype.so.6": "libfreetype6",
    "libglib-2.0.so.0": "libglib2.0-0",
    "libgthread-2.0.so.0": "libglib2.0-0",
    "libxkbcommon.so.0": "libxkbcommon0",
    "libdbus-1.so.3": "libdbus-1-3",
}
"""Debian packages of the libraries that Qt needs to be imported at all."""

X_PACKAGES: Mapping[str, str] = {
    "libxkbcommon-x11.so.0": "libxkbcommon-x11-0",
    "libxcb-cursor.so.0": "libxcb-cursor0",
    "libxcb-icccm.so.4": "libxcb-icccm4",
    "libxcb-keysyms.so.1": "libxcb-keysyms1",
    "libxcb-randr.so.0": "libxcb-randr0",
    "libxcb-shape.so.0": "libxcb-shape0",
    "libxcb-xinerama.so.0": "libxcb-xinerama0",
    "libxcb-image.so.0": "libxcb-image0",
    "libxcb-render-util.so.0": "libxcb-render-util0",
    "libxcb-xkb.so.1": "libxcb-xkb1",
    "libX11-xcb.so.1": "libx11-xcb1",
}
"""Debian packages of the libraries that Qt needs for a window under X; without one of them it ends the process."""

_MISSING = re.compile(r"(\S+\.so[.\d]*): cannot open shared object file")
_DISPLAY = re.compile(r"(?P<host>.*):(?P<number>\d{1,5})(?:\.\d+)?")
_FIRST_PORT = 6000
_PATIENCE = 3.0
_QT_MODULES = ("PySide6.QtCore", "PySide6.QtGui", "PySide6.QtWidgets")


def trouble() -> str:
    """Why no window can be opened.

    Returns
    -------
    str
        A sentence without a full stop that says how to put it right; empty where a window can be opened.
    """
    chosen = os.environ.get("QT_QPA_PLATFORM", "").partition(":")[0]
    under_x = False
    if sys.platform.startswith("linux") and chosen in {"", "xcb"}:
        reason, under_x = _no_display(os.environ)
        if reason:
            return reason
    try:
        for name in _QT_MODULES:
            import_module(name)
    except ModuleNotFoundError as error:
        return f"{error.name} is not installed: python -m pip install PySide6-Essentials"
    except ImportError as error:
        return missing_library(str(error))
    if under_x:
        missing = [name for name in X_PACKAGES if not _loads(name)]
        if missing:
            return _install(missing, X_PACKAGES)
    return ""


def missing_library(message: str) -> str:
    """What to install, from what the loader says.

    Parameters
    ----------
    message : str
        Text of an ImportError.

    Returns
    -------
    str
        The Debian packages where the libraries are known, else the message itself.
    """
    known = {**PACKAGES, **X_PACKAGES}
    match = _MISSING.search(message)
    if match is None or match[1] not in known:
        return f"Qt cannot be loaded: {message}"
    others = [name for name in PACKAGES if name != match[1] and not _loads(name)]
    return _install([match[1], *others], known)


def _install(libraries: list[str], packages: Mapping[str, str]) -> str:
    names = " ".join(dict.fromkeys(packages[library] for library in libraries))
    listed = ", ".join(libraries)
    return f"Qt needs system libraries that are not here ({listed}); on Debian: apt install {names}"


def _loads(library: str) -> bool:
    try:
        ctypes.CDLL(library)
    except OSError:
        return False
    return True


def _no_display(environment: Mapping[str, str]) -> tuple[str, bool]:
    """Why there is no display, empty where there is one; and whether it is one of X."""
    wayland, display = environment.get("WAYLAND_DISPLAY", ""), environment.get("DISPLAY", "")
    if wayland and (Path(environment.get("XDG_RUNTIME_DIR", "/")) / wayland).is_socket():
        return "", False
    if not display:
        return "there is no display (neither DISPLAY nor WAYLAND_DISPLAY leads to one)", False
    if not _answers(display):
        return f"no display answers at DISPLAY={display}", False
    return "", True


def _answers(display: str) -> bool:
    """Whether an X server listens: where none does, Qt would end the process instead of saying so."""
    match = _DISPLAY.fullmatch(display)
    if match is None:
        return False
    host, number = match["host"], int(match["number"])
    if host in {"", "unix"}:
        path = str(Path("/tmp") / ".X11-unix" / f"X{number}")
        return _connects(socket.AF_UNIX, path) or _connects(socket.AF_UNIX, f"\0{path}")
    try:
        with socket.create_connection((host, _FIRST_PORT + number), timeout=_PATIENCE):
            return True
    except (OSError, OverflowError):
        return False


def _connects(family: int, address: str) -> bool:
    with socket.socket(family, socket.SOCK_STREAM) as probe:
        probe.settimeout(_PATIENCE)
        try:
            probe.connect(address)
        except OSError:
            return False
    return True
