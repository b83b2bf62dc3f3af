"""Which colour is which: a short line of each, with its name."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QSize
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance

_LINE_PX, _GAP_PX = 16.0, 14.0


class Legend(QWidget):
    """Names of quantities in the theme, each behind a line of its colour."""

    def __init__(self, appearance: Appearance, names: tuple[str, ...], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self._names = names
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("colours of the loops")
        self.setAccessibleDescription(", ".join(names))
        appearance.changed.connect(self.update)

    def sizeHint(self) -> QSize:  # noqa: N802
        """As wide as its names."""
        metrics = QFontMetricsF(sized(self.font(), SMALL_PX))
        width = sum(metrics.horizontalAdvance(name) + _LINE_PX + 5.0 + _GAP_PX for name in self._names)
        return QSize(round(width), 18)

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """Lines and names."""
        theme = self._appearance.theme
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            font = sized(self.font(), SMALL_PX)
            painter.setFont(font)
            metrics = QFontMetricsF(font)
            x = 0.0
            for name in self._names:
                painter.setPen(QPen(QColor(getattr(theme, name)), 2.0))
                painter.drawLine(QPointF(x, 9.5), QPointF(x + _LINE_PX, 9.5))
                x += _LINE_PX + 5.0
                painter.setPen(QColor(theme.muted))
                painter.drawText(QPointF(x, 13.5), name)
                x += metrics.horizontalAdvance(name) + _GAP_PX
