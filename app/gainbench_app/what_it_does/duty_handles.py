"""The times of the duty as handles over the time plots: when reference and load come, and when it stops."""

from __future__ import annotations

import math
from dataclasses import dataclass

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPolygonF
from PySide6.QtWidgets import QWidget

from gainbench.model import Duty
from gainbench_app.theme import SMALL_PX
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.hands import Hands
from gainbench_app.widgets.movement import Movement
from gainbench_app.widgets.scales import Range, time_text

HEIGHT_PX = 18
SIDE_PX = 8
"""The strip is so much wider than the plots on either side, for handles at their ends."""
_NEAR_PX = 9.0
_HALF_PX = 5.0


@dataclass(frozen=True, slots=True, kw_only=True)
class DutyTime:
    """One handle."""

    path: str
    """``duty.load_at``."""
    name: str
    at: float
    """[s]."""
    earliest: float
    latest: float


def duty_times(duty: Duty) -> tuple[DutyTime, ...]:
    """The times of a duty that can be moved, and how far the sheet's rules let them."""
    found = []
    last = duty.length
    if duty.reference_speed != 0.0:
        end = last if duty.stop_at is None else duty.stop_at
        found.append(
            DutyTime(path="duty.reference_at", name="reference", at=duty.reference_at, earliest=0.0, latest=end)
        )
    if duty.load_step != 0.0:
        found.append(DutyTime(path="duty.load_at", name="load", at=duty.load_time, earliest=0.0, latest=last))
    if duty.stop_at is not None:
        found.append(
            DutyTime(path="duty.stop_at", name="stop", at=duty.stop_at, earliest=duty.reference_at, latest=last)
        )
    return tuple(found)


