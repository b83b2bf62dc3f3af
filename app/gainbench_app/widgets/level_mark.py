"""The shape of a judgement: a disc holds, a half disc is thin, a cross breaks."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from gainbench.results import Level
from gainbench_app.theme import Theme
from gainbench_app.widgets.appearance import Appearance

WORDS = {Level.HOLDS: "holds", Level.THIN: "thin", Level.BREAKS: "breaks"}


class LevelMark(QWidget):
    """One shape."""

    def __init__(self, appearance: Appearance, *, size: int = 11, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self._level: Level | None = Level.HOLDS
        self._size = size
        self._tell()
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        appearance.changed.connect(self.update)

    @property
    def level(self) -> Level | None:
        """What is shown; None is an empty ring: not judged."""
        return self._level

    def show_level(self, level: Level | None) -> None:
        """Show a judgement; None where there is none yet."""
        if level is not self._level:
            self._level = level
            self._tell()
            self.update()

    def _tell(self) -> None:
        words = WORDS[self._level] if self._level is not None else "not judged"
        self.setAccessibleName(words)
        self.setToolTip(words)

    def sizeHint(self) -> QSize:  # noqa: N802
        """A square."""
        return QSize(self._size + 2, self._size + 2)

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """The shape."""
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            paint_level(
                painter, self._level, theme=self._appearance.theme, box=QRectF(1.0, 1.0, self._size, self._size)
            )


def paint_level(painter: QPainter, level: Level | None, *, theme: Theme, box: QRectF) -> None:
    """Paint the shape of a level into a square."""
    painter.save()
    if level is Level.BREAKS:
        pen = QPen(QColor(theme.breaks), box.width() / 4.5)
        pen.setCapStyle(Qt.PenCapStyle.RoundCap)
        painter.setPen(pen)
        inner = box.adjusted(box.width() / 7, box.width() / 7, -box.width() / 7, -box.width() / 7)
        painter.drawLine(inner.topLeft(), inner.bottomRight())
        painter.drawLine(inner.topRight(), inner.bottomLeft())
    elif level is Level.THIN:
        colour = QColor(theme.thin)
        edge = box.adjusted(0.8, 0.8, -0.8, -0.8)
        painter.setPen(QPen(colour, 1.6))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawEllipse(edge)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(colour)
        painter.drawPie(edge, 90 * 16, 180 * 16)
    elif level is Level.HOLDS:
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(theme.holds))
        painter.drawEllipse(box)
    else:
        painter.setPen(QPen(QColor(theme.muted), 1.6))
        painter.drawEllipse(QPointF(box.center()), box.width() / 2 - 0.8, box.height() / 2 - 0.8)
    painter.restore()
