"""When to compute and when to say it: once a frame, in place; and the kernels' compilation off the window's thread."""

from __future__ import annotations

from collections.abc import Callable
from enum import IntEnum

from PySide6.QtCore import QElapsedTimer, QMetaObject, QObject, Qt, QThread, QTimer, Signal, Slot

FRAME_MS = 10
"""From the start of one run to the next. Less than a screen's frame, so that a run that came late is caught up."""
WORDS_MS = 25
"""While a hand moves: from one telling of the words to the next, at the least. No reader follows faster."""


class FrameTimer(QObject):
    """Runs a function soon, but not twice within a frame; many requests make one run, which sees the newest state."""

    def __init__(self, run: Callable[[], None], parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._run = run
        self._asked = False
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.setTimerType(Qt.TimerType.PreciseTimer)
        self._timer.timeout.connect(self._fire)
        self._since = QElapsedTimer()

    def request(self) -> None:
        """Ask for a run."""
        if self._asked:
            return
        self._asked = True
        elapsed = self._since.elapsed() if self._since.isValid() else FRAME_MS
        if elapsed >= FRAME_MS:
            # Before the window is painted: a timer would come after, and the same event be painted twice.
            QMetaObject.invokeMethod(self, "_fire", Qt.ConnectionType.QueuedConnection)
        else:
            self._timer.start(FRAME_MS - elapsed)

    def flush(self) -> None:
        """Run now if a run is asked for."""
        self._fire()

    def stop(self) -> None:
        """Forget what was asked for."""
        self._asked = False
        self._timer.stop()

    @Slot()
    def _fire(self) -> None:
        if not self._asked:
            return
        self.stop()
        self._since.start()
        self._run()


class AfterFrame(QObject):
    """Runs a function after the frame under way is painted, and spares frames that come faster than ``WORDS_MS``.

    Right after the frame where the last one with a run is so long ago; else when no other frame has come for so long.
    A run in between would meet the next event.
    """

    def __init__(self, run: Callable[[], None], parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._run = run
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.setTimerType(Qt.TimerType.PreciseTimer)
        self._timer.timeout.connect(self._fire)
        self._since = QElapsedTimer()

    def request(self) -> None:
        """Ask for a run, with the frame that is asked for."""
        due = not self._since.isValid() or self._since.elapsed() >= WORDS_MS
        if due:
            self._since.start()
        # A timer of 0 would be idle work, which a flood of events keeps back for good.
        self._timer.start(1 if due else WORDS_MS)

    def flush(self) -> None:
        """Run now if a run is asked for."""
        if self._timer.isActive():
            self._fire()

    def stop(self) -> None:
        """Forget what was asked for."""
        self._timer.stop()

    def _fire(self) -> None:
        self._timer.stop()
        self._run()


class Readiness(IntEnum):
    """What can be computed without waiting for a compiler."""

    NOTHING = 0
    LOOPS = 1
    """Gains and margins."""
    ALL = 2
    """The time response as well."""


class WarmUp(QThread):
    """Compiles the kernels, the loops' first; connect its signals to objects of the window's thread."""

    reached = Signal(Readiness)
    failed = Signal(str)

    def __init__(
        self, compile_loops: Callable[[], None], compile_all: Callable[[], None], parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._steps = ((Readiness.LOOPS, compile_loops), (Readiness.ALL, compile_all))

    def run(self) -> None:
        """The thread's work."""
        try:
            for readiness, step in self._steps:
                if self.isInterruptionRequested():
                    return
                step()
                self.reached.emit(readiness)
        except Exception as error:  # noqa: BLE001  (whatever it is, the window has to hear of it)
            self.failed.emit(f"{type(error).__name__}: {error}")
