"""The line below a page of the guide in which words are sought."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QPushButton, QWidget

from gainbench_app.guide.view import GuideView

_BOX_PX = 220


class FindBar(QWidget):
    """A box for words, how often they are there, and steps from one to the next."""

    def __init__(self, view: GuideView, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._view = view
        self.setAccessibleName("find in this page")
        self.words = QLineEdit()
        self.words.setAccessibleName("words to find in this page")
        self.words.setPlaceholderText("words to find in this page")
        self.words.setFixedWidth(_BOX_PX)
        self.words.textChanged.connect(self._seek)
        self.before = self._button("previous", backward=True)
        self.after = self._button("next", backward=False)
        self.told = QLabel()
        self.told.setProperty("role", "small")
        close = QPushButton("close")
        close.setProperty("flat", True)
        close.setAccessibleName("close the search")
        close.clicked.connect(self.leave)
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 4, 0, 0)
        line.setSpacing(8)
        line.addWidget(self.words)
        line.addWidget(self.before)
        line.addWidget(self.after)
        line.addWidget(self.told, 1)
        line.addWidget(close)
        view.page_shown.connect(lambda _: self._tell())
        self.hide()

    def _button(self, words: str, *, backward: bool) -> QPushButton:
        button = QPushButton(words)
        button.setProperty("flat", True)
        button.setAccessibleName(f"{words} of the words found")
        button.clicked.connect(lambda: self.step(backward=backward))
        return button

    def start(self) -> None:
        """Show the line, with the last words to be typed over."""
        self.show()
        self.words.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self.words.selectAll()
        self._view.search(self.words.text())
        self._tell()

    def leave(self) -> None:
        """Hide the line and its marks."""
        self.hide()
        self._view.search("")
        self._view.setFocus(Qt.FocusReason.OtherFocusReason)

    def step(self, *, backward: bool) -> None:
        """Go to the next of the words found, or to the one before; the line opens where it is shut."""
        if self.isHidden():
            self.start()
        self._view.go_to_next(backward=backward)
        self._tell()

    def _seek(self, words: str) -> None:
        self._view.search(words)
        self._view.go_to_next()
        self._tell()

    def _tell(self) -> None:
        count = self._view.found
        if not self.words.text():
            words = ""
        elif not count:
            words = "not on this page"
        else:
            words = f"{self._view.current} of {count}" if self._view.current else f"{count} on this page"
        self.told.setText(words)
        self.words.setAccessibleDescription(words)
        for button in (self.before, self.after):
            button.setEnabled(count > 0)

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Enter goes on, with Shift back; Esc ends the search."""
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.step(backward=bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier))
        elif event.key() == Qt.Key.Key_Escape:
            self.leave()
        else:
            super().keyPressEvent(event)
