"""A line to type a value into: it keeps what was typed, and hands it over when the typing is done."""

from __future__ import annotations

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QKeySequence, QPainter, QPaintEvent
from PySide6.QtWidgets import QLineEdit, QWidget

from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.grounded import Grounded


class ValueBox(QLineEdit):
    """A box for one value."""

    committed = Signal(str)
    """The text, when Enter is pressed or the box is left, where it is another than before."""

    def __init__(self, name: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName(name)
        self.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.setMinimumWidth(60)
        self._shown = ""

    def show_text(self, text: str) -> None:
        """Put a text in, unless something is being typed."""
        if self.hasFocus() and self.isModified() and self.text() != self._shown:
            return
        if text == self._shown == self.text():
            return
        self._shown = text
        if self.text() != text:
            self.setText(text)
            self.setCursorPosition(0)
        self.setModified(False)

    def mark(self, problem: str) -> None:
        """Say why the text is refused; empty takes the mark away."""
        wrong = bool(problem)
        if self.accessibleDescription() != problem:
            self.setProperty("wrong", wrong)
            self.style().unpolish(self)
            self.style().polish(self)
            self.setAccessibleDescription(problem)

    def event(self, event: QEvent) -> bool:
        """Undo is the box's own while something is being typed, else the sheet's."""
        if (
            event.type() == QEvent.Type.ShortcutOverride
            and isinstance(event, QKeyEvent)
            and self.text() == self._shown
            and (event.matches(QKeySequence.StandardKey.Undo) or event.matches(QKeySequence.StandardKey.Redo))
        ):
            event.ignore()
            return False
        return super().event(event)

    def commit(self) -> None:
        """Hand the text over as it stands."""
        self._commit()

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Enter hands the text over, Escape takes the typing back."""
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self._commit()
            self.selectAll()
        elif event.key() == Qt.Key.Key_Escape and self.text() != self._shown:
            self.setText(self._shown)
            self.setModified(False)
        else:
            super().keyPressEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Leaving the box hands the text over."""
        if event.reason() != Qt.FocusReason.PopupFocusReason:
            self._commit()
        super().focusOutEvent(event)

    def _commit(self) -> None:
        text = self.text().strip()
        if text != self._shown:
            self._shown = text
            self.setModified(False)
            self.committed.emit(text)


class CardBox(Grounded, ValueBox):
    """A box on a card, for a value that changes with every frame."""

    def __init__(self, name: str, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(name, parent)
        self._appearance = appearance

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """The card below the box as well."""
        with QPainter(self) as painter:
            painter.fillRect(self.rect(), QColor(self._appearance.theme.card))
        super().paintEvent(event)
