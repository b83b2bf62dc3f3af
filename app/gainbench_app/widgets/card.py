"""A card: a head, a body that folds, and a line of what follows that stays."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from gainbench_app.theme import sized
from gainbench_app.widgets.appearance import Appearance

_ARROW = 15


class _Head(QPushButton):
    """The name of a card; pressing it folds the card."""

    def __init__(self, name: str, appearance: Appearance) -> None:
        super().__init__(name)
        self._appearance = appearance
        self.setProperty("flat", True)
        self.setCheckable(True)
        self.setChecked(True)
        self.setFont(sized(self.font(), 13, bold=True))
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.setAccessibleName(f"{name}, fold or unfold")
        self.setToolTip("fold or unfold")
        appearance.changed.connect(self.update)

    def sizeHint(self) -> QSize:  # noqa: N802
        """The name, and room for the arrow."""
        return QSize(self.fontMetrics().horizontalAdvance(self.text()) + _ARROW + 8, 22)

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """The name in ink and a small arrow behind it."""
        theme = self._appearance.theme
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setFont(self.font())
            painter.setPen(QColor(theme.ink))
            painter.drawText(self.rect(), int(Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft), self.text())
            x = self.fontMetrics().horizontalAdvance(self.text()) + 9.0
            y = self.height() / 2.0 + 0.5
            turned = (
                [QPointF(x - 3, y - 1.5), QPointF(x, y + 1.5), QPointF(x + 3, y - 1.5)]
                if self.isChecked()
                else [QPointF(x - 1.5, y - 3), QPointF(x + 1.5, y), QPointF(x - 1.5, y + 3)]
            )
            strong = self.underMouse() or self.hasFocus()
            painter.setPen(QPen(QColor(theme.ink if strong else theme.outline), 1.3))
            painter.drawPolyline(QPolygonF(turned))
            if self.hasFocus():
                width = self.fontMetrics().horizontalAdvance(self.text())
                painter.drawLine(QPointF(0, self.height() - 3.0), QPointF(width, self.height() - 3.0))


class Card(QFrame):
    """A framed card with a body to put things into."""

    def __init__(
        self, name: str, appearance: Appearance, *, foldable: bool = True, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self.setObjectName("card")
        self.setAccessibleName(name)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(11, 6, 11, 10)
        outer.setSpacing(2)
        self.head_line = QHBoxLayout()
        self.head_line.setSpacing(6)
        self.head_line.setContentsMargins(0, 0, 0, 0)
        if foldable:
            self.head = _Head(name, appearance)
            self.head.toggled.connect(self._fold)
            self.head_line.addWidget(self.head)
        else:
            label = QLabel(name)
            label.setProperty("role", "head")
            self.head_line.addWidget(label)
        self.head_line.addStretch(1)
        outer.addLayout(self.head_line)
        self.body = QWidget()
        self.rows = QVBoxLayout(self.body)
        self.rows.setContentsMargins(0, 0, 0, 0)
        self.rows.setSpacing(1)
        outer.addWidget(self.body)
        self.follows = QLabel()
        self.follows.setProperty("role", "small")
        self.follows.setWordWrap(True)
        self.follows.setTextFormat(Qt.TextFormat.RichText)
        self.follows.setVisible(False)
        outer.addWidget(self.follows)

    def show_follows(self, rich: str) -> None:
        """The line of what follows; empty takes it away."""
        if self.follows.text() != rich:
            self.follows.setText(rich)
        self.follows.setVisible(bool(rich))

    def _fold(self, unfolded: bool) -> None:
        self.body.setVisible(unfolded)
