"""The findings: each with its shape, its statement, its reason and what to try next, and a way there."""

from __future__ import annotations

import re

from PySide6.QtCore import QEvent, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QEnterEvent, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QHBoxLayout, QVBoxLayout, QWidget

from gainbench.model import Sheet
from gainbench.results import Finding
from gainbench_app.desk import Desk
from gainbench_app.what_we_ask.finding_links import what_to_move
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.level_mark import WORDS, LevelMark
from gainbench_app.widgets.wrapped_text import WrappedText

_UNIT = re.compile(r"(?<=\d) (?=(?:%|°|[GMkmµ]?[A-Za-z]{1,3})\b|%)")
_MICRO = re.compile(r"(\d )us\b")


class FindingRow(QWidget):
    """One finding; it is filled anew rather than made anew."""

    followed = Signal()

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self.finding: Finding | None = None
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 3, 0, 4)
        line.setSpacing(8)
        self.mark = LevelMark(appearance, size=11)
        line.addWidget(self.mark, 0, Qt.AlignmentFlag.AlignTop)
        column = QVBoxLayout()
        column.setSpacing(1)
        self.title = WrappedText(appearance, strong=True)
        self.reason = WrappedText(appearance)
        column.addWidget(self.title)
        column.addWidget(self.reason)
        line.addLayout(column, 1)

    def show_finding(self, finding: Finding, *, sheet: Sheet) -> None:
        """Show another finding, and what it leads to in a sheet."""
        if finding == self.finding:
            return
        self.finding = finding
        self.setToolTip(f"Enter or a click goes to {what_to_move(finding, sheet)}")
        self.mark.show_level(finding.level)
        self.title.setText(_set(finding.title))
        reason = " ".join(f"{part[0].upper()}{part[1:]}." for part in (finding.reason, finding.advice) if part)
        self.reason.setText(_set(reason))
        self.setAccessibleName(f"{WORDS[finding.level]}: {finding.title}")
        self.setAccessibleDescription(reason)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """A click goes there."""
        if event.button() == Qt.MouseButton.LeftButton and self.rect().contains(event.position().toPoint()):
            self.followed.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Enter or the space bar go there."""
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space):
            self.followed.emit()
        else:
            event.ignore()

    def enterEvent(self, event: QEnterEvent) -> None:  # noqa: N802
        """Show that it can be pressed."""
        super().enterEvent(event)
        self.update()

    def leaveEvent(self, event: QEvent) -> None:  # noqa: N802
        """Be quiet again."""
        super().leaveEvent(event)
        self.update()

    def focusInEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Show the focus."""
        super().focusInEvent(event)
        self.update()

    def focusOutEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Hide the focus."""
        super().focusOutEvent(event)
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """A quiet ground below the mouse, a line around the focus."""
        theme = self._appearance.theme
        with QPainter(self) as painter:
            if self.underMouse():
                painter.fillRect(self.rect(), QColor(theme.mixed(theme.outline, 0.10)))
            if self.hasFocus():
                painter.setPen(QPen(QColor(theme.ink), 1.0))
                painter.drawRect(QRectF(self.rect()).adjusted(0.5, 0.5, -0.5, -0.5))


def _set(text: str) -> str:
    """Numbers kept with their units, and microseconds as they are written."""
    return _UNIT.sub("\N{NO-BREAK SPACE}", _MICRO.sub("\\1\N{MICRO SIGN}s", text))


class FindingsCard(Card):
    """All findings, the worst first."""

    followed = Signal(str)
    """Where a finding leads: a path of the sheet, or the name of a table."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__("Findings", appearance, foldable=False, parent=parent)
        self._desk = desk
        self._appearance = appearance
        self._found: list[FindingRow] = []
        self.rows.setSpacing(2)
        desk.assessed.connect(self.refresh)
        desk.opened.connect(self.refresh)
        self.refresh()

    @property
    def shown(self) -> tuple[Finding, ...]:
        """The findings as they stand."""
        return tuple(row.finding for row in self._found if row.finding is not None and not row.isHidden())

    def row(self, index: int) -> FindingRow:
        """The row of a finding, from the top."""
        return self._found[index]

    def refresh(self) -> None:
        """Show the newest assessment's findings."""
        assessment = self._desk.assessment
        findings = assessment.findings if assessment is not None else ()
        while len(self._found) < len(findings):
            row = FindingRow(self._appearance)
            row.followed.connect(lambda row=row: self._follow(row))
            self.rows.addWidget(row)
            self._found.append(row)
        for index, row in enumerate(self._found):
            if index < len(findings):
                row.show_finding(findings[index], sheet=self._desk.sheet)
            row.setVisible(index < len(findings))

    def _follow(self, row: FindingRow) -> None:
        if row.finding is not None:
            self.followed.emit(what_to_move(row.finding, self._desk.sheet))
