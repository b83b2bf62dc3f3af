"""The row below a plot that says which measured curves are in it, with the box that shows and hides them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent
from PySide6.QtWidgets import QWidget

from gainbench_app.theme import Theme
from gainbench_app.what_it_does.measured_logs import Unread
from gainbench_app.what_it_does.measured_marks import Bead, Layer, paint_sample
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.check_box import CheckBox
from gainbench_app.widgets.figure import Axes
from gainbench_app.widgets.hands import Hands

ROW_PX = 21
_WORD = "measured"
_BOX_LEFT_PX = 12
_SAMPLE_PX = 22.0
_GAP_PX = 14.0
_BASE_PX = 14.5
_READINGS_PX, _READING_PX = 14.0, 15.0
"""Where readings begin below the middle of their panel, and how high each is."""
_NAME_SHARE = 0.19
"""Of the width that the name of a log may take."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LegendEntry:
    """One log."""

    name: str
    more: str = ""
    """Muted words behind its name."""
    tip: str = ""
    """What is said when pointed at."""
    bead: Bead | None = None
    """None where it gives no curve."""


def unread_entry(unread: Unread) -> LegendEntry:
    """A log that gives no curve: in short why, in full when pointed at."""
    if not unread.reason:
        return LegendEntry(name=unread.name, more="is being read", tip=f"{unread.name} is being read")
    short = unread.reason.removeprefix(f"{unread.name}: ").split("; ")[0]
    return LegendEntry(name=unread.name, more=short, tip=unread.reason)


def readings_room(axes: Axes, end: float) -> int:
    """How many readings stand below the name of a panel before something else begins there [px], at least one."""
    return max(1, int((end - axes.box.center().y() - _READINGS_PX) / _READING_PX))


class MeasuredLegend(QWidget):
    """Stands at the bottom of a figure; not there where there is no log for it."""

    def __init__(self, name: str, appearance: Appearance, parent: QWidget, *, left: float, threaded: bool) -> None:
        """A name for screen readers, where its words begin [px], and whether curves are lines."""
        super().__init__(parent)
        self._appearance = appearance
        self._left = left
        self._threaded = threaded
        self._entries: tuple[LegendEntry, ...] = ()
        self._hands = Hands()
        self._layer = Layer()
        self.box = CheckBox(_WORD, name, appearance, self)
        self.box.setChecked(True)
        self.box.setToolTip("show or hide what was measured on the bench")
        self.box.move(_BOX_LEFT_PX, 0)
        self.setAccessibleName(f"legend of {name}")
        self.setVisible(False)
        appearance.changed.connect(self.update)

    @property
    def entries(self) -> tuple[LegendEntry, ...]:
        """The logs."""
        return self._entries

    @property
    def shows(self) -> bool:
        """Whether measured curves are to be drawn."""
        return self.box.isChecked() and any(one.bead is not None for one in self._entries)

    @property
    def height_px(self) -> int:
        """The room that it takes below the plot."""
        return ROW_PX if self._entries else 0

    def show_entries(self, entries: Sequence[LegendEntry]) -> None:
        """Tell of other logs."""
        entries = tuple(entries)
        if entries != self._entries:
            self._entries = entries
            self.setVisible(bool(entries))
            self.box.setVisible(any(one.bead is not None for one in entries))
            self.setToolTip("\n\n".join(one.tip for one in entries if one.tip))
            self.setAccessibleDescription("\n".join(f"{one.name}: {one.more}" for one in entries))
            self.update()

    def place(self, width: int, height: int) -> None:
        """Stand at the bottom of a figure of this size."""
        self.setGeometry(0, height - ROW_PX, width, ROW_PX)

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """Samples and words; the box paints itself."""
        with QPainter(self) as painter:
            theme = self._appearance.theme
            self._layer.paint(
                painter, (self._entries, self.box.isChecked(), theme), lambda own: self._paint(own, theme)
            )

    def paint_into(self, painter: QPainter, theme: Theme) -> None:
        """The row in a picture of its figure, the word of the box in place of the box."""
        if not self.shows:
            return
        painter.save()
        painter.translate(self.pos())
        painter.setFont(self._hands.of(self.font(), 12).font)
        painter.setPen(QColor(theme.muted))
        painter.drawText(QPointF(_BOX_LEFT_PX, _BASE_PX), _WORD)
        self._paint(painter, theme)
        painter.restore()

    def _paint(self, painter: QPainter, theme: Theme) -> None:
        strong, plain = (self._hands.of(self.font(), 12, bold=bold) for bold in (True, False))
        shown = self.box.isChecked()
        told = shown and (len(self._entries) == 1 or not self._threaded)
        x = self._left
        for one in self._entries:
            if one.bead is not None and shown:
                at = QPointF(x, 0.5 * ROW_PX - 0.5)
                paint_sample(painter, at, _SAMPLE_PX, bead=one.bead, threaded=self._threaded, theme=theme)
                x += _SAMPLE_PX + 6.0
            for words, hand, colour in ((one.name, strong, theme.ink), (one.more, plain, theme.muted)):
                room = self.width() - x - 6.0
                # Of several steps the names come first; their figures are said when pointed at.
                if not words or room < 20.0 or (hand is plain and one.bead is not None and not told):
                    continue
                if hand is strong:
                    share = _NAME_SHARE * self.width()
                    cut = hand.metrics.elidedText(words, Qt.TextElideMode.ElideMiddle, min(room, share))
                else:
                    cut = hand.metrics.elidedText(words, Qt.TextElideMode.ElideRight, room)
                painter.setFont(hand.font)
                painter.setPen(QColor(colour if shown or one.bead is None else theme.muted))
                painter.drawText(QPointF(x, _BASE_PX), cut)
                x += hand.width(cut) + 6.0
            x += _GAP_PX - 6.0
