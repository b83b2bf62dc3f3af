"""A few words in a row, one of them underlined."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import QLineF, QSize, Qt
from PySide6.QtGui import QColor, QIcon, QPainter, QPen, QPixmap
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QPushButton, QWidget

from gainbench_app.widgets.appearance import Appearance

_SAMPLE = QSize(16, 12)


class Choices(QWidget):
    """Quiet tabs."""

    def __init__(
        self,
        name: str,
        words: tuple[str, ...],
        *,
        appearance: Appearance | None = None,
        samples: Mapping[str, str] | None = None,
        tips: Mapping[str, str] | None = None,
        parent: QWidget | None = None,
    ) -> None:
        """Words, with a sample line in a colour of the theme before some, and more about some when pointed at."""
        super().__init__(parent)
        self.setAccessibleName(name)
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(4)
        self._appearance = appearance
        self._samples = samples or {}
        self.group = QButtonGroup(self)
        self.buttons: dict[str, QPushButton] = {}
        for word in words:
            button = QPushButton(word)
            button.setProperty("flat", True)
            button.setCheckable(True)
            button.setAccessibleName(f"{name}: {word}")
            button.setToolTip((tips or {}).get(word, ""))
            button.setIconSize(_SAMPLE)
            self.group.addButton(button)
            self.buttons[word] = button
            line.addWidget(button)
        self.buttons[words[0]].setChecked(True)
        if appearance is not None:
            appearance.changed.connect(self._paint_samples)
            self._paint_samples()

    @property
    def word(self) -> str:
        """The word chosen; empty where none is."""
        return next((word for word, button in self.buttons.items() if button.isChecked()), "")

    def choose(self, word: str) -> None:
        """Choose a word."""
        self.buttons[word].setChecked(True)

    def clear(self) -> None:
        """Choose none."""
        self.group.setExclusive(False)
        for button in self.buttons.values():
            button.setChecked(False)
        self.group.setExclusive(True)

    def _paint_samples(self) -> None:
        for word, colour in self._samples.items():
            if self._appearance is not None:
                self.buttons[word].setIcon(_line_icon(getattr(self._appearance.theme, colour)))


def _line_icon(colour: str) -> QIcon:
    pixmap = QPixmap(_SAMPLE * 2)
    pixmap.setDevicePixelRatio(2.0)
    pixmap.fill(Qt.GlobalColor.transparent)
    with QPainter(pixmap) as painter:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(colour), 2.0))
        painter.drawLine(QLineF(1.0, 6.5, 15.0, 6.5))
    return QIcon(pixmap)
