"""Fonts of a widget and how wide words are in them: to make them anew for every word takes longer than to paint it."""

from __future__ import annotations

from dataclasses import dataclass, field

from PySide6.QtGui import QFont, QFontMetricsF

from gainbench_app.theme import sized

_MOST_WIDTHS = 500
"""Widths of so many words are remembered."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Hand:
    """A font, and how wide words are in it."""

    font: QFont
    metrics: QFontMetricsF
    _widths: dict[str, float] = field(default_factory=dict)

    def width(self, words: str) -> float:
        """Of words [px]; names come again with every frame, and many numbers do."""
        found = self._widths.get(words)
        if found is None:
            if len(self._widths) >= _MOST_WIDTHS:
                self._widths.clear()
            found = self._widths[words] = self.metrics.horizontalAdvance(words)
        return found


class Hands:
    """The hands of one widget; its owner forgets them where its font changes."""

    def __init__(self) -> None:
        self._found: dict[tuple[int, bool], Hand] = {}

    def of(self, font: QFont, pixels: int, *, bold: bool = False) -> Hand:
        """The widget's font in a size and weight."""
        key = (pixels, bold)
        found = self._found.get(key)
        if found is None:
            own = sized(font, pixels, bold=bold)
            found = self._found[key] = Hand(font=own, metrics=QFontMetricsF(own))
        return found

    def forget(self) -> None:
        """The widget has another font."""
        self._found.clear()
