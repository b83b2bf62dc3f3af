"""A box to tick, behind its words."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import QCheckBox, QSizePolicy, QWidget

from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance

_BOX_PX, _GAP_PX = 12.0, 5.0


class CheckBox(QCheckBox):
    """Small, in muted words; a tick tells that it is on."""

    def __init__(self, words: str, name: str, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(words, parent)
        self._appearance = appearance
        self.setAccessibleName(name)
        self.setFont(sized(self.font(), SMALL_PX))
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        appearance.changed.connect(self.update)

    def sizeHint(self) -> QSize:  # noqa: N802
        """Words, and the box."""
        words = self.fontMetrics().horizontalAdvance(self.text())
        return QSize(words + round(_GAP_PX + _BOX_PX) + 3, 20)

    def hitButton(self, pos: object) -> bool:  # noqa: N802
        """All of it can be pressed."""
        return True

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """Words, and the box behind them."""
        theme = self._appearance.theme
        strong = self.isEnabled() and (self.underMouse() or self.hasFocus() or self.isChecked())
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setFont(self.font())
            painter.setPen(QColor(theme.ink if strong else theme.muted))
            align = int(Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft)
            painter.drawText(self.rect(), align, self.text())
            box = QRectF(self.width() - _BOX_PX - 1.5, (self.height() - _BOX_PX) / 2.0, _BOX_PX, _BOX_PX)
            pen = QPen(QColor(theme.ink if self.hasFocus() else theme.outline), 2.0 if self.hasFocus() else 1.2)
            if not self.isEnabled():
                pen.setStyle(Qt.PenStyle.DotLine)
            painter.setPen(pen)
            painter.setBrush(QColor(theme.card))
            painter.drawRoundedRect(box, 2.0, 2.0)
            if self.isChecked():
                painter.setPen(QPen(QColor(theme.ink), 1.8))
                tick = ((0.22, 0.52), (0.42, 0.74), (0.80, 0.26))
                painter.drawPolyline(QPolygonF([box.topLeft() + QPointF(x, y) * _BOX_PX for x, y in tick]))
