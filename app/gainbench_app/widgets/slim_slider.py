"""A slim slider for one target, logarithmic where the quantity is."""

from __future__ import annotations

import math

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPen, QWheelEvent
from PySide6.QtWidgets import QAbstractSlider, QSizePolicy, QWidget

from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.grounded import Grounded
from gainbench_app.widgets.movement import Movement

_STEPS = 10_000
_RADIUS = 6.0
_UP = (Qt.Key.Key_Right, Qt.Key.Key_Up)
_DOWN = (Qt.Key.Key_Left, Qt.Key.Key_Down)
_PAGES = {Qt.Key.Key_PageUp: 10.0, Qt.Key.Key_PageDown: -10.0}


class SlimSlider(Grounded, QAbstractSlider):
    """Moves a number between two ends. It shows what it is told to show: the owner may stop it anywhere."""

    grabbed = Signal()
    moved = Signal(float)
    """The value that is asked for."""
    dropped = Signal()
    taken_back = Signal()

    def __init__(
        self,
        name: str,
        appearance: Appearance,
        *,
        colour: str,
        low: float,
        high: float,
        logarithmic: bool,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self._colour = colour
        self._logarithmic = logarithmic
        self._low, self._high = low, high
        self._number = low
        self._words: str | None = None
        self._movement = Movement(self)
        self._movement.grabbed.connect(self.grabbed)
        self._movement.dropped.connect(self.dropped)
        self._movement.taken_back.connect(self.taken_back)
        self.setRange(0, _STEPS)
        self.setOrientation(Qt.Orientation.Horizontal)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName(name)
        self.setToolTip("arrow keys 1 %, with Shift 0.1 %; Esc takes a drag back")
        appearance.changed.connect(self.update)

    def sizeHint(self) -> QSize:  # noqa: N802
        """As high as its knob."""
        return QSize(90, 18)

    def minimumSizeHint(self) -> QSize:  # noqa: N802
        """Short enough for half a column."""
        return QSize(50, 18)

    def show_range(self, low: float, high: float) -> None:
        """Put the ends elsewhere."""
        if (low, high) != (self._low, self._high):
            self._low, self._high = low, high
            self.setValue(round(self._share(self._number) * _STEPS))
            self.update()

    def show_number(self, number: float, words: str) -> None:
        """Show a value; ``words`` is what a screen reader says."""
        if number == self._number and words == self._words:
            return
        self._number, self._words = number, words
        self.setValue(round(self._share(number) * _STEPS))
        self.setAccessibleDescription(words)
        self.update()

    @property
    def number(self) -> float:
        """The value shown."""
        return self._number

    def _share(self, number: float) -> float:
        if self._logarithmic:
            if number <= 0.0:
                return 0.0
            share = math.log(number / self._low) / math.log(self._high / self._low)
        else:
            share = (number - self._low) / (self._high - self._low)
        return min(max(share, 0.0), 1.0)

    def number_at(self, x: float) -> float:
        """The value at a place of the widget [px]."""
        share = (x - _RADIUS) / max(1.0, self.width() - 2.0 * _RADIUS)
        share = min(max(share, 0.0), 1.0)
        if self._logarithmic:
            return float(self._low * (self._high / self._low) ** share)
        return self._low + share * (self._high - self._low)

    def _ask(self, number: float) -> None:
        self.moved.emit(min(max(number, self._low), self._high))

    def _stepped(self, percent: float) -> float:
        if self._logarithmic:
            return self._number * (1.0 + percent / 100.0)
        return self._number + max(abs(self._number), 0.1 * (self._high - self._low)) * percent / 100.0

    def mousePressEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Take hold; the knob comes to the hand."""
        if event.button() != Qt.MouseButton.LeftButton:
            event.ignore()
            return
        self._movement.press()
        self._ask(self.number_at(event.position().x()))
        self.update()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Drag."""
        if self._movement.by_hand:
            self._ask(self.number_at(event.position().x()))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Let go."""
        if event.button() == Qt.MouseButton.LeftButton:
            self._movement.release()
            self.update()

    def wheelEvent(self, event: QWheelEvent) -> None:  # noqa: N802
        """The wheel acts only with focus; else it scrolls the column."""
        turns = event.angleDelta().y() / 120.0
        if not self.hasFocus() or not turns:
            event.ignore()
            return
        fine = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        self._nudge(turns * (0.1 if fine else 1.0))
        event.accept()

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Arrow keys 1 %, with Shift 0.1 %; Page keys 10 %; Esc takes a movement back."""
        key = event.key()
        fine = 0.1 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 1.0
        if key in _UP:
            self._nudge(fine)
        elif key in _DOWN:
            self._nudge(-fine)
        elif key in _PAGES:
            self._nudge(_PAGES[Qt.Key(key)])
        elif key == Qt.Key.Key_Escape and self._movement.take_back():
            self.update()
        else:
            event.ignore()

    def _nudge(self, percent: float) -> None:
        if not self._movement.by_hand:
            self._movement.nudge()
            self._ask(self._stepped(percent))

    def focusOutEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Leaving ends the movement."""
        if not self._movement.by_hand:
            self._movement.finish()
        super().focusOutEvent(event)
        self.update()

    def focusInEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Show the ring of the focus."""
        super().focusInEvent(event)
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """A slim track, coloured up to a round knob."""
        theme = self._appearance.theme
        colour = QColor(getattr(theme, self._colour) if self.isEnabled() else theme.outline)
        with QPainter(self) as painter:
            painter.fillRect(self.rect(), QColor(theme.card))
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            middle = self.height() / 2.0
            x = _RADIUS + self._share(self._number) * (self.width() - 2.0 * _RADIUS)
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(theme.outline))
            painter.drawRoundedRect(QRectF(_RADIUS, middle - 1.5, self.width() - 2.0 * _RADIUS, 3.0), 1.5, 1.5)
            painter.setBrush(colour)
            painter.drawRoundedRect(QRectF(_RADIUS, middle - 1.5, x - _RADIUS, 3.0), 1.5, 1.5)
            painter.setBrush(QColor(theme.card))
            painter.setPen(QPen(colour, 2.0))
            painter.drawEllipse(QPointF(x, middle), _RADIUS - 1.2, _RADIUS - 1.2)
            if self.hasFocus():
                painter.setPen(Qt.PenStyle.NoPen)
                painter.setBrush(colour)
                painter.drawEllipse(QPointF(x, middle), 2.4, 2.4)
