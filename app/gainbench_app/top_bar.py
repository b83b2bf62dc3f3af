"""The bar at the top: which sheet this is, whether it is saved, and what can be done with all of it."""

from __future__ import annotations

import time

from PySide6.QtCore import Qt
from PySide6.QtGui import QFont
from PySide6.QtWidgets import QHBoxLayout, QLabel, QMenu, QPushButton, QSizePolicy, QWidget

from gainbench_app.desk import Desk
from gainbench_app.theme import sized
from gainbench_app.widgets.value_box import ValueBox


class TopBar(QWidget):
    """Title, state of saving, buttons."""

    def __init__(self, desk: Desk, menu: QMenu, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._shown: tuple[object, ...] = ()
        self.setObjectName("topBar")
        self.setFixedHeight(42)
        line = QHBoxLayout(self)
        line.setContentsMargins(15, 0, 18, 0)
        line.setSpacing(10)
        self.title = ValueBox("title of the sheet")
        self.title.setObjectName("title")
        self.title.setFont(sized(QFont(self.font()), 14, bold=True))
        self.title.setAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self.title.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.title.committed.connect(lambda text: desk.set_values({"title": text if text else None}))
        self.title.textChanged.connect(self._fit)
        self.saved = QLabel()
        self.saved.setProperty("role", "muted")
        self.reason = QLabel()
        self.reason.setProperty("role", "small")
        self.open = QPushButton("Open")
        self.open.setToolTip("open a bench sheet (Ctrl+O); one can be dropped on the window as well")
        self.save = QPushButton("Save")
        self.save.setToolTip("save the bench sheet (Ctrl+S)")
        self.evidence = QPushButton("Evidence")
        self.keep = QPushButton("Keep this tuning")
        self.keep.setToolTip("put the gains in force on the shelf, under a name (Ctrl+K)")
        self.handover = QPushButton("Handover")
        self.more = QPushButton("More")
        self.more.setMenu(menu)
        self.more.setAccessibleName("more: undo, sheets, pictures, theme")
        line.addWidget(self.title)
        line.addWidget(self.saved)
        line.addStretch(1)
        line.addWidget(self.reason)
        for button in (self.open, self.save, self.evidence, self.keep, self.handover, self.more):
            line.addWidget(button)
        desk.changed.connect(self.refresh)
        self.show_evidence(False)
        self.refresh()

    def refresh(self) -> None:
        """Show what the sheet is called, and whether it is saved."""
        since, typed = self._desk.unsaved_since, self._desk.text("title")
        shown = (since, typed, self._desk.problem("title"), self._desk.path, self._desk.sheet.title)
        if shown == self._shown:
            return
        self._shown = shown
        self.title.show_text(typed or "")
        self.title.setPlaceholderText(self._desk.sheet.title)
        problem = self._desk.problem("title") or ""
        self.title.mark(problem)
        self.title.setToolTip(problem or str(self._desk.path or "not in a file yet"))
        self._fit()
        if since is not None:
            self.saved.setText(f"unsaved since {time.strftime('%H:%M', time.localtime(since))}")
        else:
            self.saved.setText(self._desk.path.name if self._desk.path is not None else "demo sheet, not in a file")

    def show_evidence(self, shown: bool) -> None:
        """Whether the button leads to the evidence page, or back from it."""
        self.evidence.setText("Back to tuning" if shown else "Evidence")
        tip = "go back to what it does and what we ask (Esc, Ctrl+L)"
        self.evidence.setToolTip(tip if shown else "logs from the bench, and what follows from them (Ctrl+L)")

    def show_handover(self, refused: str) -> None:
        """Open or shut the handover, with the reason."""
        if self.reason.text() == refused and self.handover.isEnabled() is not bool(refused):
            return
        self.handover.setEnabled(not refused)
        self.handover.setToolTip(refused or "write the header for the firmware (Ctrl+E)")
        self.handover.setAccessibleDescription(refused)
        self.reason.setText(refused)

    def show_keep(self, refused: str) -> None:
        """Whether there are gains to keep, with the reason where not."""
        if self.keep.isEnabled() is bool(refused):
            self.keep.setEnabled(not refused)
            self.keep.setAccessibleDescription(refused)

    def _fit(self) -> None:
        text = self.title.text() or self.title.placeholderText()
        self.title.setFixedWidth(min(max(self.title.fontMetrics().horizontalAdvance(text) + 18, 80), 420))
