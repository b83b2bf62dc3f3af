"""Text over a few lines that changes with every frame: painted, so that only another number of lines moves the rest."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPaintEvent, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from gainbench_app.theme import BODY_PX, SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance

_FLAGS = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop | Qt.TextFlag.TextWordWrap)
_LINE = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop)
_ROOM = 1e5


class WrappedText(QWidget):
    """As wide as it may be, and as high as its text needs."""

    def __init__(self, appearance: Appearance, *, strong: bool = False, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self._strong = strong
        self._text = ""
        self._flags = _LINE
        self._choose_font()
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        appearance.changed.connect(self.update)

    def sizeHint(self) -> QSize:  # noqa: N802
        """Takes the width that it gets."""
        return QSize(100, self.height())

    def text(self) -> str:
        """What is shown."""
        return self._text

    def setText(self, text: str) -> None:  # noqa: N802
        """Show another text."""
        if text != self._text:
            self._text = text
            self._fit()
            self.update()

    def _choose_font(self) -> None:
        self._hand = sized(self.font(), BODY_PX if self._strong else SMALL_PX, bold=self._strong)
        self._metrics = QFontMetricsF(self._hand)

    def showEvent(self, event: QShowEvent) -> None:  # noqa: N802
        """What was hidden while its text changed is fitted now."""
        super().showEvent(event)
        self._fit()

    def _fit(self) -> None:
        if self.isHidden():
            return
        width = max(1.0, self.width())
        # One line is measured and painted in a third of the time.
        self._flags = (
            _LINE if "\n" not in self._text and self._metrics.horizontalAdvance(self._text) <= width else _FLAGS
        )
        box = self._metrics.boundingRect(QRectF(0.0, 0.0, width, _ROOM), self._flags, self._text)
        height = round(box.height() + 0.49) if self._text else 0
        if height != self.height() or height != self.minimumHeight():
            self.setFixedHeight(height)

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Another width breaks lines elsewhere."""
        super().resizeEvent(event)
        if event.size().width() != event.oldSize().width():
            self._fit()

    def changeEvent(self, event: QEvent) -> None:  # noqa: N802
        """Another font has other widths."""
        super().changeEvent(event)
        if event.type() == QEvent.Type.FontChange:
            self._choose_font()
            self._fit()

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """The text, strong in ink, else muted."""
        theme = self._appearance.theme
        with QPainter(self) as painter:
            painter.setFont(self._hand)
            painter.setPen(QColor(theme.ink if self._strong else theme.muted))
            painter.drawText(QRectF(self.rect()), self._flags, self._text)
