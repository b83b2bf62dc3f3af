"""Another size at once: Qt reads it when it starts, so the program starts again and carries the open sheet over.

Nothing is closed before the sheet, saved or not, is in a file. The process is replaced where the system can do that, so
that a terminal that started the program goes on waiting for it.
"""

from __future__ import annotations

import os
import secrets
import subprocess
import sys
from collections.abc import MutableMapping
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from gainbench.errors import SheetError
from gainbench.sheetfile import replace_file
from gainbench_app.autosave import Unsaved, content_of, read_unsaved
from gainbench_app.desk import Desk

SCALE_VARIABLE = "QT_SCALE_FACTOR"
"""Qt reads it once, when the application is made."""
_OWN = "GAINBENCH_OWN_SCALE"
"""Says that the variable of Qt was set here, to what."""
_CARRIED = "GAINBENCH_CARRIED"
"""The file of the sheet that is carried over."""

SET_OUTSIDE = (
    f"The size is set by {SCALE_VARIABLE} outside of Gainbench, which goes first. What was chosen here counts from the "
    "first start without it."
)

Environment = MutableMapping[str, str]


def take_up(scale: int, environment: Environment) -> None:
    """Let Qt start with a size [%]; one that is set outside goes first."""
    if scale != 100 and SCALE_VARIABLE not in environment:
        environment[SCALE_VARIABLE] = environment[_OWN] = f"{scale / 100.0:g}"


def scale_in_force(environment: Environment) -> float:
    """The size that Qt started with [%]."""
    try:
        return 100.0 * float(environment.get(SCALE_VARIABLE, "1"))
    except ValueError:
        return 100.0


def set_outside(environment: Environment) -> bool:
    """Whether the size is set by something other than this program."""
    return environment.get(SCALE_VARIABLE) != environment.get(_OWN)


class Restart(QObject):
    """Carries the open sheet over, once; what follows is the session's."""

    ready = Signal()
    """The sheet is in a file, and the window may go."""

    def __init__(self, desk: Desk, folder: Path, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._folder = folder
        self._file: Path | None = None

    @property
    def file(self) -> Path | None:
        """Where the sheet is carried over; None where the program does not start again."""
        return self._file

    def prepare(self) -> str:
        """Write the open sheet; why it cannot be, empty where it was."""
        # By a name that is looked for after a crash: what does not start again is not lost either.
        file = self._folder / f"unsaved-{os.getpid()}-{secrets.token_hex(4)}.json"
        try:
            content = content_of(self._desk)
            self._folder.mkdir(mode=0o700, parents=True, exist_ok=True)
            replace_file(file, content.encode("utf-8"))
        except (OSError, SheetError) as error:
            return f"The sheet cannot be carried over, so the new size waits for the next start: {error}"
        self._file = file
        self.ready.emit()
        return ""


def start_again(file: Path, environment: Environment) -> None:
    """Start the program again with the sheet of a file; where processes can be replaced this does not return.

    Where it cannot be started that is said, and the next start offers what was not saved.
    """
    after = {key: value for key, value in environment.items() if key != _OWN}
    if not set_outside(environment):
        after.pop(SCALE_VARIABLE, None)
    after[_CARRIED] = str(file)
    command = [sys.executable, *sys.orig_argv[1:]]
    sys.stdout.flush()
    sys.stderr.flush()
    try:
        if sys.platform == "win32":
            subprocess.Popen(command, env=after)
        else:
            os.execve(sys.executable, command, after)
    except OSError as error:
        sys.stderr.write(f"gainbench: not started again: {error}; start it by hand, unsaved work is offered then\n")


def carried_over(environment: Environment) -> Unsaved | None:
    """The sheet that the program started again with; None where it did not, or where the file is damaged."""
    file = environment.pop(_CARRIED, "")
    return read_unsaved(Path(file)) if file else None


def told(desk: Desk, scale: int) -> str:
    """What starting again brings along, and what it does not."""
    held = any(desk.held(loop) for loop in ("current", "speed"))
    lost = "Undo" + (" and the gains that are held" if held else "")
    end = "end" if held else "ends"
    return (
        f"The window has {scale} % of its size after a start. The sheet comes back as it is now, with what is not "
        f"saved. {lost} {end} with the present window, and so do sheets laid beside."
    )
