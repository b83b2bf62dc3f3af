"""A box to choose one of a few words."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QPointF, Signal
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QPolygonF, QWheelEvent
from PySide6.QtWidgets import QComboBox, QWidget

from gainbench_app.widgets.appearance import Appearance


class ChoiceBox(QComboBox):
    """Words of the sheet, shown in the words of people."""

    chosen = Signal(str)
    """The word, when the user chose another one."""

    def __init__(
        self,
        name: str,
        words: Sequence[tuple[str, str]],
        appearance: Appearance,
        *,
        quiet: bool = False,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self.setProperty("quiet", quiet)
        self.setAccessibleName(name)
        for word, shown in words:
            self.addItem(shown, word)
        self.activated.connect(self._activated)
        self._word: str | None = None
        appearance.changed.connect(self.update)

    def show_word(self, word: str | None) -> None:
        """Show a word; None or one that is not among the choices shows none."""
        if word == self._word and self.currentData() == word:
            return
        self._word = word
        self.setCurrentIndex(self.findData(word) if word is not None else -1)

    def mark(self, problem: str) -> None:
        """Say why the choice is refused; empty takes the mark away."""
        wrong = bool(problem)
        if self.accessibleDescription() != problem:
            self.setProperty("wrong", wrong)
            self.style().unpolish(self)
            self.style().polish(self)
            self.setAccessibleDescription(problem)

    def wheelEvent(self, event: QWheelEvent) -> None:  # noqa: N802
        """The wheel scrolls the column, unless the box has the focus."""
        if self.hasFocus():
            super().wheelEvent(event)
        else:
            event.ignore()

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """The box, with an arrow of its own."""
        super().paintEvent(event)
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(QPen(QColor(self._appearance.theme.muted), 1.4))
            x, y = self.width() - 12.0, self.height() / 2.0
            painter.drawPolyline(QPolygonF([QPointF(x - 3.5, y - 1.5), QPointF(x, y + 2.0), QPointF(x + 3.5, y - 1.5)]))

    def _activated(self, index: int) -> None:
        word = self.itemData(index)
        if isinstance(word, str) and word != self._word:
            self._word = word
            self.chosen.emit(word)
