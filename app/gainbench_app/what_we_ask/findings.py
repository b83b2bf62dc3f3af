"""The findings: each with its shape and its statement, and one press away its reason, what to try next, a way there."""

from __future__ import annotations

import re

from PySide6.QtCore import QEvent, QRectF, Qt, QTimer, Signal
from PySide6.QtGui import QColor, QEnterEvent, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from gainbench.model import Sheet
from gainbench.results import Finding, Level
from gainbench_app.desk import Desk
from gainbench_app.theme import SMALL_PX
from gainbench_app.what_we_ask.finding_links import what_to_move
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.grounded import Grounded
from gainbench_app.widgets.level_mark import WORDS, LevelMark
from gainbench_app.widgets.revealing import reveal
from gainbench_app.widgets.wrapped_text import WrappedText

_RESTS_MS = 120
"""After the last change of a finding's numbers."""
_UNIT = re.compile(r"(?<=\d) (?=(?:%|°|[GMkmµ]?[A-Za-z]{1,3})\b|%)")
_MICRO = re.compile(r"(\d )us\b")
_DEGREES = re.compile(r"(?<=\d) deg\b")


class FindingRow(Grounded, QWidget):
    """One finding: its statement in sight, its reason and the way to its entry when it is open.

    It is filled anew rather than made anew.
    """

    followed = Signal()
    toggled = Signal(bool)
    """The reader has opened or closed it."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self._leads_to = ""
        self._sheet: Sheet | None = None
        self.finding: Finding | None = None
        self._resting = QTimer(self)
        self._resting.setSingleShot(True)
        self._resting.setInterval(_RESTS_MS)
        self._resting.timeout.connect(self._tell_all)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 2, 0, 3)
        line.setSpacing(8)
        self.mark = LevelMark(appearance, size=11)
        line.addWidget(self.mark, 0, Qt.AlignmentFlag.AlignTop)
        column = QVBoxLayout()
        column.setSpacing(1)
        self.title = WrappedText(appearance, strong=True)
        self.reason = WrappedText(appearance)
        self.way = QPushButton()
        self.way.setProperty("flat", True)
        self.way.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.way.setCursor(Qt.CursorShape.PointingHandCursor)
        self.way.setStyleSheet(f"font-size: {SMALL_PX}px; padding: 1px 0; text-decoration: underline;")
        self.way.clicked.connect(self.followed)
        column.addWidget(self.title)
        column.addWidget(self.reason)
        column.addWidget(self.way, 0, Qt.AlignmentFlag.AlignLeft)
        self.reason.hide()
        self.way.hide()
        line.addLayout(column, 1)

    @property
    def is_open(self) -> bool:
        """Whether the reason is in sight."""
        return not self.reason.isHidden()

    def show_finding(self, finding: Finding, *, sheet: Sheet, opened: bool) -> None:
        """Show another finding, and what it leads to in a sheet."""
        if finding != self.finding:
            another = self.finding is None or finding.code != self.finding.code
            self.finding, self._sheet = finding, sheet
            self.mark.show_level(finding.level)
            self.title.setText(_set(finding.title))
            if another or opened or self.is_open:
                self._tell_all()
            else:
                # Numbers run while a target is dragged; what is not in sight follows when they rest.
                self._resting.start()
        self.open(opened)

    def _tell_all(self) -> None:
        """Reason, way and what a screen reader says."""
        self._resting.stop()
        finding = self.finding
        if finding is None or self._sheet is None:
            return
        self._leads_to = what_to_move(finding, self._sheet)
        self.reason.setText(_set(self._words(finding)))
        self.way.setText(f"go to {_told(self._leads_to)}")
        self.way.setAccessibleName(f"go to {_told(self._leads_to)}, which this finding asks to move")
        self.setAccessibleDescription(f"{self._words(finding)} Return goes to {_told(self._leads_to)}.")
        self._tell()

    def _words(self, finding: Finding) -> str:
        return " ".join(f"{part[0].upper()}{part[1:]}." for part in (finding.reason, finding.advice) if part)

    def _tell(self) -> None:
        if self.finding is not None:
            state = "open" if self.is_open else "closed"
            self.setAccessibleName(f"{WORDS[self.finding.level]}: {self.finding.title}, {state}")
            act = "close it" if self.is_open else "say why"
            self.setToolTip(f"Space or a click: {act}; Enter: go to {_told(self._leads_to)}")

    def open(self, opened: bool) -> None:
        """Bring the reason in sight, or take it away."""
        if opened is not self.is_open:
            if self._resting.isActive():
                self._tell_all()
            self.reason.setVisible(opened)
            self.way.setVisible(opened)
            self._tell()
            self.update()

    def _toggle(self) -> None:
        self.open(not self.is_open)
        self.toggled.emit(self.is_open)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """A click opens or closes it."""
        if event.button() == Qt.MouseButton.LeftButton and self.rect().contains(event.position().toPoint()):
            self._toggle()

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """The space bar opens or closes it, Enter goes to its entry."""
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.followed.emit()
        elif event.key() == Qt.Key.Key_Space:
            self._toggle()
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
            painter.fillRect(self.rect(), QColor(theme.card))
            if self.underMouse():
                painter.fillRect(self.rect(), QColor(theme.mixed(theme.outline, 0.10)))
            if self.hasFocus():
                painter.setPen(QPen(QColor(theme.ink), 1.0))
                painter.drawRect(QRectF(self.rect()).adjusted(0.5, 0.5, -0.5, -0.5))


def _set(text: str) -> str:
    """Numbers kept with their units, angles and microseconds as they are written."""
    return _UNIT.sub("\N{NO-BREAK SPACE}", _MICRO.sub("\\1\N{MICRO SIGN}s", _DEGREES.sub("\N{DEGREE SIGN}", text)))


def _told(path: str) -> str:
    """An entry, or a table, in the words of people."""
    table, _, key = path.rpartition(".")
    if not table:
        return f"the {key}"
    owner = table.removeprefix("aims.") + (" loop" if table in {"aims.current", "aims.speed"} else "")
    return f"the {owner}'s {key.replace('_', ' ')}"


class FindingsCard(Card):
    """All findings, the worst first, each a line or two; what breaks is open until it is closed."""

    followed = Signal(str)
    """Where a finding leads: a path of the sheet, or the name of a table."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__("Findings", appearance, foldable=False, parent=parent)
        self._desk = desk
        self._appearance = appearance
        self._found: list[FindingRow] = []
        self._chosen: dict[tuple[str, str], bool] = {}
        """What the reader has opened and closed, by code and subject."""
        self.rows.setSpacing(2)
        outer = self.layout()
        assert outer is not None
        outer.setContentsMargins(11, 5, 11, 8)
        self.all = QPushButton("open all")
        self.all.setProperty("flat", True)
        self.all.setAccessibleName("open all findings, or close them")
        self.all.setToolTip("say the reasons of all findings, or of none")
        self.all.clicked.connect(self._open_all)
        self.head_line.addWidget(self.all)
        desk.words_due.connect(self.refresh)
        desk.opened.connect(self._open_sheet)
        self.refresh()

    @property
    def shown(self) -> tuple[Finding, ...]:
        """The findings as they stand."""
        return tuple(row.finding for row in self._present() if row.finding is not None)

    def row(self, index: int) -> FindingRow:
        """The row of a finding, from the top."""
        return self._found[index]

    def go(self) -> None:
        """Bring the worst finding to the eye and the keyboard."""
        for row in self._present()[:1]:
            reveal(row)

    def _present(self) -> list[FindingRow]:
        return [row for row in self._found if not row.isHidden()]

    def _open_sheet(self) -> None:
        self._chosen.clear()
        self.refresh()

    def refresh(self) -> None:
        """Show the newest assessment's findings."""
        assessment = self._desk.assessment
        findings = assessment.findings if assessment is not None else ()
        while len(self._found) < len(findings):
            row = FindingRow(self._appearance)
            row.followed.connect(lambda row=row: self._follow(row))
            row.toggled.connect(lambda opened, row=row: self._remember(row, opened))
            self.rows.addWidget(row)
            self._found.append(row)
        for index, row in enumerate(self._found):
            if index < len(findings):
                one = findings[index]
                opened = self._chosen.get((one.code, one.subject), one.level is Level.BREAKS)
                row.show_finding(one, sheet=self._desk.sheet, opened=opened)
            row.setVisible(index < len(findings))
        self._tell()

    def _remember(self, row: FindingRow, opened: bool) -> None:
        if row.finding is not None:
            self._chosen[row.finding.code, row.finding.subject] = opened
        self._tell()

    def _tell(self) -> None:
        present = self._present()
        words = "close all" if present and all(row.is_open for row in present) else "open all"
        if self.all.text() != words:
            self.all.setText(words)
        self.all.setVisible(bool(present))

    def _open_all(self) -> None:
        opened = self.all.text() == "open all"
        for row in self._present():
            row.open(opened)
            self._remember(row, opened)

    def _follow(self, row: FindingRow) -> None:
        if row.finding is not None:
            self.followed.emit(what_to_move(row.finding, self._desk.sheet))
