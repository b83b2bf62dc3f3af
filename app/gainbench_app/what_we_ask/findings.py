"""The findings: each with its shape, its statement, its reason and what to try next."""

from __future__ import annotations

import re

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QVBoxLayout, QWidget

from gainbench.results import Finding
from gainbench_app.desk import Desk
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.level_mark import WORDS, LevelMark

_UNIT = re.compile(r"(?<=\d) (?=(?:%|°|[GMkmµ]?[A-Za-z]{1,3})\b|%)")
_MICRO = re.compile(r"(\d )us\b")


class FindingRow(QWidget):
    """One finding; it is filled anew rather than made anew."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.finding: Finding | None = None
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 3, 0, 4)
        line.setSpacing(8)
        self.mark = LevelMark(appearance, size=11)
        line.addWidget(self.mark, 0, Qt.AlignmentFlag.AlignTop)
        column = QVBoxLayout()
        column.setSpacing(1)
        self.title = QLabel()
        self.title.setProperty("role", "head")
        self.title.setWordWrap(True)
        self.reason = QLabel()
        self.reason.setProperty("role", "small")
        self.reason.setWordWrap(True)
        column.addWidget(self.title)
        column.addWidget(self.reason)
        line.addLayout(column, 1)

    def show_finding(self, finding: Finding) -> None:
        """Show another finding."""
        if finding == self.finding:
            return
        self.finding = finding
        self.mark.show_level(finding.level)
        self.title.setText(_set(finding.title))
        reason = " ".join(f"{part[0].upper()}{part[1:]}." for part in (finding.reason, finding.advice) if part)
        self.reason.setText(_set(reason))
        self.setAccessibleName(f"{WORDS[finding.level]}: {finding.title}")
        self.setAccessibleDescription(reason)


def _set(text: str) -> str:
    """Numbers kept with their units, and microseconds as they are written."""
    return _UNIT.sub("\N{NO-BREAK SPACE}", _MICRO.sub("\\1\N{MICRO SIGN}s", text))


class FindingsCard(Card):
    """All findings, the worst first."""

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

    def refresh(self) -> None:
        """Show the newest assessment's findings."""
        assessment = self._desk.assessment
        findings = assessment.findings if assessment is not None else ()
        while len(self._found) < len(findings):
            row = FindingRow(self._appearance)
            self.rows.addWidget(row)
            self._found.append(row)
        for index, row in enumerate(self._found):
            if index < len(findings):
                row.show_finding(findings[index])
            row.setVisible(index < len(findings))
