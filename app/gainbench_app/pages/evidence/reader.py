"""Files are looked into off the window's thread, one after the other."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QObject, QRunnable, Qt, QThreadPool, Signal, Slot

from gainbench.errors import LogError
from gainbench_app.collecting import CollectorHold


class _Work(QRunnable):
    """One look into one file."""

    def __init__(self, number: int, work: Callable[[], object], done: Callable[[int, object], None]) -> None:
        super().__init__()
        self._number, self._work, self._done = number, work, done

    def run(self) -> None:
        """The thread's part."""
        found: object
        try:
            found = self._work()
        except LogError as error:
            found = error
        except MemoryError:
            found = LogError("there is not enough memory for this log; cut it to the part that matters")
        except Exception as error:  # noqa: BLE001  (whatever a file holds, the window has to hear of it)
            found = LogError(f"it cannot be read: {type(error).__name__}: {error}")
        self._done(self._number, found)


class Reader(QObject):
    """Runs what it is asked for in the order of asking; what was found arrives in the window's thread."""

    found = Signal(object, object)
    """The key, and what was found: a result, or the LogError instead."""
    _returned = Signal(int, object)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._pool = QThreadPool(self)
        self._pool.setMaxThreadCount(1)
        self._keys: dict[int, object] = {}
        self._running: set[int] = set()
        """Work that will return, whether its answer is still wanted or not."""
        self._collector = CollectorHold()
        self._next = 0
        # Emitted by the worker, received where this object lives.
        self._returned.connect(self._receive, Qt.ConnectionType.QueuedConnection)

    @property
    def busy(self) -> bool:
        """Whether something is still to come."""
        return bool(self._keys)

    def asked(self, key: object) -> bool:
        """Whether an answer for a key is still to come."""
        return key in self._keys.values()

    def ask(self, key: object, work: Callable[[], object]) -> None:
        """Do something in the worker, unless it is asked for already."""
        if self.asked(key):
            return
        self._next += 1
        self._keys[self._next] = key
        self._running.add(self._next)
        self._collector.take()
        self._pool.start(_Work(self._next, work, self._returned.emit))

    def drop(self) -> None:
        """Take back what has not begun, and say nothing of what has."""
        self._keys.clear()
        self._pool.clear()
        # One thread works in the order of asking: at most the oldest has begun.
        begun = bool(self._running) and self._pool.activeThreadCount() > 0
        self._keep_running({min(self._running)} if begun else set())

    def close(self) -> None:
        """The same, and wait for what has begun: a file is read to its end."""
        self.drop()
        self._pool.waitForDone()
        self._keep_running(set())

    @Slot(int, object)
    def _receive(self, number: int, found: object) -> None:
        self._keep_running(self._running - {number})
        if number in self._keys:
            self.found.emit(self._keys.pop(number), found)

    def _keep_running(self, numbers: set[int]) -> None:
        self._running = numbers
        if not numbers:
            self._collector.release()
