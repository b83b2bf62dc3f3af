"""Words that change with every frame: painted, not laid out, so that a drag does not lay out the window anew."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import takewhile

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance


@dataclass(frozen=True, slots=True, kw_only=True)
class Piece:
    """Words in one hand."""

    text: str
    strong: bool = False
    """Bold and in ink, else muted."""
    size: int = SMALL_PX
    gap: float = 0.0
    """Room before them [px]."""
    breaks: bool = False
    """Whether a line may be broken before them."""


class WordLine(QWidget):
    """One line of pieces, or a few lines; what does not fit is cut at the right and told when pointed at."""

    def __init__(
        self, name: str, appearance: Appearance, *, lines: int = 1, line_px: int = 18, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self._name = name
        self._appearance = appearance
        self._pieces: tuple[tuple[Piece, ...], ...] = ()
        self._line_px = line_px
        self._least = lines
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self.setFixedHeight(lines * line_px)
        self.setAccessibleName(name)
        appearance.changed.connect(self.update)

    def sizeHint(self) -> QSize:  # noqa: N802
        """Takes the width that it gets."""
        return QSize(100, self.height())

    def show_pieces(self, *lines: tuple[Piece, ...]) -> None:
        """Show other words."""
        if lines != self._pieces:
            self._pieces = lines
            self.setAccessibleDescription(self.text)
            self.setToolTip(self.text)
            self._fit()
            self.update()

    @property
    def text(self) -> str:
        """The words, as a screen reader says them."""
        return "\n".join(" ".join(piece.text for piece in line) for line in self._pieces)

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Another width breaks lines elsewhere."""
        super().resizeEvent(event)
        self._fit()

    def _fit(self) -> None:
        height = max(self._least, len(self._rows())) * self._line_px
        if height != self.height():
            self.setFixedHeight(height)

    def _rows(self) -> list[list[Piece]]:
        """The lines, broken where they are too long and may be."""
        rows: list[list[Piece]] = []
        for line in self._pieces:
            rows.append([])
            x = 0.0
            for index, piece in enumerate(line):
                group = [piece, *takewhile(lambda one: not one.breaks, line[index + 1 :])]
                if piece.breaks and rows[-1] and x + sum(map(self._width, group)) > self.width():
                    rows.append([])
                    piece, x = replace(piece, gap=0.0), 0.0
                rows[-1].append(piece)
                x += self._width(piece)
        return rows

    def _width(self, piece: Piece) -> float:
        metrics = QFontMetricsF(sized(self.font(), piece.size, bold=piece.strong))
        return piece.gap + metrics.horizontalAdvance(piece.text)

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """Pieces from left to right on a common base line."""
        theme = self._appearance.theme
        with QPainter(self) as painter:
            for row, line in enumerate(self._rows()):
                x = 0.0
                base = (row + 1) * self._line_px - 5.0
                for piece in line:
                    font = sized(self.font(), piece.size, bold=piece.strong)
                    painter.setFont(font)
                    metrics = QFontMetricsF(font)
                    x += piece.gap
                    words = metrics.elidedText(piece.text, Qt.TextElideMode.ElideRight, max(0.0, self.width() - x))
                    painter.setPen(QColor(theme.ink if piece.strong else theme.muted))
                    painter.drawText(int(x), int(base), words)
                    x += metrics.horizontalAdvance(words)
