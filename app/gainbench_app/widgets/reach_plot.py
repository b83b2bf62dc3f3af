"""The reach map as a control: crossover across, phase margin up, what can be met filled, and a point to drag in it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPen, QWheelEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, Figure, paint_band, paint_line
from gainbench_app.widgets.map_view import MapPoint, MapView, largest_margin, nearest_target, told
from gainbench_app.widgets.movement import Movement
from gainbench_app.widgets.scales import Range, frequency_text

HEIGHT_PX = 98
_LEFT, _RIGHT, _TOP, _BOTTOM = 32.0, 6.0, 6.0, 20.0
_RADIUS, _RING = 6.0, 5.0
_NEAR_PX = 9.0
_STEPS = {
    Qt.Key.Key_Right: (1.0, 0.0),
    Qt.Key.Key_Left: (-1.0, 0.0),
    Qt.Key.Key_Up: (0.0, 1.0),
    Qt.Key.Key_Down: (0.0, -1.0),
    Qt.Key.Key_PageUp: (10.0, 0.0),
    Qt.Key.Key_PageDown: (-10.0, 0.0),
}
_LEAST_STEP_OF = math.radians(9.0)
"""A step of the margin is a share of the margin, or of this where that is larger."""


class ReachPlot(Figure):
    """The map of one loop. It shows what it is told to show: the owner may stop the point anywhere."""

    grabbed = Signal()
    moved = Signal(float, float)
    """Crossover [rad/s] and margin [rad] that are asked for."""
    stepped = Signal(float, float)
    """Bandwidth [rad/s] and margin [rad] that are asked for by keys, where the map asks for a bandwidth."""
    dropped = Signal()
    taken_back = Signal()

    def __init__(self, loop: str, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self._loop = loop
        self._view: MapView | None = None
        self._off = QPointF()
        """From the mouse to the point while it is dragged."""
        self.movement = Movement(self)
        self.movement.grabbed.connect(self.grabbed)
        self.movement.dropped.connect(self.dropped)
        self.movement.taken_back.connect(self.taken_back)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setFixedHeight(HEIGHT_PX)
        self.setAccessibleName(f"reach map of the {loop} loop")

    def sizeHint(self) -> QSize:  # noqa: N802
        """As wide as there is room."""
        return QSize(200, HEIGHT_PX)

    @property
    def view(self) -> MapView | None:
        """What is shown."""
        return self._view

    def show_view(self, view: MapView | None) -> None:
        """Show another map or another point."""
        others = view is None or self._view is None or view.areas is not self._view.areas
        if view == self._view and not others:
            return
        if others:
            self.forget_background()
        self._view = view
        words = told(view)
        if words != self.accessibleDescription():
            self.setAccessibleDescription(words)
        drag = view is not None and view.asked
        self.setToolTip("drag the point; arrow keys 1 %, with Shift 0.1 %; Esc takes it back" if drag else "")
        self.setCursor(Qt.CursorShape.PointingHandCursor if drag else Qt.CursorShape.ArrowCursor)
        self.update()

    def show_point(self, crossover: float, margin: float) -> None:
        """Show the point elsewhere, before all that follows is known: steps that come faster than frames add up."""
        if self._view is not None and self._view.point is not None:
            point = MapPoint(crossover=crossover, margin=margin)
            if point != self._view.point:
                self._view = replace(self._view, point=point)
                self.update()

    def show_asked(self, bandwidth: float, margin: float) -> None:
        """As :meth:`show_point`, of a bandwidth, whose crossover is not known yet."""
        point = self._view.point if self._view is not None else None
        if point is not None and (point.bandwidth, point.margin) != (bandwidth, margin):
            self._view = replace(self._view, point=replace(point, bandwidth=bandwidth, margin=margin))
            self.update()

    # Where things are

    def panels(self) -> list[Axes]:
        """One panel."""
        view = self._view
        box = QRectF(_LEFT, _TOP, max(40.0, self.width() - _LEFT - _RIGHT), self.height() - _TOP - _BOTTOM)
        decades = view.decades if view is not None else Range(low=0.0, high=3.0, step=1.0)
        degrees = view.degrees if view is not None else Range(low=30.0, high=90.0, step=30.0)
        return [Axes(box=box, x=decades, y=degrees, log_x=True)]

    def place_of(self, point: MapPoint) -> QPointF:
        """Where a point is on the widget, on the rim of the panel where it is beyond."""
        axes = self.panels()[0]
        at = axes.point(max(point.crossover, 1e-12) / math.tau, math.degrees(point.margin))
        box = axes.box
        return QPointF(min(max(at.x(), box.left()), box.right()), min(max(at.y(), box.top()), box.bottom()))

    def nearest(self, at: QPointF) -> MapPoint | None:
        """The target closest to a place that can be met; None where none can."""
        return None if self._view is None else nearest_target(self._view, self.panels()[0], at=at)

    # Painting

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """What can be met, in the loop's hue, on a shade of what cannot."""
        axes, theme, view = panels[0], self.theme, self._view
        box, colour = axes.box, getattr(self.theme, self._loop)
        painter.fillRect(box, QColor(theme.mixed(theme.outline, 0.20)))
        if view is not None:
            painter.save()
            painter.setClipRect(box)
            for area in view.areas:
                hertz, low, high = area.crossover / math.tau, np.degrees(area.low), np.degrees(area.high)
                paint_band(painter, axes, x=hertz, low=low, high=high, colour=theme.mixed(colour, 0.24))
            for area in view.areas:
                hertz, low, high = area.crossover / math.tau, np.degrees(area.low), np.degrees(area.high)
                x = np.concatenate((hertz[:1], hertz, hertz[-1:]))
                paint_line(painter, axes, x=x, y=np.concatenate((low[:1], high, low[-1:])), colour=colour)
                if float(low.max()) > axes.y.low:
                    paint_line(painter, axes, x=hertz, y=low, colour=colour)
            painter.restore()
        self._paint_numbers(painter, axes)

    def _paint_numbers(self, painter: QPainter, axes: Axes) -> None:
        for tick in axes.y.ticks():
            y = float(axes.down(tick))
            painter.setPen(QPen(QColor(self.theme.mixed(self.theme.outline, 0.45)), 1.0))
            painter.drawLine(QPointF(axes.box.left() - 3.0, y), QPointF(axes.box.left(), y))
            painter.setPen(QColor(self.theme.muted))
            top = min(max(y - 9.0, -2.0), self.height() - 18.0)
            align = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
            painter.drawText(QRectF(0.0, top, axes.box.left() - 5.0, 18.0), align, f"{tick:.0f}°")
        ticks = _hertz_ticks(axes.x)
        labels = []
        metrics = painter.fontMetrics()
        for index, hertz in enumerate(ticks):
            x = float(axes.across(hertz))
            painter.setPen(QPen(QColor(self.theme.mixed(self.theme.outline, 0.45)), 1.0))
            painter.drawLine(QPointF(x, axes.box.bottom()), QPointF(x, axes.box.bottom() + 3.0))
            words = _hertz_text(hertz, unit=index == len(ticks) - 1)
            # Room is left for the last one, which carries the unit.
            if index == len(ticks) - 1 or x + metrics.horizontalAdvance(words) < axes.box.right() - 40.0:
                labels.append((x, words))
        self.paint_x_labels(painter, axes, labels=labels)

    def background_key(self) -> tuple[object, ...]:
        """The areas are told apart when they are shown."""
        return (self._loop,)

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Kept tunings, then the point over them."""
        view, theme = self._view, self.theme
        if view is None:
            painter.setPen(QColor(theme.muted))
            painter.drawText(panels[0].box, int(Qt.AlignmentFlag.AlignCenter), "being prepared")
            return
        point = self.place_of(view.point) if view.point is not None else None
        for one in view.kept:
            at = self.place_of(one)
            # Below the point a ring could not be seen.
            hidden = point is not None and (at - point).manhattanLength() < _RADIUS
            radius = _RADIUS + 4.0 if hidden else _RING
            painter.setBrush(Qt.BrushStyle.NoBrush)
            pen = QPen(QColor(theme.ink), 1.5)
            pen.setDashPattern([1.2, 1.4])
            painter.setPen(pen)
            painter.drawEllipse(at, radius, radius)
        if point is not None:
            self._paint_point(painter, view, point)
        self._paint_name(painter, panels[0], view)
        self._paint_cursor(painter, panels, view)

    def _paint_point(self, painter: QPainter, view: MapView, at: QPointF) -> None:
        theme = self.theme
        colour = QColor(getattr(theme, self._loop))
        if not view.met:
            for width, ink in ((5.0, theme.card), (2.4, theme.breaks)):
                painter.setPen(QPen(QColor(ink), width))
                painter.drawLine(at - QPointF(5.0, 5.0), at + QPointF(5.0, 5.0))
                painter.drawLine(at - QPointF(5.0, -5.0), at + QPointF(5.0, -5.0))
            return
        if view.asked:
            painter.setPen(QPen(QColor(theme.card), 2.0))
            painter.setBrush(colour)
            painter.drawEllipse(at, _RADIUS, _RADIUS)
        else:
            painter.setPen(QPen(colour, 2.0))
            painter.setBrush(QColor(theme.card))
            painter.drawEllipse(at, _RADIUS - 2.0, _RADIUS - 2.0)
        painter.setBrush(Qt.BrushStyle.NoBrush)
        if self.hasFocus():
            painter.setPen(QPen(QColor(theme.ink), 1.5))
            painter.drawEllipse(at, _RADIUS + 3.0, _RADIUS + 3.0)

    def _paint_name(self, painter: QPainter, axes: Axes, view: MapView) -> None:
        """The name of the kept tuning below the mouse."""
        cursor = self.cursor_at
        if cursor is None or self.movement.by_hand:
            return
        under = [one for one in view.kept if (self.place_of(one) - cursor).manhattanLength() < 1.5 * _NEAR_PX]
        at = None
        for index, one in enumerate(under):
            at = at or self.place_of(one)
            words = f"{one.name}: {one.words}"
            self.paint_tag(painter, words, at=at + QPointF(8.0, -12.0 + 15.0 * index), colour=self.theme.ink, axes=axes)

    def _paint_cursor(self, painter: QPainter, panels: Sequence[Axes], view: MapView) -> None:
        """What is below the mouse, and the largest margin there."""
        at, axes = self.cursor_at, panels[0]
        if at is None or self.movement.by_hand or not axes.box.contains(at):
            return
        hertz = axes.x_at(at.x())
        margin = axes.y.low + (axes.box.bottom() - at.y()) / axes.box.height() * axes.y.span
        top = largest_margin(view, math.tau * hertz)
        words = f"{frequency_text(hertz)} · {margin:.0f}°, " + (
            "out of reach" if top is None else f"at most {top:.1f}°"
        )
        self.paint_hair(painter, panels, x=at.x(), words=words)

    # Moving

    def _can_move(self) -> bool:
        return self._view is not None and self._view.asked and self._view.point is not None

    def _ask(self, at: QPointF) -> None:
        found = self.nearest(at)
        if found is not None:
            self.moved.emit(found.crossover, found.margin)

    def mousePressEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Take hold; the point comes to the hand."""
        if event.button() != Qt.MouseButton.LeftButton or not self._can_move():
            event.ignore()
            return
        point = self._view.point if self._view is not None else None
        away = self.place_of(point) - event.position() if point is not None else QPointF()
        # Taking hold of the point itself does not move it yet.
        self._off = away if away.manhattanLength() <= _NEAR_PX else QPointF()
        self.movement.press()
        if self._off is not away:
            self._ask(event.position())

    def mouseMoveEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Drag, or look."""
        super().mouseMoveEvent(event)
        if self.movement.by_hand:
            self._ask(event.position() + self._off)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Let go."""
        if event.button() == Qt.MouseButton.LeftButton:
            self.movement.release()
            self.update()

    def wheelEvent(self, event: QWheelEvent) -> None:  # noqa: N802
        """The wheel moves the crossover or bandwidth, only with focus; else it scrolls the column."""
        turns = event.angleDelta().y() / 120.0
        if not self.hasFocus() or not turns or not self._can_move():
            event.ignore()
            return
        fine = 0.1 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 1.0
        self._nudge(turns * fine, 0.0)
        event.accept()

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Arrow keys 1 %, with Shift 0.1 %, Page keys 10 % of the crossover or bandwidth; Esc takes a movement back."""
        if event.key() == Qt.Key.Key_Escape and self.movement.take_back():
            self.update()
        elif event.key() in _STEPS and self._can_move():
            fine = 0.1 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 1.0
            across, up = _STEPS[Qt.Key(event.key())]
            self._nudge(across * fine, up * fine)
        else:
            event.ignore()

    def _nudge(self, across: float, up: float) -> None:
        point = self._view.point if self._view is not None else None
        if point is None or self.movement.by_hand:
            return
        self.movement.nudge()
        factor = 1.0 + across / 100.0
        margin = point.margin + max(point.margin, _LEAST_STEP_OF) * up / 100.0
        margin = min(max(margin, 0.0), math.pi / 2.0)
        if point.bandwidth is not None:
            self.stepped.emit(point.bandwidth * factor, margin)
        else:
            self.moved.emit(point.crossover * factor, margin)

    def focusInEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Show the ring of the focus."""
        super().focusInEvent(event)
        self.update()

    def focusOutEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Leaving ends the movement."""
        if not self.movement.by_hand:
            self.movement.finish()
        super().focusOutEvent(event)
        self.update()


def _hertz_ticks(decades: Range) -> list[float]:
    """1, 2 and 5 times powers of ten; only 1 where there are many decades."""
    series = (1.0, 2.0, 5.0) if decades.span < 2.2 else (1.0,)
    found = [
        one * 10.0**power for power in range(math.floor(decades.low), math.ceil(decades.high) + 1) for one in series
    ]
    return [one for one in found if decades.low - 1e-9 <= math.log10(one) <= decades.high + 1e-9]


def _hertz_text(hertz: float, *, unit: bool) -> str:
    words = f"{hertz / 1000.0:g}k" if hertz >= 1000.0 else f"{hertz:g}"
    if not unit:
        return words
    return f"{words[:-1]}\N{NO-BREAK SPACE}kHz" if words.endswith("k") else f"{words}\N{NO-BREAK SPACE}Hz"
