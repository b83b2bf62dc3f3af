"""The garbage collector kept out of a working thread: widgets that it finds in a cycle must go in the window's thread.

The collector runs in whichever thread happens to allocate. A worker that does in Python what takes long would now and
then destroy what a closed window or dialog left behind, and the process with it.
"""

from __future__ import annotations

import gc
from typing import ClassVar


class CollectorHold:
    """Keeps the collector off while a thread of its owner works. Taken and released in the window's thread."""

    _taken_by: ClassVar[int] = 0
    """How many holds are taken: the collector is the process's, not an owner's."""

    def __init__(self) -> None:
        self._taken = False

    def take(self) -> None:
        """No collection from now on."""
        if not self._taken:
            self._taken = True
            CollectorHold._taken_by += 1
            gc.disable()

    def release(self) -> None:
        """Collections again, where no other thread works."""
        if self._taken:
            self._taken = False
            CollectorHold._taken_by -= 1
            if CollectorHold._taken_by == 0:
                # What has piled up goes here: the thread that worked has some steps left in which it would go there.
                gc.collect(0)
                gc.enable()