class DutyHandles(QWidget):
    """A strip above the plots. It shows what it is told to show: the owner moves the times."""

    grabbed = Signal(str)
    moved = Signal(str, float)
    """Path, and the instant that is asked for [s]."""
    dropped = Signal()
    taken_back = Signal()

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self._times: tuple[DutyTime, ...] = ()
        self._span = Range(low=0.0, high=1.0, step=0.2)
        self._chosen = 0
        self._under: int | None = None
        self._hands = Hands()
        self.movement = Movement(self)
        self.movement.grabbed.connect(self._grab)
        self.movement.dropped.connect(self.dropped)
        self.movement.taken_back.connect(self.taken_back)
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("times of the duty")
        self.setToolTip("drag a time; Up and Down choose one, Left and Right move it by 1 %, with Shift 0.1 %")
        appearance.changed.connect(self.update)

    def sizeHint(self) -> QSize:  # noqa: N802
        """A strip."""
        return QSize(200, HEIGHT_PX)

    @property
    def times(self) -> tuple[DutyTime, ...]:
        """The handles."""
        return self._times

    @property
    def chosen(self) -> DutyTime | None:
        """The one that the keys move."""
        return self._times[self._chosen] if self._times else None

    def show_times(self, times: tuple[DutyTime, ...], span: Range) -> None:
        """Show other times, or another stretch of them."""
        if (times, span) == (self._times, self._span):
            return
        self._times, self._span = times, span
        self._chosen = min(self._chosen, max(0, len(times) - 1))
        self._tell()
        self.update()

    def _tell(self) -> None:
        parts = [f"{one.name} at {time_text(one.at)}" for one in self._times]
        chosen = self.chosen
        words = ", ".join(parts) + (f"; {chosen.name} is chosen" if chosen is not None and len(parts) > 1 else "")
        if words != self.accessibleDescription():
            self.setAccessibleDescription(words)

    def place_of(self, time: DutyTime) -> float:
        """Pixels from the left of the strip."""
        return SIDE_PX + (time.at - self._span.low) / self._span.span * (self.width() - 2.0 * SIDE_PX)

    def _instant(self, x: float) -> float:
        """The instant at a place, as finely as pixels tell."""
        width = max(1.0, self.width() - 2.0 * SIDE_PX)
        instant = self._span.low + (x - SIDE_PX) / width * self._span.span
        fine = 10.0 ** math.floor(math.log10(self._span.span / width))
        return round(instant / fine) * fine

    def _in_sight(self, time: DutyTime) -> bool:
        return -1.0 <= self.place_of(time) - SIDE_PX <= self.width() - 2.0 * SIDE_PX + 1.0

    def _nearest(self, x: float) -> int | None:
        away = {index: abs(self.place_of(one) - x) for index, one in enumerate(self._times) if self._in_sight(one)}
        best = min(away, key=lambda index: away[index], default=None)
        return best if best is not None and away[best] <= _NEAR_PX else None

    def _grab(self) -> None:
        if self.chosen is not None:
            self.grabbed.emit(self.chosen.path)

    def _ask(self, instant: float) -> None:
        chosen = self.chosen
        if chosen is not None:
            self.moved.emit(chosen.path, min(max(instant, chosen.earliest), chosen.latest))

    def mousePressEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Take hold of the handle below the mouse."""
        under = self._nearest(event.position().x())
        if event.button() != Qt.MouseButton.LeftButton or under is None:
            event.ignore()
            return
        self.movement.finish()
        self._chosen = under
        self._tell()
        self.movement.press()
        self.update()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Drag, or look."""
        if self.movement.by_hand:
            self._ask(self._instant(event.position().x()))
            return
        self._under = self._nearest(event.position().x())
        found = Qt.CursorShape.ArrowCursor if self._under is None else Qt.CursorShape.SizeHorCursor
        self.setCursor(found)
        self.update()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Let go."""
        if event.button() == Qt.MouseButton.LeftButton:
            self.movement.release()
            self.update()

    def leaveEvent(self, event: QEvent) -> None:  # noqa: N802
        """Nothing is below the mouse."""
        self._under = None
        self.update()
        super().leaveEvent(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Left and Right move the chosen time by 1 % of what is shown, Up and Down choose, Esc takes back."""
        key, chosen = event.key(), self.chosen
        steps = {Qt.Key.Key_Left: -1.0, Qt.Key.Key_Right: 1.0}
        turns = {Qt.Key.Key_Up: -1, Qt.Key.Key_Down: 1}
        if key == Qt.Key.Key_Escape and self.movement.take_back():
            self.update()
        elif chosen is not None and key in steps and not self.movement.by_hand:
            fine = 0.001 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 0.01
            self.movement.nudge()
            self._ask(chosen.at + steps[Qt.Key(key)] * fine * self._span.span)
        elif chosen is not None and key in turns and not self.movement.by_hand:
            self.movement.finish()
            self._chosen = (self._chosen + turns[Qt.Key(key)]) % len(self._times)
            self._tell()
            self.update()
        else:
            event.ignore()

    def changeEvent(self, event: QEvent) -> None:  # noqa: N802
        """Another font has other widths."""
        super().changeEvent(event)
        if event.type() == QEvent.Type.FontChange:
            self._hands.forget()

    def focusInEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Show which one the keys move."""
        super().focusInEvent(event)
        self.update()

    def focusOutEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Leaving ends the movement."""
        if not self.movement.by_hand:
            self.movement.finish()
        super().focusOutEvent(event)
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """Arrows that point down into the plots, with their names where there is room."""
        theme = self._appearance.theme
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            hand = self._hands.of(self.font(), SMALL_PX)
            painter.setFont(hand.font)
            free = -1e9
            for index, one in enumerate(self._times):
                if not self._in_sight(one):
                    continue
                x = self.place_of(one)
                moved = self.movement.under_way and index == self._chosen
                strong = moved or index == self._under or (self.hasFocus() and index == self._chosen)
                colour = QColor(theme.ink if strong else theme.outline)
                base = self.height() - 1.0
                arrow = [QPointF(x - _HALF_PX, base - 8.0), QPointF(x + _HALF_PX, base - 8.0), QPointF(x, base)]
                painter.setPen(colour)
                painter.setBrush(colour if strong else QColor(theme.card))
                painter.drawPolygon(QPolygonF(arrow))
                words = f"{one.name} {time_text(one.at)}" if strong else one.name
                width = hand.width(words)
                left = min(x + _HALF_PX + 3.0, self.width() - width)
                if left > free and left > x - 1.0:
                    painter.setPen(QColor(theme.ink if strong else theme.muted))
                    painter.drawText(QRectF(left, 0.0, width + 2.0, base), int(Qt.AlignmentFlag.AlignVCenter), words)
                    free = left + width + 4.0
