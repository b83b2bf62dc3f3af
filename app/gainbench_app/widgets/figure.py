"""A plain widget that paints plots: a cached background of axes, and curves over it.

Grid lines are opaque and cached; a curve is a cosmetic pen of one pixel drawn two or four times a third of a pixel
apart, which looks like two pixels and costs a fraction of a wider pen.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import shiboken6
from numpy.typing import NDArray
from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import (
    QColor,
    QFont,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QPixmap,
    QPolygonF,
    QResizeEvent,
    QShowEvent,
)
from PySide6.QtWidgets import QPushButton, QWidget

from gainbench_app.theme import SMALL_PX, Theme
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.hands import Hand, Hands
from gainbench_app.widgets.scales import Range

Array = NDArray[np.float64]

_FOUR = ((-0.4, 0.0), (0.4, 0.0), (0.0, -0.4), (0.0, 0.4))
_TWO = ((-0.35, -0.35), (0.35, 0.35))
_ONE = ((0.0, 0.0),)
_PATCH = 0.8
"""How little the ground of a tag lets through."""
_SHORT_PX, _LONG_PX = 6_000.0, 20_000.0
_FAR = 20_000.0
"""Points beyond this many pixels are pulled in: the rasterizer works with bounded numbers."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Axes:
    """A panel: where it is on the widget, and what its edges mean."""

    box: QRectF
    x: Range
    y: Range
    log_x: bool = False
    """With it ``x`` holds exponents of ten."""

    def across(self, x: Array | float) -> Array:
        """Pixels from the left."""
        values = np.asarray(x, dtype=np.float64)
        if self.log_x:
            values = np.log10(values)
        return np.asarray(self.box.left() + (values - self.x.low) / self.x.span * self.box.width())

    def down(self, y: Array | float) -> Array:
        """Pixels from the top."""
        values = np.asarray(y, dtype=np.float64)
        return np.asarray(self.box.bottom() - (values - self.y.low) / self.y.span * self.box.height())

    def left_of(self, x: float) -> float:
        """Pixels from the left of one value."""
        at = math.log10(x) if self.log_x else x
        return self.box.left() + (at - self.x.low) / self.x.span * self.box.width()

    def top_of(self, y: float) -> float:
        """Pixels from the top of one value."""
        return self.box.bottom() - (y - self.y.low) / self.y.span * self.box.height()

    def point(self, x: float, y: float) -> QPointF:
        """A point of the panel on the widget."""
        return QPointF(self.left_of(x), self.top_of(y))

    def x_at(self, pixel: float) -> float:
        """What is at a pixel from the left."""
        value = self.x.low + (pixel - self.box.left()) / self.box.width() * self.x.span
        return float(10.0**value if self.log_x else value)


def polygon(x: Array, y: Array) -> QPolygonF:
    """Points as Qt keeps them, without an object for each."""
    count = len(x)
    points = QPolygonF()
    points.resize(count)
    if count:
        # The stubs of both know less than the modules do.
        pointer: Any = shiboken6.VoidPtr
        memory: Array = np.frombuffer(pointer(points.data(), count * 16, True), np.float64)
        for part, values in ((memory[::2], x), (memory[1::2], y)):
            # Twice as fast as a clip.
            np.minimum(np.maximum(values, -_FAR, out=part), _FAR, out=part)
    return points


def paint_line(painter: QPainter, axes: Axes, *, x: Array, y: Array, colour: str) -> None:
    """A curve that looks near two pixels wide."""
    paint_pixels(painter, axes, across=axes.across(x), down=axes.down(y), colour=colour)


def paint_pixels(painter: QPainter, axes: Axes, *, across: Array, down: Array, colour: str) -> None:
    """The same of points that are pixels already."""
    line = polygon(across, down)
    pen = QPen(QColor(colour), 1.0)
    pen.setCosmetic(True)
    painter.setPen(pen)
    for dx, dy in _passes(axes.box, across, down):
        painter.translate(dx, dy)
        painter.drawPolyline(line)
        painter.translate(-dx, -dy)


