"""Commands run as a user runs them: in a process of their own, without a display."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

_DISPLAYS = ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM")


def run_program(
    *words: str, folder: Path, module: str = "gainbench_app.start", **environment: str
) -> subprocess.CompletedProcess[str]:
    """Run the program in a folder.

    Parameters
    ----------
    words : str
        Its arguments.
    folder : Path
        Where it runs.
    module : str
        What is run.
    environment : str
        Variables to set.

    Returns
    -------
    CompletedProcess
        With what it printed, as text.
    """
    inherited = {key: value for key, value in os.environ.items() if key not in _DISPLAYS}
    return subprocess.run(
        [sys.executable, "-W", "error", "-m", module, *words],
        cwd=folder,
        env={**inherited, "PYTHONIOENCODING": "utf-8", **environment},
        capture_output=True,
        encoding="utf-8",
        timeout=300,
        check=False,
    )


def assert_refused(done: subprocess.CompletedProcess[str], *, says: str) -> None:
    """See that a run was refused as users are promised: status 2, one message, no traceback."""
    assert done.returncode == 2, done.stderr
    assert done.stdout == ""
    assert done.stderr.startswith("gainbench: ")
    assert done.stderr.count("gainbench: ") == 1
    assert "Traceback" not in done.stderr
    assert done.stderr.endswith("\n")
    assert says in done.stderr
