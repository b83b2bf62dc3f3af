"""Words that change with every frame: painted, not laid out, so that a drag does not lay out the window anew."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import takewhile

from PySide6.QtCore import QEvent, QLineF, QSize, Qt, QTimer
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QResizeEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from gainbench_app.theme import SMALL_PX
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.grounded import Grounded
from gainbench_app.widgets.hands import Hand, Hands

MOVED_MS = 900
"""So long a number that moved is underlined."""


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


@dataclass(frozen=True, slots=True, kw_only=True)
class _Placed:
    """A piece where it is painted."""

    piece: Piece
    hand: Hand
    x: float
    words: str
    width: float


class WordLine(Grounded, QWidget):
    """One line of pieces, or a few lines; what does not fit is cut at the right and told when pointed at."""

    def __init__(
        self,
        name: str,
        appearance: Appearance,
        *,
        lines: int = 1,
        line_px: int = 18,
        tells_moves: bool = False,
        ground: str = "card",
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._name = name
        self._appearance = appearance
        self._ground = ground
        self._pieces: tuple[tuple[Piece, ...], ...] = ()
        self._rows: list[list[_Placed]] = []
        self._hands = Hands()
        self._line_px = line_px
        self._least = self._most = lines
        self._tells_moves = tells_moves
        self._moved: frozenset[str] = frozenset()
        self._settling = QTimer(self)
        self._settling.setSingleShot(True)
        self._settling.setInterval(MOVED_MS)
        self._settling.timeout.connect(self._settle)
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
            if self._tells_moves:
                self._tell_moves(self._pieces, lines)
            self._pieces = lines
            self.setAccessibleDescription(self.text)
            self.setToolTip(self.text)
            self._fit()
            self.update()

    @property
    def text(self) -> str:
        """The words, as a screen reader says them."""
        return "\n".join(" ".join(piece.text for piece in line) for line in self._pieces)

    @property
    def moved(self) -> frozenset[str]:
        """The strong pieces that are other than a moment ago, underlined."""
        return self._moved

    def _tell_moves(self, before: tuple[tuple[Piece, ...], ...], after: tuple[tuple[Piece, ...], ...]) -> None:
        known = {piece.text for line in before for piece in line}
        now = {piece.text for line in after for piece in line if piece.strong}
        if known and now:
            self._moved = frozenset((now - known) | (self._moved & now))
            self._settling.start()

    def _settle(self) -> None:
        self._moved = frozenset()
        self.update()

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Another width breaks lines elsewhere."""
        super().resizeEvent(event)
        if event.size().width() != event.oldSize().width():
            self._most = self._least
        self._fit()

    def changeEvent(self, event: QEvent) -> None:  # noqa: N802
        """Another font has other widths."""
        super().changeEvent(event)
        if event.type() == QEvent.Type.FontChange:
            self._hands.forget()
            self._fit()

    def _fit(self) -> None:
        """Lay the words out anew, and be as high as they need.

        What they needed once stays theirs while the width does: everything around would move with each word that
        comes and goes.
        """
        self._rows = self._laid_out()
        self._most = max(self._most, len(self._rows))
        height = self._most * self._line_px
        if height != self.height():
            self.setFixedHeight(height)

    def _laid_out(self) -> list[list[_Placed]]:
        """The lines, broken where they are too long and may be, and cut at the right."""
        rows: list[list[_Placed]] = []
        room = float(self.width())
        for line in self._pieces:
            rows.append([])
            hands = [self._hands.of(self.font(), piece.size, bold=piece.strong) for piece in line]
            widths = [hand.width(piece.text) for hand, piece in zip(hands, line, strict=True)]
            x = 0.0
            for index, piece in enumerate(line):
                gap = piece.gap
                if piece.breaks and rows[-1]:
                    group = 1 + sum(1 for _ in takewhile(lambda one: not one.breaks, line[index + 1 :]))
                    gaps = sum(one.gap for one in line[index : index + group])
                    if x + gaps + sum(widths[index : index + group]) > room:
                        rows.append([])
                        gap, x = 0.0, 0.0
                x += gap
                words, width = piece.text, widths[index]
                if x + width > room:
                    metrics = hands[index].metrics
                    words = metrics.elidedText(words, Qt.TextElideMode.ElideRight, max(0.0, room - x))
                    width = hands[index].width(words)
                rows[-1].append(_Placed(piece=piece, hand=hands[index], x=x, words=words, width=width))
                x += width
        return rows

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """Pieces from left to right on a common base line."""
        theme = self._appearance.theme
        ink, muted = QColor(theme.ink), QColor(theme.muted)
        with QPainter(self) as painter:
            painter.fillRect(self.rect(), QColor(getattr(theme, self._ground)))
            for row, line in enumerate(self._rows):
                base = (row + 1) * self._line_px - 5.0
                for one in line:
                    piece = one.piece
                    painter.setFont(one.hand.font)
                    painter.setPen(ink if piece.strong else muted)
                    painter.drawText(int(one.x), int(base), one.words)
                    if piece.strong and piece.text in self._moved:
                        painter.setPen(QPen(muted, 1.0))
                        painter.drawLine(QLineF(one.x, base + 2.5, one.x + one.width, base + 2.5))