def _passes(box: QRectF, across: Array, down: Array) -> tuple[tuple[float, float], ...]:
    """How often a line is drawn, and where: the longer it is on the screen, the less often."""
    if len(across) < 2:
        return _FOUR
    inside = np.minimum(np.maximum(down, box.top()), box.bottom())
    wide, high = across[1:] - across[:-1], inside[1:] - inside[:-1]
    # Along the axes a line is never shorter than it is.
    if float(np.abs(wide).sum() + np.abs(high).sum()) < _SHORT_PX:
        return _FOUR
    length = float(np.hypot(wide, high).sum())
    return _FOUR if length < _SHORT_PX else _TWO if length < _LONG_PX else _ONE


def paint_dashed(painter: QPainter, axes: Axes, *, x: Array, y: Array, colour: str, dots: bool = False) -> None:
    """A thin dashed line of few points."""
    pen = QPen(QColor(colour), 1.0)
    pen.setCosmetic(True)
    pen.setDashPattern([1.5, 2.5] if dots else [4.0, 3.0])
    painter.setPen(pen)
    painter.drawPolyline(polygon(axes.across(x), axes.down(y)))


def paint_band(painter: QPainter, axes: Axes, *, x: Array, low: Array, high: Array, colour: str) -> None:
    """The area between two curves, opaque; smooth edges would cost more than the area."""
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(colour))
    across = axes.across(x)
    upper, lower = axes.down(high), axes.down(low)
    painter.drawPolygon(polygon(np.concatenate((across, across[::-1])), np.concatenate((upper, lower[::-1]))))
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)


def paint_hatched(painter: QPainter, box: QRectF, *, theme: Theme) -> None:
    """The band beyond a limit."""
    if box.height() <= 0.5:
        return
    painter.fillRect(box, QColor(theme.mixed(theme.breaks, 0.10)))
    painter.setPen(QPen(QColor(theme.mixed(theme.breaks, 0.34)), 1.0))
    painter.save()
    painter.setClipRect(box, Qt.ClipOperation.IntersectClip)
    x = box.left() - box.height()
    while x < box.right():
        painter.drawLine(QPointF(x, box.bottom()), QPointF(x + box.height(), box.top()))
        x += 7.0
    painter.restore()


