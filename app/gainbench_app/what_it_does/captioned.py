"""A plot with a line above it: what is drawn in it, or what is below the mouse."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen

from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.widgets.figure import Figure

CAPTION_PX = 24.0
LEFT_PX = 12.0
_SAMPLE_PX = 14.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Sample:
    """One word of a caption, behind a line like the one it names."""

    words: str
    colour: str = ""
    """Empty for words without a line."""
    dashed: bool = False


class CaptionedFigure(Figure):
    """A figure of the third view."""

    def paint_caption(self, painter: QPainter, samples: Sequence[Sample]) -> None:
        """What is drawn."""
        painter.setFont(sized(self.font(), SMALL_PX))
        metrics = QFontMetricsF(painter.font())
        x = LEFT_PX
        for one in samples:
            if one.colour:
                pen = QPen(QColor(one.colour), 2.0)
                if one.dashed:
                    pen.setDashPattern([2.0, 1.5])
                painter.setPen(pen)
                painter.drawLine(QPointF(x, 12.5), QPointF(x + _SAMPLE_PX, 12.5))
                x += _SAMPLE_PX + 4.0
            painter.setPen(QColor(self.theme.muted))
            painter.drawText(QPointF(x, 16.5), one.words)
            x += metrics.horizontalAdvance(one.words) + 12.0

    def paint_reading(self, painter: QPainter, words: str) -> None:
        """What is below the mouse, in place of the caption."""
        painter.setFont(sized(self.font(), SMALL_PX, bold=True))
        painter.fillRect(QRectF(0.0, 0.0, self.width(), CAPTION_PX), QColor(self.theme.card))
        painter.setPen(QColor(self.theme.ink))
        painter.drawText(QPointF(LEFT_PX, 16.5), words)

    def paint_at_right(self, painter: QPainter, words: str) -> None:
        """A figure beside the caption."""
        painter.setFont(sized(self.font(), SMALL_PX, bold=True))
        width = QFontMetricsF(painter.font()).horizontalAdvance(words)
        painter.setPen(QColor(self.theme.ink))
        painter.drawText(QPointF(self.width() - width - 14.0, 16.5), words)

    def paint_message(self, painter: QPainter, words: str) -> None:
        """Why there is nothing to draw."""
        painter.setFont(sized(self.font(), SMALL_PX))
        painter.setPen(QColor(self.theme.muted))
        box = QRectF(20.0, 30.0, max(self.width() - 40.0, 40.0), max(self.height() - 60.0, 20.0))
        painter.drawText(box, int(Qt.AlignmentFlag.AlignCenter | Qt.TextFlag.TextWordWrap), words)
