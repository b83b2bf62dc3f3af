"""The signals of a log over its time, and the span of it that counts: dragged with the mouse or moved by keys."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPen, QPolygonF

from gainbench.model import SIGNAL_DIMENSIONS, LogColumn, SignalName
from gainbench.units import pretty, unit_size
from gainbench_app.pages.evidence.guesses import SIGNALS
from gainbench_app.pages.evidence.overview import LogOverview
from gainbench_app.pages.evidence.stacked import Curve, Panel, StackedFigure, hue_of
from gainbench_app.what_it_does.spans import Span
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes
from gainbench_app.widgets.movement import Movement

PANEL_PX = 74
_NEAR_PX = 9.0
_DRAGGED_PX = 5.0
_HALF_PX = 5.0
_SHORTEST = 1e-3
"""Of a span, as a share of the log."""
_TOGETHER = {SignalName.SPEED: SignalName.SPEED_REFERENCE, SignalName.CURRENT: SignalName.CURRENT_REFERENCE}
_ORDER = (
    SignalName.SPEED,
    SignalName.SPEED_REFERENCE,
    SignalName.ANGLE,
    SignalName.CURRENT,
    SignalName.CURRENT_REFERENCE,
    SignalName.TORQUE,
    SignalName.VOLTAGE,
)


def panels_of(found: LogOverview, columns: Sequence[LogColumn]) -> list[Panel]:
    """Panels in the units of the mapping; a reference lies in the panel of its signal."""
    units = {one.signal: one.unit for one in columns}
    panels = []
    for signal in _ORDER:
        if signal not in found.signals or any(
            signal is reference and own in found.signals for own, reference in _TOGETHER.items()
        ):
            continue
        unit = units[signal]
        curves = [Curve(envelope=found.signals[signal], hue=hue_of(signal))]
        reference = _TOGETHER.get(signal)
        if reference is not None and reference in found.signals:
            curves.append(Curve(envelope=found.signals[reference], hue="ink", dashed=True))
        panels.append(
            Panel(
                name="reference" if signal in _TOGETHER.values() else SIGNALS[signal],
                unit=pretty(unit),
                size=unit_size(unit, SIGNAL_DIMENSIONS[signal]),
                curves=tuple(curves),
                about_zero=signal is not SignalName.ANGLE,
            )
        )
    return panels


class SignalPlots(StackedFigure):
    """What is outside of the span is dimmed; two handles stand at its ends."""

    span_moved = Signal(float, float)
    """While it is being moved [s]."""
    span_chosen = Signal(float, float)
    """When it is let go [s]."""

    top_px = 20.0

    def __init__(self, appearance: Appearance) -> None:
        super().__init__(appearance)
        self.setAccessibleName("signals of the log")
        self.setToolTip(
            "drag over the plots to choose a span, or drag its ends;"
            " Up and Down choose an end, Left and Right move it by 1 %, with Shift by 0.1 %"
        )
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self._length = 1.0
        self._part = Span(start=0.0, stop=1.0)
        self._before = self._part
        self._end = 0
        """The handle that the keys move: 0 the first, 1 the last."""
        self._anchor: float | None = None
        """Where a new span was begun [s]."""
        self._pressed_px = 0.0
        self.movement = Movement(self)
        self.movement.grabbed.connect(self._remember)
        self.movement.dropped.connect(self._let_go)
        self.movement.taken_back.connect(self._take_back)
        self.show_log(None, ())

    @property
    def span(self) -> Span:
        """The part that counts, as it is shown."""
        return self._part

    def show_log(self, found: LogOverview | None, columns: Sequence[LogColumn]) -> None:
        """Show another log, or none."""
        panels = panels_of(found, columns) if found is not None else []
        self._length = found.length if found is not None else 1.0
        self.show_panels(panels, length=self._length)
        self.setFixedHeight(round(self.top_px) + 26 + max(1, len(panels)) * (PANEL_PX + 16))

    def show_span(self, span: Span | None) -> None:
        """Show another part, unless it is being moved."""
        if self.movement.under_way:
            return
        self._part = span or Span(start=0.0, stop=self._length)
        self._tell()
        self.update()

    def reads_out(self) -> bool:
        """Not while a span is dragged."""
        return not self.movement.by_hand

    def _tell(self) -> None:
        ends = ("first", "last")
        words = f"span from {self._part.start:.4g} s to {self._part.stop:.4g} s, the {ends[self._end]} end is chosen"
        if self.accessibleDescription() != words:
            self.setAccessibleDescription(words)

    # Moving the span

    def _axes(self) -> Axes | None:
        panels = self.panels()
        return panels[0] if panels else None

    def end_px(self, end: int) -> float:
        """Where a handle is, from the left."""
        axes = self._axes()
        at = self._part.stop if end else self._part.start
        return float(axes.across(at)) if axes is not None else 0.0

    def _time_at(self, pixel: float) -> float:
        axes = self._axes()
        return min(max(axes.x_at(pixel), 0.0), self._length) if axes is not None else 0.0

    def _put(self, start: float, stop: float) -> None:
        self._part = Span(start=start, stop=stop)
        self._tell()
        self.span_moved.emit(start, stop)
        self.update()

    def _move_end(self, to: float) -> None:
        least = _SHORTEST * self._length
        if self._end == 0:
            self._put(min(max(to, 0.0), self._part.stop - least), self._part.stop)
        else:
            self._put(self._part.start, max(min(to, self._length), self._part.start + least))

    def mousePressEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Take hold of an end, or begin a new span."""
        axes = self._axes()
        if event.button() != Qt.MouseButton.LeftButton or axes is None:
            event.ignore()
            return
        x = event.position().x()
        away = [abs(x - self.end_px(end)) for end in (0, 1)]
        near = away[0] <= away[1]
        self._pressed_px = x
        if min(away) <= _NEAR_PX:
            self._end, self._anchor = (0 if near else 1), None
        elif axes.box.left() <= x <= axes.box.right():
            self._anchor = self._time_at(x)
        else:
            event.ignore()
            return
        self.movement.press()
        self._tell()
        self.update()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Drag, or look."""
        super().mouseMoveEvent(event)
        x = event.position().x()
        if not self.movement.by_hand:
            near = bool(self.shown) and min(abs(x - self.end_px(end)) for end in (0, 1)) <= _NEAR_PX
            self.setCursor(Qt.CursorShape.SizeHorCursor if near else Qt.CursorShape.CrossCursor)
        elif self._anchor is None:
            self._move_end(self._time_at(x))
        elif abs(x - self._pressed_px) > _DRAGGED_PX:
            start, stop = sorted((self._anchor, self._time_at(x)))
            self._end = 1 if self._time_at(x) >= self._anchor else 0
            self._put(start, max(stop, start + _SHORTEST * self._length))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Let go."""
        if event.button() == Qt.MouseButton.LeftButton:
            self.movement.release()
            self.update()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Back to all of it."""
        self.movement.take_back()
        if self.shown:
            self.span_chosen.emit(0.0, self._length)

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Up and Down choose an end, Left and Right move it, Home and End bring it to the log's, Esc takes back."""
        key = Qt.Key(event.key())
        steps = {Qt.Key.Key_Left: -1.0, Qt.Key.Key_Right: 1.0}
        if key == Qt.Key.Key_Escape and self.movement.take_back():
            self.update()
        elif self.shown and key in (Qt.Key.Key_Up, Qt.Key.Key_Down):
            self.movement.finish()
            self._end = 1 - self._end
            self._tell()
            self.update()
        elif self.shown and key in steps and not self.movement.by_hand:
            fine = 0.001 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 0.01
            self.movement.nudge()
            at = self._part.stop if self._end else self._part.start
            self._move_end(at + steps[key] * fine * self._length)
        else:
            event.ignore()

    def focusInEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Show which end the keys move."""
        super().focusInEvent(event)
        self.update()

    def focusOutEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Leaving ends the movement."""
        if not self.movement.by_hand:
            self.movement.finish()
        super().focusOutEvent(event)
        self.update()

    def _remember(self) -> None:
        self._before = self._part

    def _let_go(self) -> None:
        self._anchor = None
        if self._part != self._before:
            self.span_chosen.emit(self._part.start, self._part.stop)

    def _take_back(self) -> None:
        self._anchor = None
        self._put(self._before.start, self._before.stop)

    # Painting

    def paint_over(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Dim what does not count, and draw the handles."""
        if not panels:
            return
        theme = self.theme
        ends = [self.end_px(0), self.end_px(1)]
        veil = QColor(theme.paper)
        veil.setAlphaF(0.72)
        for axes in panels:
            box = axes.box
            if ends[0] > box.left() + 0.5:
                painter.fillRect(QRectF(box.left() + 1.0, box.top(), ends[0] - box.left() - 1.0, box.height()), veil)
            if ends[1] < box.right() - 0.5:
                painter.fillRect(QRectF(ends[1], box.top(), box.right() - ends[1] + 1.0, box.height()), veil)
        top, bottom = panels[0].box.top(), panels[-1].box.bottom()
        for end, x in enumerate(ends):
            strong = self.hasFocus() and self._end == end
            colour = QColor(theme.ink if strong or self.movement.by_hand else theme.outline)
            painter.setPen(QPen(colour, 1.0))
            painter.drawLine(QPointF(x, top), QPointF(x, bottom))
            painter.setBrush(colour if strong else QColor(theme.card))
            arrow = [
                QPointF(x - _HALF_PX, top - 10.0),
                QPointF(x + _HALF_PX, top - 10.0),
                QPointF(x, top - 1.0),
            ]
            painter.drawPolygon(QPolygonF(arrow))
        painter.setBrush(Qt.BrushStyle.NoBrush)