class Figure(QWidget):
    """Panels one above the other. The owner of a subclass tells it what to show; it paints once per frame."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.appearance = appearance
        self._background: QPixmap | None = None
        self._background_of: tuple[object, ...] = ()
        self._stale = ""
        self._cursor: QPointF | None = None
        self._hands = Hands()
        self.setMouseTracking(True)
        appearance.changed.connect(self.forget_background)

    def sizeHint(self) -> QSize:  # noqa: N802
        """Takes what it gets."""
        return QSize(600, 260)

    @property
    def theme(self) -> Theme:
        """The theme in force."""
        return self.appearance.theme

    @property
    def cursor_at(self) -> QPointF | None:
        """Where the mouse is, None where it is elsewhere."""
        return self._cursor

    def show_stale(self, words: str) -> None:
        """Hatch the plots and say why; empty takes the hatching away."""
        if words != self._stale:
            self._stale = words
            self.update()

    @property
    def stale(self) -> str:
        """Why the plots are hatched."""
        return self._stale

    def forget_background(self) -> None:
        """Paint the axes anew."""
        self._background = None
        self.update()

    # For subclasses

    def panels(self) -> Sequence[Axes]:
        """The panels as they are now."""
        raise TypeError("a figure has panels")

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """What is the same from frame to frame."""
        raise TypeError("a figure has axes")

    def background_key(self) -> tuple[object, ...]:
        """What the background depends on, besides panels, size and theme."""
        return ()

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """What changes."""
        raise TypeError("a figure has curves")

    # Painting

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """The cached axes, then the curves."""
        panels = self.panels()
        key = self._axes_key(panels)
        if self._background is None or key != self._background_of:
            self._background = self._painted_background(panels)
            self._background_of = key
        with QPainter(self) as painter:
            painter.drawPixmap(0, 0, self._background)
            painter.setFont(self.small_font())
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            self.paint_curves(painter, panels)
            if self._stale:
                self._paint_stale(painter, panels)

    def _axes_key(self, panels: Sequence[Axes]) -> tuple[object, ...]:
        """What the background is of."""
        return (*((one.box.getRect(), one.x, one.y) for one in panels), *self.background_key())

    def update_curves(self) -> None:
        """Paint what is within the panels anew; around them all stays, unless axes change or something is read out."""
        panels = self.panels()
        if self._background is None or self._cursor is not None or self._axes_key(panels) != self._background_of:
            self.update()
            return
        for axes in panels:
            super().update(axes.box.toAlignedRect().adjusted(-2, -2, 2, 2))

    def paint_whole(self, painter: QPainter) -> None:
        """All of it in lines and words, for a picture: without the cached axes, and without the read-out."""
        panels, cursor = self.panels(), self._cursor
        painter.fillRect(QRectF(0.0, 0.0, self.width(), self.height()), QColor(self.theme.card))
        painter.setFont(self.small_font())
        self.paint_axes(painter, panels)
        painter.setFont(self.small_font())
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._cursor = None
        try:
            self.paint_curves(painter, panels)
        finally:
            self._cursor = cursor
        if self._stale:
            self._paint_stale(painter, panels)
        painter.setFont(self.small_font())
        painter.setPen(QColor(self.theme.muted))
        for button in self.findChildren(QPushButton):
            if button.isVisible():
                painter.drawText(QRectF(button.geometry()), int(Qt.AlignmentFlag.AlignCenter), button.text())

    def _painted_background(self, panels: Sequence[Axes]) -> QPixmap:
        ratio = self.devicePixelRatioF()
        pixmap = QPixmap(round(self.width() * ratio), round(self.height() * ratio))
        pixmap.setDevicePixelRatio(ratio)
        pixmap.fill(QColor(self.theme.card))
        with QPainter(pixmap) as painter:
            painter.setFont(self.small_font())
            self.paint_axes(painter, panels)
        return pixmap

    def _paint_stale(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
        painter.setPen(QPen(QColor(self.theme.mixed(self.theme.outline, 0.55)), 1.0))
        for axes in panels:
            painter.save()
            painter.setClipRect(axes.box)
            x = axes.box.left() - axes.box.height()
            while x < axes.box.right():
                painter.drawLine(QPointF(x, axes.box.top()), QPointF(x + axes.box.height(), axes.box.bottom()))
                x += 14.0
            painter.restore()
        if panels:
            hand = self.hand(bold=True)
            painter.setFont(hand.font)
            width = hand.width(self._stale) + 16.0
            first = panels[0].box
            box = QRectF(first.right() - width - 8.0, first.top() + 8.0, width, 22.0)
            painter.setBrush(QColor(self.theme.card))
            painter.setPen(QPen(QColor(self.theme.breaks), 1.0))
            painter.drawRoundedRect(box, 4.0, 4.0)
            painter.setPen(QColor(self.theme.breaks))
            painter.drawText(box, int(Qt.AlignmentFlag.AlignCenter), self._stale)

    def small_font(self) -> QFont:
        """The font of ticks and labels."""
        return self.hand().font

    def hand(self, pixels: int = SMALL_PX, *, bold: bool = False) -> Hand:
        """A font and its widths."""
        return self._hands.of(self.font(), pixels, bold=bold)

    def showEvent(self, event: QShowEvent) -> None:  # noqa: N802
        """Shown for the first time."""
        super().showEvent(event)
        self._hide_what_is_below()

    def changeEvent(self, event: QEvent) -> None:  # noqa: N802
        """Another style or font."""
        super().changeEvent(event)
        if event.type() in (QEvent.Type.StyleChange, QEvent.Type.FontChange):
            self._hands.forget()
            self._hide_what_is_below()

    def _hide_what_is_below(self) -> None:
        """All of it is painted here, so that nothing below has to be: the style sheet takes this mark away."""
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Another size has another background."""
        self._background = None
        super().resizeEvent(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Read out what is below the mouse."""
        self._cursor = event.position()
        self.update()

    def leaveEvent(self, event: QEvent) -> None:  # noqa: N802
        """Nothing to read out."""
        self._cursor = None
        self.update()
        super().leaveEvent(event)

    # Parts of axes

    def paint_grid(self, painter: QPainter, axes: Axes, *, across: Sequence[float], down: Sequence[float]) -> None:
        """Opaque lines at pixels: verticals at ``across``, horizontals at ``down``, and the axes' own edges."""
        box = axes.box
        painter.setPen(QPen(QColor(self.theme.grid), 1.0))
        for x in across:
            painter.drawLine(QPointF(round(x) + 0.5, box.top()), QPointF(round(x) + 0.5, box.bottom()))
        for y in down:
            painter.drawLine(QPointF(box.left(), round(y) + 0.5), QPointF(box.right(), round(y) + 0.5))
        painter.setPen(QPen(QColor(self.theme.rule), 1.0))
        left, bottom = round(box.left()) + 0.5, round(box.bottom()) + 0.5
        painter.drawLine(QPointF(left, box.top()), QPointF(left, bottom))
        painter.drawLine(QPointF(left, bottom), QPointF(box.right(), bottom))

    def paint_y_labels(self, painter: QPainter, axes: Axes, *, labels: Sequence[tuple[float, str]]) -> None:
        """Numbers left of a panel, at pixels from the top; those that would touch are left out."""
        painter.setPen(QColor(self.theme.muted))
        last = float("inf")
        for y, words in sorted(labels, reverse=True):
            if last - y < SMALL_PX + 2.0:
                continue
            last = y
            box = QRectF(axes.box.left() - 76.0, y - 9.0, 70.0, 18.0)
            painter.drawText(box, int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter), words)

    def paint_x_labels(self, painter: QPainter, axes: Axes, *, labels: Sequence[tuple[float, str]]) -> None:
        """Numbers below a panel, at pixels from the left; the last ones are kept within the widget."""
        painter.setPen(QColor(self.theme.muted))
        metrics = painter.fontMetrics()
        free = -1e9
        for x, words in labels:
            width = metrics.horizontalAdvance(words)
            left = min(x - width / 2.0, self.width() - width - 4.0)
            if left < free + 8.0:
                continue
            free = left + width
            painter.drawText(QPointF(left, axes.box.bottom() + 17.0), words)

    def paint_name(self, painter: QPainter, axes: Axes, *, name: str, unit: str, right: float) -> None:
        """What a panel shows, outside of it, right-aligned at a pixel from the left."""
        middle = axes.box.center().y()
        align = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        painter.setFont(self.hand(bold=True).font)
        painter.setPen(QColor(self.theme.ink))
        painter.drawText(QRectF(0.0, middle - 18.0, right, 18.0), align, name)
        painter.setFont(self.small_font())
        painter.setPen(QColor(self.theme.muted))
        painter.drawText(QRectF(0.0, middle - 2.0, right, 18.0), align, unit)

    def paint_hair(self, painter: QPainter, panels: Sequence[Axes], *, x: float, words: str) -> None:
        """A hair line through all panels, and what is there below the last one, over the numbers of its axis."""
        painter.setPen(QPen(QColor(self.theme.outline), 1.0))
        for axes in panels:
            painter.drawLine(QPointF(x, axes.box.top()), QPointF(x, axes.box.bottom()))
        hand = self.hand(bold=True)
        painter.setFont(hand.font)
        width = hand.width(words) + 10.0
        left = min(max(x - width / 2.0, 2.0), self.width() - width - 2.0)
        box = QRectF(left, panels[-1].box.bottom() + 3.0, width, 18.0)
        painter.fillRect(box, QColor(self.theme.card))
        painter.setPen(QColor(self.theme.ink))
        painter.drawText(box, int(Qt.AlignmentFlag.AlignCenter), words)

    def paint_readings(
        self, painter: QPainter, axes: Axes, *, readings: Sequence[tuple[str, str]], right: float
    ) -> None:
        """Words and colours below the name of a panel, right-aligned at a pixel from the left."""
        painter.setFont(self.hand(bold=True).font)
        align = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        top = axes.box.center().y() + 14.0
        for words, colour in readings:
            painter.setPen(QColor(colour))
            painter.drawText(QRectF(0.0, top, right, 16.0), align, words)
            top += 15.0

    def paint_tag(self, painter: QPainter, words: str, *, at: QPointF, colour: str, axes: Axes) -> QRectF:
        """Words right of a point, on a patch of card that lets little through, kept within a panel."""
        hand = self.hand(bold=True)
        painter.setFont(hand.font)
        box = QRectF(at.x(), at.y() - 8.0, hand.width(words) + 4.0, 16.0)
        box.moveLeft(min(max(box.left(), axes.box.left() + 2.0), axes.box.right() - box.width()))
        box.moveTop(min(max(box.top(), axes.box.top()), axes.box.bottom() - box.height()))
        align = int(Qt.AlignmentFlag.AlignCenter)
        patch = QColor(self.theme.card)
        patch.setAlphaF(_PATCH)
        painter.fillRect(box.adjusted(1.0, 1.0, -1.0, -1.0), patch)
        painter.setPen(QColor(colour))
        painter.drawText(box, align, words)
        return box
