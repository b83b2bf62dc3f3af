"""A movement of a handle: by mouse from press to release, by keys as long as they follow each other."""

from __future__ import annotations

from PySide6.QtCore import QObject, QTimer, Signal

REST_MS = 700
"""Key presses and turns of the wheel that follow each other faster are one movement."""


class Movement(QObject):
    """Knows whether something is being moved, and tells once when it begins and once when it ends."""

    grabbed = Signal()
    dropped = Signal()
    taken_back = Signal()

    def __init__(self, parent: QObject) -> None:
        super().__init__(parent)
        self._under_way = False
        self._by_hand = False
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.setInterval(REST_MS)
        self._rest.timeout.connect(self.finish)

    @property
    def under_way(self) -> bool:
        """Whether something is being moved."""
        return self._under_way

    @property
    def by_hand(self) -> bool:
        """Whether the mouse holds it."""
        return self._by_hand

    def press(self) -> None:
        """The mouse takes hold."""
        self.finish()
        self._by_hand = True
        self._start()

    def release(self) -> None:
        """The mouse lets go."""
        if self._by_hand:
            self._by_hand = False
            self.finish()

    def nudge(self) -> None:
        """A key or the wheel moves it a little; more may follow."""
        self._start()
        self._rest.start()

    def finish(self) -> None:
        """It stays where it is."""
        self._rest.stop()
        self._by_hand = False
        if self._under_way:
            self._under_way = False
            self.dropped.emit()

    def take_back(self) -> bool:
        """It goes back to where it was; False where nothing is being moved."""
        if not self._under_way:
            return False
        self._rest.stop()
        self._under_way = self._by_hand = False
        self.taken_back.emit()
        return True

    def _start(self) -> None:
        if not self._under_way:
            self._under_way = True
            self.grabbed.emit()
