"""The heads of the shelf's columns, each in line with its figures."""

from __future__ import annotations

from PySide6.QtCore import QRect, QRectF, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QHeaderView, QWidget

from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance

PAD_PX = 8.0
"""Between the words of a column and its edges."""


class ShelfHead(QHeaderView):
    """Paints small muted words; they cannot be pressed."""

    def __init__(self, appearance: Appearance, parent: QWidget) -> None:
        super().__init__(Qt.Orientation.Horizontal, parent)
        self._appearance = appearance
        self.setHighlightSections(False)
        self.setSectionsClickable(False)
        self.setMinimumSectionSize(40)
        self.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        appearance.changed.connect(self.viewport().update)

    def paintSection(self, painter: QPainter, rect: QRect, logicalIndex: int) -> None:  # noqa: N802
        """The words of one column."""
        role = Qt.ItemDataRole
        words = str(self.model().headerData(logicalIndex, Qt.Orientation.Horizontal, role.DisplayRole) or "")
        align = self.model().headerData(logicalIndex, Qt.Orientation.Horizontal, role.TextAlignmentRole)
        painter.setFont(sized(self.font(), SMALL_PX))
        painter.setPen(QColor(self._appearance.theme.muted))
        painter.drawText(QRectF(rect).adjusted(PAD_PX, 0.0, -PAD_PX, 0.0), int(align), words)
