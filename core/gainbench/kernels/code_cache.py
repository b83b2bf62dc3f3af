"""Where the machine code of the kernels is kept; no numba.

numba keeps the code of a function beside its source and renews it when that one file changes. A caller whose own file
stays as it is would go on running with the old code of a callee that was taken into it, after an upgrade for one. Here
the folder of a module's code is named for its source and the sources of all the kernels it imports: with any change in
any of them it is another folder.
"""

from __future__ import annotations

import hashlib
import os
import re
import sys
from pathlib import Path

_IMPORTED = re.compile(rb"^\s*from gainbench\.kernels\.(\w+) import", re.MULTILINE)


def code_cache(module: str) -> Path:
    """The folder for the code of one kernel module.

    Below ``NUMBA_CACHE_DIR`` where that is set, else in the user's cache folder, so that an install that cannot be
    written to has one too.

    Parameters
    ----------
    module : str
        Its name within this package, ``response``.

    Returns
    -------
    Path
        It may not exist yet.
    """
    sources: dict[str, bytes] = {}
    waiting = [module]
    while waiting:
        name = waiting.pop()
        if name not in sources:
            sources[name] = (Path(__file__).parent / f"{name}.py").read_bytes()
            waiting += [found.decode() for found in _IMPORTED.findall(sources[name])]
    digest = hashlib.sha256()
    for name in sorted(sources):
        digest.update(name.encode() + b"\0" + sources[name])
    return _home() / f"{module}-{digest.hexdigest()[:16]}"


def _home() -> Path:
    chosen = os.environ.get("NUMBA_CACHE_DIR")
    if chosen:
        home = Path(chosen)
    elif sys.platform == "win32":
        home = Path(os.environ.get("LOCALAPPDATA") or Path.home() / "AppData" / "Local")
    elif sys.platform == "darwin":
        home = Path.home() / "Library" / "Caches"
    else:
        home = Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache")
    return home / "gainbench" / "kernels"
